"""One log from the files of several loggers, each with some of the columns and a clock of its own."""

from __future__ import annotations

import datetime as dt
import hashlib
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from typing import TypeVar

import numpy as np
from numpy.typing import NDArray

from fieldfit.errors import InputError
from fieldfit.field.barometer import gauge_values
from fieldfit.field.channel_values import flow_of, flow_step, pressure_steps, pressures_of
from fieldfit.field.channels import Channels
from fieldfit.field.clock_words import say_clock
from fieldfit.field.common_clock import LoggerPart, settle_clocks
from fieldfit.field.log import Log
from fieldfit.field.log_file import read_channels
from fieldfit.field.log_headings import wanted_columns
from fieldfit.field.logger_clock import LoggerClock
from fieldfit.field.screens import MISSING, UNPAIRED
from fieldfit.field.section import Section
from fieldfit.field.signals import Clocks
from fieldfit.field.track import GAP
from fieldfit.field.units import shown

Array = NDArray[np.float64]
Mask = NDArray[np.bool_]
Kind = TypeVar("Kind", bound=np.generic)

FASTER = 1.5
"""Times as many readings from which a channel is averaged onto the slower one's rows instead of read off a line."""
SAME_MOMENT = 0.01
"""Share of the sampling interval within which two readings are of one moment."""


@dataclass(frozen=True, slots=True, kw_only=True)
class _Rows:
    """The rows that the slowest logger gives the joined log."""

    part: LoggerPart
    place: int
    time_s: Array
    """(N,) reference times [s]."""


def read_joined_log(paths: Sequence[str | Path], section: Section) -> Log:
    """Read the files of several loggers as one log, on one clock.

    How far the clocks are apart is taken from the section file's `[[logger]]` tables, or found from the readings. The
    rows are those of the slowest logger: a faster channel is averaged over each row's share of time, one of like speed
    is read off the line between its two nearest readings, and no row is made that no logger wrote. A row at which
    another logger has no reading is set aside with that reason.

    Parameters
    ----------
    paths : sequence of path
        One or more files.
    section : Section
        Names the columns and knows the loggers.

    Returns
    -------
    Log
        N rows; `clocks` says what was found of each logger.

    Raises
    ------
    InputError
        When a column is missing or stands in two files, a file has no clock, or clocks cannot be brought together.
    """
    files = [read_channels(path, section) for path in paths]
    _check_files(files, section)
    start, begins = _starts(files)
    parts = _parts(files, begins, section)
    clocks, found = settle_clocks(parts, section, dated=start is not None)
    rows = _rows(parts, clocks)
    said = [sentence for one in files for sentence in one.assumed]
    said += [say_clock(one, found) for one in found if one.how != "reference"]
    return _joined(files, parts, (rows, clocks), (section, start, said, found))


def _check_files(files: list[Channels], section: Section) -> None:
    """Refuse files without a clock, columns that stand twice and columns that stand nowhere."""
    for one in files:
        if one.kind == "sheet":
            advice = "Loggers' files are laid over one another by their clocks: name its heading 'time'."
            raise InputError("the file has no clock", advice, one.file)
    for wanted in wanted_columns(section):
        holders = [one.file for one in files if wanted.column in one.values]
        if len(holders) > 1:
            seen = f"the column '{shown(wanted.column)}' stands in {' and in '.join(holders)}"
            raise InputError(seen, "Leave one of them out, or give each logger's column its own heading.")
        if not holders:
            listed = ", ".join(one.file for one in files)
            advice = "Name the file of the logger that has it too, or the right heading in the section file."
            raise InputError(f"none of the files has the column '{shown(wanted.column)}'", advice, listed)


def _starts(files: list[Channels]) -> tuple[dt.datetime | None, list[float]]:
    """Return the earliest clock time, and how long after it each file's seconds begin [s]."""
    known = [one.start for one in files if one.start is not None]
    if len(known) < len(files):
        return None, [0.0] * len(files)
    first = min(known)
    return first, [(start - first).total_seconds() for start in known]


def _parts(files: list[Channels], begins: list[float], section: Section) -> list[LoggerPart]:
    """Return the loggers: one per file, or several where the section file says so."""
    parts = []
    for one, begin in zip(files, begins, strict=True):
        left = list(one.values)
        time = one.time_s + begin
        tables = [table for table in section.loggers if table.file in (None, one.file)]
        for table in sorted(tables, key=lambda table: not table.columns):
            own = [column for column in left if not table.columns or column in table.columns]
            if own:
                parts.append(LoggerPart(channels=one, columns=tuple(own), time_s=time, stated=table))
                left = [column for column in left if column not in own]
        if left:
            parts.append(LoggerPart(channels=one, columns=tuple(left), time_s=time, stated=None))
    return parts


def _rows(parts: list[LoggerPart], clocks: Clocks) -> _Rows:
    """Return the rows of the slowest logger; of the first of several."""
    intervals = [one.interval_s for one in parts]
    place = next(k for k, one in enumerate(intervals) if one >= max(intervals) / 1.05)
    return _Rows(part=parts[place], place=place, time_s=clocks.reference(place, parts[place].time_s))


