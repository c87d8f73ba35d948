"""The clock of a log from whatever shows it: a column, or the lines above the headings."""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path

import numpy as np

from fieldfit.errors import InputError
from fieldfit.field.clock import Clock, count_from_start, read_clock
from fieldfit.field.clock_texts import ClockPlace, first_text, is_time_of_day
from fieldfit.field.date_forms import Known
from fieldfit.field.log_rows import Rows
from fieldfit.field.log_start import LogStart, log_start
from fieldfit.field.section import Section
from fieldfit.field.time_column import TimeColumn

LONGEST_SHEET = 500
"""Rows of a hand sheet; more of them without a clock are a logger's file that lacks one."""


def log_clock(
    rows: Rows, time: TimeColumn | None, above: Sequence[str], known: tuple[Path, Section], said: list[str]
) -> tuple[Clock, bool]:
    """Return the clock of a log's rows, and whether it is a real one: a hand sheet's rows are only numbered.

    Parameters
    ----------
    rows : Rows
        The rows.
    time : TimeColumn or None
        The clock's column.
    above : sequence of str
        Lines above the headings.
    known : tuple
        The file, and the section whose log it is.
    said : list of str
        Sentences on what was assumed are added here.

    Raises
    ------
    InputError
        When a logger's file has no clock, or it cannot be read.
    """
    path, section = known
    hints = section.log_hints
    settles = Known(order=hints.dates or (time.order if time else None), day=_day_of_test(path, section))
    if time is None:
        return _without_column(rows.line.size, log_start(above, settles, path.name, said), section, path.name, said)
    if time.unit is not None:
        begun = log_start(above, settles, path.name, said)
        clock = count_from_start(rows.numbers[time.position], time.unit.factor)
        return replace(clock, start=_started(hints.start, begun.start, said)), True
    dates = None if time.date_position is None else rows.texts[time.date_position]
    times = rows.texts[time.position]
    first = first_text(times) or ""
    if dates is None and is_time_of_day(first) and settles.day is None:
        day = log_start(above, settles, path.name, said).day
        settles = replace(settles, day=day)
        if day is not None:
            said.append(f"The clock has no dates; the lines above the headings name {day}.")
    place = ClockPlace(file=path.name, heading=time.heading, known=settles, zone_s=time.zone_s)
    return read_clock(times, dates, rows.line, place, said), True


def _day_of_test(path: Path, section: Section) -> dt.date | None:
    """Return the day that the section file gives for a log."""
    days = [campaign.date for campaign in section.campaigns if campaign.log.name == path.name]
    return days[0] if days else None


def _started(stated: dt.datetime | None, above: dt.datetime | None, said: list[str]) -> dt.datetime | None:
    """Return when a log began, and say where that is from."""
    if stated is None and above is not None:
        said.append(f"The log begins at {above:%Y-%m-%d %H:%M:%S}, as the lines above the headings say.")
    return stated or above


def _without_column(count: int, begun: LogStart, section: Section, file: str, said: list[str]) -> tuple[Clock, bool]:
    """Return the clock of a log without a column for it, and whether there is one."""
    hints = section.log_hints
    interval = hints.interval_s or begun.interval_s
    if interval is not None:
        whose = "the section file says" if hints.interval_s else "the lines above the headings say"
        said.append(f"The log has no column of times; its rows were taken as {interval:g} s apart, as {whose}.")
        start = _started(hints.start, begun.start, said)
        return Clock(start=start, time_s=np.asarray(np.arange(count) * interval, dtype=np.float64)), True
    if count > LONGEST_SHEET:
        advice = (
            "Name the heading of the clock 'time', or write interval = \"10 s\" under [log] in the section file. A hand "
            "sheet without a clock has a row for each flow."
        )
        raise InputError(f"{count} rows have no clock", advice, file)
    said.append("The log has no clock: each row was taken as one flow of a hand sheet.")
    return Clock(start=None, time_s=np.arange(1.0, count + 1.0)), False
