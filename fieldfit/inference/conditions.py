"""Under what conditions a reach was, or could be, read: flows, errors that all readings share, and the correlation's."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.readings import ReachReadings
from fieldfit.field.section import Correlation
from fieldfit.hydraulics.friction import STANDARD_GRAVITY
from fieldfit.inference.head_model import reynolds_of
from fieldfit.inference.shared_errors import shared_errors

Array = NDArray[np.float64]

SHAPES = 4
"""Terms of the correlation's error along Re: level, slope, bend, and one more."""
MOST = 16
"""Most readings that rival explanations are compared on; more are pooled, neighbours in flow together."""
POOLING_EXPONENT = 1.9
"""Power of the flow by which a reading is carried to its neighbours' mean flow."""
FINEST = (2e-4, 1e-4)
"""Noise below which no head loss is believed: share of the reading [-], and [m]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Conditions:
    """K readings of one reach without their head losses; S shared errors."""

    names: tuple[str, ...]
    """(S,) names of the shared errors."""
    flow_m3_s: Array
    """(K,) flow as metered [m³/s]."""
    viscosity_m2_s: Array
    """(K,) kinematic viscosity [m²/s]."""
    bore_m: float
    """As-new bore [m]."""
    length_m: float
    """Length [m]."""
    fitting_k: float
    """Sum of the known loss coefficients [-]."""
    velocity_meter: bool
    """Whether the meter senses velocity, so that its flow is wrong where the bore is."""
    flow_errors_m3_s: Array
    """(S, K) change of the true flow by one standard deviation of each shared error [m³/s]."""
    head_errors_m: Array
    """(S, K) change of the head loss as read [m]."""
    ln_bore: Array
    """(S,) change of ln bore [-]."""
    ln_length: Array
    """(S,) change of ln length [-]."""
    ln_viscosity: Array
    """(S,) change of ln viscosity [-]."""
    fitting_errors_k: Array
    """(S,) change of ΣK [-]."""
    correlation: Array
    """(SHAPES, K) change of ln f by each term of the correlation's error [-]."""
    limit: Correlation
    """The correlation's limit."""
    centre_reynolds: float
    """Reynolds number its error is expanded about [-]."""

    def at(self, flow_m3_s: Array) -> Conditions:
        """Return the conditions at other flows, which may be zero: errors are carried from the nearest flows tested."""
        order = np.argsort(self.flow_m3_s)
        known, wanted = self.flow_m3_s[order], np.asarray(flow_m3_s, dtype=np.float64)
        beyond = wanted / np.clip(wanted, known[0], known[-1])
        viscosity = np.interp(wanted, known, self.viscosity_m2_s[order])
        reynolds = 4.0 * np.maximum(wanted, 1e-12) / (np.pi * self.bore_m * viscosity)
        return replace(
            self,
            flow_m3_s=wanted,
            viscosity_m2_s=viscosity,
            flow_errors_m3_s=_carried(self.flow_errors_m3_s[:, order], known, wanted)
            * np.where(_grows(self.flow_errors_m3_s[:, order], known)[:, None], beyond, 1.0),
            head_errors_m=_carried(self.head_errors_m[:, order], known, wanted),
            correlation=correlation_terms(reynolds, self.centre_reynolds, self.limit),
        )


def _carried(rows: Array, known: Array, wanted: Array) -> Array:
    """Interpolate rows of errors in the flow, constant beyond the ends."""
    return np.array([np.interp(wanted, known, row) for row in rows]).reshape(len(rows), len(wanted))


def _grows(rows: Array, known: Array) -> NDArray[np.bool_]:
    """Return which errors go with the flow itself, as a meter's gain does."""
    return np.asarray(np.all(np.abs(rows * known[-1] - rows[:, -1:] * known) <= 1e-9 * known[-1] ** 2, axis=1))


