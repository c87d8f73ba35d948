"""Bore or roughness: what the readings of one reach say of both at once.

A narrower bore and a rougher wall lose head in nearly the same way, so flow readings leave a ridge: a band of mixtures
that all fit. What tells them apart is how the friction factor bends with flow, and that is just what friction
correlations do not promise. So their error is counted in level, in shape, and in how sharply the wall turns from smooth
to rough; a free fit that took the shape as exact would give a sharp and wrong bore.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.section import BoreEvidence, Correlation
from fieldfit.hydraulics.friction import ROUGH, STANDARD_GRAVITY, colebrook_white, smooth
from fieldfit.inference.bore_evidence import Weighed, log_likelihood, weigh
from fieldfit.inference.friction_curve import TURBULENT_LAW_FROM
from fieldfit.inference.head_model import HeadModel, friction_by_definition
from fieldfit.inference.shared_errors import SHAPE

Array = NDArray[np.float64]

BORES, WALLS = 101, 121
"""Points of the map along bore and roughness."""
SMOOTHEST_M = 1e-6
"""Roughness that stands for a smooth wall: drawn tube [m]."""
ROUGHEST = 0.06
"""Largest relative roughness of the map: a little beyond what may be called one."""
WIDEST = 4.5
"""Standard deviations the map reaches beyond what the readings allow."""
HIDDEN = 0.005
"""Narrowing under which nobody would speak of a deposit, as a share of the bore."""
NARROWEST = 0.2
"""Smallest bore of the map, as a share of the laid one."""


@dataclass(frozen=True, slots=True, kw_only=True)
class BoreMap:
    """What readings, stated errors and bore evidence say of bore and roughness; N bores, W roughnesses."""

    bore_m: Array
    """(N,) bores, evenly by logarithm [m]: friction's mean over the reach."""
    roughness_m: Array
    """(W,) roughnesses, evenly by logarithm [m]; the first stands for all smoother ones."""
    by_readings: Array
    """(N, W) probability of each by the readings alone; adds up to one."""
    probability: Array
    """(N, W) probability with the bore evidence; adds up to one."""
    laid_m: float
    """As-new bore [m]."""
    ridge_m: Array
    """(W,) bore that fits the readings best with each roughness [m]; NaN where none on the map does."""
    evidence: tuple[Weighed, ...]
    """Bore evidence, each held against the readings."""
    exact_shape: Exact
    """What a fit that takes the correlation as exact would claim."""

    def bores(self) -> Array:
        """Return the (N,) probability of each bore."""
        return np.asarray(np.sum(self.probability, axis=1))

    def walls(self) -> Array:
        """Return the (W,) probability of each roughness."""
        return np.asarray(np.sum(self.probability, axis=0))


class Exact(NamedTuple):
    """Uncertainties of a free fit of bore and roughness with the correlation's shape taken as exact."""

    ln_bore: float
    """Standard uncertainty of ln bore [-]."""
    ln_roughness: float
    """Standard uncertainty of ln roughness [-]."""
    correlation: float
    """Their correlation coefficient [-]."""


def bore_map(
    model: HeadModel, ln_friction: float, limit: Correlation, evidence: tuple[BoreEvidence, ...], variation: float
) -> BoreMap:
    """Map bore and roughness.

    Every stated error but the bore's is counted in through the covariance of the readings it makes. Before any reading
    every roughness is equally likely by its logarithm, and so is every thickness of deposit, from what the laid bore's
    own uncertainty would hide on; above the laid bore, as far as its stated limit allows.

    Parameters
    ----------
    model : HeadModel
        The equation of the reach, with its readings.
    ln_friction : float
        Best ln f at the reference, in the laid bore [-].
    limit : Correlation
        How far friction correlations can be trusted.
    evidence : tuple of BoreEvidence
        What something other than friction says of the bore.
    variation : float
        Relative standard deviation of a deposit's thickness along the reach [-].

    Returns
    -------
    BoreMap
    """
    covariance = _covariance(model, ln_friction, limit)
    bore, wall = _axes(model, ln_friction, covariance)
    likelihood = _log_likelihood(model, (bore, wall), covariance, limit.standard)
    log = likelihood + _log_prior(model, bore)[:, None]
    readings = _normal(log)
    weighed = tuple(
        weigh(one, (bore, np.sum(readings, axis=1)), model.readings.bore.value, variation) for one in evidence
    )
    for one in weighed:
        if one.used:
            log = log + log_likelihood(one.evidence, bore, model.readings.bore.value, variation)[:, None]
    return BoreMap(
        bore_m=bore,
        roughness_m=wall,
        by_readings=readings,
        probability=_normal(log),
        laid_m=model.readings.bore.value,
        ridge_m=_ridge(bore, likelihood),
        evidence=weighed,
        exact_shape=exact_shape(model, model.readings.bore.value, _roughness_guess(model, ln_friction)),
    )


