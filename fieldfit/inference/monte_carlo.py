"""Cross-check of the intervals: distributions propagated by Monte Carlo (JCGM 101)."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from fieldfit.inference.batch import Batch, solve_batch
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
    shapes = fit.model.errors.shapes
    limit = np.sqrt(3.0)
    u = np.array(
        [
            rng.uniform(-limit, limit, draws) if shape == "rectangular" else rng.standard_normal(draws)
            for shape in shapes
        ]
    ).reshape(len(shapes), draws)
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


def _span(ln_friction: Array) -> tuple[float, float]:
    """Return the 95 % interval of f from draws of its logarithm [-]."""
    if ln_friction.size == 0:
        return float("nan"), float("nan")
    low, high = np.exp(np.quantile(ln_friction, ENDS))
    return float(low), float(high)


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
    covariance = np.diag(fit.random_m**2) + prediction.by_error.T @ prediction.by_error
    weight = np.linalg.solve(covariance, prediction.by_wall)
    return np.asarray(weight[:, None] / np.sum(np.abs(weight)))
