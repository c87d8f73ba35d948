"""A log: a logger's file or a hand sheet, read into SI units."""

from __future__ import annotations

import itertools
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from types import MappingProxyType
from typing import TypeVar

import numpy as np
from numpy.typing import NDArray

from fieldfit.errors import InputError
from fieldfit.field.channels import Channels
from fieldfit.field.clock import Clock, count_from_start, read_clock, repeated_or_backwards
from fieldfit.field.log import Log
from fieldfit.field.log_headings import (
    Column,
    Headings,
    Wanted,
    find_any_headings,
    find_headings,
    find_temperature,
    resolve_unit,
    wanted_columns,
)
from fieldfit.field.log_rows import Form, Rows, decimal_mark, read_rows, sample_rows, too_many_fields
from fieldfit.field.log_source import LogSource, log_source
from fieldfit.field.resolution import written_step
from fieldfit.field.screens import CLOCK, MISSING
from fieldfit.field.section import Section
from fieldfit.field.time_column import TimeColumn, find_time
from fieldfit.field.units import shown

LONGEST_PREAMBLE = 200
"""Lines that may stand above the headings."""
LONGEST_SHEET = 500
"""Rows of a hand sheet; more of them without a clock are a logger's file that lacks one."""
TAB = "\t"
_SAMPLE_ROWS = 50
_LONGEST_LINE = 20_000
Kind = TypeVar("Kind", bound=np.generic)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Columns:
    """The columns of a log that are used."""

    instruments: Mapping[str, Column]
    """Each instrument's, by its name in the section file."""
    temperature: Column | None
    time: TimeColumn | None

    @property
    def of_numbers(self) -> tuple[int, ...]:
        """Places of the columns that hold numbers."""
        others = [self.temperature] if self.temperature else []
        counted = [self.time.position] if self.time and self.time.unit else []
        return (*(column.position for column in (*self.instruments.values(), *others)), *counted)


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
    try:
        lines = _first_lines(source)
    except UnicodeError:
        raise source.undecodable() from None
    headings = find(lines[:LONGEST_PREAMBLE], wanted_columns(section), source.path.name)
    columns = _columns(headings, lines, said, source.path.name)
    form = _form(headings, columns, lines, source.path.name)
    rows, decimal = read_rows(source, form, said)
    _say_form(headings, decimal, said)
    if rows.line.size == 0:
        raise InputError(
            "no rows stand below the headings", "Export the log again.", f"{source.path.name}:{headings.line}"
        )
    clock = _clock(rows, columns, source.path.name, said)
    return _channels(source, rows, columns, clock, said)


def _first_lines(source: LogSource) -> list[str]:
    """Return the beginning of the file, enough to find the headings and see some rows."""
    with source.open() as file:
        wanted = LONGEST_PREAMBLE + _SAMPLE_ROWS
        lines = list(itertools.islice(iter(lambda: file.readline(_LONGEST_LINE), ""), wanted))
    for number, line in enumerate(lines, start=1):
        if len(line) >= _LONGEST_LINE:
            seen, advice = f"the line has more than {_LONGEST_LINE} characters", "Export one row of readings in a line."
            raise InputError(seen, advice, f"{source.path.name}:{number}")
    return lines


def _columns(headings: Headings, lines: Sequence[str], said: list[str], file: str) -> _Columns:
    """Return the columns that are used, with their units."""
    where = f"{file}:{headings.line}"
    below = sample_rows(lines, headings)
    instruments = {
        wanted.column: Column(
            heading=headings.texts[place],
            position=place,
            unit=resolve_unit(wanted, headings.texts[place], its_unit, said, where),
        )
        for wanted, (place, its_unit) in zip(headings.wanted, headings.found, strict=True)
    }
    return _Columns(
        instruments=instruments,
        temperature=find_temperature(headings, said, where),
        time=find_time(headings, below[0][1] if below else (), said, where),
    )


def _form(headings: Headings, columns: _Columns, lines: Sequence[str], file: str) -> Form:
    """Return how the rows are written, from a look at the first ones."""
    names = len(headings.texts)
    samples = sample_rows(lines, headings)
    for number, row in samples:
        if any(row[names:]):
            raise too_many_fields(len(row), names, headings.separator, f"{file}:{number}")
        for place in columns.of_numbers:
            # A column of nothing but these would pass for ones and zeros.
            if place < len(row) and row[place].casefold() in {"true", "false"}:
                where = f"{file}:{number}, column '{shown(headings.texts[place])}'"
                raise InputError(f"'{row[place]}' is not a number", "Name the right column in the section file.", where)
    widest = max((len(row) for _, row in samples), default=names)
    if widest <= max(column.position for column in columns.instruments.values()):
        advice = "Headings that hold a comma must stand in quotation marks."
        raise InputError(f"{widest} fields stand under {names} headings", advice, f"{file}:{samples[0][0]}")
    cells = [row[place] for _, row in samples for place in columns.of_numbers if place < len(row)]
    return Form(
        headings=headings,
        decimal=decimal_mark(cells, headings.separator, file),
        width=max(names, widest),
        numbers=columns.of_numbers,
        label=columns.time.position if columns.time else 0,
    )


def _say_form(headings: Headings, decimal: str, said: list[str]) -> None:
    """Say how the file was read, where that is not plain."""
    if headings.line > 1:
        said.append(f"The headings were found in line {headings.line}; what stands above them was not read.")
    if headings.separator != ",":
        said.append(f"Fields are parted by {'tabs' if headings.separator == TAB else 'semicolons'}.")
    if decimal == ",":
        said.append("Commas in numbers are decimal marks.")


def _clock(rows: Rows, columns: _Columns, file: str, said: list[str]) -> Clock:
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


def _channels(source: LogSource, rows: Rows, columns: _Columns, clock: Clock, said: list[str]) -> Channels:
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
    flow, *pressures = (channels.values[wanted.column] for wanted in wanted_columns(section))
    flow_step, *steps = (channels.steps[wanted.column] for wanted in wanted_columns(section))
    return Log(
        file=channels.file,
        sha256=channels.sha256,
        kind=channels.kind,
        line=channels.line,
        start=channels.start,
        time_s=channels.time_s,
        flow_m3_s=flow,
        pressure_pa=_frozen(np.array(pressures)),
        temperature_degc=channels.temperature_degc,
        flow_step_m3_s=flow_step,
        pressure_step_pa=_frozen(np.array(steps)),
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
