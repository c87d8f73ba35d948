"""Wrong units and swapped channels: discrete mistakes, each of an exact size."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.readings import ReachReadings
from fieldfit.hydraulics.friction import STANDARD_GRAVITY

Array = NDArray[np.float64]

ATMOSPHERE_PA = 101325.0
"""Standard atmosphere, 1.013 bar [Pa]."""
PRESSURE_RATIOS: tuple[tuple[str, float], ...] = (
    ("psi taken for kPa or the reverse", 6.894757),
    ("bar taken for m of water or the reverse", 10.19716),
    ("bar taken for psi or the reverse", 14.50377),
    ("psi taken for ft of water or the reverse", 2.306659),
    ("psi taken for m of water or the reverse", 1.422334),
    ("m of water taken for kPa or the reverse", 9.80665),
    ("m taken for ft of water or the reverse", 3.280840),
    ("bar taken for kg/cm² or the reverse", 1.019716),
    ("a decimal point", 10.0),
    ("bar taken for kPa or the reverse", 100.0),
)
"""Mistaken pressure units and the ratio between them [-]."""
FLOW_RATIOS: tuple[tuple[str, float], ...] = (
    ("US gallons taken for litres or the reverse", 3.785412),
    ("US gallons a minute taken for m³/h or the reverse", 4.402868),
    ("imperial gallons taken for litres or the reverse", 4.54609),
    ("imperial taken for US gallons or the reverse", 1.200950),
    ("L/s taken for m³/h or the reverse", 3.6),
    ("L/s taken for US gallons a minute or the reverse", 15.85032),
    ("L/min taken for m³/h or the reverse", 16.66667),
    ("seconds taken for minutes or the reverse", 60.0),
    ("a decimal point", 10.0),
)
"""Mistaken flow units and the ratio between them [-]; US gallons a minute and m³/h: 1/0.2271."""
SHARES = {"both": 0.30, "one": 0.15, "flow": 0.25, "absolute": 0.10, "swapped": 0.20}
"""Prior shares of the kinds of mistake [-]: both gauges, one gauge, flow, one absolute, taps swapped."""

BEYOND = 30.0
"""Stated standard uncertainties of gauges and survey by which no static differs from what a mistake foretells [-]."""
IMPOSSIBLE = 1e-300
"""Share of a mistake that the static rules out [-]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Option:
    """One mistake; K readings."""

    name: str
    """In words."""
    probability: float
    """Prior share among all of them [-]."""
    flow_ratio: float = 1.0
    """Read over true flow [-]."""
    head_ratio: float = 1.0
    """Read over true head loss [-]."""
    shift_m: Array
    """(K,) what it adds to the head loss as read [m]."""
    at_rest_m: float = 0.0
    """What it adds to the apparent loss at rest, before levelling [m]."""


def options(readings: ReachReadings) -> tuple[Option, ...]:
    """List every mistake for a reach.

    With a static the gauges were levelled while wrong: a constant mistake is gone, and a wrong gauge counts from its
    static pressure. Without one the elevations count, which no wrong unit of pressure touches.

    Parameters
    ----------
    readings : ReachReadings
        K readings.

    Returns
    -------
    tuple of Option
        Their shares are the prior's, times what a static says for or against them.
    """
    surveyed = readings.elevation_drop.value if readings.elevation_drop else 0.0
    # A levelling takes the whole apparent loss at rest off; without it that stays in every reading.
    stays = 0.0 if readings.levelling else 1.0
    none = np.zeros(len(readings.flow_m3_s))
    found = [
        Option(
            name="the two taps swapped",
            probability=SHARES["swapped"],
            head_ratio=-1.0,
            shift_m=none + stays * 2.0 * surveyed,
            at_rest_m=2.0 * surveyed,
        )
    ]
    for name, ratio in _both_ways(PRESSURE_RATIOS):
        rest = (1.0 - ratio) * surveyed
        share = SHARES["both"] / (2.0 * len(PRESSURE_RATIOS))
        found.append(
            Option(
                name=f"both gauges: {name}",
                probability=share,
                head_ratio=ratio,
                shift_m=none + stays * rest,
                at_rest_m=rest,
            )
        )
    found += [*_one_gauge(readings, stays * surveyed), *_absolute(readings)]
    for name, ratio in _both_ways(FLOW_RATIOS):
        share = SHARES["flow"] / (2.0 * len(FLOW_RATIOS))
        found.append(Option(name=f"flow: {name}", probability=share, flow_ratio=ratio, shift_m=none))
    return tuple(replace(option, probability=option.probability * _by_static(option, readings)) for option in found)


def _by_static(option: Option, readings: ReachReadings) -> float:
    """Return how much better a mistake foretells what the static showed than no mistake does.

    The tail is heavy: a knocked gauge or a wrong elevation moves a static too.
    """
    level = readings.levelling
    if level is None or not np.isfinite(level.expected_m):
        return 1.0
    stated = max(level.expected_m, 0.01)
    without, within = level.offset_m / stated, (level.offset_m - option.at_rest_m) / stated
    if abs(within) > BEYOND and abs(within) > abs(without):
        return IMPOSSIBLE
    return float((1.0 + without**2) / (1.0 + within**2))


def _both_ways(ratios: tuple[tuple[str, float], ...]) -> list[tuple[str, float]]:
    """Return every ratio and its inverse."""
    return [(name, way) for name, ratio in ratios for way in (ratio, 1.0 / ratio)]


def _one_gauge(readings: ReachReadings, drop: float) -> list[Option]:
    """Return each gauge in a unit of its own: it reads the other one's true pressure and the head loss, times a ratio."""
    found = []
    at_both = readings.levelling.pressure_pa if readings.levelling else (0.0, 0.0)
    weight = readings.density_kg_m3 * STANDARD_GRAVITY
    share = SHARES["one"] / (4.0 * len(PRESSURE_RATIOS))
    if not _two_gauges(readings):
        return []
    for end, tap, sign in ((0, readings.upstream, 1.0), (1, readings.downstream, -1.0)):
        sound = (readings.pressure_pa[1 - end] - at_both[1 - end]) / weight
        for name, ratio in _both_ways(PRESSURE_RATIOS):
            shift = sign * (ratio - 1.0) * sound + (1.0 - ratio) * drop
            wrong = sign * (1.0 - 1.0 / ratio) * at_both[end] / float(np.mean(weight))
            found.append(
                Option(
                    name=f"gauge {tap.column}: {name}",
                    probability=share,
                    head_ratio=ratio,
                    shift_m=shift,
                    at_rest_m=wrong,
                )
            )
    return found


def _two_gauges(readings: ReachReadings) -> bool:
    """Return whether each tap has a gauge of its own: a transmitter of the difference stands at one, zero at the other."""
    return bool(np.all(np.any(readings.pressure_pa != 0.0, axis=1)))


def _absolute(readings: ReachReadings) -> list[Option]:
    """Return one gauge reading absolute pressure; a static would have taken it off."""
    if readings.levelling or not _two_gauges(readings):
        return []
    step = ATMOSPHERE_PA / (readings.density_kg_m3 * STANDARD_GRAVITY)
    return [
        Option(
            name=f"gauge {tap.column} reads absolute pressure",
            probability=SHARES["absolute"] / 2.0,
            shift_m=sign * step,
        )
        for tap, sign in ((readings.upstream, 1.0), (readings.downstream, -1.0))
    ]
