"""Many sections at once: one wall each, solved together in one array.

Structure of arrays with sections along the last axis. Each section's estimate is the root of a weighted sum of
its residuals; with the weights of a generalised least-squares fit that is the same estimate as the full fit with
the shared errors linearised, at a small part of the cost.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldfit.hydraulics.friction import STANDARD_GRAVITY
from fieldfit.inference.friction_curve import TURBULENT_LAW_FROM, friction_curve, highest_ln_friction

Array = NDArray[np.float64]

STEPS = 30
TOLERANCE = 1e-10


@dataclass(frozen=True, slots=True, kw_only=True)
class Batch:
    """N sections with K readings each; every array broadcasts to (K, N) or (N,)."""

    flow_m3_s: Array
    """(K, N) flow [m³/s]."""
    head_loss_m: Array
    """(K, N) head loss, fittings included [m]."""
    bore_m: Array
    """(N,) bore [m]."""
    length_m: Array
    """(N,) length [m]."""
    viscosity_m2_s: Array
    """(K, N) kinematic viscosity [m²/s]."""
    fitting_k: Array
    """(N,) sum of loss coefficients [-]."""
    ln_friction_error: Array
    """(K, N) ln of the true f over the correlation's [-]."""
    reference_reynolds: Array
    """(N,) Reynolds number of the reference [-]."""

    def take(self, columns: NDArray[np.int64]) -> Batch:
        """Return the batch of some of the sections."""
        return Batch(**{name: getattr(self, name)[..., columns] for name in self.__slots__})


def solve_batch(batch: Batch, weight: Array, start: Array) -> tuple[Array, NDArray[np.bool_]]:
    """Find ln f at the reference of every section.

    Newton on ``Σ w (h − h_model) = 0``, each step limited to 1 in ln f; sections that are done leave the work.

    Parameters
    ----------
    batch : Batch
        N sections.
    weight : (K, 1) or (K, N) array
        Weights, of either sign [-].
    start : (N,) array
        First guess of ln f [-].

    Returns
    -------
    ln_friction : (N,) array
        ln f at the reference [-]; NaN where no root was found.
    converged : (N,) bool array
        Whether it was found.
    """
    ln_friction = start.astype(np.float64).copy()
    converged = np.zeros(len(start), dtype=np.bool_)
    weight = np.broadcast_to(weight, np.broadcast_shapes(weight.shape, batch.flow_m3_s.shape))
    left = np.arange(len(start))
    work, pull = batch, weight
    for _ in range(STEPS):
        step = _newton_step(work, pull, ln_friction[left])
        ln_friction[left] += np.clip(step, -1.0, 1.0)
        done = np.abs(step) < TOLERANCE
        converged[left[done]] = True
        going = np.flatnonzero(~done & np.isfinite(step))
        if going.size == 0:
            break
        if going.size < left.size:
            left, work, pull = left[going], work.take(going), pull[:, going]
    ln_friction[~converged] = np.nan
    return ln_friction, converged


def readings_weight(by_wall: Array, by_error: Array, noise_m: Array) -> Array:
    """Return generalised least-squares weights of readings, with shared errors made linear, (K, 1) [-].

    Parameters
    ----------
    by_wall : (K,) array
        d head / d ln f at the reference [m].
    by_error : (M, K) array
        d head / d u of each shared error [m].
    noise_m : (K,) array
        Random standard errors [m].

    Returns
    -------
    (K, 1) array
        Of unit absolute sum.
    """
    weight = np.linalg.solve(np.diag(noise_m**2) + by_error.T @ by_error, by_wall)
    return np.asarray(weight[:, None] / np.sum(np.abs(weight)))


def _newton_step(batch: Batch, weight: Array, ln_friction: Array) -> Array:
    """Return the Newton step of each section."""
    loss_per_k = 8.0 * batch.flow_m3_s * np.abs(batch.flow_m3_s) / (np.pi**2 * STANDARD_GRAVITY * batch.bore_m**4)
    reynolds = np.maximum(
        4.0 * np.abs(batch.flow_m3_s) / (np.pi * batch.bore_m * batch.viscosity_m2_s), TURBULENT_LAW_FROM
    )
    capped = np.minimum(ln_friction, highest_ln_friction(batch.reference_reynolds))
    curve = friction_curve(capped, reynolds, batch.reference_reynolds)
    scale = loss_per_k * batch.length_m / batch.bore_m * np.exp(batch.ln_friction_error)
    friction_m = curve.friction_factor * scale
    misfit = batch.head_loss_m - friction_m - batch.fitting_k * loss_per_k
    slope = np.sum(weight * friction_m * curve.slope_parameter, axis=0)
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.asarray(np.sum(weight * misfit, axis=0) / slope)
