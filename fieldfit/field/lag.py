"""How far the clocks of several loggers are apart, found from what they logged."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.lag_interval import LagInterval, covariance, lag_interval
from fieldfit.field.lag_search import dearer, rough_lags
from fieldfit.field.signals import Clocks, Grid, Signals

Array = NDArray[np.float64]

LONG_S = 4.0 * 3600.0
"""Length of a log from which clocks may drift apart visibly [s]."""
DRIFT_SEEN = 2.5
"""Standard uncertainties a drift must be to be believed."""
WIDEST_SHARE = 0.05
"""Half an interval over the log's length beyond which it says nothing of the lag."""
WIDEST_ROWS = 6.0
"""Sampling intervals within which half an interval is good enough all the same."""
AMBIGUOUS = 9.0
"""Fall of the log-likelihood, twice over, by which one lag must beat every other."""
FIT_SD = 6.0
"""Robust standard deviations from which a row is no part of the comparison."""
RESPONSE = 0.1
"""Share of the sampling interval to which a row's time can be trusted."""
BLUR = 0.25
"""Share of the blur of lines between readings to which it can be known."""
RIVALS = 3
"""Other valleys of the rough search that are looked at closely."""
ROUNDS = 15
NARROW = 2.0
"""Width of the finest window, in sampling intervals of the slowest channel."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Lag:
    """How far one logger's clock is ahead of the reference."""

    seconds: float
    """Reading of this clock less the reference's, in the middle of the log [s]."""
    interval_s: tuple[float, float]
    """Its 95 % interval, the time a pressure wave needs between the taps included [s]."""
    drift: float = 0.0
    """How fast this clock gains on the reference [s/s]; zero where none was seen or looked for."""
    drift_standard: float | None = None
    """Standard uncertainty of the drift [s/s]; None where none was looked for."""
    effective_rows: float | None = None
    """Rows that count as independent for this lag [-]; None for a lag that was given or refused."""
    refused: str = ""
    """Why the readings cannot tell the lag; empty where they can, or where it was given."""
    profile: tuple[Array, Array] | None = None
    """Lags about the best one [s], and the residual variance at each over the least [-]."""
    search: tuple[Array, Array] | None = None
    """Every lag searched [s], and the share of the channels' variance left over at each [-]."""


class _Free(NamedTuple):
    """What is to be found: which loggers, and whether their clocks may drift."""

    places: list[int]
    drifting: bool

    def clocks(self, clocks: Clocks, theta: Array) -> Clocks:
        """Return the clocks with the free ones at these parameters: lags, then drifts."""
        lag, drift, count = clocks.lag_s.copy(), clocks.drift.copy(), len(self.places)
        lag[self.places] = theta[:count]
        if self.drifting:
            drift[self.places] = theta[count:]
        return replace(clocks, lag_s=lag, drift=drift)

    def theta(self, clocks: Clocks) -> Array:
        """Return the parameters of the clocks."""
        return np.concatenate([clocks.lag_s[self.places], clocks.drift[self.places] if self.drifting else []])


class _Fit(NamedTuple):
    """The free clocks at their best."""

    clocks: Clocks
    grid: Grid
    slopes: Array
    variance: Array


def recover_lags(
    signals: Signals, known: Sequence[float | None], drifts: Sequence[float | None] | None = None
) -> tuple[Lag, ...]:
    """Find how far each logger's clock is ahead, from the one head-loss equation that all channels must obey.

    The pressure difference of each reach, its rigid-column inertia taken off, is held against Q|Q|, Q, a constant and
    a slow drift of the gauges; clocks are right where the least variance is left over. A rough search takes every
    lag at which half of the shorter log still overlaps, so a whole hour is found as well as seconds; the fine one is
    Gauss–Newton on windows of two rows. The interval is where the residual variance has risen by what the effective
    number of rows allows: rows that remember one another, and the few moments at which the flow changes, count for
    what they are. The time of a pressure wave between the taps widens it.

    Parameters
    ----------
    signals : Signals
        All channels; L loggers.
    known : (L,) sequence of float or None
        How far a clock is known to be ahead [s]; None where it is to be found. At least one must be known.
    drifts : (L,) sequence of float or None, optional
        How fast a clock is known to gain [s/s]; None where it may be found.

    Returns
    -------
    tuple of Lag
        (L,) A known lag comes back as given; one that cannot be told has the reason in `refused`.
    """
    search = rough_lags(signals, known)
    given = [one or 0.0 for one in drifts or [0.0] * len(known)]
    found = [
        Lag(seconds=one, interval_s=(one, one), drift=gains, refused=why)
        for one, gains, why in zip(search.seconds, given, search.refused, strict=True)
    ]
    places = [place for place, one in enumerate(known) if one is None and not search.refused[place]]
    if not places:
        return tuple(found)
    clocks = Clocks(lag_s=np.array(search.seconds), drift=np.array(given))
    first, last = signals.overlap(clocks)
    may_drift = last - first >= LONG_S and (drifts is None or all(drifts[place] is None for place in places))
    start = replace(clocks, middle_s=(first + last) / 2.0)
    fit, free, spread = _fine(signals, start, _Free(places, may_drift), last - first)
    for index, place in enumerate(places):
        interval = lag_interval(_leftover(signals, fit, free), free.theta(fit.clocks), index, (fit.variance, fit.grid))
        rival = _rival(signals, fit, place, (search.curves[place], interval.independent_rows))
        found[place] = replace(
            _judged(signals, interval, search.curves[place], rival),
            drift=float(fit.clocks.drift[place]),
            drift_standard=spread[index] if spread else None,
        )
    return tuple(found)


