"""A campaign's log as arrays, one element per row, before any row is judged."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.logger_clock import LoggerClock

AUDIT_HEADINGS = ("plateau", "set aside because")
"""Last headings of the list of rows that every assessment writes: by them it is told from a log."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Log:
    """The rows of one log in SI units; N rows, T taps.

    A value that is missing is NaN, and the row's `reason` says so.
    """

    file: str
    """File name, without its folder."""
    sha256: str
    """Hash of the file's bytes, so that the report can be tied to it."""
    kind: Literal["logger", "sheet"]
    """A time series, or a hand sheet with one row per flow and no time."""
    line: NDArray[np.int64]
    """(N,) line of the file that each row came from, counted from 1."""
    start: dt.datetime | None
    """Clock time of the first row, when it is known."""
    time_s: NDArray[np.float64]
    """(N,) seconds since the first row; the row number for a sheet."""
    flow_m3_s: NDArray[np.float64]
    """(N,) flow [m³/s], as the meter gave it."""
    pressure_pa: NDArray[np.float64]
    """(T, N) gauge pressure at each tap [Pa], taps in the section's order."""
    temperature_degc: NDArray[np.float64] | None
    """(N,) liquid temperature [°C]; None when the log has no such column."""
    flow_step_m3_s: float
    """Resolution: smallest step the flow column was written in [m³/s]."""
    pressure_step_pa: NDArray[np.float64]
    """(T,) resolution of each pressure column [Pa]."""
    reason: NDArray[np.str_]
    """(N,) why the row cannot be used already now; empty where it can."""
    assumed: tuple[str, ...] = ()
    """Sentences on what was assumed about the file (separator, units, clock)."""
    clocks: tuple[LoggerClock, ...] = ()
    """How the clocks of several loggers stood; none for a log of one logger."""
    rows_in_file: int | None = None
    """Rows of the file, where it was too long to keep more than some of them; None where all are here."""

    @property
    def rows(self) -> int:
        """Number of rows of the file."""
        return len(self.line) if self.rows_in_file is None else self.rows_in_file
