"""The optional property library: what it knows by what name, and where that is a liquid."""

from __future__ import annotations

import re
from typing import Any

import numpy as np
from numpy.typing import NDArray

from fieldfit.errors import InputError, near_miss

ATMOSPHERE_PA = 101_325.0
"""Pressure the properties are taken at [Pa]."""
SOLUTIONS = {
    "ethylene glycol": "MEG",
    "propylene glycol": "MPG",
    "glycerol": "MGL",
    "calcium chloride": "MCA",
    "sodium chloride": "MNA",
    "magnesium chloride": "MMG",
    "potassium carbonate": "MKC",
    "potassium acetate": "MKA",
    "potassium formate": "MKF",
}
"""What may be dissolved in water by mass percent, and the library's code for it."""
GIVE_A_PAIR = 'Give { density = "…", viscosity = "…" } at the temperature in the pipe instead.'


def load(name: str) -> Any:
    """Return the CoolProp library, or say how to get it.

    Parameters
    ----------
    name : str
        The liquid it is wanted for.

    Raises
    ------
    InputError
        When it is not installed.
    """
    try:
        from CoolProp import CoolProp
    except ImportError:
        raise InputError(
            f"the properties of {name!r:.60} come from the CoolProp library, which is not installed",
            f'Run: pip install "fieldfit[liquids]". Or g{GIVE_A_PAIR[1:]}',
        ) from None
    return CoolProp


def code_of(name: str, library: Any) -> str:
    """Return what the library calls a pure liquid or a solution in water.

    Parameters
    ----------
    name : str
        "toluene", or "propylene glycol 30 %" by mass; capitals do not matter.
    library : module
        From `load`.

    Raises
    ------
    InputError
        For a name that is not matched exactly; the nearest one is suggested.
    """
    return _solution_code(name) or _pure_code(name, library)


def liquid_range_k(name: str, code: str, library: Any) -> tuple[float, float]:
    """Return between what temperatures [K] a fluid is liquid at atmospheric pressure.

    Raises
    ------
    InputError
        When it never is, or when the library has no viscosity for it.
    """
    try:
        if code.startswith("INCOMP::"):
            freezes = library.PropsSI("T_freeze", "T", 300.0, "P", ATMOSPHERE_PA, code)
            return max(freezes, library.PropsSI("Tmin", code)), library.PropsSI("Tmax", code)
        boils = library.PropsSI("T", "P", ATMOSPHERE_PA, "Q", 0, code)
        low = max(library.PropsSI("Tmin", code), library.PropsSI("Ttriple", code))
        library.PropsSI("V", "T", boils - 0.01, "P", ATMOSPHERE_PA, code)
    except ValueError as error:
        complaint = str(error).split(" : PropsSI")[0].rstrip(". ")
        raise InputError(
            f"the property library cannot give {name!r:.60} as a liquid at atmospheric pressure ({complaint})",
            GIVE_A_PAIR,
        ) from None
    return low, boils


def values_at(key: str, temperature_k: NDArray[np.float64], code: str, library: Any) -> NDArray[np.float64]:
    """Return a property at each temperature [K], NaN at a missing one.

    Parameters
    ----------
    key : str
        "D" for density [kg/m³], "V" for dynamic viscosity [Pa·s].
    temperature_k : (N,) array
        Temperatures [K].
    code : str
        From `code_of`.
    library : module
        From `load`.

    Raises
    ------
    InputError
        Where the library has no value.
    """
    known = np.isfinite(temperature_k)
    values = np.full(temperature_k.shape, np.nan)
    if not known.any():
        return values
    try:
        values[known] = library.PropsSI(key, "T", temperature_k[known], "P", ATMOSPHERE_PA, code)
    except ValueError:
        values[known] = np.inf  # it raises when every temperature fails, and gives inf where some do
    failed = temperature_k[np.isinf(values)]
    if failed.size:
        raise InputError(f"the property library has no value for {code} at {failed[0]:.6g} K", GIVE_A_PAIR)
    return values


def _solution_code(name: str) -> str | None:
    """Return the library's code for "propylene glycol 30 %", or None when the name has no percentage."""
    match = re.fullmatch(r"\s*(.+?)[\s,]+(\d+(?:\.\d+)?)\s*%\s*", name)
    if match is None:
        return None
    solute = " ".join(match[1].casefold().split())
    if solute not in SOLUTIONS:
        raise InputError(
            f"the solution {name!r:.60} is not known",
            f"{near_miss(solute, SOLUTIONS)}Known, with their percentage by mass: {', '.join(SOLUTIONS)}.",
        )
    return f"INCOMP::{SOLUTIONS[solute]}[{float(match[2]) / 100.0:.6g}]"


def _pure_code(name: str, library: Any) -> str:
    """Return the library's own name of a pure liquid, matched exactly or by one of its aliases."""
    known: dict[str, str] = {}
    for fluid in library.get_global_param_string("FluidsList").split(","):
        for alias in (fluid, *library.get_fluid_param_string(fluid, "aliases").split(",")):
            known.setdefault(alias.strip().casefold(), fluid)
    known.pop("", None)  # a fluid without an alias lists an empty one
    wanted = name.strip().casefold()
    if wanted in SOLUTIONS:
        raise InputError(
            f"{name!r:.60} has no percentage", f'Give the percentage by mass in water, such as "{wanted} 30 %".'
        )
    code = known.get(wanted)
    if code is None:
        raise InputError(
            f"the property library knows no fluid {name!r:.60}",
            f"{near_miss(name, sorted(set(known.values()) | set(SOLUTIONS)))}"
            f'Name a pure liquid ("toluene") or a solution by mass ("propylene glycol 30 %"). {GIVE_A_PAIR}',
        )
    return code