def _fine(signals: Signals, clocks: Clocks, free: _Free, length: float) -> tuple[_Fit, _Free, list[float]]:
    """Refine the free clocks on ever narrower windows; a drift stays only where it is seen."""
    widths = [NARROW * signals.interval_s]
    while widths[-1] < length / 500.0:
        widths.append(4.0 * widths[-1])
    for width in reversed(widths):
        fit = _converge(signals, clocks, free, width)
        clocks = fit.clocks
    if not free.drifting:
        return fit, free, []
    count = len(free.places)
    spread = np.sqrt(np.diag(fit.variance)[count:])
    if np.all(np.abs(free.theta(clocks)[count:]) < DRIFT_SEEN * spread):
        free = _Free(free.places, False)
        steady = clocks.drift.copy()
        steady[free.places] = 0.0
        fit = _converge(signals, replace(clocks, drift=steady), free, widths[0])
    return fit, free, spread.tolist()


def _leftover(signals: Signals, fit: _Fit, free: _Free) -> Callable[[Array], Array]:
    """Return the residual as a function of the free parameters."""
    return lambda theta: signals.residual(free.clocks(fit.clocks, theta), fit.grid)


def _converge(signals: Signals, clocks: Clocks, free: _Free, width: float) -> _Fit:
    """Minimise the residual variance at one width of window: a look around, then Gauss–Newton without outliers."""
    grid = signals.grid(clocks, width)
    theta = free.theta(clocks)
    half = max((grid.time_s[-1] - grid.time_s[0]) / 2.0, width)
    size = np.concatenate([np.full(len(free.places), width), np.full(len(theta) - len(free.places), width / half)])

    def residual(at: Array) -> Array:
        return signals.residual(free.clocks(clocks, at), grid)

    for index in range(len(free.places)):
        theta = _look_around(residual, theta, index, width)
    theta, slopes = _gauss_newton(residual, theta, size)
    left = residual(theta)
    spread = 1.4826 * np.array([np.median(np.abs(one[keep])) for one, keep in zip(left, grid.keep, strict=True)])
    near = np.abs(left) <= np.maximum(FIT_SD * spread[:, None], 1e-9)
    grid = replace(grid, keep=grid.keep & near)
    theta, slopes = _gauss_newton(residual, theta, size)
    variance = covariance(residual(theta), slopes, grid.keep) + _blurred(signals, residual, theta, slopes)
    return _Fit(free.clocks(clocks, theta), grid, slopes, variance)


def _blurred(signals: Signals, residual: Callable[[Array], Array], theta: Array, slopes: Array) -> Array:
    """Return the covariance that comes of not knowing quite how a logger blurs what it samples."""
    flat = slopes.reshape(len(theta), -1)
    inverse = np.linalg.pinv(flat @ flat.T)
    middle, whole = residual(theta), np.zeros((len(theta), len(theta)))
    for index in range(len(theta)):
        step = np.zeros_like(theta)
        step[index] = signals.interval_s
        bend = (residual(theta + step) + residual(theta - step) - 2.0 * middle) / 6.0
        moved = inverse @ (flat @ (BLUR * bend).ravel())
        whole += np.outer(moved, moved)
    return whole


