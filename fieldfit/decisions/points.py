"""Each campaign as a point in time: its roughness and its C at the duty, by the joint fit."""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldfit.decisions.duty import Duty
from fieldfit.decisions.visits import Visit, events_between
from fieldfit.hydraulics.friction import relative_roughness
from fieldfit.hydraulics.hazen_williams import c_from_friction_factor
from fieldfit.inference.campaigns import JointFit
from fieldfit.inference.fit import NORMAL_95
from fieldfit.inference.friction_curve import friction_curve

Array = NDArray[np.float64]
Triple = tuple[float, float, float]
ENDS = np.array([-1.0, 0.0, 1.0]) * NORMAL_95


@dataclass(frozen=True, slots=True, kw_only=True)
class Point:
    """One campaign; triples are 95 % low, best, 95 % high by measurement."""

    date: dt.date
    """Day of the test."""
    roughness_m: Triple
    """Equivalent roughness [m]; 0 where it cannot be told from smooth."""
    roughness_own_m: tuple[float, float]
    """The same with only those errors that the campaigns do not share [m]."""
    c: Triple
    """Hazen–Williams C at the duty [-]."""
    c_own: tuple[float, float]
    """The same with only those errors that the campaigns do not share [-]."""
    events: tuple[str, ...]
    """What happened since the campaign before."""


def points(fit: JointFit, visits: Sequence[Visit], duty: Duty) -> tuple[Point, ...]:
    """Return every campaign by the joint fit.

    The part that campaigns share is the mean of their covariances: it moves all points together and no change.

    Parameters
    ----------
    fit : JointFit
        All campaigns.
    visits : sequence of Visit
        The same campaigns.
    duty : Duty
        What C is for.

    Returns
    -------
    tuple of Point
    """
    count = len(visits)
    walls = fit.walls
    common = float((np.sum(walls) - np.trace(walls)) / (count * (count - 1))) if count > 1 else 0.0
    shape = fit.shape_at(duty.reynolds)
    at_duty = float(shape @ fit.covariance[count:, count:] @ shape)
    found = []
    for index, visit in enumerate(visits):
        variance = float(walls[index, index])
        own = float(np.sqrt(max(variance - max(common, 0.0), 0.0)))
        place = (fit.references[index].reynolds, visit.readings.bore.value)
        best = float(fit.ln_friction[index])
        whole = _roughness(best + ENDS * np.sqrt(variance), place)
        apart = _roughness(best + ENDS * own, place)
        c = _c(best + ENDS[::-1] * np.sqrt(variance + at_duty), place, duty)
        c_apart = _c(best + ENDS[::-1] * own, place, duty)
        found.append(
            Point(
                date=visit.date,
                roughness_m=whole,
                roughness_own_m=(apart[0], apart[2]),
                c=c,
                c_own=(c_apart[0], c_apart[2]),
                events=events_between(visits[index - 1] if index else None, visit),
            )
        )
    return tuple(found)


def _roughness(ln_friction: Array, place: tuple[float, float]) -> Triple:
    """Return the roughness that each ln f means in a bore [m]."""
    low, best, high = np.maximum(relative_roughness(np.exp(ln_friction), place[0]), 0.0) * place[1]
    return float(low), float(best), float(high)


def _c(ln_friction: Array, place: tuple[float, float], duty: Duty) -> Triple:
    """Return C at the duty flow in a campaign's own bore [-]."""
    at_duty = 4.0 * duty.flow_m3_s / (np.pi * place[1] * duty.viscosity_m2_s)
    factor = friction_curve(ln_friction, np.full(3, at_duty), np.full(3, place[0])).friction_factor
    low, best, high = c_from_friction_factor(factor, duty.flow_m3_s, place[1])
    return float(low), float(best), float(high)
