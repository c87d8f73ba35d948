"""Density and viscosity of what flows."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Property = Callable[[NDArray[np.float64]], NDArray[np.float64]]
"""A property as a function of temperature [°C], array in, array of the same shape out."""


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