def _look_around(residual: Callable[[Array], Array], theta: Array, index: int, width: float) -> Array:
    """Return the best of a few lags about the present one."""
    tries = []
    for step in np.linspace(-2.0, 2.0, 17) * width:
        at = theta.copy()
        at[index] += step
        tries.append((float(np.sum(residual(at) ** 2)), at))
    return min(tries, key=lambda one: one[0])[1]


def _gauss_newton(residual: Callable[[Array], Array], theta: Array, size: Array) -> tuple[Array, Array]:
    """Return parameters of least squares, and the (P, R, n) slopes of the residual there."""
    for _ in range(ROUNDS):
        slopes = _slopes(residual, theta, size)
        flat = slopes.reshape(len(theta), -1)
        step = -np.linalg.lstsq(flat.T, residual(theta).ravel(), rcond=None)[0]
        step = step / max(1.0, float(np.max(np.abs(step) / size)))
        theta = theta + step
        if np.all(np.abs(step) < 1e-4 * size):
            break
    return theta, _slopes(residual, theta, size)


def _slopes(residual: Callable[[Array], Array], theta: Array, size: Array) -> Array:
    """Return how the residual changes with each parameter, (P, R, n)."""
    found = []
    for index, width in enumerate(size):
        ahead, behind = theta.copy(), theta.copy()
        ahead[index] += width / 4.0
        behind[index] -= width / 4.0
        found.append((residual(ahead) - residual(behind)) / (width / 2.0))
    return np.array(found)


def _judged(signals: Signals, interval: LagInterval, search: tuple[Array, Array], rival: float | None) -> Lag:
    """Return a lag with its interval, or refused where it is too wide or another lag fits as well."""
    half = (interval.ends_s[1] - interval.ends_s[0]) / 2.0
    length = signals.flow.time_s[-1] - signals.flow.time_s[0]
    refused = ""
    if not half <= max(WIDEST_SHARE * length, WIDEST_ROWS * signals.interval_s):
        refused = f"the signals are so flat that any lag within ±{half:.0f} s fits"
    elif rival is not None:
        refused = f"a lag of {rival:+.0f} s fits as well as one of {interval.seconds:+.0f} s"
    below, above = (
        float(np.hypot(end - interval.seconds, RESPONSE * signals.interval_s)) + signals.travel_s
        for end in interval.ends_s
    )
    return Lag(
        seconds=interval.seconds,
        interval_s=(interval.seconds - below, interval.seconds + above),
        effective_rows=interval.effective_rows,
        refused=refused,
        profile=interval.profile,
        search=search,
    )


def _rival(signals: Signals, fit: _Fit, place: int, search: tuple[tuple[Array, Array], float]) -> float | None:
    """Return a lag out of the best one's valley that fits as well; None where there is none."""
    (lags, share), rows = search
    rows = max(rows, 4.0)
    # Another lag lays other rows over one another, and a variance of so many rows is itself not sure.
    rise = float(np.exp(AMBIGUOUS / rows + 2.0 * np.sqrt(2.0 / rows)))
    allowed = rise * signals.unexplained(fit.clocks, fit.grid)
    for lag in _valleys(lags, share, fit.clocks.lag_s[place])[:RIVALS]:
        if _closely(signals, fit, place, lag) <= allowed:
            return lag
    return None


def _closely(signals: Signals, fit: _Fit, place: int, lag: float) -> float:
    """Return the share of variance left over at the best lag near one of the rough search, held against the overlap."""
    alone = _Free([place], False)
    theta = np.array([lag])
    at = alone.clocks(fit.clocks, theta)
    grid = signals.grid(at, fit.grid.width_s)
    if not np.any(grid.keep):
        return float("inf")

    def residual(one: Array) -> Array:
        return signals.residual(alone.clocks(at, one), grid)

    for _ in range(2):
        theta = _look_around(residual, theta, 0, grid.width_s)
    common = float(np.count_nonzero(grid.keep)) / max(float(np.count_nonzero(fit.grid.keep)), 1.0)
    return signals.unexplained(alone.clocks(at, theta), grid) * dearer(common)


def _valleys(lags: Array, share: Array, best: float) -> list[float]:
    """Return the lags at which the rough share has a low of its own, deepest first, without the best one's."""
    padded = np.concatenate([[np.inf], share, [np.inf]])
    low = np.flatnonzero((share <= padded[:-2]) & (share <= padded[2:]))
    step = lags[1] - lags[0] if len(lags) > 1 else 1.0
    low = low[np.abs(lags[low] - best) > 2.5 * step]
    return [float(lags[one]) for one in low[np.argsort(share[low])]]
