"""What is known of a logger's clock, stated and found."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
How = Literal["reference", "given", "recovered", "agrees", "taken as equal"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Logger:
    """What the section file says of one logger: a `[[logger]]` table."""

    file: str | None = None
    """Its file; None where only columns are named."""
    columns: tuple[str, ...] = ()
    """Columns that it logged; none for all of its file's."""
    offset_s: float | None = None
    """How far its clock is ahead [s]; None when that is to be found."""
    drift: float | None = None
    """How fast its clock gains [s/s]; None when that may be found."""


@dataclass(frozen=True, slots=True, kw_only=True)
class LoggerClock:
    """How one logger's clock stood, and what was done about it."""

    file: str
    """Its file."""
    sha256: str
    """Hash of the file's bytes."""
    columns: tuple[str, ...]
    """Columns of the section it holds."""
    rows: int
    """Rows of the file."""
    how: How
    """Where its offset comes from."""
    offset_s: float
    """How far its clock is ahead, as it was taken off [s]."""
    best_s: float
    """How far ahead the readings alone put it [s]; the offset where they were not asked."""
    interval_s: tuple[float, float] | None = None
    """95 % interval of that [s]; None where the readings were not asked or cannot tell."""
    drift: float = 0.0
    """How fast its clock gains on the others, as it was taken off [s/s]."""
    drift_standard: float | None = None
    """Standard uncertainty of a drift that was looked for [s/s]."""
    because: str = ""
    """Why the readings cannot tell; empty where they can."""
    profile: tuple[Array, Array] | None = None
    """Lags tried [s], and the residual variance at each over the least [-]."""
    search: tuple[Array, Array] | None = None
    """Every lag searched [s], and the share of the pressures' variance left over [-]."""
