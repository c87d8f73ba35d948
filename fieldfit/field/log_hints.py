"""What the section file says of how its logs are written, where a log leaves it open."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from typing import Literal

DateOrder = Literal["day first", "month first", "year first"]
DATE_ORDERS: tuple[DateOrder, ...] = ("day first", "month first", "year first")
"""Orders of day, month and year in dates."""


@dataclass(frozen=True, slots=True, kw_only=True)
class LogHints:
    """The `[log]` table."""

    dates: DateOrder | None = None
    """Order of day, month and year in dates of figures only."""
    decimal: Literal[".", ","] | None = None
    """Decimal mark."""
    start: dt.datetime | None = None
    """Time of the first row, for a log without a clock."""
    interval_s: float | None = None
    """Time from row to row [s], for a log without a clock."""
    sheet: str | None = None
    """Sheet of a workbook."""
    barometer_pa: float | None = None
    """Pressure of the air during the test [Pa]."""
    barometer_column: str | None = None
    """Heading of the pressure of the air."""