def correlation_terms(reynolds: Array, centre: float, limit: Correlation) -> Array:
    """Return the terms of the correlation's error, one shared smooth function of ln Re.

    They are the leading terms of a squared-exponential process: of the same standard deviation everywhere, keeping
    together over `limit.decades`.

    Parameters
    ----------
    reynolds : (K,) array
        Reynolds numbers [-].
    centre : float
        Where they are expanded about [-].
    limit : Correlation
        Size and range of the error.

    Returns
    -------
    (SHAPES, K) array
        Change of ln f by one standard deviation of each [-].

    Examples
    --------
    >>> terms = correlation_terms(np.array([1e4, 1e5, 1e6]), 1e5, Correlation())
    >>> np.sqrt(np.sum(terms**2, axis=0)).round(4).tolist()
    [0.05, 0.05, 0.05]
    """
    # The limit is one on turbulent friction; far below the readings it must not run away with the expansion.
    distance = np.clip(np.log10(reynolds / centre) / limit.decades, -2.0, 2.0)
    terms = [limit.standard * np.exp(-0.5 * distance**2)]
    for order in range(1, SHAPES):
        terms.append(terms[-1] * distance / np.sqrt(float(order)))
    return np.array(terms)


def conditions_of(readings: ReachReadings, limit: Correlation) -> Conditions:
    """Return the conditions of a reach's readings.

    Parameters
    ----------
    readings : ReachReadings
        K readings.
    limit : Correlation
        How far friction correlations can be trusted.

    Returns
    -------
    Conditions
    """
    nothing = np.zeros(len(readings.flow_m3_s))
    errors = shared_errors(readings, limit, nothing, nothing)
    reynolds = reynolds_of(readings)
    centre = float(np.exp(np.mean(np.log(reynolds))))
    return Conditions(
        names=errors.names,
        flow_m3_s=readings.flow_m3_s,
        viscosity_m2_s=readings.viscosity_m2_s,
        bore_m=readings.bore.value,
        length_m=readings.length.value,
        fitting_k=readings.fitting_k.value,
        velocity_meter=readings.meter.senses == "velocity",
        flow_errors_m3_s=errors.flow_m3_s,
        head_errors_m=errors.head_m,
        ln_bore=errors.ln_bore,
        ln_length=errors.ln_length,
        ln_viscosity=errors.ln_viscosity,
        fitting_errors_k=errors.fitting_k,
        correlation=correlation_terms(reynolds, centre, limit),
        limit=limit,
        centre_reynolds=centre,
    )


def pooled(readings: ReachReadings, most: int = MOST) -> ReachReadings:
    """Return readings with neighbours in flow averaged until there are no more than `most`.

    Each is first carried to the mean flow of its group, so that the curve's bend does no harm.

    Parameters
    ----------
    readings : ReachReadings
        K readings.
    most : int
        How many to keep.

    Returns
    -------
    ReachReadings
        The same when there are no more.
    """
    count = len(readings.flow_m3_s)
    if count <= most:
        return readings
    groups = np.array_split(np.argsort(readings.flow_m3_s, kind="stable"), most)
    noise = noise_of(readings)
    weights = [1.0 / noise[rows] ** 2 / np.sum(1.0 / noise[rows] ** 2) for rows in groups]

    def mean(values: Array) -> Array:
        return np.array([values[rows] @ weight for rows, weight in zip(groups, weights, strict=True)])

    flow = mean(readings.flow_m3_s)
    of_group = np.empty(count)
    for rows, centre in zip(groups, flow, strict=True):
        of_group[rows] = (centre / readings.flow_m3_s[rows]) ** POOLING_EXPONENT
    return replace(
        readings,
        number=np.array([readings.number[rows[0]] for rows in groups]),
        flow_m3_s=flow,
        head_loss_m=mean(readings.head_loss_m * of_group),
        random_m=np.array([np.sum(1.0 / noise[rows] ** 2) ** -0.5 for rows in groups]),
        pressure_pa=np.array([mean(row) for row in readings.pressure_pa]),
        temperature_degc=mean(readings.temperature_degc),
        density_kg_m3=mean(readings.density_kg_m3),
        viscosity_m2_s=mean(readings.viscosity_m2_s),
    )


def noise_of(readings: ReachReadings) -> Array:
    """Return the random standard error of each reading [m], with a floor under what is claimed too fine."""
    share, least = FINEST
    return np.sqrt(readings.random_m**2 + (share * readings.head_loss_m) ** 2 + least**2)


def typical_weight(readings: ReachReadings) -> Array:
    """Return the weight of the liquid at each reading, ρg [Pa/m]."""
    return np.asarray(readings.density_kg_m3 * STANDARD_GRAVITY)