def _joined(
    files: list[Channels],
    parts: list[LoggerPart],
    on: tuple[_Rows, Clocks],
    known: tuple[Section, dt.datetime | None, list[str], tuple[LoggerClock, ...]],
) -> Log:
    """Put the log together on the slowest logger's rows."""
    (rows, clocks), (section, start, said, found) = on, known
    base = rows.part.channels
    values: dict[str, Array] = {}
    covered = np.ones(len(rows.time_s), dtype=np.bool_)
    for place, one in enumerate(parts):
        for column in one.columns:
            if place == rows.place:
                values[column] = one.channels.values[column]
                continue
            own = clocks.own(place, rows.time_s)
            values[column], inside = _onto(own, one, one.channels.values[column], rows.part.interval_s)
            covered &= inside
    said += [_say_rows(rows, parts, int(np.count_nonzero(~covered)))] if len(parts) > 1 else []
    present = np.all([np.isfinite(one) for one in values.values()], axis=0)
    steps = {column: step for one in files for column, step in one.steps.items()}
    temperature = _slowly(parts, rows, clocks, lambda one: one.temperature_degc)
    absolute = frozenset[str]().union(*(one.absolute for one in files))
    air = _slowly(parts, rows, clocks, lambda one: one.barometer_pa) if absolute else None
    values = gauge_values(values, (absolute, air), section, base.file, said)
    first = float(rows.time_s[np.flatnonzero(np.isfinite(rows.time_s))[0]])
    widest = max(len(MISSING), len(UNPAIRED))
    reason = base.reason.astype(f"<U{max(widest, base.reason.dtype.itemsize // 4)}")
    reason[(reason == MISSING) & np.isfinite(rows.time_s) & present] = ""
    reason[(reason == "") & ~covered] = UNPAIRED
    reason[(reason == "") & ~present] = MISSING
    return Log(
        file=" + ".join(dict.fromkeys(one.file for one in files)),
        sha256=files[0].sha256 if len(files) == 1 else _together(files),
        kind="logger",
        line=base.line,
        start=None if start is None else start + dt.timedelta(seconds=first),
        time_s=_frozen(rows.time_s - first),
        flow_m3_s=_frozen(flow_of(section, values)),
        pressure_pa=_frozen(pressures_of(section, values, temperature)),
        temperature_degc=None if temperature is None else _frozen(temperature),
        flow_step_m3_s=flow_step(section, values, steps),
        pressure_step_pa=_frozen(pressure_steps(section, steps)),
        reason=_frozen(reason),
        assumed=tuple(dict.fromkeys(said)),
        clocks=tuple(replace(one, rows=len(part.time_s)) for one, part in zip(found, parts, strict=True)),
    )


def _together(files: list[Channels]) -> str:
    """Return one hash for several files: that of their hashes in order."""
    return hashlib.sha256("".join(one.sha256 for one in files).encode()).hexdigest()


def _onto(own_s: Array, part: LoggerPart, value: Array, interval_s: float) -> tuple[Array, Mask]:
    """Return a channel at the rows' moments, NaN where it has a gap, and which rows it reaches at all."""
    known = np.flatnonzero(np.isfinite(part.time_s) & np.isfinite(value) & part.in_order)
    time, reading = part.time_s[known], value[known]
    room = part.interval_s
    asked = np.nan_to_num(own_s, nan=-np.inf)
    inside = ~np.isfinite(own_s) | ((asked >= time[0] - 0.5 * room) & (asked <= time[-1] + 0.5 * room))
    if interval_s >= FASTER * part.interval_s:
        found = _averaged(asked, time, reading, interval_s)
    else:
        found = _between(asked, time, reading, room)
    return np.where(inside & np.isfinite(own_s), found, np.nan), inside


def _averaged(asked: Array, time: Array, reading: Array, interval_s: float) -> Array:
    """Return the mean of all readings within half a row of each moment; NaN without any."""
    total = np.append(0.0, np.cumsum(reading - reading[0]))
    first = np.searchsorted(time, asked - interval_s / 2.0)
    stop = np.searchsorted(time, asked + interval_s / 2.0)
    count = stop - first
    return np.where(count > 0, reading[0] + (total[stop] - total[first]) / np.maximum(count, 1), np.nan)


def _between(asked: Array, time: Array, reading: Array, room: float) -> Array:
    """Return readings of the moments themselves, else from the line between neighbours; NaN across a gap."""
    after = np.clip(np.searchsorted(time, asked), 1, len(time) - 1)
    nearest = np.where(np.abs(time[after] - asked) < np.abs(time[after - 1] - asked), after, after - 1)
    gap = time[after] - time[after - 1] > GAP * room
    line = np.interp(asked, time, reading)
    return np.where(np.abs(time[nearest] - asked) <= SAME_MOMENT * room, reading[nearest], np.where(gap, np.nan, line))


def _slowly(
    parts: list[LoggerPart], rows: _Rows, clocks: Clocks, of: Callable[[Channels], Array | None]
) -> Array | None:
    """Return what changes slowly at the rows, from the first logger that has it: temperature or the air's pressure."""
    for place, one in enumerate(parts):
        values = of(one.channels)
        if values is None:
            continue
        if one.channels is rows.part.channels:
            return np.array(values)
        known = np.isfinite(one.time_s) & np.isfinite(values) & one.in_order
        own = clocks.own(place, rows.time_s)
        # Water and weather change slowly: beyond its ends an instrument's last word stands.
        return np.asarray(np.interp(np.nan_to_num(own), one.time_s[known], values[known]))
    return None


def _say_rows(rows: _Rows, parts: list[LoggerPart], unpaired: int) -> str:
    """Say whose rows the log has and how the others came onto them."""
    base = rows.part
    faster = [one.channels.file for one in parts if base.interval_s >= FASTER * one.interval_s]
    told = (
        f"All channels were put on the {len(rows.time_s)} rows of {base.channels.file}, one every {base.interval_s:g} s"
    )
    told += f"; readings of {' and '.join(dict.fromkeys(faster))} were averaged onto them" if faster else ""
    return told + (f"; at {unpaired} of them another logger had not begun or had ended." if unpaired else ".")


def _frozen(values: NDArray[Kind]) -> NDArray[Kind]:
    """Return an array that cannot be written to."""
    values.setflags(write=False)
    return values
