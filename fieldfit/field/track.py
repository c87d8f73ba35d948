"""One channel on its own logger's clock, ready to be held against channels of other loggers."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
Mask = NDArray[np.bool_]

GAP = 3.5
"""Sampling intervals without a reading that make a gap."""
SPIKE_SD = 12.0
"""Robust standard deviations by which a single reading sticks out of its neighbours to be a spike."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Track:
    """One channel; n readings in order of its clock."""

    time_s: Array
    """(n,) its own clock, rising [s]."""
    value: Array
    """(n,) reading, all finite [SI]."""
    sum: Array
    """(n,) integral of the reading over time from the first one [SI·s]."""
    interval_s: float
    """Usual time between readings [s]."""

    def mean(self, time_s: Array, width_s: float) -> Array:
        """Return the mean over a window about each time.

        Readings are joined by straight lines, and the mean of those lines is taken exactly, so that it moves smoothly
        with the window's place and its noise hardly depends on where between two readings the window lies.

        Parameters
        ----------
        time_s : (m,) array
            Middles of the windows, on the track's clock [s].
        width_s : float
            Width of the windows [s].

        Returns
        -------
        (m,) array
            Means [SI]; beyond the ends the last reading is carried on.

        Examples
        --------
        >>> line = track(np.arange(5.0), 2.0 * np.arange(5.0))
        >>> line.mean(np.array([1.3, 2.0]), 1.0).round(12).tolist()
        [2.6, 4.0]
        """
        half = width_s / 2.0
        return (self._integral(time_s + half) - self._integral(time_s - half)) / width_s

    def slope(self, time_s: Array, width_s: float) -> Array:
        """Return the mean rate of change over a window about each time [SI/s]."""
        half = width_s / 2.0
        ahead, behind = np.interp(time_s + half, self.time_s, self.value), np.interp(time_s - half, *self._line())
        return np.asarray((ahead - behind) / width_s)

    def covers(self, time_s: Array, room_s: float) -> Mask:
        """Return at which times the track has readings about, and none missing."""
        inside = (time_s - room_s >= self.time_s[0]) & (time_s + room_s <= self.time_s[-1])
        after = np.clip(np.searchsorted(self.time_s, time_s), 1, len(self.time_s) - 1)
        gap = self.time_s[after] - self.time_s[after - 1]
        return np.asarray(inside & (gap <= GAP * self.interval_s))

    def _line(self) -> tuple[Array, Array]:
        return self.time_s, self.value

    def _integral(self, time_s: Array) -> Array:
        """Return the integral from the first reading to each time [SI·s]."""
        before = np.clip(np.searchsorted(self.time_s, time_s, side="right") - 1, 0, len(self.time_s) - 2)
        along = time_s - self.time_s[before]
        inside = np.clip(along, 0.0, self.time_s[before + 1] - self.time_s[before])
        slope = (self.value[before + 1] - self.value[before]) / (self.time_s[before + 1] - self.time_s[before])
        edge = self.value[before] + slope * inside
        return np.asarray(
            self.sum[before] + self.value[before] * inside + slope * inside**2 / 2.0 + edge * (along - inside)
        )


def track(time_s: Array, value: Array) -> Track:
    """Make a track of one channel, without missing readings, rows out of order and lone spikes.

    Parameters
    ----------
    time_s : (n,) array
        The logger's clock [s]; NaN where missing.
    value : (n,) array
        Readings [SI]; NaN where missing.

    Returns
    -------
    Track

    Raises
    ------
    ValueError
        When fewer than two readings are left.

    Examples
    --------
    >>> track(np.array([0.0, 1.0, 1.0, 2.0]), np.array([5.0, np.nan, 6.0, 7.0])).value.tolist()
    [5.0, 6.0, 7.0]
    """
    known = np.isfinite(time_s) & np.isfinite(value)
    time, value = time_s[known], value[known]
    rising = time > np.append(-np.inf, np.maximum.accumulate(time)[:-1])
    time, value = time[rising], value[rising]
    sound = ~_spikes(value)
    time, value = time[sound], value[sound]
    if len(time) < 2:
        raise ValueError("a track needs two readings")
    pieces = np.diff(time) * (value[1:] + value[:-1]) / 2.0
    return Track(
        time_s=time,
        value=value,
        sum=np.append(0.0, np.cumsum(pieces)),
        interval_s=float(np.median(np.diff(time))),
    )


def _spikes(value: Array) -> Mask:
    """Return single readings that stick out of both neighbours far more than readings usually do."""
    out = np.zeros(len(value), dtype=np.bool_)
    if len(value) < 8:
        return out
    step = np.diff(value)
    bend = np.minimum(np.abs(step[:-1]), np.abs(step[1:])) * (step[:-1] * step[1:] < 0.0)
    usual = float(np.percentile(np.abs(step), 90.0))
    spread = float(np.subtract(*np.percentile(value, (95.0, 5.0))))
    out[1:-1] = bend > max(SPIKE_SD * usual, 0.1 * spread, 1e-300)
    return out
