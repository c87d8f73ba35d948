"""What changed between campaigns, and what is asked of the years ahead."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass, field

from fieldfit.field.uncertain import Accuracy, Uncertain


@dataclass(frozen=True, slots=True, kw_only=True)
class Changes:
    """What changed between the campaign before and this one."""

    cleaned_on: dt.date | None = None
    """Day of the cleaning, when it was written."""
    relined: bool = False
    """Whether the pipe was lined."""
    lining: str | None = None
    """Material of the lining, as the new-pipe table calls it."""
    bore: Uncertain | None = None
    """Bore after lining [m]."""
    length: Uncertain | None = None
    """Distance between the taps on that day, when they were elsewhere [m]."""
    valve: str | None = None
    """What was done to a valve or fitting; its loss is then a new one."""
    meter_accuracy: Accuracy | None = None
    """How far that campaign's own meter may be off [m³/s]."""
    gauges: tuple[tuple[str, str], ...] = ()
    """Column of the tap and serial of the gauge, where it was another one."""
    gauge_accuracy: Accuracy | None = None
    """How far those gauges may be off [Pa]."""
    recalibrated: tuple[str, ...] = ()
    """Serials of instruments that were calibrated anew since the campaign before."""
    promised_c: float | None = None
    """Hazen–Williams C that cleaning or lining was to reach [-]."""
    note: str | None = None
    """Anything else the reader should know."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Thresholds:
    """What the pipe must not fall short of: the `[threshold]` table."""

    c: float | None = None
    """Lowest Hazen–Williams C at the duty flow [-]."""
    head_loss_m: float | None = None
    """Largest head loss at the duty flow [m]."""
    capacity_m3_s: float | None = None
    """Smallest flow at the available head [m³/s]."""
    by: dt.date | None = None
    """Day that the probability of a crossing is wanted for."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Outlook:
    """What is known of the water and asked of the years ahead: `[water]`, `[growth]`, `[threshold]`, `[duty]`."""

    langelier: float | None = None
    """Langelier index of the water [-]."""
    ph: float | None = None
    """pH of the water [-]."""
    rate_m_year: Uncertain | None = None
    """The user's own growth rate of roughness [m/year]."""
    until: dt.date | None = None
    """Day the forecast reaches."""
    worse_by: float = 0.1
    """Rise of the head loss whose probability is printed [-]."""
    available_head_m: float | None = None
    """Head available over the section [m]."""
    thresholds: Thresholds = field(default_factory=Thresholds)
    """What the pipe must not fall short of."""
