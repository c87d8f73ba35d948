"""Clocks at their best: least squares on ever narrower windows, and what noise does to them."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.lag_interval import covariance
from fieldfit.field.signals import Clocks, Grid, Signals

Array = NDArray[np.float64]

LONG_S = 4.0 * 3600.0
"""Length of a log from which clocks may drift apart visibly [s]."""
DRIFT_SEEN = 2.5
"""Standard uncertainties a drift must be to be believed."""
FIT_SD = 6.0
"""Robust standard deviations from which a row is no part of the comparison."""
BLUR = 0.25
"""Share of the blur of lines between readings to which it can be known."""
ROUNDS = 15
NARROW = 2.0
"""Width of the finest window, in sampling intervals of the slowest channel."""


class Free(NamedTuple):
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


class ClockFit(NamedTuple):
    """The free clocks at their best."""

    clocks: Clocks
    grid: Grid
    slopes: Array
    variance: Array


def fit_clocks(signals: Signals, clocks: Clocks, free: Free, length: float) -> tuple[ClockFit, Free, list[float]]:
    """Refine the free clocks on ever narrower windows; a drift stays only where it is seen."""
    widths = [NARROW * signals.interval_s]
    while widths[-1] < length / 500.0:
        widths.append(4.0 * widths[-1])
    for width in reversed(widths):
        fit = converge(signals, clocks, free, width)
        clocks = fit.clocks
    if not free.drifting:
        return fit, free, []
    count = len(free.places)
    spread = np.sqrt(np.diag(fit.variance)[count:])
    if np.all(np.abs(free.theta(clocks)[count:]) < DRIFT_SEEN * spread):
        free = Free(free.places, False)
        steady = clocks.drift.copy()
        steady[free.places] = 0.0
        fit = converge(signals, replace(clocks, drift=steady), free, widths[0])
    return fit, free, spread.tolist()


def leftover(signals: Signals, fit: ClockFit, free: Free) -> Callable[[Array], Array]:
    """Return the residual as a function of the free parameters."""
    return lambda theta: signals.residual(free.clocks(fit.clocks, theta), fit.grid)


def converge(signals: Signals, clocks: Clocks, free: Free, width: float) -> ClockFit:
    """Minimise the residual variance at one width of window: a look around, then Gauss–Newton without outliers."""
    grid = signals.grid(clocks, width)
    theta = free.theta(clocks)
    half = max((grid.time_s[-1] - grid.time_s[0]) / 2.0, width)
    size = np.concatenate([np.full(len(free.places), width), np.full(len(theta) - len(free.places), width / half)])

    def residual(at: Array) -> Array:
        return signals.residual(free.clocks(clocks, at), grid)

    for index in range(len(free.places)):
        theta = look_around(residual, theta, index, width)
    theta, slopes = _gauss_newton(residual, theta, size)
    left = residual(theta)
    spread = 1.4826 * np.array([np.median(np.abs(one[keep])) for one, keep in zip(left, grid.keep, strict=True)])
    near = np.abs(left) <= np.maximum(FIT_SD * spread[:, None], 1e-9)
    grid = replace(grid, keep=grid.keep & near)
    theta, slopes = _gauss_newton(residual, theta, size)
    variance = covariance(residual(theta), slopes, grid.keep) + _blurred(signals, residual, theta, slopes)
    return ClockFit(free.clocks(clocks, theta), grid, slopes, variance)


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


def look_around(residual: Callable[[Array], Array], theta: Array, index: int, width: float) -> Array:
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
