"""The hour that summer time takes or gives, in a clock that shows local time."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Stamps = NDArray[np.datetime64]

HOUR_S = 3600.0
BACK_MONTHS = (3, 4, 5, 9, 10, 11)
"""Months in which summer time ends, north and south."""
FORWARD_MONTHS = (3, 4, 9, 10, 11)
"""Months in which summer time begins, north and south."""
SUNDAY = 6
LATEST_HOUR = 4
"""Hour of the night after which no clock is changed."""
LONGEST_STEP_S = 900.0
"""Time from row to row beyond which a changed hour cannot be told from a gap [s]."""


def straightened(stamps: Stamps, said: list[str]) -> Stamps:
    """Return the stamps of a clock without the jump of an hour at the change to or from summer time.

    A jump counts as such when it is one hour within a row, between rows that lie next to a full hour of the night to a
    Sunday, in a month in which clocks are changed. Any other jump is left as it stands.

    Parameters
    ----------
    stamps : ndarray of datetime64
        (N,) local times; NaT where missing.
    said : list of str
        A sentence on each jump is added here.

    Examples
    --------
    >>> night = np.array(["2026-10-25T02:59:30", "2026-10-25T02:00:00"], dtype="datetime64[s]")
    >>> straightened(night, [])
    array(['2026-10-25T02:59:30', '2026-10-25T03:00:00'],
          dtype='datetime64[s]')
    """
    there = np.flatnonzero(~np.isnat(stamps))
    times = stamps[there]
    steps = np.diff(times) / np.timedelta64(1, "s")
    forward = steps[steps > 0.0]
    usual = float(np.median(forward)) if forward.size else 60.0
    if usual > LONGEST_STEP_S:
        return stamps
    added = np.zeros(len(times))
    for row in np.flatnonzero(np.abs(np.abs(steps) - HOUR_S) <= 3.0 * usual):
        jump = _jump(times[row], times[row + 1], float(steps[row]), usual)
        if jump:
            added[row + 1 :] += jump
            said.append(_sentence(times[row], times[row + 1], jump))
    if not added.any():
        return stamps
    straight = stamps.copy()
    straight[there] = times + added.astype("timedelta64[s]")
    return straight


def _jump(before: np.datetime64, after: np.datetime64, step: float, usual: float) -> float:
    """Return what must be added to the rows after a jump [s]; 0 for a jump that is no change of summer time."""
    day = before.astype("datetime64[D]")
    month = int(day.astype("datetime64[M]").astype(np.int64)) % 12 + 1
    hour = float((before - day) / np.timedelta64(1, "h"))
    weekday = (int(day.astype(np.int64)) + 3) % 7
    near = max(1.5 * usual, 1.0)
    at_hour = [_from_full_hour(time) <= near for time in (before, after)]
    if weekday != SUNDAY or hour > LATEST_HOUR or not all(at_hour):
        return 0.0
    if step < 0.0:
        return HOUR_S if month in BACK_MONTHS and step > -HOUR_S - usual else 0.0
    return -HOUR_S if month in FORWARD_MONTHS and step > HOUR_S else 0.0


def _from_full_hour(time: np.datetime64) -> float:
    """Return how far a time is from the next full hour, before or after [s]."""
    past = float((time - time.astype("datetime64[h]")) / np.timedelta64(1, "s"))
    return min(past, HOUR_S - past)


def _sentence(before: np.datetime64, after: np.datetime64, jump: float) -> str:
    """Return what is said of a jump."""
    day, first, last = str(before)[:10], str(before)[11:19], str(after)[11:19]
    way = "back an hour, as at the end of" if jump > 0.0 else "on an hour, as at the beginning of"
    return f"On {day} the clock goes {way} summer time, from {first} to {last}: the rows below were put in order."
