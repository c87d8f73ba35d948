"""The channels of a test on the clocks of their loggers, held against the one equation they must obey."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.track import Track, track

Array = NDArray[np.float64]
Mask = NDArray[np.bool_]


@dataclass(frozen=True, slots=True, kw_only=True)
class Clocks:
    """How far each of L loggers' clocks is ahead of the reference."""

    lag_s: Array
    """(L,) reading of each clock less the reference's, in the middle of the log [s]."""
    drift: Array
    """(L,) how fast each clock gains on the reference [s/s]."""
    middle_s: float = 0.0
    """Middle of the log, on the reference clock [s]."""

    def own(self, logger: int, time_s: Array) -> Array:
        """Return what a logger's clock shows at reference times [s]."""
        return np.asarray(time_s + self.lag_s[logger] + self.drift[logger] * (time_s - self.middle_s))

    def reference(self, logger: int, own_s: Array) -> Array:
        """Return the reference times at which a logger's clock shows these [s]."""
        since = (own_s - self.lag_s[logger] - self.middle_s) / (1.0 + self.drift[logger])
        return np.asarray(since + self.middle_s)


@dataclass(frozen=True, slots=True, kw_only=True)
class Grid:
    """Reference times at which channels are compared; n of them, R reaches."""

    time_s: Array
    """(n,) [s]."""
    width_s: float
    """Window of the means taken there [s]."""
    keep: Mask
    """(R, n) which are compared."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Signals:
    """Flow and pressures of one test; T taps, R = T − 1 reaches."""

    flow: Track
    """Flow [m³/s]."""
    square: Track
    """Flow times its magnitude, on the same clock [m⁶/s²]."""
    pressures: tuple[Track, ...]
    """T gauge pressures; or one pressure difference [Pa]."""
    loggers: tuple[int, ...]
    """(1 + T,) logger of the flow, then of each pressure, from 0."""
    inertia: tuple[float, ...]
    """(R,) density × length / area of each reach [Pa s²/m³]."""
    travel_s: float = 0.0
    """Longest time a pressure wave needs between neighbouring taps [s]."""
    gentle: Track = field(init=False)
    """Flow to the power 1.75, with its sign: friction of a smooth wall, where `square` is that of a rough one."""

    def __post_init__(self) -> None:
        """Work out the other end of the friction law."""
        flow = self.flow.value
        object.__setattr__(self, "gentle", track(self.flow.time_s, flow * np.abs(flow) ** 0.75))

    @property
    def count(self) -> int:
        """Number of loggers."""
        return max(self.loggers) + 1

    @property
    def interval_s(self) -> float:
        """Usual time between readings of the slowest channel [s]."""
        return max(one.interval_s for one in (self.flow, *self.pressures))

    def tracks(self) -> tuple[tuple[Track, int], ...]:
        """Return flow and pressures, each with its logger."""
        return tuple(zip((self.square, *self.pressures), self.loggers, strict=True))

    def overlap(self, clocks: Clocks) -> tuple[float, float]:
        """Return first and last reference time that every channel covers [s]; the last before the first for none."""
        ends = [clocks.reference(logger, one.time_s[[0, -1]]) for one, logger in self.tracks()]
        return max(float(first) for first, _ in ends), min(float(last) for _, last in ends)

    def grid(self, clocks: Clocks, width_s: float, most: int = 200_000) -> Grid:
        """Return times two to a window over the overlap, each kept where no channel of its reach has a gap."""
        first, last = self.overlap(clocks)
        room = 1.5 * width_s
        count = int(np.clip((last - first - 2.0 * room) / (width_s / 2.0), 2, most))
        time = np.linspace(first + room, last - room, count)
        whole = np.array([one.covers(clocks.own(logger, time), room) for one, logger in self.tracks()])
        keep = np.array([whole[0] & np.all(whole[list(taps)], axis=0) for taps in self._taps()])
        return Grid(time_s=time, width_s=width_s, keep=keep)

    def residual(self, clocks: Clocks, grid: Grid) -> Array:
        """Return what is left of each reach's pressure difference when all that explains it is taken off.

        Returns
        -------
        (R, n) array
            Left over [Pa]; zero where the grid does not compare.
        """
        on = [clocks.own(logger, grid.time_s) for logger in self.loggers]
        width = self._width(self.flow, grid.width_s)
        square, gentle = self.square.mean(on[0], width), self.gentle.mean(on[0], width)
        change = self.flow.slope(on[0], width)
        pressure = [one.mean(on[1 + tap], self._width(one, grid.width_s)) for tap, one in enumerate(self.pressures)]
        explains = np.array([np.ones_like(square), square, gentle])
        explains = explains / np.maximum(np.max(np.abs(explains), axis=1, keepdims=True), 1e-300)
        left = np.zeros((len(self.inertia), len(square)))
        for reach, taps in enumerate(self._taps()):
            keep = grid.keep[reach]
            difference = pressure[taps[0] - 1] - (pressure[taps[1] - 1] if len(taps) > 1 else 0.0)
            difference = (difference - self.inertia[reach] * change)[keep]
            left[reach, keep] = _unexplained(explains[:, keep].T, difference)
        return left

    def unexplained(self, clocks: Clocks, grid: Grid) -> float:
        """Return the share of the pressures' variance that the head-loss equation leaves over [-]."""
        on = [clocks.own(logger, grid.time_s) for logger in self.loggers[1:]]
        values = [one.mean(time, self._width(one, grid.width_s)) for one, time in zip(self.pressures, on, strict=True)]
        whole = sum(
            float(np.sum(np.square(values[tap - 1][keep] - np.mean(values[tap - 1][keep]))))
            for taps, keep in zip(self._taps(), grid.keep, strict=True)
            for tap in taps
            if np.any(keep)
        )
        return float(np.sum(self.residual(clocks, grid) ** 2)) / max(whole, 1e-300)

    def _width(self, one: Track, width_s: float) -> float:
        """Return a channel's window [s]: a faster one gets a wider, so that all are blurred alike.

        Lines between readings blur as a window of √2 intervals does; a channel blurred less than its partner would
        lean on it while the flow changes, and pass for late or early.
        """
        return float(np.sqrt(width_s**2 + 2.0 * (self.interval_s**2 - one.interval_s**2)))

    def _taps(self) -> list[tuple[int, ...]]:
        """Return the places of each reach's pressures among the tracks."""
        if len(self.pressures) == 1:
            return [(1,)]
        return [(tap, tap + 1) for tap in range(1, len(self.pressures))]


def _unexplained(explains: Array, difference: Array) -> Array:
    """Return what is left of a pressure difference after a constant and friction.

    Friction goes with a power of the flow between 1.75 and 2, so the shares of both ends must be of one sign. Without
    that, or with a drift over time, a staircase of equal steps would pass for itself when shifted by a step.
    """
    whole = np.linalg.lstsq(explains, difference, rcond=None)[0]
    rough = np.linalg.lstsq(explains[:, :2], difference, rcond=None)[0]
    sign = np.sign(rough[1])
    if sign * whole[1] >= 0.0 and sign * whole[2] >= 0.0:
        return np.asarray(difference - explains @ whole)
    if sign * whole[2] < 0.0:
        return np.asarray(difference - explains[:, :2] @ rough)
    smooth = explains[:, [0, 2]]
    return np.asarray(difference - smooth @ np.linalg.lstsq(smooth, difference, rcond=None)[0])
