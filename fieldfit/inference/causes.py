"""What may explain a set of readings, each cause as trials of the fault model under its prior."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.readings import ReachReadings
from fieldfit.inference import wrong_units
from fieldfit.inference.beliefs import AFTER_STATIC, BELIEFS, BRANCH_SHARE, NOTHING
from fieldfit.inference.fault_model import (
    AIR,
    BORE,
    BRANCH,
    BY_RATIO,
    GAIN,
    LEAK,
    LOCAL,
    OFFSET,
    PLACE,
    SIZES,
    WALL,
    ZERO,
    Trials,
)
from fieldfit.inference.fit import NORMAL_95

Array = NDArray[np.float64]
GENERIC_NEW_M = (1.5e-6, 5e-4)
"""Roughness of new pipe of whatever material: drawn plastic to sound cast iron and concrete [m]."""
MODEST_AGE = 2.0
"""How far a wall may have roughened beyond the roughest new one and still count as new [-]."""
ROUGHEST_WALL = 0.05
"""ε/D above which nothing is a roughness [-]."""
PLACES = (0.0, 0.25, 0.5, 0.75)
"""Places of a leak that are tried, as shares of the length from the meter's end [-]."""
RIPPLE = 0.6
"""Width over spacing of the normal parts that a log-uniform prior is made of: it ripples by 0.2 % [-]."""

