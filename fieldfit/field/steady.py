"""Finding the steady stretches of a flow record."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

BLOCKS = 3000
"""A longer record is averaged to this many blocks before it is cut."""
LONG = 8
"""Rows from which a stretch may be joined to its neighbour; the steps of a ramp are shorter."""
MEMORY = 5
"""Rows apart at which the scatter of a record is judged."""


def steady_stretches(flow: Array, step: float) -> list[tuple[int, int]]:
    """Cut a flow record where its level changes.

    The cuts minimise the squared distance from a staircase plus a price per stair (optimal partitioning, Jackson
    et al. 2005, doi:10.1109/LSP.2001.838216). Levels are compared on a scale that is relative for large flows and
    absolute for small ones; the price grows with the scatter of the record, so that noise makes no stairs.

    Parameters
    ----------
    flow : (N,) array
        Flow in order of time, no missing values [any unit].
    step : float
        Smallest relative change of level worth a cut [-].

    Returns
    -------
    list of (first, stop)
        Half-open row ranges that cover the record; ramps come out as many short ones.

    Examples
    --------
    >>> steady_stretches(np.repeat([1.0, 2.0], 10), step=0.04)
    [(0, 10), (10, 20)]
    """
    count = len(flow)
    if count == 0:
        return []
    width = -(-count // BLOCKS)
    edges = np.append(np.arange(0, count, width), count)
    level = _relative_level(flow)
    means = np.add.reduceat(level, edges[:-1]) / np.diff(edges)
    cuts = _partition(means, np.diff(edges).astype(np.float64), _price(level, step))
    return _join([(int(edges[first]), int(edges[stop])) for first, stop in cuts], level, step)


def _relative_level(flow: Array) -> Array:
    """Return flow on a scale where a difference is a relative change, absolute near zero."""
    largest = float(np.max(np.abs(flow)))
    small = 0.05 * largest if largest > 1e-300 else 1.0
    return np.asarray(np.sign(flow) * np.log1p(np.abs(flow) / small))


def _price(level: Array, step: float) -> float:
    """Return what a further stair must save: a step over eight rows, or ten times the scatter's variance."""
    # Noise with memory shows little from row to row, so rows some way apart are compared.
    apart = np.abs(level[MEMORY:] - level[:-MEMORY])
    scatter = 1.4826 * float(np.median(apart)) / np.sqrt(2.0) if len(apart) else 0.0
    return max(4.0 * step**2, 12.0 * scatter**2)


def _join(stretches: list[tuple[int, int]], level: Array, step: float) -> list[tuple[int, int]]:
    """Join neighbouring stretches of some length that differ by less than a step: long ones part on very little."""
    joined = stretches[:1]
    for first, stop in stretches[1:]:
        start = joined[-1][0]
        long = min(first - start, stop - first) >= LONG
        if long and abs(float(np.mean(level[start:first])) - float(np.mean(level[first:stop]))) < step:
            joined[-1] = (start, stop)
        else:
            joined.append((first, stop))
    return joined


def _partition(means: Array, weight: Array, price: float) -> list[tuple[int, int]]:
    """Return the staircase of least cost as half-open ranges of blocks."""
    total_weight = np.concatenate([[0.0], np.cumsum(weight)])
    total = np.concatenate([[0.0], np.cumsum(weight * means)])
    squares = np.concatenate([[0.0], np.cumsum(weight * means**2)])
    count = len(means)
    cost = np.zeros(count + 1)
    cost[0] = -price
    origin = np.zeros(count + 1, dtype=np.int64)
    starts = np.array([0])
    for stop in range(1, count + 1):
        inside = squares[stop] - squares[starts]
        inside = inside - (total[stop] - total[starts]) ** 2 / (total_weight[stop] - total_weight[starts])
        through = cost[starts] + inside
        best = int(np.argmin(through))
        cost[stop] = through[best] + price
        origin[stop] = starts[best]
        # A start that already costs more than the best can never win later (PELT pruning, Killick et al. 2012).
        starts = np.append(starts[through <= cost[stop]], stop)
    ranges = []
    stop = count
    while stop > 0:
        ranges.append((int(origin[stop]), stop))
        stop = int(origin[stop])
    return ranges[::-1]
