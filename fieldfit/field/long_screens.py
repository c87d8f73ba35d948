"""Screens for single rows of a long log, and the blocks of rows that stand for them where plateaus are looked for."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.log import Log
from fieldfit.field.long_rows import LongRows
from fieldfit.field.row_screens import ROW_SCREENS, still_below
from fieldfit.field.screens import CLOCK, MISSING, REASONS, STUCK, limit
from fieldfit.field.section import Section

Array = NDArray[np.float64]
Codes = NDArray[np.uint8]
Mask = NDArray[np.bool_]

MOST_BLOCKS = 100_000
"""Blocks that a long log is looked at in; each is as many rows as that takes."""
FEWEST_ROWS = 16
"""Rows of a block at least: few enough for the shortest plateau that is found in a log so long."""
PARTS = 5
"""Parts of a block, of whose means the middle one stands for the block: a few wild rows cannot move it."""
CODE = {"": 0} | {reason: code for code, reason in enumerate(REASONS, start=1)}
"""Number that stands for a reason in the column of codes; 0 for a row that is good."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Blocks:
    """Blocks of neighbouring rows with one good row or more; M blocks."""

    width: int
    """Rows in a block, good and bad."""
    place: NDArray[np.int64]
    """(M,) number of each block among all blocks of the log, from 0."""
    log: Log
    """(M,) the middle of each block's good rows as a log that can be screened."""


def witnesses(rows: LongRows, name: str) -> Log:
    """Return a log of two rows that carry the extremes of the flow, so that screens see how large flows get."""
    return _log(rows, name, np.arange(2), {"flow": np.array(rows.flow_ends_m3_s)})


def _log(rows: LongRows, name: str, line: NDArray[np.int64], columns: dict[str, Array]) -> Log:
    """Return some rows as a log; a column that is not given is zero."""
    size = len(line)
    nothing = np.zeros(size)
    return Log(
        file=name,
        sha256="",
        kind="logger",
        line=line,
        start=rows.start,
        time_s=columns.get("time", np.arange(float(size))),
        flow_m3_s=columns["flow"],
        pressure_pa=np.array([columns.get(f"p{tap}", nothing) for tap in range(rows.taps)]),
        temperature_degc=columns.get("temperature"),
        flow_step_m3_s=float(rows.steps[0]),
        pressure_step_pa=rows.steps[1:],
        reason=np.zeros(size, dtype="<U1"),
    )


def screen_rows(rows: LongRows, section: Section, name: str) -> None:
    """Write the code of the first screen that catches each row.

    The screens are the ordinary ones, shown some rows at a time together with the extremes of the whole log; those
    that look from row to row are carried over from one part to the next.

    Parameters
    ----------
    rows : LongRows
        The log; its column ``code`` is written.
    section : Section
        Gives the limits.
    name : str
        Name of the log's file.
    """
    latest, frozen = _Latest(rows), _Frozen(rows, section, name)
    ends = np.array(rows.flow_ends_m3_s)
    for first, stop in rows.store.spans():
        columns = {key: rows.store.read(key, first, stop) for key in ("time", *rows.channels)}
        code = np.zeros(stop - first, dtype=np.uint8)
        code[latest.not_later(columns["time"], stop)] = CODE[CLOCK]
        code[np.any([np.isnan(values) for values in columns.values()], axis=0)] = CODE[MISSING]
        shown = {
            key: np.append(values, [np.nan, np.nan] if key == "time" else [0.0, 0.0]) for key, values in columns.items()
        }
        shown["flow"][-2:] = ends
        log = _log(rows, name, np.arange(len(shown["flow"])), shown)
        for reason, caught in ROW_SCREENS:
            mask = frozen.rows(columns, first) if reason == STUCK else caught(log, section)[:-2]
            code[(code == 0) & mask] = CODE[reason]
        rows.store.overwrite("code", first, code)


class _Latest:
    """The clock so far."""

    def __init__(self, rows: LongRows) -> None:
        self._rows, self._before, self._latest = rows, -np.inf, -np.inf

    def not_later(self, time: Array, stop: int) -> Mask:
        """Return which of the next rows are not later than every row before them; `stop` is the row after them.

        The same as `clock.repeated_or_backwards`, with what came before and what comes after in mind.
        """
        wrong = np.zeros(len(time), dtype=np.bool_)
        known = np.isfinite(time)
        times = time if known.all() else time[known]
        if times.size == 0:
            return wrong
        if times[0] > self._before >= self._latest and np.all(times[1:] > times[:-1]):
            after = self._after(stop)
            if times[-1] < after:
                self._before = self._latest = float(times[-1])
                return wrong
        before, after_each = np.append(self._before, times[:-1]), np.append(times[1:], self._after(stop))
        ahead = (times > after_each) & (before < after_each)
        latest = np.maximum.accumulate(np.append(self._latest, np.where(ahead, -np.inf, times)))
        wrong[known] = ahead | (times <= latest[:-1])
        self._before, self._latest = float(times[-1]), float(latest[-1])
        return wrong

    def _after(self, stop: int) -> float:
        """Return the next time that is known, infinity for none."""
        for first, end in self._rows.store.spans(first=stop):
            time = self._rows.store.read("time", first, min(end, first + 1000))
            if np.any(np.isfinite(time)):
                return float(time[np.isfinite(time)][0])
        return np.inf


