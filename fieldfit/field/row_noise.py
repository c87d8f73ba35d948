"""How well a plateau's rows tell its mean pressure difference: noise with memory, resolution, curvature."""

from __future__ import annotations

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
    residuals, curved = [], []
    for rows, slope in zip(members, slopes, strict=True):
        flow = log.flow_m3_s[rows] - np.mean(log.flow_m3_s[rows])
        difference = log.pressure_pa[reach, rows] - log.pressure_pa[reach + 1, rows]
        difference = difference - np.mean(difference)
        residuals.append(difference - slope * flow)
        curved.append(curvature(flow, difference, slope, float(np.mean(log.flow_m3_s[rows]))))
    memory = autocorrelation_time(residuals)
    count = np.array([len(rows) for rows in members], dtype=np.float64)
    independent = np.maximum(count / memory, 1.0)
    spread = np.array([float(np.sum(part**2)) for part in residuals]) / np.maximum(count - memory, 1.0)
    for kind in (slopes == 0.0, slopes != 0.0):
        # Statics are quieter than flow, so the two are not pooled.
        spread[kind] = pooled_variance(spread[kind], np.maximum(independent[kind] - 1.0, 1.0))
    return MeanNoise(
        np.sqrt(spread / independent + step_variance(log, members, reach, slopes)), independent, np.array(curved)
    )


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
    if slope <= 0.0 or mean_flow == 0.0:
        return 0.0
    covariance = float(np.mean(flow * difference))
    ceiling = slope * float(np.mean(flow**2))
    return 0.45 / mean_flow * float(np.clip(covariance, 0.0, ceiling))


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
    lengths = np.array([len(part) for part in centred])
    lost, time = 0.0, 1.0
    for _ in range(3):
        time = _windowed_time(centred, variance, lost)
        lost = time / float(np.mean(lengths))
    return min(time, float(np.mean(lengths)) / 2.0)


def _windowed_time(centred: list[Array], variance: float, lost: float) -> float:
    """Sum the pooled autocorrelations until the window closes."""
    time = 1.0
    for lag in range(1, max(len(part) for part in centred) // 2):
        covariance = sum(
            float(part[lag:] @ part[:-lag]) * len(part) / (len(part) - lag) for part in centred if len(part) > lag
        )
        rho = covariance / variance
        time += 2.0 * (rho + lost * (1.0 - rho))
        if lag >= 5.0 * time or rho <= 0.0:
            break
    return max(time, 1.0)
