"""How well a plateau's rows tell its mean pressure difference: noise with memory, resolution, curvature."""

from __future__ import annotations

from collections.abc import Callable
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.log import Log
from fieldfit.field.quantisation import steps_left
from fieldfit.field.variances import pooled_variance

Array = NDArray[np.float64]
Rows = NDArray[np.int64]


class MeanNoise(NamedTuple):
    """Noise of the mean pressure difference of each plateau; K plateaus."""

    standard_pa: Array
    """(K,) standard error at the mean flow [Pa]."""
    independent_rows: Array
    """(K,) rows that count as independent [-]."""
    curvature_pa: Array
    """(K,) mean pressure difference less the one at the mean flow [Pa]."""


class RowSums(NamedTuple):
    """Sums over the rows of each plateau, about its means; K plateaus."""

    rows: Array
    """(K,) rows."""
    mean_flow: Array
    """(K,) mean flow [m³/s]."""
    flows: Array
    """(K,) sum of the squared flow [m⁶/s²]."""
    products: Array
    """(K,) sum of flow times pressure difference [Pa m³/s]."""
    differences: Array
    """(K,) sum of the squared pressure difference [Pa²]."""


def noise_of_mean(log: Log, members: list[Rows], reach: int, slopes: Array) -> MeanNoise:
    """Find the standard error of each plateau's pressure difference from the rows themselves.

    Only what the flow does not explain is noise: the rows' distance from a line of the known slope through the
    plateau's means. Its memory is taken from all plateaus together (integrated autocorrelation time), and so is part
    of its variance, see `variances.pooled_variance`. A column written in steps is no better than its step where it
    stands still, see `quantisation.step_standard`.

    Parameters
    ----------
    log : Log
        The log.
    members : list of (n,) int arrays
        Rows of each plateau; K of them.
    reach : int
        Which pair of neighbouring taps.
    slopes : (K,) array
        Change of the pressure difference with flow at each plateau [Pa s/m³].

    Returns
    -------
    MeanNoise
    """
    residuals, squares = [], []
    for rows, slope in zip(members, slopes, strict=True):
        flow = log.flow_m3_s[rows] - np.mean(log.flow_m3_s[rows])
        difference = log.pressure_pa[reach, rows] - log.pressure_pa[reach + 1, rows]
        difference = difference - np.mean(difference)
        residuals.append(difference - slope * flow)
        squares.append(
            (len(rows), np.mean(log.flow_m3_s[rows]), flow @ flow, flow @ difference, difference @ difference)
        )
    sums = RowSums(*np.array(squares, dtype=np.float64).reshape(-1, 5).T)
    return noise_from_sums(sums, slopes, autocorrelation_time(residuals), step_variance(log, members, reach, slopes))


def noise_from_sums(sums: RowSums, slopes: Array, memory: float, steps: Array) -> MeanNoise:
    """Return the noise of each mean pressure difference from sums over its rows.

    Parameters
    ----------
    sums : RowSums
        Of K plateaus.
    slopes : (K,) array
        Change of the pressure difference with flow at each plateau [Pa s/m³].
    memory : float
        Rows that are worth one independent row [-].
    steps : (K,) array
        Variance that the steps of the columns leave in each mean [Pa²].

    Returns
    -------
    MeanNoise
    """
    independent = np.maximum(sums.rows / memory, 1.0)
    residual = sums.differences - 2.0 * slopes * sums.products + slopes**2 * sums.flows
    spread = np.maximum(residual, 0.0) / np.maximum(sums.rows - memory, 1.0)
    for kind in (slopes == 0.0, slopes != 0.0):
        # Statics are quieter than flow, so the two are not pooled.
        spread[kind] = pooled_variance(spread[kind], np.maximum(independent[kind] - 1.0, 1.0))
    curved = [
        _curvature(product / rows, flow / rows, slope, mean)
        for rows, mean, flow, product, slope in zip(
            sums.rows, sums.mean_flow, sums.flows, sums.products, slopes, strict=True
        )
    ]
    return MeanNoise(np.sqrt(spread / independent + steps), independent, np.array(curved))


def step_variance(log: Log, members: list[Rows], reach: int, slopes: Array) -> Array:
    """Return the variance that the steps of both gauges and of the meter leave in each mean difference [Pa²]."""
    variance = (slopes * steps_left(log.flow_m3_s, members, log.flow_step_m3_s)) ** 2
    for tap in (reach, reach + 1):
        variance += steps_left(log.pressure_pa[tap], members, float(log.pressure_step_pa[tap])) ** 2
    return variance


def curvature(flow: Array, difference: Array, slope: float, mean_flow: float) -> float:
    """Return how far a mean of differences lies above the difference at the mean flow [Pa].

    To second order it is h''/2 times the variance of the flow, and h''/h' = 0.9/Q where h goes with Q to the 1.9.
    The covariance of flow and difference over the slope is that variance without the meter's own noise, so that
    the slope drops out.
    """
    return _curvature(float(np.mean(flow * difference)), float(np.mean(flow**2)), slope, mean_flow)


def _curvature(covariance: float, variance: float, slope: float, mean_flow: float) -> float:
    """Return the same from the covariance with the difference and the variance of the flow."""
    if slope <= 0.0 or mean_flow == 0.0:
        return 0.0
    return 0.45 / mean_flow * float(np.clip(covariance, 0.0, slope * variance))


def autocorrelation_time(series: list[Array]) -> float:
    """Return how many neighbouring rows are worth one independent row [-], at least 1.

    Autocorrelations are pooled over all series, summed up to five times the running result (Sokal's window), and
    corrected for the mean that each series has lost.

    Examples
    --------
    >>> rng = np.random.default_rng(1)
    >>> round(autocorrelation_time([rng.normal(size=400) for _ in range(5)]), 0)
    1.0
    """
    centred = [part - np.mean(part) for part in series if len(part) > 2]
    variance = sum(float(part @ part) for part in centred)
    if variance <= 0.0:
        return 1.0
    found: list[float] = []

    def alike(lag: int) -> float:
        """Return the pooled autocorrelation of rows so far apart."""
        while len(found) < lag:
            apart = len(found) + 1
            products = (
                float(part[apart:] @ part[:-apart]) * len(part) / (len(part) - apart)
                for part in centred
                if len(part) > apart
            )
            found.append(sum(products) / variance)
        return found[lag - 1]

    return integrated_time(alike, np.array([len(part) for part in centred]))


def integrated_time(alike: Callable[[int], float], lengths: Rows) -> float:
    """Return the integrated autocorrelation time [rows] from autocorrelations by distance in rows.

    Parameters
    ----------
    alike : callable
        Pooled autocorrelation at a distance of 1, 2, … rows.
    lengths : array of int
        Rows of each series.
    """
    mean = float(np.mean(lengths))
    lost, time = 0.0, 1.0
    for _ in range(3):
        time = _windowed_time(alike, int(np.max(lengths)) // 2, lost)
        lost = time / mean
    return min(time, mean / 2.0)


def _windowed_time(alike: Callable[[int], float], farthest: int, lost: float) -> float:
    """Sum the pooled autocorrelations until the window closes."""
    time = 1.0
    for lag in range(1, farthest):
        rho = alike(lag)
        time += 2.0 * (rho + lost * (1.0 - rho))
        if lag >= 5.0 * time or rho <= 0.0:
            break
    return max(time, 1.0)
