"""The clock of a log: texts of dates and times as seconds, and rows where it stood still or ran back."""

from __future__ import annotations

import datetime as dt
import re
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from fieldfit.errors import InputError
from fieldfit.field.clock_numbers import number_stamps
from fieldfit.field.clock_texts import (
    ADVICE,
    ClockPlace,
    first_text,
    is_time_of_day,
    read_stamps,
    read_times_of_day,
    with_days,
)
from fieldfit.field.summer_time import straightened
from fieldfit.field.units import shown
from fieldfit.field.whole_minutes import spread_minutes

if TYPE_CHECKING:
    from pandas import Series


@dataclass(frozen=True, slots=True, kw_only=True)
class Clock:
    """The times of a log's rows; N rows."""

    start: dt.datetime | None
    """Time of the first row that has one; None when its day is not known."""
    time_s: NDArray[np.float64]
    """(N,) seconds since then; NaN where missing."""


def read_clock(
    times: Series[Any],
    dates: Series[Any] | None,
    line: NDArray[np.int64],
    place: ClockPlace,
    said: list[str],
) -> Clock:
    """Read the times of a log.

    ISO 8601 dates with times are understood, with or without T, fractions of a second and time zone; dates in other
    writings; times of day on their own or beside a column of dates; Unix time and the days of spreadsheets. The hour of
    a change to or from summer time is taken out.

    Parameters
    ----------
    times : Series
        (N,) texts of the time column.
    dates : Series or None
        (N,) texts of a column of dates.
    line : ndarray
        (N,) line of each row.
    place : ClockPlace
        Where the clock stands.
    said : list of str
        Sentences on what was assumed are added here.

    Raises
    ------
    InputError
        At the first time that cannot be read, when only some have a time zone, or when they may be read in two ways.
    """
    first = first_text(times)
    if first is None:
        raise InputError("no row has a time", "Check that the right column is named 'time'.", place.where)
    if dates is not None:
        times, dates_known = with_days(times, dates, said), True
        if first_text(times) is None:
            raise InputError("no row has a day with its time", "Fill in the column of dates.", place.where)
    else:
        dates_known = not is_time_of_day(first) or place.known.day is not None
    stamps, universal = _stamps(times, first, line, place, said)
    absent = np.isnat(stamps)
    unread = np.flatnonzero(absent & times.notna().to_numpy()) if absent.any() else np.array([], dtype=np.int64)
    if unread.size:
        row = int(unread[0])
        seen = f"'{shown(str(times.iloc[row]))}' is not a date and time that can be read only one way"
        order = place.known.order
        advice = f"{ADVICE} The dates are said to be {order}." if order else ADVICE
        raise InputError(seen, advice, f"{place.file}:{line[row]}, column '{shown(place.heading)}'")
    stamps = spread_minutes(stamps, said)
    if not universal and dates_known:
        stamps = straightened(stamps, said)
    if place.zone_s is not None and not universal:
        stamps = stamps - np.timedelta64(round(place.zone_s), "s")
        said.append("The zone in the heading of the clock was taken off: times are in UTC.")
    first_stamp = stamps[~np.isnat(stamps)][0]
    start = first_stamp.astype("datetime64[us]").item() if dates_known else None
    return Clock(start=start, time_s=np.asarray((stamps - first_stamp) / np.timedelta64(1, "s")))


def _stamps(
    times: Series[Any], first: str, line: NDArray[np.int64], place: ClockPlace, said: list[str]
) -> tuple[NDArray[np.datetime64], bool]:
    """Return the times as stamps, and whether they are in UTC."""
    if re.fullmatch(r"[0-9]*[.,]?[0-9]*(?:[eE]\+?[0-9]+)?", first) and first_text(times) == first:
        import pandas as pd

        numbers = pd.to_numeric(times.str.strip().str.replace(",", ".", regex=False), errors="coerce")
        values = numbers.to_numpy(dtype=np.float64)
        return number_stamps(values, (f"{place.file}:{line[0]}", place.heading), said), True
    if is_time_of_day(first) and first_text(times) == first:
        return read_times_of_day(times, place, place.known.day, said), False
    return read_stamps(times, place, said)


def count_from_start(values: NDArray[np.float64], seconds: float) -> Clock:
    """Return the clock of a column that counts time from the start.

    Parameters
    ----------
    values : ndarray
        (N,) times; NaN where missing.
    seconds : float
        Their unit [s].
    """
    known = values[np.isfinite(values)]
    first = float(known[0]) if known.size else 0.0
    return Clock(start=None, time_s=(values - first) * seconds)


def repeated_or_backwards(time_s: NDArray[np.float64]) -> NDArray[np.bool_]:
    """Return which rows are not later than every row before them.

    A single row that jumps ahead is itself to blame, not the rows after it.

    Parameters
    ----------
    time_s : ndarray
        (N,) seconds; NaN where missing, which is not judged.

    Returns
    -------
    ndarray of bool
        (N,)

    Examples
    --------
    >>> repeated_or_backwards(np.array([0.0, 1.0, 1.0, 2.0, 99.0, 3.0, 4.0])).tolist()
    [False, False, True, False, True, False, False]
    """
    wrong = np.zeros(len(time_s), dtype=np.bool_)
    known = np.flatnonzero(np.isfinite(time_s))
    times = time_s[known]
    if np.all(np.diff(times) > 0.0):
        return wrong
    before, after = np.append(-np.inf, times[:-1]), np.append(times[1:], np.inf)
    ahead = (times > after) & (before < after)
    latest = np.maximum.accumulate(np.where(ahead, -np.inf, times))
    wrong[known] = ahead | (times <= np.append(-np.inf, latest[:-1]))
    return wrong
