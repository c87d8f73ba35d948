"""A static that is none: signs that water still moved while the gauges were levelled."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.log import Log
from fieldfit.field.readings import Plateaus, Screening
from fieldfit.field.row_noise import autocorrelation_time
from fieldfit.field.row_screens import still_below
from fieldfit.field.section import Section

Array = NDArray[np.float64]

CHANGE_SD = 4.0
"""Standard errors by which something must change within a static to be changing."""
CHANGE_STEPS = 2.0
"""Steps of the gauges' resolution that it must change by as well."""
DRAINS = 0.1
"""Share of its pressure that a static must lose to be draining."""
ZERO_SD = 3.0
"""Standard errors by which a static's flow must stand clear of none."""
NEARLY_STILL = 0.05
"""Share of the largest flow under which a plateau was perhaps meant to be a static."""
ROWS = 12
"""Rows of a static without which a change within it is not looked for."""


@dataclass(frozen=True, slots=True, kw_only=True)
class StaticDoubt:
    """A sign that a static is none."""

    plateau: int
    """Number of the plateau."""
    sign: str
    """"decaying loss", "draining", "flow" or "nearly still"."""
    value: float
    """What was seen: change of the apparent loss [m], of the pressure [-], or flow [m³/s]."""
    limit: float
    """What noise and resolution allow, in the same unit."""
    text: str
    """The sentence, with what to do."""


def static_doubts(log: Log, screening: Screening, plateaus: Plateaus, section: Section) -> tuple[StaticDoubt, ...]:
    """Look at every static for water that still moves.

    Looked for are: an apparent loss that is still falling or rising from the beginning of the static to its end, a
    pressure that runs down, a flow clear of the meter's zero, and, where there is no static, a plateau that was perhaps
    meant to be one.

    Parameters
    ----------
    log : Log
        N rows.
    screening : Screening
        Which rows belong to which plateau.
    plateaus : Plateaus
        K plateaus.
    section : Section
        The test section.

    Returns
    -------
    tuple of StaticDoubt
    """
    found: list[StaticDoubt] = []
    # A service log's statics are gathered from many days, and one too long for memory keeps no rows to look within.
    in_steps = log.kind == "logger" and screening.block is None
    if in_steps and screening.plateau.shape == log.time_s.shape:
        for number in plateaus.number[plateaus.static]:
            rows = np.flatnonzero(screening.plateau == number)
            if len(rows) >= ROWS:
                found += _within(log, int(number), rows, section)
                found += _flow(log, int(number), rows, section)
    return (*found, *_nearly_still(plateaus, log, section))


def _within(log: Log, number: int, rows: NDArray[np.int64], section: Section) -> Iterator[StaticDoubt]:
    """Look for an apparent loss or a pressure that changes within a static."""
    weight = 9.80665 * float(section.liquid.density_kg_m3(np.array([_degrees(section)]))[0])
    time = log.time_s[rows]
    steps = log.pressure_step_pa
    for reach in range(len(section.taps) - 1):
        difference = log.pressure_pa[reach, rows] - log.pressure_pa[reach + 1, rows]
        change, standard = _change(time, difference)
        allowed = max(CHANGE_SD * standard, CHANGE_STEPS * float(np.hypot(*steps[reach : reach + 2])))
        if abs(change) > allowed:
            upper, lower = section.taps[reach].column, section.taps[reach + 1].column
            yield StaticDoubt(
                plateau=number,
                sign="decaying loss",
                value=change / weight,
                limit=allowed / weight,
                text=f"While the water should have stood still (plateau {number}), the difference between '{upper}' and "
                f"'{lower}' went on changing by {change / weight:+.2f} m: the water was still coming to rest, or a gauge was. "
                "Wait longer before levelling.",
            )
    mean = np.mean(log.pressure_pa[:, rows], axis=0)
    change, standard = _change(time, mean)
    allowed = max(CHANGE_SD * standard, DRAINS * abs(float(np.mean(mean))))
    if not section.differential and change < -allowed:
        yield StaticDoubt(
            plateau=number,
            sign="draining",
            value=change,
            limit=allowed,
            text=f"All gauges ran down together by {-change / weight:.1f} m while the water should have stood still (plateau "
            f"{number}): the section was draining. Find where, or keep it under pressure while levelling.",
        )


def _change(time: Array, values: Array) -> tuple[float, float]:
    """Return how far a line through values goes from the first to the last, with its standard error."""
    centred = time - np.mean(time)
    spread = float(centred @ centred)
    if spread <= 0.0:
        return 0.0, float("inf")
    slope = float(centred @ values) / spread
    left = values - np.mean(values) - slope * centred
    memory = autocorrelation_time([left])
    variance = float(left @ left) / max(len(values) - 2.0 * memory, 1.0)
    span = float(time[-1] - time[0])
    return slope * span, float(np.sqrt(variance * memory / spread)) * span


def _flow(log: Log, number: int, rows: NDArray[np.int64], section: Section) -> Iterator[StaticDoubt]:
    """Look for a flow in a static that the meter can tell from none."""
    flow = log.flow_m3_s[rows]
    memory = autocorrelation_time([flow])
    mean, standard = float(np.mean(flow)), float(np.std(flow)) * np.sqrt(memory / len(flow))
    zero = float(section.meter.accuracy.fixed_at(np.zeros(1))[0])
    allowed = float(np.hypot(max(ZERO_SD * standard, log.flow_step_m3_s), 2.0 * zero))
    if abs(mean) > allowed:
        yield StaticDoubt(
            plateau=number,
            sign="flow",
            value=mean,
            limit=allowed,
            text=f"The meter shows {1e3 * mean:.3g} L/s while the water should have stood still (plateau {number}): its zero "
            "is off, or water leaks past a valve. Read it with the meter's own valve shut.",
        )


def _nearly_still(plateaus: Plateaus, log: Log, section: Section) -> Iterator[StaticDoubt]:
    """Look for a plateau at the ends of the log that was perhaps meant to be a static."""
    if np.any(plateaus.static) or len(plateaus.number) < 2:
        return
    largest = float(np.max(np.abs(plateaus.flow_m3_s)))
    for place in (0, len(plateaus.number) - 1):
        flow = float(plateaus.flow_m3_s[place])
        if abs(flow) < NEARLY_STILL * largest:
            yield StaticDoubt(
                plateau=int(plateaus.number[place]),
                sign="nearly still",
                value=flow,
                limit=still_below(log, section),
                text=f"Plateau {int(plateaus.number[place])} is no static: {1e3 * flow:.3g} L/s still flowed, so the gauges "
                "were not levelled on it. Shut the line tight, or level the gauges on a pump or a common pipe.",
            )


def _degrees(section: Section) -> float:
    """Return a temperature of the liquid [°C]; its weight hardly depends on it."""
    return section.temperature.value if section.temperature else 15.0
