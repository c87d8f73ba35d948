"""What is found of a wall: its roughness, its C and its friction factor, each with two bands."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
State = Literal["measured", "upper limit", "no estimate"]
Span = tuple[float, float]


@dataclass(frozen=True, slots=True, kw_only=True)
class Band:
    """A result with its 95 % bands; every field is None when there is no estimate."""

    best: float | None
    """Best value; None for an upper limit too."""
    measurement: Span | None
    """95 % interval from measurement errors alone."""
    with_correlation: Span | None
    """95 % interval with the limit of friction correlations."""


@dataclass(frozen=True, slots=True, kw_only=True)
class BudgetEntry:
    """One error's share of the uncertainty."""

    error: str
    """The error, in trade words, such as "meter gain"."""
    share: float
    """Share in the variance of ln ε, correlation included [-]."""
    measurement_share: float
    """Share in the variance of ln C, which holds no correlation [-]."""
    standard: float
    """Standard uncertainty of f it causes on its own [-]."""
    pull: float
    """Its fitted value over its stated standard uncertainty [-]; 0 for random errors."""


@dataclass(frozen=True, slots=True, kw_only=True)
class MonteCarlo:
    """Cross-check of the intervals by propagating distributions (JCGM 101)."""

    draws: int
    """Number of draws."""
    seed: int
    """Seed of the generator."""
    friction_factor: Span
    """95 % interval of f from measurement errors alone [-]."""
    with_correlation: Span
    """95 % interval of the Colebrook-equivalent f with the correlation's limit [-]."""
    unconverged: int
    """Draws without a solution."""


@dataclass(frozen=True, slots=True, kw_only=True)
class PlateauValues:
    """Friction factor and C by their definitions, at each plateau used; K plateaus."""

    number: NDArray[np.int64]
    """(K,) plateau numbers."""
    flow_m3_s: Array
    """(K,) flow [m³/s]."""
    velocity_m_s: Array
    """(K,) mean velocity in the as-new bore [m/s]."""
    reynolds: Array
    """(K,) Reynolds number [-]."""
    temperature_degc: Array
    """(K,) temperature [°C]."""
    friction_loss_m: Array
    """(K,) head loss to friction, fittings taken off [m]."""
    friction_loss_standard_m: Array
    """(K,) its standard uncertainty, shared errors included [m]."""
    friction_factor: Array
    """(K,) Darcy friction factor [-]."""
    friction_factor_relative: Array
    """(K,) its relative standard uncertainty, shared errors included [-]."""
    friction_factor_random: Array
    """(K,) the random part of it alone [-]."""
    hazen_williams_c: Array
    """(K,) Hazen–Williams C [-]."""
    hazen_williams_relative: Array
    """(K,) its relative standard uncertainty [-]."""
    fitted_loss_m: Array
    """(K,) what the fit says the readings should have been: fittings and fitted shared errors included [m]."""
    residual: Array
    """(K,) reading less fit, over the random standard error [-]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Wall:
    """What one campaign says of one reach."""

    state: State
    """Measured, upper limit, or no estimate."""
    because: str
    """Why that state, as a sentence."""
    advice: str
    """What to do for an estimate, as a sentence; empty when there is one."""
    roughness_m: Band
    """Equivalent sand-grain roughness by Colebrook–White [m]."""
    hazen_williams_c: Band
    """Hazen–Williams C at `flow_m3_s` [-]."""
    friction_factor: Band
    """Darcy friction factor at `reynolds` [-]."""
    flow_m3_s: float
    """Flow the pooled values are for [m³/s]: the centre of the information."""
    velocity_m_s: float
    """Velocity at that flow in the as-new bore [m/s]."""
    reynolds: float
    """Reynolds number at that flow [-]."""
    temperature_degc: float
    """Temperature there [°C]."""
    viscosity_m2_s: float
    """Kinematic viscosity there [m²/s]."""
    smooth_friction_factor: float
    """Friction factor of a perfectly smooth wall there [-]."""
    reduced_chi_square: float | None
    """Reduced χ² of the fit; None without degrees of freedom."""
    degrees_of_freedom: int
    """Readings less one."""
    budget: tuple[BudgetEntry, ...]
    """Errors, largest share first."""
    plateaus: PlateauValues | None
    """Values at each plateau."""
    monte_carlo: MonteCarlo | None
    """Cross-check of the intervals."""
    other_laws: tuple[tuple[str, float | None], ...]
    """Roughness the same friction factor means under other laws [m], by published name; None where smooth."""
