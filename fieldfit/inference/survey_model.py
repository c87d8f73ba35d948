"""Head losses of a whole survey as the gauges would read them, with their slopes in everything unknown."""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.section import Correlation
from fieldfit.field.survey_readings import SurveyReadings
from fieldfit.hydraulics.friction import STANDARD_GRAVITY, smooth
from fieldfit.inference.friction_curve import TURBULENT_LAW_FROM, friction_curve, highest_ln_friction
from fieldfit.inference.survey_errors import SurveyErrors, survey_errors
from fieldfit.inference.survey_pipe import SurveyPipe, survey_pipe

Array = NDArray[np.float64]

PER_K = 8.0 / (np.pi**2 * STANDARD_GRAVITY)
"""V²/2g = PER_K Q²/D⁴ [s²/m]."""


class Prediction(NamedTuple):
    """What the gauges would read, and its slopes; J head losses, R reaches, M shared errors."""

    head_m: Array
    """(J,) fall of the piezometric head [m]."""
    by_wall: Array
    """(R, J) d head / d ln f of each reach at its reference [m]."""
    by_local: Array
    """(R, J) d head / d K of a local loss in each reach [m]."""
    by_branch: Array
    """(J,) d head / d the unknown side flow [m/(m³/s)]; zero when there is none."""
    by_error: Array
    """(M, J) d head / d u of each shared error [m]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class SurveyModel:
    """The head-loss equation of every reach of a survey."""

    readings: SurveyReadings
    """Readings it is for."""
    pipe: SurveyPipe
    """What lies between the taps."""
    errors: SurveyErrors
    """Their shared errors."""

    def predict(self, ln_friction: Array, u: Array, local_k: Array, branch_m3_s: float = 0.0) -> Prediction:
        """Return what the gauges would read.

        Parameters
        ----------
        ln_friction : (R,) array
            ln f of each reach at its reference [-].
        u : (M,) array
            Shared errors in standard deviations [-].
        local_k : (R,) array
            Local loss in each reach beside the stated fittings [-].
        branch_m3_s : float
            The unknown side flow [m³/s].

        Returns
        -------
        Prediction
        """
        pipe, errors = self.pipe, self.errors
        side = pipe.branch_m3_s + u @ errors.branch_m3_s
        if pipe.unknown_branch is not None:
            side[pipe.unknown_branch] = branch_m3_s
        metered = self.readings.flow_m3_s + u @ errors.flow_m3_s
        reach = pipe.stretch_reach
        flow = metered - (pipe.stretch_takes @ side)[:, None]
        bore = (pipe.bore_m * np.exp(u @ errors.ln_bore))[reach, None]
        length = (pipe.length_m * np.exp(u @ errors.ln_length))[reach] * pipe.stretch_share
        viscosity = self.readings.viscosity_m2_s * np.exp(u @ errors.ln_viscosity)
        per_k = PER_K * flow * np.abs(flow) / bore**4
        reynolds = np.maximum(4.0 * np.abs(flow) / (np.pi * bore * viscosity), TURBULENT_LAW_FROM)
        capped = np.minimum(ln_friction, highest_ln_friction(pipe.reference_reynolds))
        curve = friction_curve(capped[reach], reynolds.T, pipe.reference_reynolds[reach])
        off = np.exp((u @ errors.ln_friction).reshape(len(pipe.bore_m), -1))[reach]
        friction = curve.friction_factor.T * off * length[:, None] / bore * per_k
        loss_k = self._stretch_k(u, local_k)[:, None] * per_k
        parts = _Parts(flow, friction, friction * curve.slope_reynolds.T, loss_k, per_k)
        taps = self._velocity_heads(metered, side, u)
        return Prediction(
            head_m=self._fall(friction + loss_k) - self._drop(taps[0]) + u @ errors.head_m,
            by_wall=self._by_reach(friction * curve.slope_parameter.T),
            by_local=self._by_reach(per_k * self._first_stretch()[:, None]),
            by_branch=self._by_branch(parts, taps),
            by_error=self._by_error(parts, taps),
        )

    def _stretch_k(self, u: Array, local_k: Array) -> Array:
        """Return ΣK of each stretch; a local loss is put at the head of its reach."""
        pipe = self.pipe
        found = local_k[pipe.stretch_reach] * self._first_stretch()
        np.add.at(found, pipe.fitting_stretch, pipe.fitting_k + u @ self.errors.fitting_k)
        return np.asarray(found)

    def _first_stretch(self) -> Array:
        """Return 1 for the first stretch of each reach, else 0."""
        reach = self.pipe.stretch_reach
        return np.append(1.0, (reach[1:] != reach[:-1]).astype(np.float64))

    def _fall(self, of_stretch: Array) -> Array:
        """Add up a loss in each stretch, (…, S, K), over what lies between the taps of each reading, (…, J)."""
        readings, count = self.readings, len(self.pipe.bore_m)
        owner = (self.pipe.stretch_reach == np.arange(count)[:, None]).astype(np.float64)
        of_reach = owner @ of_stretch
        total = np.concatenate(
            [np.zeros((*of_reach.shape[:-2], 1, of_reach.shape[-1])), np.cumsum(of_reach, axis=-2)], -2
        )
        return np.asarray(total[..., readings.lower, readings.plateau] - total[..., readings.upper, readings.plateau])

    def _by_reach(self, of_stretch: Array) -> Array:
        """Return what each reach gives to each reading, (R, J)."""
        count = len(self.pipe.bore_m)
        chosen = (self.pipe.stretch_reach == np.arange(count)[:, None]).astype(np.float64)
        return self._fall(chosen[:, :, None] * of_stretch)

    def _drop(self, at_tap: Array) -> Array:
        """Return the difference from upper to lower tap of each reading, (…, T, K) to (…, J)."""
        readings = self.readings
        return np.asarray(at_tap[..., readings.upper, readings.plateau] - at_tap[..., readings.lower, readings.plateau])

    def _velocity_heads(self, metered: Array, side: Array, u: Array) -> tuple[Array, Array]:
        """Return velocity head [m] and flow [m³/s] at each tap, (T, K); a uniform pipe cancels later."""
        pipe = self.pipe
        flow = metered - (pipe.tap_takes @ side)[:, None]
        bore = pipe.tap_bore_m * np.exp(u @ self.errors.ln_bore)[pipe.tap_reach]
        return PER_K * flow**2 / bore[:, None] ** 4, flow

    def _by_flow(self, parts: _Parts) -> Array:
        """Return d loss / d flow of each stretch [m/(m³/s)]."""
        return np.asarray((2.0 * (parts.friction + parts.loss_k) + parts.by_reynolds) / parts.flow)

    def _by_branch(self, parts: _Parts, taps: tuple[Array, Array]) -> Array:
        """Return d head / d the unknown side flow, (J,)."""
        index = self.pipe.unknown_branch
        if index is None:
            return np.zeros(len(self.readings.head_m))
        heads, flow = taps
        by_stretch = -self.pipe.stretch_takes[:, index, None] * self._by_flow(parts)
        by_tap = -self.pipe.tap_takes[:, index, None] * 2.0 * heads / flow
        return self._fall(by_stretch) - self._drop(by_tap)

    def _by_error(self, parts: _Parts, taps: tuple[Array, Array]) -> Array:
        """Return d head / d u of each shared error, (M, J)."""
        pipe, errors, reach = self.pipe, self.errors, self.pipe.stretch_reach
        heads, tap_flow = taps
        flow = errors.flow_m3_s[:, None, :] - (errors.branch_m3_s @ pipe.stretch_takes.T)[:, :, None]
        at_tap = errors.flow_m3_s[:, None, :] - (errors.branch_m3_s @ pipe.tap_takes.T)[:, :, None]
        by_bore = 5.0 * parts.friction + 4.0 * parts.loss_k + parts.by_reynolds
        shape = errors.ln_friction.reshape(len(errors.names), len(pipe.bore_m), -1)
        k = np.zeros((len(errors.names), len(reach)))
        for index, stretch in enumerate(pipe.fitting_stretch):
            k[:, stretch] += errors.fitting_k[:, index]
        losses = (
            flow * self._by_flow(parts)
            - errors.ln_bore[:, reach, None] * by_bore
            + errors.ln_length[:, reach, None] * parts.friction
            - errors.ln_viscosity[:, :, None] * parts.by_reynolds
            + k[:, :, None] * parts.per_k
            + shape[:, reach] * parts.friction
        )
        velocity = at_tap * 2.0 * heads / tap_flow - 4.0 * errors.ln_bore[:, pipe.tap_reach, None] * heads
        return self._fall(losses) - self._drop(velocity) + errors.head_m


class _Parts(NamedTuple):
    """Flow and losses of each stretch at each plateau, (S, K) each."""

    flow: Array
    friction: Array
    by_reynolds: Array
    loss_k: Array
    per_k: Array


def survey_model(readings: SurveyReadings, limit: Correlation) -> SurveyModel:
    """Set up the equations of a survey.

    Parameters
    ----------
    readings : SurveyReadings
        What all taps say.
    limit : Correlation
        How far friction correlations can be trusted.

    Returns
    -------
    SurveyModel
    """
    pipe = survey_pipe(readings)
    start = SurveyModel(
        readings=readings, pipe=pipe, errors=survey_errors(readings, pipe, limit, np.zeros_like(pipe.middle_reynolds))
    )
    at = np.minimum(first_guess(start), highest_ln_friction(pipe.reference_reynolds))
    curve = friction_curve(at, pipe.middle_reynolds.T, pipe.reference_reynolds)
    tilt = curve.slope_parameter.T - 1.0
    return SurveyModel(readings=readings, pipe=pipe, errors=survey_errors(readings, pipe, limit, tilt))


def first_guess(model: SurveyModel) -> Array:
    """Return ln f at the reference that serves all reaches alike, from all head lost over all that smooth pipe would lose."""
    pipe, readings = model.pipe, model.readings
    at_smooth = np.log(smooth(pipe.reference_reynolds))
    nothing = np.zeros(len(pipe.bore_m))
    predicted = model.predict(at_smooth, np.zeros(len(model.errors.names)), nothing)
    friction = float(np.sum(predicted.by_wall))
    others = float(np.sum(predicted.head_m)) - friction
    ratio = (float(np.sum(readings.head_m)) - others) / friction
    return np.asarray(at_smooth + np.log(max(ratio, 1.0 + 1e-6)))
