"""What trembles when several taps are read at once: each gauge on its own, and the meter for all of them."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.averages import difference_slopes, rest_difference
from fieldfit.field.log import Log
from fieldfit.field.readings import Plateaus, Screening
from fieldfit.field.section import Section

Array = NDArray[np.float64]

FEWEST_ROWS = 8
"""Rows of a plateau from which they tell what trembles with what."""
EVENNESS = 0.5
"""Weight of "all gauges alike" against what the differences say, where only these are known."""


class Tremble(NamedTuple):
    """Where the noise of single rows comes from; T taps, K plateaus."""

    gauge_pa2: Array
    """(T,) variance of each gauge's own noise, up to a common factor [Pa²]."""
    meter: float
    """Variance of the meter's noise as a share of the flow, by the same factor [-]."""
    slope_pa: Array
    """(T, K) what one relative unit of flow changes at each tap, from the first on [Pa]."""


def tremble(plateaus: Plateaus, section: Section, weight_pa_m: float, rows: tuple[Log, Screening] | None) -> Tremble:
    """Part the noise of neighbouring pressure differences into what each gauge and what the meter does.

    A gauge's noise enters the two differences beside it with opposite signs, the meter's enters all with one sign and
    as their slopes with the flow. Both are found from how the rows of each plateau stray together (least squares,
    none negative); from the plateaus' standard errors alone, gauges most alike, where there are no rows to ask.

    Parameters
    ----------
    plateaus : Plateaus
        K plateaus of T taps.
    section : Section
        The test section.
    weight_pa_m : float
        Weight of the liquid ρg [Pa/m].
    rows : (Log, Screening), optional
        The log and which of its rows make the plateaus.

    Returns
    -------
    Tremble
    """
    slopes = _slopes(plateaus, section, weight_pa_m)
    of_tap = np.vstack([np.zeros((1, slopes.shape[1])), -np.cumsum(slopes, axis=0)]) * plateaus.flow_m3_s
    seen = _stray(plateaus, slopes, rows) if rows is not None else []
    if not seen:
        return Tremble(_even(np.mean(np.nan_to_num(plateaus.random_pa) ** 2, axis=1)), 0.0, of_tap)
    gauge, meter = _parted(
        [covariance for _, covariance in seen], [slopes[:, k] * plateaus.flow_m3_s[k] for k, _ in seen]
    )
    return Tremble(gauge, meter, of_tap)


def head_covariance(plateaus: Plateaus, found: Tremble, index: int) -> tuple[Array, Array]:
    """Return the covariance of the taps' mean pressures at one plateau [Pa²], and the factor of each reach on it.

    The covariance says how differences hang together; the factors (R,) bring each neighbouring difference to the
    standard error that its own rows gave.
    """
    taps = np.diag(found.gauge_pa2) + found.meter * np.outer(found.slope_pa[:, index], found.slope_pa[:, index])
    between = np.eye(len(taps) - 1, len(taps)) - np.eye(len(taps) - 1, len(taps), 1)
    own = np.sqrt(np.maximum(np.diag(between @ taps @ between.T), 1e-30))
    return taps, np.nan_to_num(plateaus.random_pa[:, index]) / own


def _slopes(plateaus: Plateaus, section: Section, weight_pa_m: float) -> Array:
    """Return how each neighbouring difference changes with the flow, (R, K) [Pa s/m³]; zero at a dead tap."""
    found = []
    for reach in range(len(section.taps) - 1):
        rest = rest_difference(section, reach, weight_pa_m)
        pressure = plateaus.pressure_pa
        alive = plateaus.static & np.all(np.isfinite(pressure[reach : reach + 2]), axis=0)
        found.append(difference_slopes(plateaus.flow_m3_s, pressure, alive, rest, reach))
    return np.where(plateaus.static, 0.0, np.nan_to_num(np.array(found)))


def _stray(plateaus: Plateaus, slopes: Array, rows: tuple[Log, Screening]) -> list[tuple[int, Array]]:
    """Return how the rows of each flowing plateau stray together, (R, R) [Pa²] each, the flow's own changes taken off."""
    log, screening = rows
    found = []
    for index, number in enumerate(plateaus.number):
        here = np.flatnonzero(screening.plateau == number)
        if plateaus.static[index] or len(here) < FEWEST_ROWS or not np.all(np.isfinite(plateaus.pressure_pa[:, index])):
            continue
        flow = log.flow_m3_s[here]
        difference = log.pressure_pa[:-1, here] - log.pressure_pa[1:, here] - np.outer(slopes[:, index], flow)
        found.append((index, np.cov(difference).reshape(len(difference), -1)))
    return found


def _parted(strays: list[Array], slopes: list[Array]) -> tuple[Array, float]:
    """Return the variance of each gauge and of the meter that come nearest to all covariances."""
    from scipy.optimize import nnls

    reaches = len(slopes[0])
    places = np.triu_indices(reaches)
    between = np.eye(reaches, reaches + 1) - np.eye(reaches, reaches + 1, 1)
    gauges = np.array([np.outer(between[:, tap], between[:, tap])[places] for tap in range(reaches + 1)])
    scale = float(np.mean([np.trace(stray) for stray in strays])) / reaches
    tables, wanted = [], []
    for stray, slope in zip(strays, slopes, strict=True):
        meter = np.outer(slope, slope)[places]
        tables.append(np.vstack([gauges, meter / float(np.mean(slope**2))]).T)
        wanted.append(stray[places] / scale)
    # A tenth of a reading pulls the gauges together: with two taps nothing else tells them apart.
    pull = 0.1 * np.hstack([np.eye(reaches + 1) - 1.0 / (reaches + 1), np.zeros((reaches + 1, 1))])
    found, _ = nnls(np.vstack([*tables, pull]), np.concatenate([*wanted, np.zeros(reaches + 1)]))
    meter_variance = found[-1] * scale / float(np.mean([np.mean(slope**2) for slope in slopes]))
    return np.asarray(np.maximum(found[:-1] * scale, 1e-3 * scale)), float(meter_variance)


def _even(variance: Array) -> Array:
    """Return gauges' variances whose sums come near to those of neighbouring differences, all much alike."""
    from scipy.optimize import nnls

    reaches = len(variance)
    sums = np.eye(reaches, reaches + 1) + np.eye(reaches, reaches + 1, 1)
    scale = float(np.mean(variance)) or 1.0
    table = np.vstack([sums, EVENNESS * np.eye(reaches + 1)])
    found, _ = nnls(table, np.concatenate([variance / scale, np.full(reaches + 1, EVENNESS / 2.0)]))
    return np.asarray(np.maximum(found * scale, 1e-3 * scale))
