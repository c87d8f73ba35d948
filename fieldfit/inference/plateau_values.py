"""Friction factor and Hazen–Williams C at each plateau, by their definitions, with their uncertainties."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from fieldfit.hydraulics.friction import STANDARD_GRAVITY
from fieldfit.hydraulics.hazen_williams import c_from_friction_factor
from fieldfit.inference.fit import Fit
from fieldfit.inference.head_model import HeadModel, friction_by_definition, reynolds_of
from fieldfit.inference.wall import PlateauValues

Array = NDArray[np.float64]

NO_LOSS_M = 1e-12
"""Head loss that stands for none where a relative uncertainty is asked for [m]."""


class _Effects(NamedTuple):
    """What one standard deviation of each shared error does to the values by definition; (M, K) each."""

    friction_m: Array
    ln_friction_factor: Array
    ln_c: Array


def plateau_values(model: HeadModel, fit: Fit | None = None) -> PlateauValues:
    """Work out each plateau on its own; no correlation is in the values.

    The uncertainties hold every shared error but those of the correlation, so they are not independent
    between plateaus.

    Parameters
    ----------
    model : HeadModel
        The equation with its readings; K plateaus.
    fit : Fit, optional
        Gives what the readings should have been; without it residuals are zero.

    Returns
    -------
    PlateauValues
        C is NaN where the friction loss is not positive.
    """
    readings = model.readings
    friction_m, factor = friction_by_definition(readings)
    bore = readings.bore.value
    random = fit.random_m if fit else readings.random_m
    random_relative = random / np.maximum(np.abs(friction_m), NO_LOSS_M)
    effects = _effects(model, friction_m)
    positive = np.where(factor > 0.0, factor, np.nan)
    fitted = fit.model.predict(fit.ln_friction, fit.u).head_m if fit else readings.head_loss_m
    return PlateauValues(
        number=readings.number,
        flow_m3_s=readings.flow_m3_s,
        velocity_m_s=readings.flow_m3_s / (np.pi * bore**2 / 4.0),
        reynolds=reynolds_of(readings),
        temperature_degc=readings.temperature_degc,
        friction_loss_m=friction_m,
        friction_loss_standard_m=_together(effects.friction_m, random),
        friction_factor=factor,
        friction_factor_relative=_together(effects.ln_friction_factor, random_relative),
        friction_factor_random=random_relative,
        hazen_williams_c=np.asarray(c_from_friction_factor(positive, readings.flow_m3_s, bore)),
        hazen_williams_relative=_together(effects.ln_c, 0.54 * random_relative),
        fitted_loss_m=fitted,
        residual=(readings.head_loss_m - fitted) / random,
    )


def _together(shared: Array, random: Array) -> Array:
    """Add independent parts in quadrature, (M, K) and (K,) to (K,)."""
    return np.asarray(np.sqrt(random**2 + np.sum(shared**2, axis=0)))


def _effects(model: HeadModel, friction_m: Array) -> _Effects:
    """Propagate the shared errors through the definitions.

    ln f = ln h − 2 ln Q + 5 ln D − ln L and ln C = ln Q − 2.63 ln D − 0.54 (ln h − ln L), each up to a constant,
    where h is what is left of the head loss when the fittings are taken off.
    """
    readings, errors = model.readings, model.errors
    velocity_head = 8.0 * readings.flow_m3_s**2 / (np.pi**2 * STANDARD_GRAVITY * readings.bore.value**4)
    fittings_m = readings.fitting_k.value * velocity_head
    ln_flow = errors.flow_m3_s / readings.flow_m3_s
    ln_bore, ln_length = errors.ln_bore[:, None], errors.ln_length[:, None]
    own = errors.head_m - errors.fitting_k[:, None] * velocity_head
    ln_loss = (own - fittings_m * (2.0 * ln_flow - 4.0 * ln_bore)) / np.maximum(np.abs(friction_m), NO_LOSS_M)
    return _Effects(
        friction_m=own,
        ln_friction_factor=ln_loss - 2.0 * ln_flow + 5.0 * ln_bore - ln_length,
        ln_c=ln_flow - 2.63 * ln_bore - 0.54 * (ln_loss - ln_length),
    )