class _Frozen:
    """Gauges that repeat one reading, from part to part of a log."""

    def __init__(self, rows: LongRows, section: Section, name: str) -> None:
        self._rows, self._limit = rows, limit(section, "stuck")
        self._still = still_below(witnesses(rows, name), section)
        self._last = [np.nan] * rows.taps
        self._until = [0] * rows.taps

    def rows(self, columns: dict[str, Array], first: int) -> Mask:
        """Return which of the next rows belong to a run of equal readings that is far too long."""
        frozen = np.zeros(len(columns["flow"]), dtype=np.bool_)
        flowing = np.append(0, np.cumsum(np.abs(columns["flow"]) >= self._still))
        for tap in range(self._rows.taps):
            self._mark(tap, columns[f"p{tap}"], flowing, (first, frozen))
            self._last[tap] = float(columns[f"p{tap}"][-1])
        return frozen

    def _mark(self, tap: int, pressure: Array, flowing: NDArray[np.int64], where: tuple[int, Mask]) -> None:
        """Mark the long runs of one gauge that begin in these rows, and the rest of one that began before."""
        first, frozen = where
        frozen[: max(self._until[tap] - first, 0)] = True
        # Only rows that repeat the one before are looked at: of a fine gauge they are few.
        again = np.flatnonzero(pressure[1:] == pressure[:-1])
        breaks = np.flatnonzero(np.diff(again) > 1)
        starts = again[np.append(0, breaks + 1)] if again.size else again
        lengths = again[np.append(breaks, len(again) - 1)] + 2 - starts if again.size else again
        if starts.size and starts[0] == 0 and pressure[0] == self._last[tap]:
            starts, lengths = starts[1:], lengths[1:]
        if not starts.size or starts[-1] + lengths[-1] < len(pressure):
            starts, lengths = self._with_last(starts, lengths, pressure, tap)
        if not starts.size:
            return
        moving = flowing[starts + lengths] - flowing[starts]
        if starts[-1] + lengths[-1] == len(pressure):
            on, flows = self._goes_on(tap, float(pressure[-1]), first + len(pressure))
            lengths[-1] += on
            moving[-1] += flows
        runs = self._rows.runs[tap]
        others = (self._rows.store.rows - lengths) / max(runs - 1, 1)
        for run in np.flatnonzero(moving > self._limit * np.maximum(others, 1.0)) if runs > 2 else ():
            frozen[starts[run] + 1 : starts[run] + lengths[run]] = True
            self._until[tap] = first + int(starts[run] + lengths[run])

    def _with_last(
        self, starts: NDArray[np.int64], lengths: NDArray[np.int64], pressure: Array, tap: int
    ) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
        """Return the runs with the last row as one of its own: it may go on in the next rows."""
        alone = len(pressure) > 1 or pressure[-1] != self._last[tap]
        if not alone:
            return starts, lengths
        return np.append(starts, len(pressure) - 1), np.append(lengths, 1)

    def _goes_on(self, tap: int, value: float, row: int) -> tuple[int, int]:
        """Return for how many rows from one on a reading stays, and in how many of them water flows."""
        length = flows = 0
        for first, stop in self._rows.store.spans(first=row):
            other = np.flatnonzero(self._rows.store.read(f"p{tap}", first, stop) != value)
            more = int(other[0]) if other.size else stop - first
            flow = self._rows.store.read("flow", first, first + more)
            length, flows = length + more, flows + int(np.count_nonzero(np.abs(flow) >= self._still))
            if other.size:
                break
        return length, flows


def blocks_of(rows: LongRows, name: str) -> Blocks:
    """Return the blocks of a log whose rows were screened.

    Parameters
    ----------
    rows : LongRows
        The log, its codes written.
    name : str
        Name of its file.

    Returns
    -------
    Blocks
    """
    width = max(-(-rows.store.rows // MOST_BLOCKS), FEWEST_ROWS)
    names = ("time", *rows.channels, *(["temperature"] if rows.temperature else []))
    found: dict[str, list[Array]] = {key: [] for key in names}
    places, lines = [np.empty(0, dtype=np.int64)], [np.empty(0, dtype=np.int64)]
    for first, stop in rows.store.spans(width):
        good = rows.store.read("code", first, stop) == 0
        starts = np.arange(0, stop - first, width)
        some = np.flatnonzero(np.add.reduceat(good, starts, dtype=np.int64))
        for key in names:
            found[key].append(_middles(rows.store.read(key, first, stop), good, width)[some])
        places.append(first // width + some)
        lines.append(rows.store.read("line", first, stop)[starts[some]])
    columns = {key: np.concatenate([np.empty(0), *parts]) for key, parts in found.items()}
    log = _log(rows, name, np.concatenate(lines), columns)
    return Blocks(width=width, place=np.concatenate(places), log=log)


def _middles(values: Array, good: Mask, width: int) -> Array:
    """Return the middle of the means of each block's parts, good rows only; NaN for a block without one."""
    count, parts = -(-len(values) // width), min(PARTS, width)
    cuts = (np.arange(count)[:, None] * width + np.arange(parts) * width // parts).ravel()
    edges = np.append(cuts, count * width)
    usable = good & np.isfinite(values)
    if usable.all() and edges[-1] == len(values):
        means = (np.add.reduceat(values, cuts) / np.diff(edges)).reshape(count, parts)
    else:
        inside = cuts[cuts < len(values)]
        total, rows = np.zeros(len(cuts)), np.zeros(len(cuts))
        total[: len(inside)] = np.add.reduceat(np.where(usable, values, 0.0), inside)
        rows[: len(inside)] = np.add.reduceat(usable, inside, dtype=np.int64)
        means = np.where(rows > 0.0, total / np.maximum(rows, 1.0), np.nan).reshape(count, parts)
    means.sort(axis=1)
    known = np.count_nonzero(np.isfinite(means), axis=1)
    line = np.arange(count)
    low, high = means[line, np.maximum(known - 1, 0) // 2], means[line, np.minimum(known // 2, parts - 1)]
    return np.asarray((low + high) / 2.0)
