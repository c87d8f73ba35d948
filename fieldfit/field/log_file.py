"""A log: a logger's file or a hand sheet, read into SI units."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from pathlib import Path
from types import MappingProxyType

from fieldfit.errors import InputError
from fieldfit.field.barometer import gauge_values
from fieldfit.field.channel_values import flow_of, flow_step, pressure_steps, pressures_of
from fieldfit.field.channels import Channels
from fieldfit.field.heading_parts import Wanted
from fieldfit.field.log import Log
from fieldfit.field.log_clock import log_clock
from fieldfit.field.log_form import LONGEST_PREAMBLE, log_form, say_form
from fieldfit.field.log_headings import Headings, find_any_headings, find_headings, wanted_columns
from fieldfit.field.log_rows import read_rows
from fieldfit.field.log_source import LogSource, log_source
from fieldfit.field.section import Section
from fieldfit.field.si_values import frozen, row_reasons, si_values, without_last
from fieldfit.field.workbook import is_workbook, workbook_source

Finder = Callable[[Sequence[str], Sequence[Wanted], str], Headings]


def read_log(path: str | Path, section: Section) -> Log:
    """Read a log of a test section into SI units.

    Understood are tabs, semicolons, upright strokes or commas between fields; UTF-8, UTF-16 and Windows-1252; decimal
    commas and thousands separators; lines above the headings, a row of units below them, comments, averages and notes
    among the rows; units in the headings, which the section file overrules; dates and times in every usual writing, or
    none for a hand sheet with one row per flow; totalisers, pulses, raw signals, velocities and absolute pressures; the
    usual marks for a missing value; and one sheet of a workbook. What was assumed is kept with the log; what changes
    the answer and can be read in two ways is an error that names the key to settle it. A temperature may be missing
    here and there, other values make their row unusable.

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


def _read(path: Path, section: Section, find: Finder) -> Channels:
    """Read the columns that the headings of a file name."""
    said: list[str] = []
    source = log_text(path, section, find, said)
    form = log_form(source, section, find, said)
    columns, headings = form.columns, form.rows.headings
    rows, decimal = read_rows(source, form.rows, said)
    say_form(headings, decimal, said)
    if rows.line.size == 0:
        raise InputError("no rows stand below the headings", "Export the log again.", f"{path.name}:{headings.line}")
    rows = without_last(rows) if source.cut_off else rows
    clock, timed = log_clock(rows, columns.time, form.above, (path, section), said)
    found = si_values(rows, columns, clock.time_s if timed else None, (path.name, section), said)
    return Channels(
        file=path.name,
        sha256=source.sha256,
        kind="logger" if timed else "sheet",
        line=frozen(rows.line),
        start=clock.start,
        time_s=frozen(clock.time_s),
        values=MappingProxyType(found.values),
        steps=MappingProxyType(found.steps),
        temperature_degc=found.temperature_degc,
        barometer_pa=found.barometer_pa,
        absolute=frozenset(name for name, column in columns.instruments.items() if column.unit.absolute),
        reason=row_reasons(clock.time_s, found, source.cut_off),
        assumed=tuple(dict.fromkeys(said)),
    )


def log_text(path: Path, section: Section, find: Finder, said: list[str]) -> LogSource:
    """Return a file as a log's text, whether it is text itself or a workbook.

    Parameters
    ----------
    path : Path
        The file.
    section : Section
        Names the columns and perhaps the sheet.
    find : callable
        `find_headings` for all columns, `find_any_headings` for some.
    said : list of str
        Sentences on what was assumed are added here.

    Raises
    ------
    InputError
        When it cannot be read.
    """
    if not is_workbook(path):
        source = log_source(path)
        said += source.remarks()
        return source

    def fits(lines: list[str]) -> bool:
        """Return whether a sheet has the wanted headings."""
        try:
            return bool(find(lines[:LONGEST_PREAMBLE], wanted_columns(section), path.name).found)
        except InputError:
            return False

    return workbook_source(path, section.log_hints.sheet, fits, said)


def _log(channels: Channels, section: Section) -> Log:
    """Return the channels of a file that holds all of a section's columns as a log."""
    said: list[str] = []
    values = gauge_values(channels.values, (channels.absolute, channels.barometer_pa), section, channels.file, said)
    return Log(
        file=channels.file,
        sha256=channels.sha256,
        kind=channels.kind,
        line=channels.line,
        start=channels.start,
        time_s=channels.time_s,
        flow_m3_s=flow_of(section, values),
        pressure_pa=frozen(pressures_of(section, values, channels.temperature_degc)),
        temperature_degc=channels.temperature_degc,
        flow_step_m3_s=flow_step(section, values, channels.steps),
        pressure_step_pa=frozen(pressure_steps(section, channels.steps)),
        reason=channels.reason,
        assumed=tuple(dict.fromkeys((*channels.assumed, *said))),
    )
