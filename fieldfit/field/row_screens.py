"""Screens that judge single rows of a log, each a small pure function of log and section."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.log import Log
from fieldfit.field.screens import RANGE, REVERSED, STUCK, limit
from fieldfit.field.section import Section

Array = NDArray[np.float64]
Mask = NDArray[np.bool_]
Rows = NDArray[np.int64]

VACUUM_PA = -101_325.0
"""Gauge pressure that nothing can be below, near enough [Pa]."""


def still_below(log: Log, section: Section) -> float:
    """Return the flow under which nothing counts as flowing [m³/s]: a share of the largest, or what the meter can tell."""
    largest = float(np.nanmax(np.abs(log.flow_m3_s), initial=0.0))
    zero = 2.0 * float(section.meter.accuracy.fixed_at(np.zeros(1))[0])
    return max(limit(section, "static_flow") * largest, zero, 1.01 * log.flow_step_m3_s)


def out_of_range(log: Log, section: Section) -> Mask:
    """Return the (N,) rows in which a gauge reads beyond its range, or less than a vacuum."""
    beyond = np.zeros(len(log.reason), dtype=np.bool_)
    for tap, pressure in zip(section.taps, log.pressure_pa, strict=True):
        highest = tap.accuracy.span if tap.accuracy.span is not None else np.inf
        beyond |= (pressure > highest) | (pressure < VACUUM_PA)
    return beyond


def stuck(log: Log, section: Section) -> Mask:
    """Return the (N,) rows in which a gauge repeats one reading far longer than is its habit.

    A coarse gauge repeats itself all the time, a fine one hardly ever; so a run of equal readings is held against
    the mean of the column's other runs. Only rows that flow count: at rest even a fine gauge may stand still. The
    first row of a run may be good and is kept.
    """
    frozen = np.zeros(len(log.reason), dtype=np.bool_)
    if log.kind == "sheet":
        return frozen
    flowing = np.append(0, np.cumsum(np.abs(log.flow_m3_s) >= still_below(log, section)))
    for pressure in log.pressure_pa:
        starts = np.flatnonzero(np.append(True, pressure[1:] != pressure[:-1]))
        lengths = np.diff(np.append(starts, len(pressure)))
        others = (len(pressure) - lengths) / max(len(lengths) - 1, 1)
        moving = flowing[starts + lengths] - flowing[starts]
        long = np.flatnonzero(moving > limit(section, "stuck") * np.maximum(others, 1.0))
        for run in long if len(lengths) > 2 else ():
            frozen[starts[run] + 1 : starts[run] + lengths[run]] = True
    return frozen


def reversed_flow(log: Log, section: Section) -> Mask:
    """Return the (N,) rows in which the water ran backwards, clear of the meter's noise about zero."""
    largest = float(np.nanmax(np.abs(log.flow_m3_s), initial=0.0))
    return np.asarray(log.flow_m3_s < -max(still_below(log, section), limit(section, "reversed") * largest))


def pauses(log: Log, section: Section) -> Rows:
    """Return the rows before which the clock paused for much longer than is its habit."""
    told = np.flatnonzero(np.isfinite(log.time_s))
    steps = np.diff(log.time_s[told])
    forward = steps[steps > 0.0]
    if log.kind == "sheet" or forward.size == 0:
        return np.empty(0, dtype=np.int64)
    return told[1:][steps > limit(section, "gap") * float(np.median(forward))]


ROW_SCREENS: tuple[tuple[str, Callable[[Log, Section], Mask]], ...] = (
    (RANGE, out_of_range),
    (STUCK, stuck),
    (REVERSED, reversed_flow),
)
"""Reason and screen, in the order they are tried; the first reason counts."""
