"""A log: a logger's file or a hand sheet, read into SI units."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from pathlib import Path
from types import MappingProxyType
from typing import TypeVar

import numpy as np
from numpy.typing import NDArray

from fieldfit.errors import InputError
from fieldfit.field.channel_values import flow_of, flow_step, pressure_steps, pressures_of
from fieldfit.field.channels import Channels
from fieldfit.field.clock import Clock, count_from_start, read_clock, repeated_or_backwards
from fieldfit.field.log import Log
from fieldfit.field.log_form import Columns, log_form, say_form
from fieldfit.field.log_headings import Column, Headings, Wanted, find_any_headings, find_headings
from fieldfit.field.log_rows import Rows, read_rows
from fieldfit.field.log_source import LogSource, log_source
from fieldfit.field.resolution import written_step
from fieldfit.field.screens import CLOCK, MISSING
from fieldfit.field.section import Section
from fieldfit.field.units import shown

LONGEST_SHEET = 500
"""Rows of a hand sheet; more of them without a clock are a logger's file that lacks one."""
Kind = TypeVar("Kind", bound=np.generic)


def read_log(path: str | Path, section: Section) -> Log:
    """Read a log of a test section into SI units.

    Understood are commas, semicolons or tabs between fields; UTF-8, or UTF-16 with its mark; lines above the headings;
    units in the headings, which the section file overrules; ISO times, or none for a hand sheet with one row per flow;
    decimal commas where fields are not parted by commas; the usual marks for a missing value; a row of averages at the
    end. What was assumed is kept with the log. A temperature may be missing here and there, other values make their
    row unusable.

    Parameters
    ----------
    path : str or Path
        The file.
    section : Section
        Names the columns.

    Returns
    -------
    Log
        N rows in the file's order, none judged but for missing values and the clock.

    Raises
    ------
    InputError
        With file, line and column, what was seen, and what to do.
    """
    return _log(_read(Path(path), section, find_headings), section)


def read_channels(path: str | Path, section: Section) -> Channels:
    """Read a file that holds some of a section's columns, one or more, such as the file of a single logger.

    Parameters
    ----------
    path : str or Path
        The file, in any form that `read_log` understands.
    section : Section
        Names the columns.

    Returns
    -------
    Channels
        N rows in the file's order. A row's reason counts the columns of this file only.

    Raises
    ------
    InputError
        With file, line and column, what was seen, and what to do.
    """
    return _read(Path(path), section, find_any_headings)


def _read(path: Path, section: Section, find: Callable[[Sequence[str], Sequence[Wanted], str], Headings]) -> Channels:
    """Read the columns that the headings of a file name."""
    source = log_source(path)
    said: list[str] = []
    form = log_form(source, section, find, said)
    columns, headings = form.columns, form.rows.headings
    rows, decimal = read_rows(source, form.rows, said)
    say_form(headings, decimal, said)
    if rows.line.size == 0:
        raise InputError(
            "no rows stand below the headings", "Export the log again.", f"{source.path.name}:{headings.line}"
        )
    clock = _clock(rows, columns, source.path.name, said)
    return _channels(source, rows, columns, clock, said)


def _clock(rows: Rows, columns: Columns, file: str, said: list[str]) -> Clock:
    """Return the rows' clock; a sheet's rows are numbered."""
    time, count = columns.time, rows.line.size
    if time is None:
        if count > LONGEST_SHEET:
            advice = "Name the heading of the clock 'time'. A hand sheet without one has a row for each flow."
            raise InputError(f"{count} rows have no clock", advice, file)
        said.append("The log has no clock: each row was taken as one flow of a hand sheet.")
        return Clock(start=None, time_s=np.arange(1.0, count + 1.0))
    if time.unit is not None:
        return count_from_start(rows.numbers[time.position], time.unit.factor)
    dates = None if time.date_position is None else rows.texts[time.date_position]
    return read_clock(rows.texts[time.position], dates, rows.line, (file, time.heading), said)


def _channels(source: LogSource, rows: Rows, columns: Columns, clock: Clock, said: list[str]) -> Channels:
    """Put what was read together in SI units."""
    file = source.path.name
    values, steps = {}, {}
    for name, column in columns.instruments.items():
        raw = rows.numbers[column.position]
        if np.all(np.isnan(raw)):
            where = f"{file}, column '{shown(column.heading)}'"
            raise InputError("no row has a value", "Check that the section file names the right column.", where)
        values[name] = _frozen(raw * column.unit.factor)
        steps[name] = written_step(raw) * column.unit.factor
    missing = np.any([np.isnan(column) for column in (clock.time_s, *values.values())], axis=0)
    reason = np.zeros(rows.line.size, dtype=f"<U{max(len(MISSING), len(CLOCK))}")
    reason[repeated_or_backwards(clock.time_s)] = CLOCK
    reason[missing] = MISSING
    return Channels(
        file=file,
        sha256=source.sha256,
        kind="sheet" if columns.time is None else "logger",
        line=_frozen(rows.line),
        start=clock.start,
        time_s=_frozen(clock.time_s),
        values=MappingProxyType(values),
        steps=MappingProxyType(steps),
        temperature_degc=_temperature(rows, columns.temperature, said),
        reason=_frozen(reason),
        assumed=tuple(dict.fromkeys(said)),
    )


def _log(channels: Channels, section: Section) -> Log:
    """Return the channels of a file that holds all of a section's columns as a log."""
    return Log(
        file=channels.file,
        sha256=channels.sha256,
        kind=channels.kind,
        line=channels.line,
        start=channels.start,
        time_s=channels.time_s,
        flow_m3_s=flow_of(section, channels.values),
        pressure_pa=_frozen(pressures_of(section, channels.values, channels.temperature_degc)),
        temperature_degc=channels.temperature_degc,
        flow_step_m3_s=flow_step(section, channels.values, channels.steps),
        pressure_step_pa=_frozen(pressure_steps(section, channels.steps)),
        reason=channels.reason,
        assumed=channels.assumed,
    )


def _temperature(rows: Rows, column: Column | None, said: list[str]) -> NDArray[np.float64] | None:
    """Return the liquid's temperature [°C], None where no row has one."""
    if column is None:
        return None
    values = rows.numbers[column.position] * column.unit.factor + column.unit.offset
    absent = int(np.count_nonzero(np.isnan(values)))
    if absent == values.size:
        said.append(f"The column '{shown(column.heading)}' is empty and was not used.")
        return None
    if absent:
        said.append(f"The temperature is missing in {absent} of {values.size} rows; the others stand for them.")
    return _frozen(values)


def _frozen(values: NDArray[Kind]) -> NDArray[Kind]:
    """Return an array that cannot be written to."""
    values.setflags(write=False)
    return values
