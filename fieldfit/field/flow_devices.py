"""Devices whose flow is worked out from a pressure: pitots at hydrant outlets, and constrictions in a pipe."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.uncertain import Accuracy, Uncertain

Array = NDArray[np.float64]
OUTLET_COEFFICIENTS = {"rounded": 0.90, "square": 0.80, "projecting": 0.70}
"""Discharge coefficient of a hydrant outlet by its inner edge (NFPA 291)."""
COEFFICIENT_LIMIT = 0.05
"""Limit of an outlet's coefficient that nothing is said of, as a share of it."""
PSI = 6894.757293168361
PUMPER_FACTORS = ((2.0, 0.97), (3.0, 0.92), (4.0, 0.89), (5.0, 0.86), (6.0, 0.84), (7.0, 0.83))
"""Further factor of a large pumper outlet by pitot pressure [psi] (NFPA 291)."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Outlet:
    """A hydrant outlet with its pitot: an `[[outlet]]` table."""

    column: str
    """Heading of the pitot pressure in the log, without its unit."""
    diameter: Uncertain
    """Inside diameter of the outlet [m]."""
    coefficient: Uncertain
    """Discharge coefficient [-]."""
    accuracy: Accuracy
    """How far the pitot gauge may be off [Pa]."""
    pumper: bool = False
    """Whether it is a large pumper outlet, with its further factor."""
    unit: str | None = None
    """Unit that overrules the heading."""


def pitot_flow(pressure_pa: Array, outlet: Outlet, density_kg_m3: float = 999.1) -> Array:
    """Return the flow out of a hydrant outlet from its pitot pressure.

    ``Q = c π d²/4 √(2p/ρ)``, with the further factor of a pumper outlet by its pitot pressure [1]_. A pressure the
    gauge cannot tell from none (twice its fixed error) is no flow.

    Parameters
    ----------
    pressure_pa : (N,) array
        Pitot pressure [Pa].
    outlet : Outlet
        The outlet.
    density_kg_m3 : float
        Density of the water [kg/m³].

    Returns
    -------
    (N,) array
        Flow [m³/s]; NaN where the pressure is missing.

    References
    ----------
    .. [1] NFPA 291, Recommended practice for water flow testing and marking of hydrants:
       Q [gpm] = 29.84 c d² √p, d in inches, p in psi.

    Examples
    --------
    >>> exact = Uncertain(value=0.9, standard=0.0)
    >>> two_and_a_half = Outlet(column="pitot", diameter=Uncertain(value=0.0635, standard=0.0), coefficient=exact,
    ...                         accuracy=Accuracy(text="0"))
    >>> gpm = 231 * 0.0254**3 / 60
    >>> round(float(pitot_flow(np.array([25 * PSI]), two_and_a_half)[0]) / gpm)
    839
    """
    blind = 2.0 * outlet.accuracy.fixed_at(np.zeros(1))[0]
    pressure = np.where(pressure_pa > blind, pressure_pa, np.where(np.isnan(pressure_pa), np.nan, 0.0))
    area = np.pi * outlet.diameter.value**2 / 4.0
    return np.asarray(
        outlet.coefficient.value * pumper_factor(pressure, outlet) * area * np.sqrt(2.0 * pressure / density_kg_m3)
    )


def pumper_factor(pressure_pa: Array, outlet: Outlet) -> Array:
    """Return the further factor of a pumper outlet at each pitot pressure [-]; 1 for any other outlet."""
    if not outlet.pumper:
        return np.ones_like(pressure_pa)
    psi, factor = zip(*PUMPER_FACTORS, strict=True)
    return np.where(np.isnan(pressure_pa), np.nan, np.interp(np.nan_to_num(pressure_pa) / PSI, psi, factor))


def pitot_accuracy(outlets: tuple[Outlet, ...], density_kg_m3: float = 999.1) -> Accuracy:
    """Return how far the summed flow of several outlets may be off.

    Coefficient, diameter and the gauge's share of its reading make a gain; as outlets of one make err alike, their
    errors are not taken to cancel. A gauge's fixed error counts as the root of a pressure does: the less the flow, the
    more.

    Parameters
    ----------
    outlets : tuple of Outlet
        All outlets that flow together.
    density_kg_m3 : float
        Density of the water [kg/m³].

    Returns
    -------
    Accuracy
        Of the flow [m³/s].
    """
    factors = np.array([one.coefficient.value * np.pi * one.diameter.value**2 / 4.0 for one in outlets])
    factors = factors * np.sqrt(2.0 / density_kg_m3)
    gains = [
        np.sqrt(one.coefficient.relative**2 + (2.0 * one.diameter.relative) ** 2 + (one.accuracy.gain / 2.0) ** 2)
        for one in outlets
    ]
    fixed = max(one.accuracy.fixed for one in outlets)
    return Accuracy(
        text="pitot: " + "; ".join(one.accuracy.text for one in outlets),
        gain=float(factors @ np.array(gains) / np.sum(factors)),
        root=float(np.sum(factors)) ** 2 * fixed / 2.0,
    )


def flow_at_residual(flow_m3_s: float, static_pa: float, residual_pa: float, wanted_pa: float) -> float:
    """Return the flow that would leave another residual pressure, from one hydrant test.

    ``Q₂ = Q₁ (P_s − P_wanted)^0.54 / (P_s − P_residual)^0.54`` (NFPA 291).

    Parameters
    ----------
    flow_m3_s : float
        Flow of the test [m³/s].
    static_pa, residual_pa, wanted_pa : float
        Pressure at rest, during the test, and the one asked for [Pa].

    Returns
    -------
    float
        Flow [m³/s].

    Raises
    ------
    ValueError
        When the pressure did not fall during the test, or the one asked for is above the static.

    Examples
    --------
    >>> round(flow_at_residual(800.0, 65.0, 50.0, 20.0), 1)
    1447.9
    """
    if not static_pa > residual_pa or not static_pa >= wanted_pa:
        raise ValueError("the static pressure must be above the residual one and the one asked for")
    return float(flow_m3_s * ((static_pa - wanted_pa) / (static_pa - residual_pa)) ** 0.54)
