"""What a cleaning or lining brought, and how the wall grew back."""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from fieldfit.decisions.duty import Duty
from fieldfit.decisions.forecast import Carried
from fieldfit.decisions.visits import Event, Stage, Visit
from fieldfit.hydraulics.friction import STANDARD_GRAVITY, colebrook_white, relative_roughness
from fieldfit.inference.campaigns import JointFit

Array = NDArray[np.float64]
Triple = tuple[float, float, float]

DRAWS = 8000
SEED = 20050317
SURE = 0.95
"""Probability from which a promise counts as reached, or, from the other side, as missed."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Cleaning:
    """From the last campaign before a cleaning to the first one after it; triples are 95 % low, best, 95 % high."""

    event: Event
    """Cleaned, lined, or better without a word."""
    date: dt.date
    """Day it was done, or of the first test after it."""
    before: int
    """Number of the campaign before, from 0."""
    after: int
    """Number of the campaign after."""
    c_before: Triple
    """C at the duty before [-]."""
    c_after: Triple
    """C at the duty after [-]."""
    c_gain: Triple
    """C at the duty after less before [-]."""
    probability_gain: float
    """Probability that C rose at all [-]."""
    capacity_ratio: Triple
    """Flow at one and the same head after over before [-]."""
    head_loss_ratio: Triple
    """Head loss at the duty after over before [-]."""
    power_saved_w: Triple
    """Hydraulic power at the duty that friction no longer takes [W]."""
    promised_c: float | None
    """C that was promised [-]."""
    probability_promise: float | None
    """Probability that it was reached [-]."""
    promise: Literal["reached", "missed", "undecided"] | None
    """What the tests say of the promise."""
    regrowth: Triple | None
    """Starting growth rate after over before [-]; None without a later campaign in the new stage."""
    probability_faster: float | None
    """Probability that the wall grows faster than before [-]."""


def cleaning(
    fit: JointFit,
    visits: Sequence[Visit],
    stages: tuple[Stage, ...],
    which: tuple[int, tuple[Duty, Duty]],
    carried: tuple[Carried, ...],
) -> Cleaning:
    """Compare the pipe before and after one cleaning by the joint fit, in which what both tests share cancels.

    Parameters
    ----------
    fit : JointFit
        All campaigns.
    visits : sequence of Visit
        The same campaigns.
    stages : tuple of Stage
        Stages of the pipe's life.
    which : (int, (Duty, Duty))
        Number of the stage that the cleaning began, and the duties before and after.
    carried : tuple of Carried
        Draws of growth, for the regrowth.

    Returns
    -------
    Cleaning
    """
    number, duties = which
    stage = stages[number]
    pair = (stage.first - 1, stage.first)
    loss, c, capacity = _drawn(fit, pair, duties)
    saved = duties[1].density_kg_m3 * STANDARD_GRAVITY * duties[1].flow_m3_s * (loss[0] - loss[1])
    promised = visits[stage.first].changes.promised_c
    reached = None if promised is None else float(np.mean(c[1, 1:] >= promised))
    regrown = _regrowth(carried, number) if _tested_again(stages, number, len(visits)) else None
    return Cleaning(
        event=stage.event,
        date=stage.start,
        before=pair[0],
        after=pair[1],
        c_before=_triple(c[0]),
        c_after=_triple(c[1]),
        c_gain=_triple(c[1] - c[0]),
        probability_gain=float(np.mean(c[1, 1:] > c[0, 1:])),
        capacity_ratio=_triple(capacity[1] / capacity[0]),
        head_loss_ratio=_triple(loss[1] / loss[0]),
        power_saved_w=_triple(saved),
        promised_c=promised,
        probability_promise=reached,
        promise=_verdict(reached),
        regrowth=None if regrown is None else regrown[0],
        probability_faster=None if regrown is None else regrown[1],
    )


def _tested_again(stages: tuple[Stage, ...], number: int, visits: int) -> bool:
    """Return whether a stage holds two campaigns or more."""
    end = stages[number + 1].first if number + 1 < len(stages) else visits
    return end - stages[number].first > 1


def _verdict(reached: float | None) -> Literal["reached", "missed", "undecided"] | None:
    """Return what a probability says of a promise."""
    if reached is None:
        return None
    if reached >= SURE:
        return "reached"
    return "missed" if reached <= 1.0 - SURE else "undecided"


def _drawn(fit: JointFit, pair: tuple[int, int], duties: tuple[Duty, Duty]) -> tuple[Array, Array, Array]:
    """Return head loss, C and capacity before and after, (2, 1 + N) each, the best values first."""
    count = len(fit.tests)
    rows = np.zeros((6, count + len(fit.keys)))
    for place, (index, duty) in enumerate(zip(pair, duties, strict=True)):
        rows[place, index] = 1.0
        rows[2 + place, count:] = fit.shape_at(duty.reynolds)
        rows[4 + place, count:] = fit.ln_length[index] - 5.0 * fit.ln_bore[index]
    mean = rows @ np.concatenate([fit.ln_friction, fit.u])
    spread = rows @ fit.covariance @ rows.T + 1e-16 * np.eye(6)
    drawn = np.random.default_rng(SEED).multivariate_normal(mean, spread, DRAWS, method="eigh")
    drawn = np.vstack([mean, drawn]).T
    loss, c, capacity = [], [], []
    for place, (index, duty) in enumerate(zip(pair, duties, strict=True)):
        at = fit.references[index].reynolds
        wall = np.maximum(_roughness(drawn[place], at, duty.bore_m), 0.0)
        excess = drawn[place] - _ln_law(wall, at, duty.bore_m) + drawn[2 + place]
        ln_f = duty.ln_friction(wall) + excess
        c.append(duty.c(ln_f))
        loss.append(duty.head_loss_m(ln_f + drawn[4 + place]))
        capacity.append(_capacity(duty, duties[0], wall, excess + drawn[4 + place]))
    return np.array(loss), np.array(c), np.array(capacity)


def _capacity(duty: Duty, before: Duty, wall: Array, excess: Array) -> Array:
    """Return the flow at the available head, or, without one, at the head the duty needs as new [m³/s]."""
    head = duty.head_m or float(before.head_loss_m(before.ln_friction(np.zeros(1)))[0])
    return replace(duty, head_m=head).capacity_m3_s(wall, excess)


def _roughness(ln_friction: Array, reynolds: float, bore_m: float) -> Array:
    return relative_roughness(np.exp(ln_friction), reynolds) * bore_m


def _ln_law(wall: Array, reynolds: float, bore_m: float) -> Array:
    return np.asarray(np.log(colebrook_white(reynolds, wall / bore_m)))


def _regrowth(carried: tuple[Carried, ...], number: int) -> tuple[Triple, float]:
    """Return the ratio of the starting rates of a stage and the one before, and the probability that it exceeds one."""
    ratio = np.concatenate([one.draws.rate_m_year[:, number] / one.draws.rate_m_year[:, number - 1] for one in carried])
    low, middle, high = np.quantile(ratio, (0.025, 0.5, 0.975))
    return (float(low), float(middle), float(high)), float(np.mean(ratio > 1.0))


def _triple(values: Array) -> Triple:
    """Return low, best and high; the first value is the best."""
    low, high = np.quantile(values[1:], (0.025, 0.975))
    return float(low), float(values[0]), float(high)
