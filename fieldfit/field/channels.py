"""What one file holds of a section's columns, on its own clock, in SI units."""

from __future__ import annotations

import datetime as dt
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class Channels:
    """The rows of one file: any of a section's columns, none judged but for missing values and the clock; N rows."""

    file: str
    """File name, without its folder."""
    sha256: str
    """Hash of the file's bytes."""
    kind: Literal["logger", "sheet"]
    """A time series, or a hand sheet with one row per flow and no time."""
    line: NDArray[np.int64]
    """(N,) line of the file that each row came from, counted from 1."""
    start: dt.datetime | None
    """Clock time of the first row, when it is known."""
    time_s: Array
    """(N,) seconds since the first row; the row number for a sheet; NaN where missing."""
    values: Mapping[str, Array]
    """(N,) flow [m³/s] or pressure [Pa] of each column, by its name in the section file; NaN where missing."""
    steps: Mapping[str, float]
    """Resolution of each of these columns [m³/s or Pa]; 0 when none can be seen."""
    temperature_degc: Array | None
    """(N,) liquid temperature [°C]; None when the file has no such column."""
    barometer_pa: Array | None = None
    """(N,) pressure of the air [Pa]; None when the file has no such column."""
    absolute: frozenset[str] = frozenset()
    """Columns whose pressures are absolute as they stand here, not yet over the air's."""
    reason: NDArray[np.str_]
    """(N,) why a row cannot be used already now; empty where it can."""
    assumed: tuple[str, ...] = ()
    """Sentences on what was assumed about the file."""
