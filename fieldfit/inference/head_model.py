"""Head loss of a reach as the gauges would read it, with its slopes in the wall and in every shared error."""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.readings import ReachReadings
from fieldfit.field.section import Correlation
from fieldfit.hydraulics.friction import STANDARD_GRAVITY, smooth
from fieldfit.inference.friction_curve import TURBULENT_LAW_FROM, friction_curve, highest_ln_friction
from fieldfit.inference.shared_errors import SharedErrors, shared_errors

Array = NDArray[np.float64]

FURTHEST_ERROR = 100.0
"""Standard deviations to which a shared error is followed: only a wild trial step goes beyond."""


class Reference(NamedTuple):
    """The point the pooled results are for: where the readings know most of the wall."""

    flow_m3_s: float
    """Flow [m³/s]."""
    reynolds: float
    """Reynolds number in the as-new bore [-]."""
    temperature_degc: float
    """Temperature [°C]."""
    viscosity_m2_s: float
    """Kinematic viscosity [m²/s]."""


class Prediction(NamedTuple):
    """What the gauges would read, and its slopes; K readings, M shared errors."""

    head_m: Array
    """(K,) head loss as read, fittings included [m]."""
    friction_m: Array
    """(K,) the part that friction makes [m]."""
    by_wall: Array
    """(K,) d head / d ln f at the reference [m]."""
    by_error: Array
    """(M, K) d head / d u of each shared error [m]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class HeadModel:
    """The head-loss equation of one reach, ready to be fitted.

    ``h = (f L/D + ΣK) 8 Q² / (π² g D⁴)``, with the shared errors acting on Q, D, L, ν, ΣK, f and on the reading of h.
    """

    readings: ReachReadings
    """Readings it is for; K of them."""
    errors: SharedErrors
    """Their shared errors; M of them."""
    reference: Reference
    """Where ln f is the wall's parameter."""

    def predict(self, ln_friction: float, u: Array) -> Prediction:
        """Return what the gauges would read.

        Parameters
        ----------
        ln_friction : float
            ln f at the reference [-].
        u : (M,) array
            Shared errors in standard deviations [-].

        Returns
        -------
        Prediction
        """
        readings, errors = self.readings, self.errors
        u = np.clip(u, -FURTHEST_ERROR, FURTHEST_ERROR)
        flow = readings.flow_m3_s + u @ errors.flow_m3_s
        bore = readings.bore.value * np.exp(u @ errors.ln_bore)
        length = readings.length.value * np.exp(u @ errors.ln_length)
        viscosity = readings.viscosity_m2_s * np.exp(u @ errors.ln_viscosity)
        loss_per_k = 8.0 * flow * np.abs(flow) / (np.pi**2 * STANDARD_GRAVITY * bore**4)
        reynolds = np.maximum(4.0 * np.abs(flow) / (np.pi * bore * viscosity), TURBULENT_LAW_FROM)
        curve = friction_curve(np.array([ln_friction]), reynolds, np.array([self.reference.reynolds]))
        friction_m = curve.friction_factor * np.exp(u @ errors.ln_friction) * length / bore * loss_per_k
        fitting_k = readings.fitting_k.value + u @ errors.fitting_k
        fittings_m = fitting_k * loss_per_k
        by_reynolds = friction_m * curve.slope_reynolds
        by_ln_flow = 2.0 * (friction_m + fittings_m) + by_reynolds
        by_error = (
            errors.flow_m3_s * (by_ln_flow / flow)
            - errors.ln_bore[:, None] * (5.0 * friction_m + 4.0 * fittings_m + by_reynolds)
            + errors.ln_length[:, None] * friction_m
            - errors.ln_viscosity[:, None] * by_reynolds
            + errors.fitting_k[:, None] * loss_per_k
            + errors.ln_friction * friction_m
            + errors.head_m
        )
        head = friction_m + fittings_m + u @ errors.head_m
        return Prediction(head, friction_m, friction_m * curve.slope_parameter, by_error)


def friction_by_definition(readings: ReachReadings) -> tuple[Array, Array]:
    """Return the head loss to friction [m] and the Darcy friction factor [-] at each reading, as defined.

    Fittings are taken off; nothing of a correlation is in it.
    """
    area = np.pi * readings.bore.value**2 / 4.0
    velocity_head = (readings.flow_m3_s / area) ** 2 / (2.0 * STANDARD_GRAVITY)
    friction_m = readings.head_loss_m - readings.fitting_k.value * velocity_head
    return friction_m, friction_m * readings.bore.value / (readings.length.value * velocity_head)


def reynolds_of(readings: ReachReadings) -> Array:
    """Return the Reynolds number of each reading in the as-new bore [-]."""
    return 4.0 * np.abs(readings.flow_m3_s) / (np.pi * readings.bore.value * readings.viscosity_m2_s)


def head_model(readings: ReachReadings, limit: Correlation) -> HeadModel:
    """Set up the equation of a reach and find the reference the pooled results are for.

    The reference is the mean of ln Q and ln Re, each reading weighted by what it says of f when nothing but its
    own noise and the shared errors of head are counted, so that it falls where the wall is known best.
    """
    ln_reynolds = np.log(reynolds_of(readings))
    nothing = np.zeros_like(ln_reynolds)
    noise = np.sqrt(readings.random_m**2 + np.sum(shared_errors(readings, limit, nothing, nothing).head_m ** 2, axis=0))
    # The expected loss, not the read one: a weight that grows with a reading's own error would bias the centre.
    area = np.pi * readings.bore.value**2 / 4.0
    expected = smooth(reynolds_of(readings)) * (readings.flow_m3_s / area) ** 2
    weight = (expected / np.maximum(noise, 1e-9 * np.max(np.abs(readings.head_loss_m)) + 1e-12)) ** 2
    weight = weight / np.sum(weight)
    centre = float(np.sum(weight * ln_reynolds))
    flow = float(np.exp(np.sum(weight * np.log(np.abs(readings.flow_m3_s)))))
    reference = Reference(
        flow_m3_s=flow,
        reynolds=float(np.exp(centre)),
        temperature_degc=float(np.sum(weight * readings.temperature_degc)),
        viscosity_m2_s=4.0 * flow / (np.pi * readings.bore.value * float(np.exp(centre))),
    )
    distance = (ln_reynolds - centre) / np.log(10.0)
    tilt = _tilt(readings, weight, reference)
    return HeadModel(readings=readings, errors=shared_errors(readings, limit, distance, tilt), reference=reference)


def _tilt(readings: ReachReadings, weight: Array, reference: Reference) -> Array:
    """Return how unlike ln f moves along the curve when the wall changes, near the wall the readings suggest [-]."""
    _, factor = friction_by_definition(readings)
    at_smooth = float(smooth(reference.reynolds))
    rough = max(float(weight @ factor), at_smooth * (1.0 + 1e-6))
    at = np.minimum(np.log([rough]), highest_ln_friction(np.array([reference.reynolds])))
    return friction_curve(at, reynolds_of(readings), np.array([reference.reynolds])).slope_parameter - 1.0
