"""Head loss and C of a fitted reach at another flow and temperature, with what the readings say of them.

A head loss at a flow that was tested is a measurement: bore, length and friction factor may each be uncertain, yet
their errors cancel in it. So the uncertainty is taken from the fit's whole covariance, not put together from parts.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.section import Correlation
from fieldfit.hydraulics.friction import STANDARD_GRAVITY
from fieldfit.hydraulics.hazen_williams import c_from_head_loss
from fieldfit.inference.fit import Fit, covariance
from fieldfit.inference.friction_curve import friction_curve
from fieldfit.inference.head_model import reynolds_of

Array = NDArray[np.float64]

C_BY_LOSS = -0.54
"""d ln C / d ln of the head loss per length, by the exponents of Hazen–Williams."""
C_BY_BORE = -2.63
"""d ln C / d ln bore at a given head loss and flow."""


@dataclass(frozen=True, slots=True, kw_only=True)
class OperatingPoint:
    """What the pipe is asked for."""

    flow_m3_s: float
    """Flow [m³/s]."""
    viscosity_m2_s: float
    """Kinematic viscosity there [m²/s]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Predicted:
    """A value that is known by its logarithm."""

    value: float
    """Best value [SI]."""
    measurement: float
    """Relative standard uncertainty from the measurement alone [-]."""
    extrapolation: float
    """Relative standard uncertainty added because the flow lies outside those tested [-]; 0 within them."""

    @property
    def standard(self) -> float:
        """Relative standard uncertainty, both together [-]."""
        return float(np.hypot(self.measurement, self.extrapolation))


@dataclass(frozen=True, slots=True, kw_only=True)
class Loss:
    """A head loss at an operating point and the C it means, with or without fittings."""

    head_loss_m: Predicted
    """Head loss of the reach [m]."""
    per_length: Predicted
    """Head loss per length [-]."""
    hazen_williams_c: Predicted
    """C by the true bore, which is the as-new bore within its limit [-]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Prediction:
    """What a fitted reach does at an operating point."""

    friction: Loss
    """Friction alone."""
    whole: Loss
    """Fittings included."""
    flow_m3_s: float
    """Flow [m³/s]."""
    reynolds: float
    """Reynolds number [-]."""
    decades_outside: float
    """How far the Reynolds number lies outside those tested [decades]; 0 within them."""


def predict(fit: Fit, point: OperatingPoint, limit: Correlation, better: Array | None = None) -> Prediction:
    """Say what a fitted reach does at a flow.

    Within the flows tested the fit interpolates and the correlation's level does not enter. Outside them the
    correlation carries the curve on: its error is then the difference of a squared-exponential process between the
    end of the tested range and that flow.

    Parameters
    ----------
    fit : Fit
        The fitted reach.
    point : OperatingPoint
        Flow and viscosity asked for.
    limit : Correlation
        How far friction correlations can be trusted.
    better : (M + 1,) array, optional
        How many times smaller each shared error, and last the readings' noise, is to be taken.

    Returns
    -------
    Prediction
    """
    readings, errors = fit.model.readings, fit.model.errors
    bore = readings.bore.value * float(np.exp(fit.u @ errors.ln_bore))
    length = readings.length.value * float(np.exp(fit.u @ errors.ln_length))
    reynolds = 4.0 * point.flow_m3_s / (np.pi * bore * point.viscosity_m2_s)
    curve = friction_curve(np.array([fit.ln_friction]), np.array([reynolds]), np.array([fit.model.reference.reynolds]))
    shape = _shape_at(fit, reynolds)
    velocity_head = 8.0 * point.flow_m3_s**2 / (np.pi**2 * STANDARD_GRAVITY * bore**4)
    friction_m = float(curve.friction_factor[0] * np.exp(fit.u @ shape)) * length / bore * velocity_head
    whole_m = friction_m + (readings.fitting_k.value + float(fit.u @ errors.fitting_k)) * velocity_head
    # Slopes of ln head loss in the wall and in every shared error; the fittings' part goes with D⁻⁴ and K alone.
    friction = np.append(
        float(curve.slope_parameter[0]),
        shape - errors.ln_bore * (5.0 + float(curve.slope_reynolds[0])) + errors.ln_length,
    )
    fittings = np.append(0.0, errors.fitting_k * velocity_head - 4.0 * errors.ln_bore * (whole_m - friction_m))
    whole = (friction * friction_m + fittings) / whole_m
    outside = _outside(fit, reynolds)
    spread = _Spread(
        fit=fit,
        covariance=covariance(fit, better),
        bore_and_length_m=(bore, length),
        flow_m3_s=point.flow_m3_s,
        drift=limit.standard * float(np.sqrt(2.0 * (1.0 - np.exp(-0.5 * (outside / limit.decades) ** 2)))),
    )
    return Prediction(
        friction=spread.loss(friction_m, friction),
        whole=spread.loss(whole_m, whole),
        flow_m3_s=point.flow_m3_s,
        reynolds=reynolds,
        decades_outside=outside,
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class _Spread:
    """Turns a head loss and its slopes into values with uncertainties."""

    fit: Fit
    covariance: Array
    bore_and_length_m: tuple[float, float]
    flow_m3_s: float
    drift: float

    def loss(self, head_loss_m: float, slope: Array) -> Loss:
        """Return a head loss, per length, and as C; slopes are of its logarithm."""
        errors = self.fit.model.errors
        bore, length = self.bore_and_length_m
        per_length = slope - np.append(0.0, errors.ln_length)
        c = float(c_from_head_loss(self.flow_m3_s, head_loss_m, bore, length))
        return Loss(
            head_loss_m=self._of(head_loss_m, slope),
            per_length=self._of(head_loss_m / length, per_length),
            hazen_williams_c=self._of(c, C_BY_LOSS * per_length + C_BY_BORE * np.append(0.0, errors.ln_bore)),
        )

    def _of(self, value: float, slope: Array) -> Predicted:
        """Return a value with its uncertainties."""
        return Predicted(
            value=value,
            measurement=float(np.sqrt(slope @ self.covariance @ slope)),
            extrapolation=abs(float(slope[0])) * self.drift,
        )


def _shape_at(fit: Fit, reynolds: float) -> Array:
    """Return what one standard deviation of each shared error does to ln f at a Reynolds number, (M,) [-]."""
    tested = np.log(reynolds_of(fit.model.readings))
    order = np.argsort(tested)
    return np.array(
        [np.interp(np.log(reynolds), tested[order], row[order]) for row in fit.model.errors.ln_friction]
    ).reshape(len(fit.u))


def _outside(fit: Fit, reynolds: float) -> float:
    """Return how far a Reynolds number lies outside those tested [decades]."""
    tested = np.log10(reynolds_of(fit.model.readings))
    return max(
        0.0, float(np.min(tested)) - float(np.log10(reynolds)), float(np.log10(reynolds)) - float(np.max(tested))
    )
