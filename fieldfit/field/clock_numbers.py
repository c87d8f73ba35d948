"""A clock that is a bare number: Unix time, or the days that spreadsheets count."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from fieldfit.errors import InputError
from fieldfit.field.units import shown

Array = NDArray[np.float64]
Stamps = NDArray[np.datetime64]

UNIX_S = (946_684_800.0, 4_102_444_800.0)
"""Unix time of the years 2000 and 2100 [s]."""
SERIAL_DAYS = (36_526.0, 73_050.0)
"""Days of the years 2000 and 2100 as spreadsheets count them."""
LONGEST_DAYS = 400.0
"""Days that one log may take as spreadsheets count them."""
_SPREADSHEET_ZERO = np.datetime64("1899-12-30", "ms")
_UNIX_ZERO = np.datetime64("1970-01-01", "us")


def number_stamps(values: Array, place: tuple[str, str], said: list[str]) -> Stamps:
    """Return numbers as stamps; NaT where missing.

    Seconds, thousandths or millionths since 1970 are told by their size; days since the end of 1899 by their size and
    their fractions.

    Parameters
    ----------
    values : ndarray
        (N,) numbers; NaN where missing.
    place : tuple of str
        File and line, and heading, for errors.
    said : list of str
        A sentence on what was assumed is added here.

    Raises
    ------
    InputError
        When the numbers may be anything.

    Examples
    --------
    >>> number_stamps(np.array([46154.5]), ("log.csv:2", "time"), [])
    array(['2026-05-12T12:00:00.000000'], dtype='datetime64[us]')
    """
    known = values[np.isfinite(values)]
    for name, parts in (("seconds", 1.0), ("milliseconds", 1e3), ("microseconds", 1e6)):
        if known.size and UNIX_S[0] * parts <= known.min() and known.max() <= UNIX_S[1] * parts:
            said.append(f"Times were read as Unix time, {name} since 1970 in UTC.")
            return _from(_UNIX_ZERO, values * (1e6 / parts), "us")
    fractions = known.size and np.any(known != np.rint(known))
    if fractions and SERIAL_DAYS[0] <= known.min() and known.max() <= min(SERIAL_DAYS[1], known.min() + LONGEST_DAYS):
        said.append("Times were read as days the way spreadsheets count them.")
        return _from(_SPREADSHEET_ZERO, values * 86_400e3, "ms").astype("datetime64[us]")
    where, heading = place
    first = f"{known[0]:.15g}" if known.size else ""
    raise InputError(
        f"'{shown(first)}' may be seconds, minutes or days",
        f"Name the unit in the heading, such as '{shown(heading)} [s]' for seconds from the start. Else: write year, "
        "month, day and time like 2026-05-12T08:00:00.",
        f"{where}, column '{shown(heading)}'",
    )


def _from(zero: np.datetime64, counts: Array, unit: str) -> Stamps:
    """Return times counted from a zero, to the whole count."""
    whole = np.where(np.isfinite(counts), np.rint(counts), 0.0).astype(np.int64).astype(f"timedelta64[{unit}]")
    return np.where(np.isfinite(counts), zero + whole, np.datetime64("NaT"))