def region_level(probability: Array, share: float) -> float:
    """Return the probability per cell over which the most probable cells hold a share of all.

    Examples
    --------
    >>> print(region_level(np.array([[0.1, 0.6], [0.3, 0.0]]), 0.5))
    0.6
    """
    order = np.sort(probability.ravel())[::-1]
    return float(order[min(int(np.searchsorted(np.cumsum(order), share)), order.size - 1)])


def quantiles(values: Array, probability: Array, shares: tuple[float, ...]) -> tuple[float, ...]:
    """Return the values below which lie some shares of the probability, between cells by a line."""
    order = np.argsort(values)
    below = np.cumsum(probability[order]) - 0.5 * probability[order]
    return tuple(float(part) for part in np.interp(shares, below, values[order]))


def exact_shape(model: HeadModel, bore_m: float, roughness_m: float) -> Exact:
    """Return what a free fit of bore and roughness would claim if the correlation were exact and nothing else were off.

    Parameters
    ----------
    model : HeadModel
        The equation, for its readings and their noise.
    bore_m, roughness_m : float
        Where [m].

    Returns
    -------
    Exact
        Infinite where the readings cannot tell the two apart at all.
    """
    slopes = []
    for ln_bore, ln_wall in ((1e-4, 0.0), (0.0, 1e-3)):
        ends = [
            _heads(model, np.array([bore_m * np.exp(sign * ln_bore)]), np.array([roughness_m * np.exp(sign * ln_wall)]))
            for sign in (1.0, -1.0)
        ]
        slopes.append(
            (ends[0].friction + ends[0].rest - ends[1].friction - ends[1].rest).ravel() / 2.0 / (ln_bore or ln_wall)
        )
    table = np.array(slopes) / model.readings.random_m
    information = table @ table.T
    if np.linalg.cond(information) > 1e12:
        return Exact(float("inf"), float("inf"), -1.0)
    covariance = np.linalg.inv(information)
    standard = np.sqrt(np.diag(covariance))
    return Exact(float(standard[0]), float(standard[1]), float(covariance[0, 1] / (standard[0] * standard[1])))


class _Heads(NamedTuple):
    """Head losses over a grid, (N, W, K): to friction, to fittings, and how much the sharpness of the turn moves them."""

    friction: Array
    rest: Array
    turning: Array


def _heads(model: HeadModel, bore: Array, wall: Array) -> _Heads:
    """Return what the readings would be for each bore and roughness."""
    readings = model.readings
    flow = np.broadcast_to(readings.flow_m3_s, (len(bore), 1, len(readings.flow_m3_s)))
    if readings.meter.senses == "velocity":
        flow = flow * (bore[:, None, None] / readings.bore.value) ** 2
    per_k = 8.0 * flow**2 / (np.pi**2 * STANDARD_GRAVITY * bore[:, None, None] ** 4)
    reynolds = np.maximum(4.0 * flow / (np.pi * bore[:, None, None] * readings.viscosity_m2_s), TURBULENT_LAW_FROM)
    relative = np.minimum(wall[None, :, None] / bore[:, None, None], 0.5)
    factor = colebrook_white(reynolds, relative)
    friction = factor * per_k * readings.length.value / bore[:, None, None]
    rough = np.clip(relative / ROUGH * 10.0 ** (0.5 / np.sqrt(factor)), 1e-12, 1.0 - 1e-12)
    turning = -(rough * np.log2(rough) + (1.0 - rough) * np.log2(1.0 - rough))
    return _Heads(friction, readings.fitting_k.value * per_k, turning)


