"""Density and viscosity of what flows."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cache

import numpy as np
from numpy.typing import NDArray

from fieldfit.errors import InputError
from fieldfit.hydraulics import property_library
from fieldfit.hydraulics.property_library import GIVE_A_PAIR

Array = NDArray[np.float64]
Property = Callable[[NDArray[np.float64]], NDArray[np.float64]]
"""A property as a function of temperature [°C], array in, array of the same shape out."""

ZERO_DEGC_K = 273.15
"""0 °C [K]."""
PRESSURE_PA = 1.0e5
"""Pressure the properties of water are taken at [Pa]: IAPWS gives them for 0.1 MPa."""
WATER_RANGE_DEGC = (0.0, 100.0)
"""Where water is liquid at atmospheric pressure [°C]."""
_WATER_FIT_DEGC = (0.0, 99.6)  # at 0.1 MPa water boils at 99.61 °C; the last 0.4 K are carried on smoothly
LEAST_DENSITY_KG_M3 = 100.0
"""A density below this is a gas [kg/m³]; the lightest liquid a plant pipes in bulk is several times heavier."""
GREATEST_DENSITY_KG_M3 = 20_000.0
"""A density above this is a slip of units [kg/m³]: mercury has 13 500."""
KINEMATIC_LIMITS_M2_S = (1.0e-8, 1.0)
"""Kinematic viscosity that a liquid in a pipe can have [m²/s]: 0.01 cSt to 1 000 000 cSt."""
WATER_VISCOSITY_STANDARD = 0.005
"""Relative standard uncertainty of the viscosity of water [-]: IAPWS' 1 % for the liquid read as 95 %."""
PAIR_VISCOSITY_STANDARD = 0.02
"""Relative standard uncertainty of a viscosity from a data sheet [-]: an assumption."""
LIBRARY_VISCOSITY_STANDARD = 0.02
"""Relative standard uncertainty of a viscosity from the property library [-]: an assumption."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Liquid:
    """A liquid as functions of temperature, near atmospheric pressure."""

    name: str
    """Printed name, such as "water"."""
    source: str
    """Where the properties come from."""
    density_kg_m3: Property
    """Density [kg/m³] at a temperature [°C]."""
    viscosity_m2_s: Property
    """Kinematic viscosity [m²/s] at a temperature [°C]."""
    viscosity_standard: float
    """Relative standard uncertainty of the viscosity itself [-], temperature known."""


def water() -> Liquid:
    """Return liquid water at 0.1 MPa, 0 to 100 °C.

    Density is IAPWS-95, viscosity the IAPWS formulation of 2008, both computed by the `chemicals` library at 25
    temperatures and interpolated between them by one polynomial, which follows the library to 1e-12 and costs a long
    log no more than a short one. IAPWS puts the viscosity of the liquid at about 1 %; it is read as a 95 % limit.
    A missing temperature (NaN) gives NaN.

    Returns
    -------
    Liquid
        Its functions raise InputError where water is ice or steam at atmospheric pressure.

    References
    ----------
    IAPWS R6-95(2018), thermodynamic properties; IAPWS R12-08, viscosity; IAPWS SR6-08(2011), liquid water at 0.1 MPa.
    Huber, M. L. et al. (2009), "New international formulation for the viscosity of H2O", J. Phys. Chem. Ref. Data
    38(2), 101–125, doi:10.1063/1.3088050.

    Examples
    --------
    >>> import numpy as np
    >>> liquid = water()
    >>> np.round(liquid.density_kg_m3(np.array([5.0, 20.0])), 3)
    array([999.966, 998.207])
    >>> f"{liquid.viscosity_m2_s(np.array(20.0)):.4e}"
    '1.0034e-06'
    """
    return Liquid(
        name="water",
        source="IAPWS-95 density and IAPWS R12-08 viscosity at 0.1 MPa",
        density_kg_m3=_water_density,
        viscosity_m2_s=_water_viscosity,
        viscosity_standard=WATER_VISCOSITY_STANDARD,
    )


def fixed_pair(
    name: str, density_kg_m3: float, *, dynamic_pa_s: float | None = None, kinematic_m2_s: float | None = None
) -> Liquid:
    """Return a liquid of constant density and viscosity, as given on a data sheet.

    Parameters
    ----------
    name : str
        Printed name.
    density_kg_m3 : float
        Density [kg/m³].
    dynamic_pa_s, kinematic_m2_s : float, optional
        Dynamic viscosity [Pa·s] or kinematic viscosity [m²/s]: one of the two.

    Returns
    -------
    Liquid
        The same at any temperature; its viscosity carries an assumed 2 % standard uncertainty.

    Raises
    ------
    InputError
        For a gas, for a value no liquid has, and unless exactly one viscosity is given.

    Examples
    --------
    >>> import numpy as np
    >>> oil = fixed_pair("gear oil", 870.0, kinematic_m2_s=32e-6)
    >>> oil.viscosity_m2_s(np.array([15.0, 40.0]))
    array([3.2e-05, 3.2e-05])
    """
    if (dynamic_pa_s is None) == (kinematic_m2_s is None):
        raise InputError(
            f"the liquid {name!r:.60} needs one viscosity, dynamic or kinematic",
            'Give one, such as viscosity = "32 cSt".',
        )
    _refuse_density(name, density_kg_m3)
    kinematic = kinematic_m2_s if kinematic_m2_s is not None else (dynamic_pa_s or 0.0) / density_kg_m3
    low, high = KINEMATIC_LIMITS_M2_S
    if not low <= kinematic <= high:
        raise InputError(
            f"the viscosity of {name!r:.60} comes to {kinematic:.6g} m2/s, which no liquid in a pipe has",
            "Check the value and its unit: water has 1 cSt, gear oil some hundred.",
        )
    return Liquid(
        name=name,
        source="density and viscosity given in the section file",
        density_kg_m3=lambda temperature_degc: np.full(np.shape(temperature_degc), density_kg_m3),
        viscosity_m2_s=lambda temperature_degc: np.full(np.shape(temperature_degc), kinematic),
        viscosity_standard=PAIR_VISCOSITY_STANDARD,
    )


def from_library(name: str) -> Liquid:
    """Return a liquid from the CoolProp library, at atmospheric pressure.

    Parameters
    ----------
    name : str
        A pure liquid ("ethanol", "toluene") or a solution in water by mass ("propylene glycol 30 %").

    Returns
    -------
    Liquid
        Its functions raise InputError at a temperature where it is not liquid at atmospheric pressure. Its viscosity
        carries an assumed 2 % standard uncertainty.

    Raises
    ------
    InputError
        When the library is not installed, does not know the name, has no viscosity for it, or it is never liquid at
        atmospheric pressure.

    References
    ----------
    Bell, I. H. et al. (2014), "Pure and pseudo-pure fluid thermophysical property evaluation and the open-source
    thermophysical property library CoolProp", Ind. Eng. Chem. Res. 53(6), 2498–2508, doi:10.1021/ie4033999.
    """
    library = property_library.load(name)
    code = property_library.code_of(name, library)
    low_k, high_k = property_library.liquid_range_k(name, code, library)

    def property_at(key: str, temperature_degc: Array) -> Array:
        low_degc, high_degc = low_k - ZERO_DEGC_K, high_k - ZERO_DEGC_K
        _refuse_outside(name, temperature_degc, low_degc, high_degc, also=f"Is it under pressure? {GIVE_A_PAIR}")
        distinct, where = np.unique(np.asarray(temperature_degc, dtype=float), return_inverse=True)
        values = property_library.values_at(key, distinct + ZERO_DEGC_K, code, library)
        return values[where].reshape(np.shape(temperature_degc))

    return Liquid(
        name=name,
        source=f"CoolProp ({code}) at atmospheric pressure",
        density_kg_m3=lambda temperature_degc: property_at("D", temperature_degc),
        viscosity_m2_s=lambda temperature_degc: property_at("V", temperature_degc) / property_at("D", temperature_degc),
        viscosity_standard=LIBRARY_VISCOSITY_STANDARD,
    )


def _refuse_density(name: str, density_kg_m3: float) -> None:
    """Raise InputError for a density that no liquid has."""
    if not density_kg_m3 > 0.0 or density_kg_m3 > GREATEST_DENSITY_KG_M3:
        raise InputError(
            f"the density of {name!r:.60} is {density_kg_m3:.6g} kg/m3, which no liquid has",
            "Check the value and its unit: water has 998 kg/m3.",
        )
    if density_kg_m3 < LEAST_DENSITY_KG_M3:
        raise InputError(
            f"the density of {name!r:.60} is {density_kg_m3:.6g} kg/m3: that is a gas",
            "Only liquids can be assessed: water has 998 kg/m3, petrol about 740.",
        )


def _refuse_outside(name: str, temperature_degc: Array, low_degc: float, high_degc: float, also: str = "") -> None:
    """Raise InputError for the first temperature at which the liquid is none; NaN passes."""
    flat = np.ravel(np.asarray(temperature_degc, dtype=float))
    outside = flat[(flat < low_degc) | (flat > high_degc)]
    if outside.size:
        raise InputError(
            f"a temperature of {outside[0]:.6g} degC, but {name} is known as a liquid from {low_degc:.4g} to"
            f" {high_degc:.4g} degC at atmospheric pressure",
            f"Check the temperature and its unit. {also}".rstrip(),
        )


@cache
def _water_fit() -> tuple[Array, Array]:
    """Return Chebyshev coefficients of density [kg/m³] and of ln kinematic viscosity [m²/s]."""
    from chemicals.iapws import iapws95_rho
    from chemicals.viscosity import mu_IAPWS

    density_at: Callable[[float, float], float] = iapws95_rho
    nodes = np.polynomial.chebyshev.chebpts1(25)
    low, high = _WATER_FIT_DEGC
    kelvins = ZERO_DEGC_K + low + (high - low) * (nodes + 1.0) / 2.0
    density = np.array([density_at(float(kelvin), PRESSURE_PA) for kelvin in kelvins])
    dynamic = np.array([mu_IAPWS(float(t), float(rho)) for t, rho in zip(kelvins, density, strict=True)])
    fit = np.polynomial.chebyshev.chebfit
    return fit(nodes, density, 24), fit(nodes, np.log(dynamic / density), 24)


def _water_at(which: int, temperature_degc: Array) -> Array:
    """Return one of the two fits at the temperatures [°C]."""
    _refuse_outside("water", temperature_degc, *WATER_RANGE_DEGC)
    low, high = _WATER_FIT_DEGC
    place = 2.0 * (np.asarray(temperature_degc, dtype=float) - low) / (high - low) - 1.0
    return np.asarray(np.polynomial.chebyshev.chebval(place, _water_fit()[which]))


def _water_density(temperature_degc: Array) -> Array:
    """Return the density of water [kg/m³]."""
    return _water_at(0, temperature_degc)


def _water_viscosity(temperature_degc: Array) -> Array:
    """Return the kinematic viscosity of water [m²/s]."""
    return np.asarray(np.exp(_water_at(1, temperature_degc)))
