"""The clock of a long log, from block to block."""

from __future__ import annotations

import datetime as dt
from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from fieldfit.errors import InputError
from fieldfit.field.clock_texts import ADVICE, ClockPlace, read_stamps
from fieldfit.field.summer_time import straightened
from fieldfit.field.time_column import TimeColumn
from fieldfit.field.units import shown

if TYPE_CHECKING:
    from pandas import Series

Array = NDArray[np.float64]
Stamps = NDArray[np.datetime64]

FEW = 100
"""Rows before a block that show what is usual from row to row."""
HOUR_S = 3600.0


class LongClock:
    """Turns the times of one block after the other into seconds since the log's first row.

    Parameters
    ----------
    column : TimeColumn or None
        The clock's column.
    file : str
        Name of the log.
    said : list of str
        Sentences on what was assumed are added here.
    """

    def __init__(self, column: TimeColumn | None, file: str, said: list[str]) -> None:
        self._column, self._file, self._said = column, file, said
        self.begun = False
        self.start: dt.datetime | None = None
        self._origin: np.datetime64 | None = None
        self._zero: float | None = None
        self._universal: bool | None = None
        self._before = np.empty(0, dtype="datetime64[us]")
        self._shift = np.timedelta64(0, "us")

    def begin(self, start: dt.datetime | None) -> None:
        """Take note of when the log began."""
        self.begun, self.start = True, start

    def of_numbers(self, numbers: Mapping[int, Array]) -> Array:
        """Return the time of rows with a clock that counts from the start [s]."""
        if self._column is None or self._column.unit is None:
            raise ValueError("the clock does not count from the start")
        values = numbers[self._column.position]
        known = values[np.isfinite(values)]
        if self._zero is None and known.size:
            self._zero = float(known[0])
        return np.asarray((values - (self._zero or 0.0)) * self._column.unit.factor)

    def of_texts(self, times: Series[Any], line: NDArray[np.int64], said: list[str]) -> Array:
        """Return the time of rows from their texts [s]; `line` is theirs in the block.

        Raises
        ------
        InputError
            At a time that cannot be read, or when only some have a zone.
        """
        if not times.notna().any():
            return np.full(len(times), np.nan)
        heading = self._column.heading if self._column else ""
        stamps, universal = read_stamps(times, ClockPlace(file=self._file, heading=heading), said)
        unread = np.flatnonzero(np.isnat(stamps) & times.notna().to_numpy())
        if unread.size:
            row = int(unread[0])
            seen = f"'{shown(str(times.iloc[row]))}' is not a date and time that can be read only one way"
            raise InputError(seen, ADVICE, f"{self._file}:{line[row]}, column '{shown(heading)}'")
        return self.of_stamps(stamps.astype("datetime64[us]"), universal)

    def of_stamps(self, stamps: Stamps, universal: bool) -> Array:
        """Return the time of rows with a clock of dates [s]; local times without the jumps of summer time.

        Raises
        ------
        InputError
            When only some blocks have a zone.
        """
        if self._universal not in (None, universal):
            heading = self._column.heading if self._column else ""
            where = f"{self._file}, column '{shown(heading)}'"
            raise InputError("only some times have a time zone", "Write all times in one zone.", where)
        self._universal = universal
        if self._origin is None:
            self._origin = stamps[~np.isnat(stamps)][0]
        straight = stamps if universal else self._straight(stamps)
        seconds: Array = (straight - self._origin).astype(np.int64) / 1e6
        missing = np.isnat(straight)
        return np.where(missing, np.nan, seconds) if missing.any() else seconds

    def _straight(self, stamps: Stamps) -> Stamps:
        """Return local times with all jumps so far taken out, those within these rows too."""
        there = stamps[~np.isnat(stamps)]
        before, self._before = self._before, np.append(self._before, there[-FEW:])[-FEW:]
        seen = np.append(before[-1:], there)
        steps = np.diff(seen).astype(np.int64)
        leap = max(int(steps.max()), -int(steps.min())) / 1e6 if steps.size else 0.0
        if leap > 0.5 * HOUR_S:
            straight = straightened(np.append(before, stamps), self._said)[len(before) :]
            shift = self._shift
            if there.size:
                last = int(np.flatnonzero(~np.isnat(stamps))[-1])
                self._shift = self._shift + (straight[last] - stamps[last])
            return straight + shift
        return stamps + self._shift if self._shift else stamps