def _covariance(model: HeadModel, ln_friction: float, limit: Correlation) -> Array:
    """Return the covariance of the readings from noise, stated errors but the bore's, and the correlation, (K, K) [m²].

    The correlation's error is one smooth curve in log Re: as large everywhere, alike over its stated range.
    """
    errors, readings = model.errors, model.readings
    found = model.predict(ln_friction, np.zeros(len(errors.names)))
    counted = [index for index, name in enumerate(errors.names) if name not in {"bore", SHAPE}]
    effect = found.by_error[counted]
    place = np.log10(readings.flow_m3_s) / limit.decades
    alike = limit.standard**2 * np.exp(-0.5 * (place[:, None] - place[None, :]) ** 2)
    curve = alike * np.outer(found.friction_m, found.friction_m)
    return np.asarray(np.diag(readings.random_m**2) + effect.T @ effect + curve)


def _axes(model: HeadModel, ln_friction: float, covariance: Array) -> tuple[Array, Array]:
    """Return the bores and roughnesses of the map: all that the readings may allow, the laid bore among them."""
    readings = model.readings
    laid = readings.bore.value
    friction, _ = friction_by_definition(readings)
    relative = float(np.min(np.sqrt(np.diag(covariance)) / np.maximum(friction, 1e-9)))
    at_smooth = float(np.log(smooth(model.reference.reynolds)))
    power = 1.0 if readings.meter.senses == "velocity" else 5.0
    lowest = (at_smooth - 0.25 - ln_friction - WIDEST * relative) / (power * 0.95)
    highest = WIDEST * max(readings.bore.relative, 0.002)
    low = float(np.log(laid)) + float(np.clip(lowest, np.log(NARROWEST), -0.02))
    bore = np.exp(np.linspace(low, np.log(laid) + highest, BORES))
    return bore, np.geomspace(SMOOTHEST_M, max(ROUGHEST * laid, 10.0 * SMOOTHEST_M), WALLS)


def _log_likelihood(model: HeadModel, axes: tuple[Array, Array], covariance: Array, standard: float) -> Array:
    """Return the log likelihood over the map, (N, W).

    How sharply a wall turns from smooth to rough is one more error of the correlation, largest where both count alike
    and as large there as its level; it differs from place to place, so it is folded in by a rank-one update.
    """
    heads = _heads(model, *axes)
    whiten = np.linalg.inv(np.linalg.cholesky(covariance)).T
    misfit = (model.readings.head_loss_m - heads.friction - heads.rest) @ whiten
    turn = (standard * heads.turning * heads.friction) @ whiten
    own = 1.0 + np.sum(turn**2, axis=-1)
    along = np.sum(misfit * turn, axis=-1)
    return np.asarray(-0.5 * (np.sum(misfit**2, axis=-1) - along**2 / own) - 0.5 * np.log(own))


def _log_prior(model: HeadModel, bore: Array) -> Array:
    """Return the log prior of each bore, (N,): thicknesses by their logarithm, and no bore beyond the stated limit."""
    from scipy.special import ndtr

    laid = model.readings.bore
    spread = max(laid.standard, 1e-4 * laid.value)
    above = (bore - laid.value) / spread
    beyond = np.clip(0.5 - above / (2.0 * np.sqrt(3.0)), 0.0, 1.0) if laid.shape == "rectangular" else ndtr(-above)
    hidden = max(spread, HIDDEN * laid.value)
    return np.asarray(np.log(np.maximum(beyond, 1e-12)) - np.log(np.maximum(laid.value - bore, 0.0) + hidden))


def _normal(log: Array) -> Array:
    """Return probabilities that add up to one."""
    weight = np.exp(log - np.max(log))
    return np.asarray(weight / np.sum(weight))


def _ridge(bore: Array, log: Array) -> Array:
    """Return the best bore for each roughness, (W,) [m], refined between points by a parabola."""
    top = np.argmax(log, axis=0)
    inner = np.clip(top, 1, len(bore) - 2)
    columns = np.arange(log.shape[1])
    left, middle, right = (log[inner + step, columns] for step in (-1, 0, 1))
    bend = left - 2.0 * middle + right
    shift = np.where(bend < 0.0, 0.5 * (left - right) / np.where(bend == 0.0, 1.0, bend), 0.0)
    found = bore[inner] * (bore[1] / bore[0]) ** np.clip(shift, -1.0, 1.0)
    return np.where((top == 0) | (top == len(bore) - 1), np.nan, found)


def _roughness_guess(model: HeadModel, ln_friction: float) -> float:
    """Return the roughness that all of the loss would mean in the laid bore [m], not under a smooth wall's."""
    from fieldfit.hydraulics.friction import relative_roughness

    found = float(relative_roughness(np.exp(ln_friction), model.reference.reynolds)) * model.readings.bore.value
    return max(found, SMOOTHEST_M)
