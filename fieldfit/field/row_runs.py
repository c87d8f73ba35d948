"""What became of the rows of a long log, told in runs instead of row by row."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
Whole = NDArray[np.int64]

MOST_RUNS = 50_000
"""Runs that are kept; with more of them, like rows of a window are counted together."""


@dataclass(frozen=True, slots=True, kw_only=True)
class RowRuns:
    """Rows with one fate, in order; R runs that hold every row of the log once.

    A run is rows that follow each other. Where fates change so often that there would be too many runs, a run holds
    the like rows of a window, and others lie between: `rows` then is less than the lines from first to last.
    """

    first_line: Whole
    """(R,) line of the file of the first row."""
    last_line: Whole
    """(R,) line of the file of the last row."""
    first_s: Array
    """(R,) time of the first row [s since the log's first row]; NaN where missing."""
    last_s: Array
    """(R,) time of the last row [s since the log's first row]; NaN where missing."""
    rows: Whole
    """(R,) rows."""
    plateau: Whole
    """(R,) plateau they belong to, from 1; 0 for none."""
    reason: NDArray[np.str_]
    """(R,) why they were set aside; empty where they are used."""

    @property
    def total(self) -> int:
        """Rows of the log."""
        return int(np.sum(self.rows))

    @property
    def used(self) -> int:
        """Rows that are used."""
        return int(np.sum(self.rows[self.plateau > 0]))

    @property
    def counts(self) -> tuple[tuple[str, int], ...]:
        """Rows set aside by reason, most first."""
        counted: Counter[str] = Counter()
        for reason in np.unique(self.reason[self.plateau == 0]).tolist():
            counted[reason] = int(np.sum(self.rows[(self.reason == reason) & (self.plateau == 0)]))
        return tuple(counted.most_common())

    def set_aside(self, reasons: dict[int, str]) -> RowRuns:
        """Return the runs with whole plateaus set aside, by number."""
        reason = self.reason.astype(object)
        plateau = self.plateau.copy()
        for number, why in reasons.items():
            reason[self.plateau == number] = why
            plateau[self.plateau == number] = 0
        return replace(self, reason=reason.astype(np.str_), plateau=plateau)


class RunCounter:
    """Makes runs from the fates of rows, part by part.

    Examples
    --------
    >>> counter = RunCounter()
    >>> counter.add(np.array([0, 0, 3]), np.arange(2, 5), np.arange(3.0))
    >>> counter.add(np.array([3, 3]), np.arange(5, 7), np.arange(3.0, 5.0))
    >>> counter.code.tolist(), counter.rows.tolist()
    ([0, 3], [2, 3])
    """

    def __init__(self) -> None:
        self.first = np.empty(0, dtype=np.int64)
        self.rows, self.code = self.first, self.first
        self.lines = np.empty((2, 0), dtype=np.int64)
        self.times = np.empty((2, 0))
        self._window = 1
        self._seen = 0

    def add(self, code: Whole, line: Whole, time: Array) -> None:
        """Take the fate of the next rows, as whole numbers, with their lines and times."""
        starts = np.flatnonzero(np.append(True, code[1:] != code[:-1]))
        stops = np.append(starts[1:], len(code))
        self.first = np.append(self.first, self._seen + starts)
        self.rows = np.append(self.rows, stops - starts)
        self.code = np.append(self.code, code[starts])
        self.lines = np.append(self.lines, [line[starts], line[stops - 1]], axis=1)
        self.times = np.append(self.times, [time[starts], time[stops - 1]], axis=1)
        self._seen += len(code)
        self._join()
        while len(self.rows) > MOST_RUNS:
            self._window *= 2
            self._fold()

    def _join(self) -> None:
        """Join runs that go on from one part to the next."""
        new = np.append(True, (np.diff(self.code) != 0) | (np.diff(self.first) != self.rows[:-1]))
        self._gather(np.cumsum(new) - 1)

    def _fold(self) -> None:
        """Count like rows of a window together; a run that is longer than the window stays as it is."""
        window = self.first // self._window
        short = self.rows < self._window
        key = np.column_stack([np.where(short, window, -1 - self.first), np.where(short, self.code, 0)])
        _, group = np.unique(key, axis=0, return_inverse=True)
        firsts = np.full(int(np.max(group)) + 1, np.iinfo(np.int64).max)
        np.minimum.at(firsts, group.ravel(), self.first)
        rank = np.argsort(np.argsort(firsts))
        self._gather(rank[group.ravel()])

    def _gather(self, group: Whole) -> None:
        """Put runs of one group together; groups are numbered in order of their first rows."""
        order = np.argsort(group, kind="stable")
        begin = np.flatnonzero(np.append(True, np.diff(group[order]) != 0))
        last = np.append(begin[1:], len(order)) - 1
        self.rows = np.add.reduceat(self.rows[order], begin)
        self.first, self.code = self.first[order[begin]], self.code[order[begin]]
        self.lines = np.array([self.lines[0, order[begin]], self.lines[1, order[last]]])
        self.times = np.array([self.times[0, order[begin]], self.times[1, order[last]]])
