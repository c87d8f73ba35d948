"""Head loss of a reach as it would read if something other than its wall were wrong.

One forward model holds every fault: each is a number of it, zero where it is absent. Many trials, that is sets of
assumptions, are worked out at once.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from fieldfit.hydraulics.friction import STANDARD_GRAVITY, colebrook_white_with_slopes
from fieldfit.inference.conditions import Conditions
from fieldfit.inference.friction_curve import ROUGHEST, TURBULENT_LAW_FROM

Array = NDArray[np.float64]

WALL, BORE, LOCAL, OFFSET, AIR, LEAK, BRANCH, GAIN, ZERO, PLACE = range(10)
SIZES = ("wall", "bore", "local", "offset", "air", "leak", "branch", "gain", "zero", "place")
"""Sizes of a trial, in order: ln ε [m]; ln of −ln(bore over as-new); ln K; offset of the reading [m]; ln head step of air
[m]; ln leak [m³/s]; ln share of the flow in a branch; ln of (meter over true flow); zero of the meter [m³/s]; share of the
length upstream of a leak."""
BY_RATIO = (WALL, BORE, LOCAL, AIR, LEAK, BRANCH)
"""Sizes given by their logarithm: −inf is none."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Trials:
    """T sets of assumptions; every size has a normal prior of its own about a centre."""

    ln_weight: Array
    """(T,) logarithm of the prior probability [-]."""
    centre: Array
    """(T, 10) centre of each size."""
    spread: Array
    """(T, 10) prior standard deviation of each; zero where it is fixed."""
    side: Array
    """(T,) 1 where the meter sits upstream of the leak, −1 downstream, 0 without one."""
    flow_ratio: Array
    """(T,) metered over true flow, from a wrong unit [-]."""
    head_ratio: Array
    """(T,) read over true head loss, from a wrong unit or swapped taps [-]."""
    shift_m: Array
    """(T, K) what a wrong unit adds to the reading [m]."""

    def take(self, rows: NDArray[np.int64] | NDArray[np.bool_]) -> Trials:
        """Return some of the trials."""
        return Trials(**{name: getattr(self, name)[rows] for name in self.__slots__})

    def shifted(self, shift_m: Array) -> Trials:
        """Return the trials for other readings (K,), where a wrong unit adds `shift_m`."""
        values = {name: getattr(self, name) for name in self.__slots__}
        return Trials(**(values | {"shift_m": np.broadcast_to(shift_m, (len(self.side), len(shift_m)))}))


class Reading(NamedTuple):
    """What the gauges would read, T trials by K readings."""

    head_m: Array
    """(T, K) head loss as read [m]."""
    slopes: Array
    """(T, M, K) its slopes: ten sizes, the shared errors, the correlation's terms, each by one standard deviation [m]."""


class _Part(NamedTuple):
    """Head loss of the length above or below a leak, scaled to the whole length, and its slopes; (T, K) each."""

    friction: Array
    per_k: Array
    by_flow: Array
    ln_bore: Array
    ln_wall: Array
    ln_viscosity: Array


def unknowns(conditions: Conditions) -> int:
    """Return how many normal numbers a trial has."""
    return len(SIZES) + len(conditions.ln_bore) + len(conditions.correlation)


def read(conditions: Conditions, trials: Trials, u: Array) -> Reading:
    """Return what the gauges would read in every trial.

    ``h = ratio ((f L/D + ΣK + K) 8 Q² / (π² g D⁴) + air) + shift + offset + errors``, above and below a leak with the
    flow that is there.

    Parameters
    ----------
    conditions : Conditions
        K readings with S shared errors.
    trials : Trials
        T trials.
    u : (T, M) array
        Sizes, shared errors and the correlation's terms in prior standard deviations [-].

    Returns
    -------
    Reading
    """
    count, shared_count = len(SIZES), len(conditions.ln_bore)
    sizes = trials.centre + trials.spread * u[:, :count]
    ratios = np.exp(np.minimum(sizes, 50.0))
    shared, shape = u[:, count : count + shared_count], u[:, count + shared_count :]
    metered, by_read = _metered(conditions, trials, (sizes, ratios), shared)
    lost = ratios[:, LEAK, None] + ratios[:, BRANCH, None] * metered
    down, up = (trials.side < 0.0)[:, None], (trials.side > 0.0)[:, None]
    above = np.where(trials.side == 0.0, 1.0, np.clip(sizes[:, PLACE], 0.0, 1.0))[:, None]
    first = _part(conditions, ratios, (shared, shape), metered + down * lost)
    second = _part(conditions, ratios, (shared, shape), metered - up * lost)
    both = _Part(*(above * one + (1.0 - above) * two for one, two in zip(first, second, strict=True)))
    by_lost = above * first.by_flow * down - (1.0 - above) * second.by_flow * up
    by_metered = both.by_flow + by_lost * ratios[:, BRANCH, None]
    k_sum = (conditions.fitting_k + shared @ conditions.fitting_errors_k + ratios[:, LOCAL])[:, None]
    true_head = both.friction + k_sum * both.per_k + ratios[:, AIR, None]
    through = _by_size(conditions, ratios, both, (by_metered, by_lost, metered))
    by_zero = by_metered * by_read
    through[:, ZERO] = -by_zero
    moved = first.friction - second.friction + k_sum * (first.per_k - second.per_k)
    through[:, PLACE] = np.where((sizes[:, PLACE] > 0.0) & (sizes[:, PLACE] < 1.0), moved.T, 0.0).T
    sharing = (
        conditions.flow_errors_m3_s * (by_zero / trials.flow_ratio[:, None])[:, None, :]
        + conditions.ln_bore[:, None] * both.ln_bore[:, None, :]
        + conditions.ln_length[:, None] * both.friction[:, None, :]
        + conditions.ln_viscosity[:, None] * both.ln_viscosity[:, None, :]
        + conditions.fitting_errors_k[:, None] * both.per_k[:, None, :]
    )
    shaping = conditions.correlation * both.friction[:, None, :]
    slopes = np.concatenate([through * trials.spread[:, :, None], sharing, shaping], axis=1)
    slopes *= trials.head_ratio[:, None, None]
    slopes[:, OFFSET] = trials.spread[:, OFFSET, None]
    slopes[:, count : count + shared_count] += conditions.head_errors_m
    head = trials.head_ratio[:, None] * true_head + trials.shift_m + sizes[:, OFFSET, None]
    return Reading(head + shared @ conditions.head_errors_m, slopes)


