"""What is known of a test section before anyone looks at readings."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass, field
from pathlib import Path
from typing import Literal

from fieldfit.field.uncertain import Accuracy, Uncertain
from fieldfit.hydraulics.liquids import Liquid


@dataclass(frozen=True, slots=True, kw_only=True)
class Meter:
    """The flow meter: the `[flow]` table."""

    column: str
    """Heading in the log, without its unit."""
    accuracy: Accuracy
    """How far it may be off [m³/s]."""
    serial: str | None = None
    """Serial; campaigns that name the same meter share its error."""
    senses: Literal["volume", "velocity"] = "volume"
    """What it measures: a velocity meter computed its flow with the same bore."""
    unit: str | None = None
    """Unit that overrules the heading."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Tap:
    """One pressure tap and its gauge: a `[[tap]]` table."""

    column: str
    """Heading in the log, without its unit."""
    station: Uncertain
    """Distance along the pipe [m]."""
    elevation: Uncertain | None
    """Elevation of the gauge [m, any datum]; None when it was not surveyed."""
    accuracy: Accuracy
    """How far the gauge may be off [Pa]."""
    gauge: str | None = None
    """Serial of the gauge."""
    unit: str | None = None
    """Unit that overrules the heading."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Fitting:
    """A local loss between the taps: a `[[fitting]]` table."""

    name: str
    """As the user calls it."""
    k: Uncertain
    """Loss coefficient of one, on the velocity in the pipe [-]."""
    count: int = 1
    """How many there are."""
    station: float | None = None
    """Distance along the pipe [m], when it is known."""
    source: str = "given in the section file"
    """Where K comes from."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Campaign:
    """One day of testing: a `[[campaign]]` table."""

    date: dt.date | None
    """Day of the test."""
    log: Path
    """Its log."""
    cleaned: bool = False
    """Whether the pipe was cleaned since the campaign before."""
    meter: str | None = None
    """Serial of the meter used, when it differs from `[flow]`."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Correlation:
    """How far friction correlations can be trusted: the `[correlation]` table."""

    standard: float = 0.05
    """Standard uncertainty of f from a correlation [-]: the trade's ±10 % read as 95 %."""
    decades: float = 1.5
    """Range of Reynolds number over which its error keeps together [decades]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Section:
    """One test section, from its `section.toml`."""

    name: str
    """Printed name."""
    path: Path
    """The section file."""
    material: str | None
    """Material, exactly as the new-pipe table calls it; None when unknown."""
    installed: dt.date | None
    """Day of laying; None when unknown."""
    bore: Uncertain
    """As-new inside diameter [m]: the basis of ε/D and C."""
    bore_source: str
    """Where the bore comes from, such as "given in the section file" or the pipe schedule."""
    liquid: Liquid
    """What flows."""
    temperature: Uncertain | None
    """Temperature of the liquid [°C], used when the log has no such column."""
    temperature_standard: float
    """Standard uncertainty of the liquid's temperature [K]."""
    meter: Meter
    """The flow meter."""
    taps: tuple[Tap, ...]
    """Two taps or more, by station."""
    fittings: tuple[Fitting, ...] = ()
    """Local losses between the taps."""
    campaigns: tuple[Campaign, ...] = ()
    """Campaigns named in the file."""
    correlation: Correlation = field(default_factory=Correlation)
    """Limit of the friction correlation."""
    duty_flow_m3_s: float | None = None
    """Flow the pipe must carry [m³/s]."""
    screen_limits: tuple[tuple[str, float], ...] = ()
    """Limits of screens that the file changes, by name [SI]."""
    assumed: tuple[str, ...] = ()
    """Sentences on what the program assumed because the file is silent."""
