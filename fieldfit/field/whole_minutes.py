"""A clock written without its seconds, by a logger that took several rows a minute."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Stamps = NDArray[np.datetime64]

MINUTE_S = 60.0
FEWEST_MINUTES = 3
"""Whole minutes, with rows before and after them, that must agree on their number of rows."""
FULL = 0.9
"""Share of its rows that a minute may have and still count as whole."""
AGREE = 0.8
"""Share of the whole minutes that must have their rows, give or take one; none may have more."""


def spread_minutes(stamps: Stamps, said: list[str]) -> Stamps:
    """Return stamps in which the rows of one minute are spread over it evenly.

    Only a clock that shows whole minutes throughout, the same one for several rows, is touched, and only if its whole
    minutes agree on how many rows they have: a logger's fixed interval. The rows of the first minute are taken to be
    its last ones.

    Parameters
    ----------
    stamps : ndarray of datetime64
        (N,) times; NaT where missing.
    said : list of str
        A sentence is added here.

    Examples
    --------
    >>> minutes = np.repeat(np.datetime64("2026-05-12T08:00", "s") + 60 * np.arange(5), [1, 3, 3, 3, 2])
    >>> [str(time)[14:19] for time in spread_minutes(minutes, [])[:5]]
    ['00:40', '01:00', '01:20', '01:40', '02:00']
    """
    there = np.flatnonzero(~np.isnat(stamps))
    times = stamps[there]
    whole = times.astype("datetime64[m]")
    if times.size < 2 or np.any(times != whole) or not np.any(np.diff(times) == np.timedelta64(0)):
        return stamps
    starts = np.flatnonzero(np.append(True, whole[1:] != whole[:-1]))
    counts = np.diff(np.append(starts, times.size))
    inner = counts[1:-1]
    if inner.size < FEWEST_MINUTES:
        return stamps
    usual = float(np.median(inner))
    agree = float(np.mean(inner >= FULL * usual - 1.0))
    if usual < 2.0 or agree < AGREE or counts.max() > usual + 1.0 or np.any(np.diff(whole) < np.timedelta64(0)):
        return stamps
    interval = MINUTE_S / float(np.mean(inner[np.abs(inner - usual) <= 1.0]))
    place = np.arange(times.size) - np.repeat(starts, counts)
    step = np.repeat(np.where(counts > usual, MINUTE_S / counts, interval), counts)
    seconds = place * step
    seconds[: counts[0]] += max(MINUTE_S - counts[0] * interval, 0.0)
    spread = stamps.astype("datetime64[ms]")
    spread[there] = times + np.rint(seconds * 1000.0).astype("timedelta64[ms]")
    said.append(f"The clock shows no seconds; rows were spread over their minutes, {interval:.3g} s apart.")
    return spread
