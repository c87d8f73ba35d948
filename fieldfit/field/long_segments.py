"""Which rows of a long log make each plateau: edges to the row, and rows far off the plateau's middle."""

from __future__ import annotations

import itertools
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.long_rows import LongRows
from fieldfit.field.long_screens import CODE, Blocks
from fieldfit.field.readings import Screening
from fieldfit.field.screens import OUTLIER, limit
from fieldfit.field.section import Section
from fieldfit.field.stretches import END_ROWS, settled

Array = NDArray[np.float64]

MOST_JUDGED = 150_000
"""Rows of a plateau from which its middle and spread are found; a longer plateau lends evenly spaced ones."""
EDGE_BLOCKS = 2
"""Blocks at either end of a plateau in which its edge may lie."""
MIDDLE_ROWS = 20_000
"""Rows from between that say where the plateau's flow lies."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Segments:
    """Row ranges that belong to plateaus, in order of rows; S of them."""

    first: NDArray[np.int64]
    """(S,) first row."""
    stop: NDArray[np.int64]
    """(S,) row after the last one."""
    number: NDArray[np.int64]
    """(S,) number of the plateau."""

    def within(self, first: int, stop: int) -> list[tuple[slice, int]]:
        """Return the parts of the segments that lie in a range of rows, counted from its first, with their numbers."""
        begin = int(np.searchsorted(self.stop, first, side="right"))
        end = int(np.searchsorted(self.first, stop, side="left"))
        return [
            (slice(max(int(self.first[k]) - first, 0), min(int(self.stop[k]), stop) - first), int(self.number[k]))
            for k in range(begin, end)
        ]


def segments_of(rows: LongRows, blocks: Blocks, screening: Screening) -> Segments:
    """Return the row ranges of the plateaus that were found on blocks.

    A plateau's edges are sought among the rows of its outer blocks and the ones beyond, as an ordinary log's are. The
    groups of a service log keep to whole blocks.

    Parameters
    ----------
    rows : LongRows
        The log.
    blocks : Blocks
        Its M blocks.
    screening : Screening
        What became of the blocks.

    Returns
    -------
    Segments
    """
    number = np.array(screening.plateau)
    if screening.block is None:
        _take_in(number, screening)
    starts = np.flatnonzero(np.append(True, np.diff(number) != 0))
    stops = np.append(starts[1:], len(number))
    found: list[tuple[int, int, int]] = []
    for first, stop in zip(starts.tolist(), stops.tolist(), strict=True):
        if number[first] == 0:
            continue
        begin, end = int(blocks.place[first]) * blocks.width, (int(blocks.place[stop - 1]) + 1) * blocks.width
        end = min(end, rows.store.rows)
        if screening.block is None and blocks.width > 1:
            later = np.flatnonzero(number[stop:])
            ceiling = int(blocks.place[stop + later[0]]) * blocks.width if later.size else rows.store.rows
            begin, end = _edges(rows, (begin, end), (found[-1][1] if found else 0, ceiling), blocks.width)
        found.append((begin, end, int(number[first])))
    table = np.array(found, dtype=np.int64).reshape(-1, 3)
    return Segments(first=table[:, 0], stop=table[:, 1], number=table[:, 2])


def _take_in(number: NDArray[np.int64], screening: Screening) -> None:
    """Give the blocks set aside as outliers within a plateau back to it: its rows are judged one by one."""
    held = np.flatnonzero(number > 0)
    if held.size == 0:
        return
    for block in np.flatnonzero(screening.reason == OUTLIER):
        after = int(np.searchsorted(held, block))
        if 0 < after < held.size and number[held[after - 1]] == number[held[after]]:
            number[block] = number[held[after]]


def _edges(rows: LongRows, span: tuple[int, int], bounds: tuple[int, int], width: int) -> tuple[int, int]:
    """Return first row and row after the last of a plateau, found among the rows about the ends of its blocks."""
    begin, end = max(span[0], bounds[0]), span[1]
    reach = EDGE_BLOCKS * width
    low, high = max(begin - reach, bounds[0]), min(end + reach, bounds[1])
    inner, outer = min(begin + reach, end), max(end - reach, min(begin + reach, end))
    step = max((outer - inner) // MIDDLE_ROWS, 1)
    place = np.concatenate([np.arange(low, inner), np.arange(inner, outer, step), np.arange(outer, high)])
    flow, code = (
        np.concatenate(
            [
                rows.store.read(name, low, inner),
                every(rows, name, (inner, outer), step),
                rows.store.read(name, outer, high),
            ]
        )
        for name in ("flow", "code")
    )
    good = np.flatnonzero(code == 0)
    if good.size <= 2 * END_ROWS:
        return begin, end
    kept = settled(flow, good)
    first, last = int(place[kept[0]]), int(place[kept[-1]])
    return first if first < inner else begin, last + 1 if last >= outer else end


def every(rows: LongRows, name: str, span: tuple[int, int], step: int) -> NDArray[np.generic]:
    """Return every so many values of a column, read part by part."""
    parts = [rows.store.read(name, first, stop)[::step] for first, stop in rows.store.spans(step, *span)]
    return np.concatenate(parts) if parts else rows.store.read(name, 0, 0)


def set_outliers_aside(rows: LongRows, segments: Segments, section: Section) -> None:
    """Write the code of an outlier where a row lies far off the middle of its plateau, in flow or in any difference.

    Parameters
    ----------
    rows : LongRows
        The log; its column ``code`` is changed.
    segments : Segments
        The rows of each plateau.
    section : Section
        Gives the limit.
    """
    limit_sd = limit(section, "outlier")
    for first, stop in zip(segments.first.tolist(), segments.stop.tolist(), strict=True):
        ranges = _usual(rows, first, stop, limit_sd)
        for begin, end in rows.store.spans(1, first, stop):
            code = rows.store.read("code", begin, end)
            far = np.zeros(end - begin, dtype=np.bool_)
            for values, (middle, distance) in zip(_judged(rows, begin, end), ranges, strict=True):
                far |= np.abs(values - middle) > distance
            far &= code == 0
            if far.any():
                code[far] = CODE[OUTLIER]
                rows.store.overwrite("code", begin, code)


def _judged(rows: LongRows, first: int, stop: int) -> list[Array]:
    """Return the flow and the pressure differences of some rows."""
    flow, *pressure = (rows.store.read(name, first, stop) for name in rows.channels)
    return [flow, *(upper - lower for upper, lower in itertools.pairwise(pressure))]


def _usual(rows: LongRows, first: int, stop: int, limit_sd: float) -> list[tuple[float, float]]:
    """Return middle and allowed distance of flow and pressure differences in a stretch."""
    step = max(-(-(stop - first) // MOST_JUDGED), 1)
    good = every(rows, "code", (first, stop), step) == 0
    flow, *pressure = (np.asarray(every(rows, name, (first, stop), step)[good]) for name in rows.channels)
    channels = [flow, *(upper - lower for upper, lower in itertools.pairwise(pressure))]
    steps = [rows.steps[0], *(rows.steps[1:-1] + rows.steps[2:])]
    found = []
    for values, resolution in zip(channels, steps, strict=True):
        if values.size == 0:
            found.append((0.0, np.inf))
            continue
        middle = float(np.median(values))
        spread = max(1.4826 * float(np.median(np.abs(values - middle))), float(resolution) / 2.0, 1e-12)
        found.append((middle, limit_sd * spread))
    return found