def _metered(conditions: Conditions, trials: Trials, sizes: tuple[Array, Array], shared: Array) -> tuple[Array, Array]:
    """Return the true flow at the meter [m³/s] and its slope with the flow it shows [-]."""
    values, ratios = sizes
    gain = np.exp(-values[:, GAIN])
    if conditions.velocity_meter:
        gain = gain * np.exp(-2.0 * ratios[:, BORE])
    shown = (conditions.flow_m3_s + shared @ conditions.flow_errors_m3_s) / trials.flow_ratio[:, None]
    return (shown - values[:, ZERO, None]) * gain[:, None], np.broadcast_to(gain[:, None], shown.shape)


def _part(conditions: Conditions, ratios: Array, errors: tuple[Array, Array], flow: Array) -> _Part:
    """Return the head loss at a flow over the whole length, and its slopes (that of the flow is d head / d Q)."""
    shared, shape = errors
    bore = (conditions.bore_m * np.exp(shared @ conditions.ln_bore - ratios[:, BORE]))[:, None]
    viscosity = conditions.viscosity_m2_s * np.exp(shared @ conditions.ln_viscosity)[:, None]
    length = conditions.length_m * np.exp(shared @ conditions.ln_length)[:, None]
    size = np.maximum(np.abs(flow), 1e-12)
    reynolds = np.maximum(4.0 * size / (np.pi * bore * viscosity), TURBULENT_LAW_FROM)
    relative = np.minimum(ratios[:, WALL, None] / bore, ROUGHEST)
    factor, by_reynolds, by_wall = colebrook_white_with_slopes(reynolds, relative)
    per_k = 8.0 * flow * size / (np.pi**2 * STANDARD_GRAVITY * bore**4)
    friction = factor * np.exp(shape @ conditions.correlation) * length / bore * per_k
    k_sum = (conditions.fitting_k + shared @ conditions.fitting_errors_k + ratios[:, LOCAL])[:, None]
    with_reynolds = friction * by_reynolds * reynolds / factor
    with_wall = np.where(relative < ROUGHEST, friction * by_wall * relative / factor, 0.0)
    whole = friction + k_sum * per_k
    return _Part(
        friction=friction,
        per_k=per_k,
        by_flow=(2.0 * whole + with_reynolds) / np.where(flow < 0.0, -size, size),
        ln_bore=-(4.0 * whole + friction) - with_reynolds - with_wall,
        ln_wall=with_wall,
        ln_viscosity=-with_reynolds,
    )


def _by_size(conditions: Conditions, ratios: Array, part: _Part, flows: tuple[Array, Array, Array]) -> Array:
    """Return (T, 9, K) slopes of the true head with each size, the meter's zero and the offset left out."""
    by_metered, by_lost, metered = flows
    found = np.zeros((len(ratios), len(SIZES), metered.shape[1]))
    shrink = ratios[:, BORE, None]
    through_meter = 2.0 * by_metered * metered if conditions.velocity_meter else 0.0
    found[:, WALL] = part.ln_wall
    found[:, BORE] = -shrink * (part.ln_bore + through_meter)
    found[:, LOCAL] = ratios[:, LOCAL, None] * part.per_k
    found[:, AIR] = ratios[:, AIR, None]
    found[:, LEAK] = by_lost * ratios[:, LEAK, None]
    found[:, BRANCH] = by_lost * ratios[:, BRANCH, None] * metered
    found[:, GAIN] = -by_metered * metered
    return found