CUT_OFFS = (0.02, 0.05, 0.1)
"""Flows that a meter may not show, as shares of the largest [-]."""
CUT_OFF_EXPONENT = 1.85
"""Power of the flow that head loss roughly goes with, for a flow that is not known anyway [-]."""
CUT_OFF = "low-flow cut-off: water ran unseen during the static"
"""What such a trial stands for."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Hypothesis:
    """One or two causes, as trials."""

    causes: tuple[str, ...]
    """Names; "nothing unusual" is the new wall alone."""
    trials: Trials
    """Their trials; the weights add up to the prior probability."""
    options: tuple[str, ...] = ()
    """What each trial stands for, where a cause is one of several discrete faults."""


def hypotheses(readings: ReachReadings, new_m: tuple[float, float] | None) -> tuple[Hypothesis, ...]:
    """Set up every single cause for a reach.

    Parameters
    ----------
    readings : ReachReadings
        K readings.
    new_m : (float, float) or None
        Roughness of new pipe, low and high [m]; None when the material is unknown.

    Returns
    -------
    tuple of Hypothesis
        "nothing unusual" first, then each cause of the table.
    """
    setting = _Setting(readings, new_m or GENERIC_NEW_M)
    return tuple(_hypothesis(name, build(setting)) for name, build in _BUILDERS.items())


def together(first: Hypothesis, second: Hypothesis) -> Hypothesis:
    """Return two causes at once; the wall is the first's, the product of their priors theirs.

    Parameters
    ----------
    first, second : Hypothesis
        Single causes; a rough wall must come first.

    Returns
    -------
    Hypothesis
        T₁ times T₂ trials.
    """
    one, two = first.trials, second.trials
    a, b = (index.ravel() for index in np.indices((len(one.side), len(two.side))))
    centre = one.centre[a] + np.where(np.isfinite(two.centre), two.centre, 0.0)[b]
    for column in BY_RATIO:
        centre[:, column] = np.maximum(one.centre[a, column], two.centre[b, column])
    centre[:, WALL] = one.centre[a, WALL]
    spread = np.maximum(one.spread[a], two.spread[b])
    spread[:, WALL] = one.spread[a, WALL]
    trials = Trials(
        ln_weight=one.ln_weight[a] + two.ln_weight[b],
        centre=centre,
        spread=spread,
        side=np.where(one.side[a] != 0.0, one.side[a], two.side[b]),
        flow_ratio=one.flow_ratio[a] * two.flow_ratio[b],
        head_ratio=one.head_ratio[a] * two.head_ratio[b],
        shift_m=one.shift_m[a] + two.shift_m[b],
    )
    options = tuple(two_name for _ in range(len(one.side)) for two_name in second.options)
    return Hypothesis(causes=first.causes + second.causes, trials=trials, options=options)


class _Setting(NamedTuple):
    """What the priors are scaled by."""

    readings: ReachReadings
    new_m: tuple[float, float]

    def blank(self, count: int) -> dict[str, Array]:
        """Return trials of a new wall with nothing wrong, of equal weight."""
        low, high = np.log(self.new_m[0]), np.log(self.new_m[1] * MODEST_AGE)
        centre, spread = np.full((count, len(SIZES)), -np.inf), np.zeros((count, len(SIZES)))
        centre[:, [OFFSET, GAIN, ZERO, PLACE]] = 0.0
        centre[:, WALL], spread[:, WALL] = (low + high) / 2.0, (high - low) / (2.0 * NORMAL_95)
        one = np.ones(count)
        return {
            "ln_weight": np.full(count, -np.log(count)),
            "centre": centre,
            "spread": spread,
            "side": 0.0 * one,
            "flow_ratio": one,
            "head_ratio": one.copy(),
            "shift_m": np.zeros((count, len(self.readings.flow_m3_s))),
        }

    @property
    def top_flow(self) -> float:
        """Largest flow [m³/s]."""
        return float(np.max(np.abs(self.readings.flow_m3_s)))


Built = tuple[dict[str, Array], tuple[str, ...]]


def _hypothesis(name: str, built: Built) -> Hypothesis:
    """Give the trials of a cause its prior probability."""
    parts, options = built
    parts["ln_weight"] = parts["ln_weight"] + np.log(BELIEFS[name].probability)
    return Hypothesis(causes=(name,), trials=Trials(**parts), options=options)


def _log_uniform(low: float, high: float, spacing: float = 0.7) -> tuple[Array, float]:
    """Return the centres and common spread of normal parts that together are flat between two logarithms."""
    count = max(round((high - low) / spacing), 1)
    width = (high - low) / count
    return np.asarray(low + width * (np.arange(count) + 0.5), dtype=np.float64), RIPPLE * width


def _nothing(setting: _Setting) -> Built:
    return setting.blank(1), ()


def _rough(setting: _Setting) -> Built:
    low = np.log(setting.new_m[1] * MODEST_AGE)
    high = max(np.log(ROUGHEST_WALL * setting.readings.bore.value), low + 0.7)
    centres, spread = _log_uniform(low, high)
    parts = setting.blank(len(centres))
    parts["centre"][:, WALL], parts["spread"][:, WALL] = centres, spread
    return parts, ()


def _one_size(column: int, low: float, high: float) -> Callable[[_Setting], Built]:
    """Return the builder of a cause with one log-uniform size."""

    def build(setting: _Setting) -> Built:
        centres, spread = _log_uniform(np.log(low), np.log(high))
        parts = setting.blank(len(centres))
        parts["centre"][:, column], parts["spread"][:, column] = centres, spread
        return parts, ()

    return build


def _offset(setting: _Setting) -> Built:
    parts = setting.blank(2)
    parts["spread"][:, OFFSET] = np.array([3.0, 10.0]) * offset_standard(setting.readings)
    if setting.readings.levelling:
        parts["ln_weight"] += np.log(AFTER_STATIC)
    return parts, ()


def offset_standard(readings: ReachReadings) -> float:
    """Return how far the zero of the head loss may be off by what is stated [m]."""
    if readings.levelling:
        return max(readings.levelling.standard_m, 0.005)
    weight = float(np.mean(readings.density_kg_m3)) * 9.80665
    ends = zip((readings.upstream, readings.downstream), readings.pressure_pa, strict=True)
    gauges = [float(np.mean(tap.accuracy.standard_at(pressure))) / weight for tap, pressure in ends]
    survey = readings.elevation_drop.standard if readings.elevation_drop else 0.0
    return max(float(np.sqrt(gauges[0] ** 2 + gauges[1] ** 2 + survey**2)), 0.01)


def _leak(setting: _Setting) -> Built:
    centres, spread = _log_uniform(np.log(0.005), np.log(0.5))
    steady = [(c, 1.0, place) for c in centres for place in PLACES]
    steady += [(c, -1.0, 1.0 - place) for c in centres for place in PLACES]
    share = [(c, side, 0.0 if side > 0.0 else 1.0) for c in centres for side in (1.0, -1.0)]
    parts = setting.blank(len(steady) + len(share))
    rows = np.array(steady + share)
    leak, branch = slice(0, len(steady)), slice(len(steady), None)
    parts["side"], parts["centre"][:, PLACE] = rows[:, 1].copy(), rows[:, 2]
    parts["spread"][leak, PLACE] = RIPPLE * (PLACES[1] - PLACES[0])
    parts["centre"][leak, LEAK] = rows[leak, 0] + np.log(setting.top_flow)
    parts["spread"][leak, LEAK] = spread
    parts["centre"][branch, BRANCH] = rows[branch, 0]
    parts["spread"][branch, BRANCH] = spread
    parts["ln_weight"][leak] = np.log((1.0 - BRANCH_SHARE) / len(steady))
    parts["ln_weight"][branch] = np.log(BRANCH_SHARE / len(share))
    return parts, ()


def _meter(setting: _Setting) -> Built:
    readings = setting.readings
    accuracy = readings.meter.accuracy.standard_at(readings.flow_m3_s)
    stated = float(np.min(accuracy / np.abs(readings.flow_m3_s)))
    unseen = CUT_OFFS if readings.levelling else ()
    parts = setting.blank(5 + len(unseen))
    parts["spread"][:3, GAIN] = (max(3.0 * stated, 0.05), 0.15, 0.4)
    parts["spread"][3:5, ZERO] = np.array([0.01, 0.06]) * setting.top_flow
    for row, share in enumerate(unseen, start=5):
        # The static was taken off every reading, and with it what the unseen flow loses.
        loss = share**CUT_OFF_EXPONENT * float(np.max(np.abs(readings.head_loss_m)))
        parts["centre"][row, OFFSET], parts["spread"][row, OFFSET] = -loss, 0.5 * loss
    return parts, ("",) * 5 + (CUT_OFF,) * len(unseen)


def _units(setting: _Setting) -> Built:
    found = wrong_units.options(setting.readings)
    parts = setting.blank(len(found))
    parts["ln_weight"] = np.log([option.probability for option in found])
    parts["flow_ratio"] = np.array([option.flow_ratio for option in found])
    parts["head_ratio"] = np.array([option.head_ratio for option in found])
    parts["shift_m"] = np.array([option.shift_m for option in found])
    return parts, tuple(option.name for option in found)


_BUILDERS: dict[str, Callable[[_Setting], Built]] = {
    NOTHING: _nothing,
    "rough wall": _rough,
    "reduced bore": _one_size(BORE, 0.005, 0.4581),
    "local loss": _one_size(LOCAL, 0.5, 500.0),
    "gauge offset": _offset,
    "leak or open branch": _leak,
    "trapped air": _one_size(AIR, 0.03, 6.0),
    "meter error": _meter,
    "wrong unit or swapped channel": _units,
}
