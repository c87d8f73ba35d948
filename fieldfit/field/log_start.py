"""When a log began and how often it was written, from the lines above its headings."""

from __future__ import annotations

import datetime as dt
import re
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from fieldfit.errors import InputError
from fieldfit.field.clock_texts import ClockPlace, is_day_only, is_time_of_day, read_stamps
from fieldfit.field.date_forms import Known, is_stamp
from fieldfit.field.units import is_unit, unit

_LABEL = r"(?i)^[\s\"'#/;*]*([a-z][a-z /&._-]{1,40}?)\s*(?:[:=;,|\t]+|\s{2,})\s*(.+?)[\s\",;|]*$"
_START = re.compile(r"(?i)\b(?:start|started|begin|began|first|launch)")
_DATE = re.compile(r"(?i)\b(?:date|day)\b")
_INTERVAL = re.compile(r"(?i)\b(?:interval|period|rate|sampling|every|step|frequency)\b")
_NOT_OF_ROWS = re.compile(r"(?i)\b(?:flow|pipe|pump|print|export|created|report|calibrat\w*|serial|average\w*)\b")
_SPAN = re.compile(r"([0-9]+(?:[.,][0-9]+)?)\s*([A-Za-z]+)\.?(?:\s*/\s*sample)?")
_HERTZ = re.compile(r"(?i)([0-9]+(?:[.,][0-9]+)?)\s*(?:hz|samples?\s*(?:/|per)\s*s(?:ec(?:ond)?)?)")
_CLOCKED = re.compile(r"([0-9]{1,2}):([0-9]{2}):([0-9]{2}(?:\.[0-9]+)?)")


@dataclass(frozen=True, slots=True, kw_only=True)
class LogStart:
    """What the lines above the headings say of the clock."""

    start: dt.datetime | None = None
    """Time of the first row."""
    day: dt.date | None = None
    """Day of the first row, where its time is not said."""
    interval_s: float | None = None
    """Time from row to row [s]."""


def log_start(lines: Sequence[str], known: Known, file: str, said: list[str]) -> LogStart:
    """Return what the lines above the headings say of the clock.

    Parameters
    ----------
    lines : sequence of str
        The lines, such as "Start time: 12.05.2026 08:00" and "Interval: 10 s".
    known : Known
        What settles the order of day and month.
    file : str
        Name of the log, for errors.
    said : list of str
        Sentences on the order of a date are added here.

    Examples
    --------
    >>> log_start(["Start: 2026-05-12 08:00:00", "Logging interval: 10 s"], Known(), "log.csv", [])
    LogStart(start=datetime.datetime(2026, 5, 12, 8, 0), day=datetime.date(2026, 5, 12), interval_s=10.0)
    """
    stamp = day = time = interval = None
    for line in lines:
        label, text = _labelled(line)
        if not text or _NOT_OF_ROWS.search(label):
            continue
        if interval is None and _INTERVAL.search(label):
            interval = _seconds(text)
        begins = _START.search(label) is not None
        if begins and is_stamp(text):
            stamp = stamp or text
        elif begins and is_time_of_day(text):
            time = time or text
        elif (begins or _DATE.search(label)) and is_day_only(text):
            day = day or text
    stamp = stamp or (f"{day} {time}" if day and time else None)
    place = ClockPlace(file=file, heading="start", known=known)
    start = _read(stamp, place, said)
    only_day = _read(day, place, said if start is None else [])
    begun = start or only_day
    return LogStart(start=start, day=begun.date() if begun else None, interval_s=interval)


def _labelled(line: str) -> tuple[str, str]:
    """Return label and text of a line."""
    found = re.match(_LABEL, line.rstrip("\r\n"))
    return (found[1], found[2]) if found else ("", "")


def _read(text: str | None, place: ClockPlace, said: list[str]) -> dt.datetime | None:
    """Return a text as a time; None where it cannot be read."""
    if text is None:
        return None
    import pandas as pd

    try:
        stamps, _ = read_stamps(pd.Series([text], dtype="str"), place, said)
    except InputError:
        return None
    return None if np.isnat(stamps[0]) else stamps[0].astype("datetime64[us]").item()


def _seconds(text: str) -> float | None:
    """Return a span of time [s]; None where it is none."""
    hertz, span, clocked = _HERTZ.fullmatch(text), _SPAN.fullmatch(text), _CLOCKED.fullmatch(text)
    if hertz and float(hertz[1].replace(",", ".")) > 0.0:
        return 1.0 / float(hertz[1].replace(",", "."))
    if clocked:
        return 3600.0 * int(clocked[1]) + 60.0 * int(clocked[2]) + float(clocked[3]) or None
    if span and is_unit(span[2], "duration"):
        return float(span[1].replace(",", ".")) * unit(span[2], "duration").factor or None
    return None
