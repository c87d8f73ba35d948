"""What is known of a quantity or of an instrument: its value and how far it may be off."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

Shape = Literal["rectangular", "normal"]
"""Distribution of an error: a limit is rectangular (GUM 4.3.7), a coverage factor or level means normal."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Uncertain:
    """A value in SI units with its standard uncertainty."""

    value: float
    """Value [SI]."""
    standard: float
    """Standard uncertainty [SI, same unit]; zero means exactly known."""
    shape: Shape = "rectangular"
    """Distribution of the error."""
    assumed: bool = False
    """Whether the uncertainty is this program's default and not the user's word."""

    @property
    def relative(self) -> float:
        """Standard uncertainty over the value [-]."""
        return self.standard / abs(self.value)


@dataclass(frozen=True, slots=True, kw_only=True)
class Accuracy:
    """How far an instrument may be off, as standard uncertainties over its range."""

    text: str
    """As the user wrote it."""
    gain: float = 0.0
    """Part proportional to the reading: relative standard uncertainty [-]."""
    fixed: float = 0.0
    """Part that is the same over the range: standard uncertainty [SI]."""
    span: float | None = None
    """Range the fixed part was stated for [SI], if it was."""
    shape: Shape = "rectangular"
    """Distribution of the error."""
    middle_fixed: float | None = None
    """Fixed part in the middle third of the range [SI], for grades that promise less error there."""
    low_below: float = 0.0
    """Reading below which `low_gain` holds instead of `gain` [SI]."""
    low_gain: float = 0.0
    """Relative standard uncertainty of small readings [-]."""
    root: float = 0.0
    """For a flow that is a root of a pressure: its standard uncertainty by the pressure's fixed error, times the flow
    [SI²]."""

    def gain_at(self, reading: NDArray[np.float64]) -> NDArray[np.float64]:
        """Return the relative standard uncertainty at each reading [-], same shape."""
        gain = np.where(np.abs(reading) < self.low_below, self.low_gain, self.gain)
        if self.root == 0.0:
            return gain
        return np.hypot(gain, self.root / np.maximum(np.square(reading), self.root))

    def fixed_at(self, reading: NDArray[np.float64]) -> NDArray[np.float64]:
        """Return the fixed standard uncertainty at each reading [SI], same shape."""
        fixed = np.full(np.shape(reading), self.fixed)
        if self.middle_fixed is None or self.span is None:
            return fixed
        middle = (reading > self.span / 3.0) & (reading < 2.0 * self.span / 3.0)
        return np.where(middle, self.middle_fixed, fixed)

    def standard_at(self, reading: NDArray[np.float64]) -> NDArray[np.float64]:
        """Return the whole standard uncertainty at each reading [SI], same shape."""
        return np.hypot(self.gain_at(reading) * np.abs(reading), self.fixed_at(reading))
