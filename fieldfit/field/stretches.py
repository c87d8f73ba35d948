"""Which rows of a steady stretch count: ends that are still on their way, outliers, pauses, pieces of a valve move."""

from __future__ import annotations

import itertools

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.log import Log
from fieldfit.field.row_screens import still_below
from fieldfit.field.screens import limit
from fieldfit.field.section import Section

Array = NDArray[np.float64]
Rows = NDArray[np.int64]
Mask = NDArray[np.bool_]

END_ROWS = 5
"""Rows at either end of a plateau that are averaged to see whether and how the flow changes."""
ALIKE = (0.35, 3.0)
"""Range of a rate beyond the end of a stretch, over the one within, that still counts as the same valve move."""


def settled(flow: Array, rows: Rows) -> Rows:
    """Return a stretch without the rows at its ends in which the flow was still on its way.

    Single rows far off the middle go first; then, as the last of a ramp hides in the noise of single rows, ends
    whose running mean is off the middle.
    """
    middle = float(np.median(flow[rows]))
    distance = np.abs(flow[rows] - middle)
    spread = 1.4826 * float(np.median(distance))
    inside = np.flatnonzero(distance <= max(4.0 * spread, 0.005 * abs(middle)))
    first, stop = int(inside[0]), int(inside[-1]) + 1
    near = max(1.8 * spread, 0.003 * abs(middle))
    while stop - first > 2 * END_ROWS and abs(float(np.mean(flow[rows[first : first + END_ROWS]])) - middle) > near:
        first += 1
    while stop - first > 2 * END_ROWS and abs(float(np.mean(flow[rows[stop - END_ROWS : stop]])) - middle) > near:
        stop -= 1
    return rows[first:stop]


def outliers(log: Log, rows: Rows, limit_sd: float) -> Mask:
    """Return which rows of a stretch lie far off its middle, in flow or in any pressure difference."""
    far = np.zeros(len(rows), dtype=np.bool_)
    steps = np.append(log.pressure_step_pa[:-1] + log.pressure_step_pa[1:], log.flow_step_m3_s)
    differences = log.pressure_pa[:-1, rows] - log.pressure_pa[1:, rows]
    for values, step in zip([*differences, log.flow_m3_s[rows]], steps, strict=True):
        distance = np.abs(values - np.median(values))
        # The middle absolute distance is blind below a resolution step; a step is never an outlier.
        spread = max(1.4826 * float(np.median(distance)), float(step) / 2.0, 1e-12)
        far |= distance > limit_sd * spread
    return far


def parted(stretches: list[tuple[int, int]], good: Rows, breaks: Rows) -> list[tuple[int, int]]:
    """Return stretches of the good rows, parted where the clock paused before a row.

    Examples
    --------
    >>> parted([(0, 6)], np.array([0, 1, 2, 4, 5, 6]), np.array([4]))
    [(0, 3), (3, 6)]
    """
    cuts = np.searchsorted(good, breaks)
    pieces: list[tuple[int, int]] = []
    for first, stop in stretches:
        ends = [first, *(int(cut) for cut in cuts if first < cut < stop), stop]
        pieces += itertools.pairwise(ends)
    return pieces


def drifts(log: Log, section: Section, rows: Rows) -> bool:
    """Return whether the flow changes too much from end to end of a stretch."""
    mean = float(np.mean(log.flow_m3_s[rows]))
    if abs(mean) < still_below(log, section):
        return False
    return change(log, rows) > limit(section, "drift") * abs(mean)


def change(log: Log, rows: Rows) -> float:
    """Return by how much the flow changes from end to end of a stretch, either way [m³/s]."""
    span = float(log.time_s[rows[-1]] - log.time_s[rows[0]])
    return abs(mean_change(log.time_s[rows], log.flow_m3_s[rows])) * span


def ramps(log: Log, section: Section, good: Rows, rows: Rows) -> bool:
    """Return whether a stretch is a piece of a slow valve move.

    A slow move is cut into steps that pass for plateaus. What tells them apart is that the flow changes within them
    and goes on changing at much the same rate beyond both ends; the flow of a plateau that sags is left at once.
    """
    flow, time = log.flow_m3_s, log.time_s
    if change(log, rows) <= limit(section, "ramp") * abs(float(np.mean(flow[rows]))):
        return False
    rate = mean_change(time[rows], flow[rows])
    reach = max(END_ROWS, len(rows) // 2)
    first, last = int(np.searchsorted(good, rows[0])), int(np.searchsorted(good, rows[-1]))
    ends = [good[max(first - reach, 0) : first + reach], good[max(last - reach + 1, 0) : last + reach + 1]]
    beyond = [_slope(time[part], flow[part]) / rate for part in ends if len(part) == 2 * reach]
    return len(beyond) == 2 and all(ALIKE[0] < share < ALIKE[1] for share in beyond)


def _slope(time: Array, values: Array) -> float:
    """Return the slope of a straight line through a few rows [per s]."""
    apart = time - np.mean(time)
    return float(apart @ values) / max(float(apart @ apart), 1e-300)


def mean_change(time: Array, values: Array) -> float:
    """Return the mean rate of change: last less first over the time between, each a mean of a few rows.

    Inertia asks for the mean of dQ/dt, and that is this ratio whatever the path; a line of least squares would
    miss the hook that a valve move leaves at one end. Zero where time stands still.
    """
    few = end_rows(len(time))
    span = float(np.mean(time[-few:]) - np.mean(time[:few]))
    return float(np.mean(values[-few:]) - np.mean(values[:few])) / span if span > 0.0 else 0.0


def end_rows(count: int) -> int:
    """Return how many rows at either end of a stretch are averaged for its mean rate of change."""
    return max(min(END_ROWS, count // 2), count // 10, 1)
