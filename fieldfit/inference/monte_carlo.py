"""Cross-check of the intervals: distributions propagated by Monte Carlo (JCGM 101)."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.uncertain import Shape
from fieldfit.inference.batch import Batch, readings_weight, solve_batch
from fieldfit.inference.fit import Fit
from fieldfit.inference.wall import MonteCarlo

Array = NDArray[np.float64]

DRAWS = 10_000
SEED = 20260512
ENDS = (0.025, 0.975)


def monte_carlo(fit: Fit, correlation_standard: float, draws: int = DRAWS, seed: int = SEED) -> MonteCarlo:
    """Propagate every error through the readings with its own distribution, limits as rectangles.

    Each draw is one more section in a batch: what flow, bore, head and the rest may truly have been, given what
    was read.

    Parameters
    ----------
    fit : Fit
        Best fit of the reach.
    correlation_standard : float
        Standard uncertainty of the correlation's level [-]; it enters the second interval only.
    draws : int
        Number of draws.
    seed : int
        Seed of the generator.

    Returns
    -------
    MonteCarlo
        Intervals of f itself, not of its logarithm.
    """
    rng = np.random.default_rng(seed)
    u = draw_errors(fit.model.errors.shapes, draws, rng)
    noise = fit.random_m[:, None] * rng.standard_normal((len(fit.random_m), draws))
    found, converged = solve_batch(_batch(fit, u, noise), _weight(fit), np.full(draws, fit.ln_friction))
    level = correlation_standard * rng.standard_normal(draws)
    return MonteCarlo(
        draws=draws,
        seed=seed,
        friction_factor=_span(found[converged]),
        with_correlation=_span((found + level)[converged]),
        unconverged=int(np.count_nonzero(~converged)),
    )


def draw_errors(shapes: tuple[Shape, ...], draws: int, rng: np.random.Generator) -> Array:
    """Return draws of errors of zero mean and unit standard deviation, each of its own distribution.

    Parameters
    ----------
    shapes : tuple of str
        Distribution of each of M errors.
    draws : int
        Number of draws.
    rng : numpy.random.Generator
        Where they come from.

    Returns
    -------
    (M, draws) array
    """
    limit = np.sqrt(3.0)
    rows = [rng.uniform(-limit, limit, draws) if one == "rectangular" else rng.standard_normal(draws) for one in shapes]
    return np.array(rows).reshape(len(shapes), draws)


def coverage_interval(values: Array) -> tuple[float, float]:
    """Return the probabilistically symmetric 95 % interval of draws (JCGM 101, 7.7); NaN of none."""
    if values.size == 0:
        return float("nan"), float("nan")
    low, high = np.quantile(values, ENDS)
    return float(low), float(high)


def _span(ln_friction: Array) -> tuple[float, float]:
    """Return the 95 % interval of f from draws of its logarithm [-]."""
    low, high = coverage_interval(ln_friction)
    return float(np.exp(low)), float(np.exp(high))


def _batch(fit: Fit, u: Array, noise: Array) -> Batch:
    """Return the draws as sections."""
    readings, errors = fit.model.readings, fit.model.errors
    column = readings.flow_m3_s[:, None]
    return Batch(
        flow_m3_s=column + errors.flow_m3_s.T @ u,
        head_loss_m=readings.head_loss_m[:, None] - errors.head_m.T @ u - noise,
        bore_m=readings.bore.value * np.exp(errors.ln_bore @ u),
        length_m=readings.length.value * np.exp(errors.ln_length @ u),
        viscosity_m2_s=readings.viscosity_m2_s[:, None] * np.exp(errors.ln_viscosity @ u),
        fitting_k=readings.fitting_k.value + errors.fitting_k @ u,
        ln_friction_error=errors.ln_friction.T @ u,
        reference_reynolds=np.full(u.shape[1], fit.model.reference.reynolds),
    )


def _weight(fit: Fit) -> Array:
    """Return the generalised least-squares weights of the readings at the best point, (K, 1)."""
    prediction = fit.model.predict(fit.ln_friction, np.zeros(len(fit.u)))
    return readings_weight(prediction.by_wall, prediction.by_error, fit.random_m)
