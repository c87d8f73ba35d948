"""The clock of a log: texts of dates and times as seconds, and rows where it stood still or ran back."""

from __future__ import annotations

import datetime as dt
import re
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from fieldfit.errors import InputError
from fieldfit.field.units import shown

if TYPE_CHECKING:
    from pandas import Series

ADVICE = "Write year, month, day and time like 2026-05-12T08:00:00."

_ZONE = re.compile(r".*(?:[zZ]|[0-9][+-][0-9]{2}:?[0-9]{2})")
_TIME_OF_DAY = re.compile(r"[0-9]{1,2}:[0-9]{2}(?::[0-9]{2}(?:\.[0-9]+)?)?")
_NO_DAY = "2000-01-01"


@dataclass(frozen=True, slots=True, kw_only=True)
class Clock:
    """The times of a log's rows; N rows."""

    start: dt.datetime | None
    """Time of the first row that has one; None when its day is not known."""
    time_s: NDArray[np.float64]
    """(N,) seconds since then; NaN where missing."""


def read_clock(
    times: Series[Any], dates: Series[Any] | None, line: NDArray[np.int64], place: tuple[str, str], said: list[str]
) -> Clock:
    """Read the times of a log.

    ISO 8601 dates with times are understood, with or without T, fractions of a second and time zone; and times of day
    on their own or beside a column of ISO dates.

    Parameters
    ----------
    times : Series
        (N,) texts of the time column.
    dates : Series or None
        (N,) texts of a column of dates.
    line : ndarray
        (N,) line of each row.
    place : tuple of str
        File and heading, for errors.
    said : list of str
        Sentences on what was assumed are added here.

    Raises
    ------
    InputError
        At the first time that cannot be read, or when only some have a time zone.
    """
    file, heading = place
    where = f"{file}, column '{shown(heading)}'"
    given = times.dropna()
    if given.empty:
        raise InputError("no row has a time", "Check that the right column is named 'time'.", where)
    first = str(given.iloc[0]).strip()
    if re.fullmatch(r"[0-9]*\.?[0-9]*", first):
        raise InputError(
            f"'{shown(first)}' may be seconds, minutes or days",
            f"Name the unit in the heading, such as '{shown(heading)} [s]' for seconds from the start. Else: {ADVICE}",
            f"{file}:{line[0]}, column '{shown(heading)}'",
        )
    day_known = not _TIME_OF_DAY.fullmatch(first) or dates is not None
    if _TIME_OF_DAY.fullmatch(first):
        days = dates.str.strip() if dates is not None else _NO_DAY
        times = days + "T" + times.str.strip()
        if dates is None:
            said.append("The clock has no dates: all rows were taken to be of one day.")
    stamps = _stamps(times, given, where, said)
    unread = np.flatnonzero(np.isnat(stamps) & times.notna().to_numpy())
    if unread.size:
        row = int(unread[0])
        seen = f"'{shown(str(times.iloc[row]))}' is not a date and time that can be read only one way"
        raise InputError(seen, ADVICE, f"{file}:{line[row]}, column '{shown(heading)}'")
    first_stamp = stamps[~np.isnat(stamps)][0]
    start = first_stamp.astype("datetime64[us]").item() if day_known else None
    return Clock(start=start, time_s=np.asarray((stamps - first_stamp) / np.timedelta64(1, "s")))


def _stamps(times: Series[Any], given: Series[Any], where: str, said: list[str]) -> NDArray[np.datetime64]:
    """Return times without zones as they stand, and times with zones in UTC; NaT where they cannot be read."""
    import pandas as pd

    # A look at some rows is enough: a logger that writes zones writes them all the way.
    zoned = {bool(_ZONE.fullmatch(str(text).strip())) for text in given.iloc[:: max(1, len(given) // 200)]}
    if len(zoned) > 1:
        raise InputError("only some times have a time zone", "Write all times in one zone.", where)
    if zoned == {True}:
        said.append("Times with a zone were turned into UTC.")
    stamps = pd.to_datetime(times, format="ISO8601", errors="coerce", utc=True)
    if stamps.isna().sum() > times.isna().sum():
        stamps = pd.to_datetime(times.str.strip(), format="ISO8601", errors="coerce", utc=True)
    return np.asarray(stamps.dt.tz_localize(None).to_numpy())


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
