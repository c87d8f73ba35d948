"""How surely a lag is known: what noise with a memory does to it, and where its residual variance has risen."""

from __future__ import annotations

from collections.abc import Callable
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.row_noise import autocorrelation_time
from fieldfit.field.signals import Grid

Array = NDArray[np.float64]
Mask = NDArray[np.bool_]

NORMAL_95 = 1.959963984540054
ALIKE_FREEDOM = 10.0
"""Degrees of freedom that the noise of the whole log counts for beside the noise of the moments that tell a lag."""
TRIES = 61
"""Lags of a profile."""
REACH = 5.0
"""Standard uncertainties a profile goes to either side."""


class LagInterval(NamedTuple):
    """A lag's 95 % interval, by the profile of residual variance."""

    seconds: float
    """The best lag [s]."""
    ends_s: tuple[float, float]
    """Where the residual variance has risen as far as noise may make it [s]."""
    effective_rows: float
    """Rows that count as independent for this lag [-]."""
    profile: tuple[Array, Array]
    """Lags [s], and the residual variance at each over the least [-]."""
    independent_rows: float
    """Rows of the comparison that do not remember one another [-]."""


def covariance(left: Array, slopes: Array, keep: Mask) -> Array:
    """Return the covariance of least-squares parameters whose rows remember one another.

    Two estimates are weighed together for each parameter: one where noise is alike over the whole log and only its
    autocorrelation counts, and one from the very rows that tell the parameter, which see that noise and misfit are
    larger while a valve moves (Newey & West 1987, doi:10.2307/1913610). The second counts by the number of separate
    moments it stands on, and few of them widen the result as Student's distribution does.

    Parameters
    ----------
    left : (R, n) array
        Residuals [Pa]; zero where not kept.
    slopes : (P, R, n) array
        Their slopes in the parameters.
    keep : (R, n) array
        Which count.

    Returns
    -------
    (P, P) array
    """
    count = len(slopes)
    flat = slopes.reshape(count, -1)
    inverse = np.linalg.pinv(flat @ flat.T)
    rows = max(int(np.count_nonzero(keep)) - count - 4 * len(left), 1)
    memory = autocorrelation_time([one[which] for one, which in zip(left, keep, strict=True)])
    span = max(int(np.ceil(2.0 * memory)), 2)
    alike, own = np.zeros((count, count)), np.zeros((count, count))
    for reach, one in enumerate(left):
        correlation = _autocorrelation(one[keep[reach]], span)
        for apart in range(span):
            weight = 1.0 - apart / span
            early, late = slopes[:, reach, : one.size - apart], slopes[:, reach, apart:]
            pair = early @ late.T
            alike += weight * correlation[apart] * (pair + pair.T) / (2.0 if apart == 0 else 1.0)
            product = (early * one[: one.size - apart]) @ (late * one[apart:]).T
            own += weight * (product + product.T) / (2.0 if apart == 0 else 1.0)
    first = inverse @ (alike * float(np.sum(left**2)) / rows) @ inverse
    second = inverse @ own @ inverse
    scale = np.sqrt(
        [
            _together(float(one), float(other), _moments(row, span))
            for one, other, row in zip(np.diag(first), np.diag(second), flat, strict=True)
        ]
    )
    return np.asarray(first * np.outer(scale, scale))


def _autocorrelation(values: Array, span: int) -> Array:
    """Return the autocorrelation of a series up to a span, never below zero."""
    whole = float(values @ values)
    if whole <= 0.0:
        return np.append(1.0, np.zeros(span - 1))
    return np.array([max(float(values[apart:] @ values[: values.size - apart]) / whole, 0.0) for apart in range(span)])


def _moments(slope: Array, span: int) -> float:
    """Return how many separate moments tell a parameter [-]."""
    pieces = np.add.reduceat(slope**2, np.arange(0, slope.size, 2 * span))
    return float(np.sum(pieces)) ** 2 / max(float(np.sum(pieces**2)), 1e-300)


def _together(alike: float, own: float, moments: float) -> float:
    """Return the factor on the first of two variances: both weighed by what they stand on, Student's width included."""
    from scipy.special import stdtrit

    freedom = ALIKE_FREEDOM + moments
    ratio = (ALIKE_FREEDOM + moments * own / max(alike, 1e-300)) / freedom
    return max(ratio, 1.0) * float(stdtrit(freedom, 0.975) / NORMAL_95) ** 2


def lag_interval(
    residual: Callable[[Array], Array], theta: Array, index: int, spread: tuple[Array, Grid]
) -> LagInterval:
    """Return the 95 % interval of one lag from the profile of residual variance.

    Parameters
    ----------
    residual : callable
        (P,) parameters to (R, n) residuals.
    theta : (P,) array
        The best parameters.
    index : int
        Which of them.
    spread : tuple of (P, P) array and Grid
        Covariance of the parameters, and the grid of the residuals.

    Returns
    -------
    LagInterval
    """
    variance, grid = spread
    standard = float(np.sqrt(max(variance[index, index], 1e-12)))
    # The other parameters follow along the line on which the residual stays least.
    along = variance[:, index] / max(variance[index, index], 1e-300)
    along[index] = 1.0
    least = float(np.sum(residual(theta) ** 2))
    offsets = np.linspace(-REACH, REACH, TRIES) * max(standard, 0.2 * grid.width_s)
    risen = np.array([float(np.sum(residual(theta + one * along) ** 2)) for one in offsets])
    least = min(least, float(np.min(risen)))
    curvature = _curvature(offsets, risen - least, standard)
    effective = least / max(curvature * standard**2, 1e-300)
    allowed = least * NORMAL_95**2 / effective
    ends = [
        _crossing(offsets[side], (risen - least)[side], allowed, standard)
        for side in (slice(TRIES // 2, None, -1), slice(TRIES // 2, None))
    ]
    seconds = float(theta[index])
    profile = (seconds + offsets, risen / max(least, 1e-300))
    left = residual(theta)
    memory = autocorrelation_time([one[which] for one, which in zip(left, grid.keep, strict=True)])
    independent = float(np.count_nonzero(grid.keep)) / memory
    return LagInterval(seconds, (seconds - ends[0], seconds + ends[1]), effective, profile, independent)


def _curvature(offsets: Array, rise: Array, standard: float) -> float:
    """Return the rise of squares per square of lag, about the least."""
    near = np.abs(offsets) <= max(1.5 * standard, 3.0 * abs(float(offsets[1] - offsets[0])))
    return max(float(np.polyfit(offsets[near], rise[near], 2)[0]), 1e-300)


def _crossing(offsets: Array, rise: Array, allowed: float, standard: float) -> float:
    """Return the distance at which the rise passes what is allowed; no less than the linear one, at most twice it."""
    above = np.flatnonzero(rise >= allowed)
    linear = NORMAL_95 * standard
    if not len(above) or above[0] == 0:
        return 2.0 * linear if not len(above) else linear
    after = above[0]
    share = (allowed - rise[after - 1]) / (rise[after] - rise[after - 1])
    found = abs(float(offsets[after - 1] + share * (offsets[after] - offsets[after - 1])))
    return float(np.clip(found, linear, 2.0 * linear))
