"""What is known of a test section before anyone looks at readings."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass, field
from pathlib import Path
from typing import Literal

from fieldfit.field.constrictions import Throat
from fieldfit.field.contract import Contract
from fieldfit.field.differential import Differential
from fieldfit.field.flow_devices import Outlet
from fieldfit.field.log_hints import LogHints
from fieldfit.field.logger_clock import Logger
from fieldfit.field.outlook import Changes, Outlook
from fieldfit.field.raw_signal import RawSignal
from fieldfit.field.uncertain import Accuracy, Uncertain
from fieldfit.field.wishes import Wishes
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
    signal: RawSignal | None = None
    """Raw signal that its column holds; None for readings."""
    totaliser: bool | None = None
    """Whether its column counts on from row to row; None where the log shows it."""
    pulse_m3: float | None = None
    """Volume of one pulse [m³]; None where the column counts no pulses."""
    outlets: tuple[Outlet, ...] = ()
    """Hydrant outlets whose pitot pressures the flow is summed from; none for any other device."""
    throat: Throat | None = None
    """Constriction whose pressure difference the column holds; None for any other device."""


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
    signal: RawSignal | None = None
    """Raw signal that its column holds; None for readings."""


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
    """Its log; the first file where several loggers have one each."""
    parts: tuple[Path, ...] = ()
    """Files of its other loggers."""
    cleaned: bool = False
    """Whether the pipe was cleaned since the campaign before."""
    meter: str | None = None
    """Serial of the meter used, when it differs from `[flow]`."""
    changes: Changes = field(default_factory=Changes)
    """What else changed since the campaign before."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Correlation:
    """How far friction correlations can be trusted: the `[correlation]` table."""

    standard: float = 0.05
    """Standard uncertainty of f from a correlation [-]: the trade's ±10 % read as 95 %."""
    decades: float = 1.5
    """Range of Reynolds number over which its error keeps together [decades]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class ReachPipe:
    """Pipe of one reach where it differs from the section's: a `[[reach]]` table."""

    upper: str
    """Column of the tap at its upper end."""
    lower: str
    """Column of the tap at its lower end."""
    bore: Uncertain
    """As-new inside diameter [m]."""
    bore_source: str
    """Where the bore comes from."""
    material: str | None
    """Material, as the new-pipe table calls it; None when unknown."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Branch:
    """A side flow along the section: a `[[branch]]` table."""

    name: str
    """As the user calls it."""
    station: float
    """Distance along the pipe [m]."""
    flow: Uncertain | None
    """Flow that leaves there [m³/s], negative where water comes in; None when it is to be inferred."""


@dataclass(frozen=True, slots=True, kw_only=True)
class BoreEvidence:
    """What something other than friction says of the bore today: a `[[bore_evidence]]` table."""

    kind: Literal["coupon", "calliper", "gauge plate", "tracer", "laminar flow"]
    """How it was found; each sees its own kind of average."""
    bore: Uncertain
    """Bore it gives [m]."""
    date: dt.date | None = None
    """Day it was found."""
    between: tuple[str, str] | None = None
    """Columns of the taps it holds between; None for the whole section."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Deposit:
    """What is known of a deposit beforehand: the `[deposit]` table."""

    density_kg_m3: Uncertain | None = None
    """Density of the deposit as it sits in the pipe, water included [kg/m³]."""
    variation: float = 0.3
    """How unevenly it lies: relative standard deviation of its thickness along the reach [-]."""


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
    outlook: Outlook = field(default_factory=Outlook)
    """What is known of the water and asked of the years ahead."""
    duty_flow_m3_s: float | None = None
    """Flow the pipe must carry [m³/s]."""
    reach_pipes: tuple[ReachPipe, ...] = ()
    """Reaches whose pipe differs from the section's."""
    branches: tuple[Branch, ...] = ()
    """Side flows, by station."""
    meter_station_m: float | None = None
    """Where the meter stands along the pipe [m]; None for upstream of every branch."""
    bore_evidence: tuple[BoreEvidence, ...] = ()
    """What something other than friction says of the bore."""
    deposit: Deposit = field(default_factory=Deposit)
    """What is known of a deposit."""
    differential: Differential | None = None
    """One transmitter between the two taps instead of two gauges; the taps then stand for it."""
    loggers: tuple[Logger, ...] = ()
    """What is said of loggers' clocks."""
    wave_speed_m_s: float | None = None
    """Speed of a pressure wave along the pipe [m/s]; None where nothing is said."""
    log_hints: LogHints = field(default_factory=LogHints)
    """How its logs are written."""
    screen_limits: tuple[tuple[str, float], ...] = ()
    """Limits of screens that the file changes, by name [SI]."""
    screen_mode: Literal["plateaus", "service"] | None = None
    """How logs are to be read; None to decide by rule."""
    contract: Contract | None = None
    """What a contract asks of the pipe."""
    wishes: Wishes | None = None
    """What is wanted of a test still to be made."""
    assumed: tuple[str, ...] = ()
    """Sentences on what the program assumed because the file is silent."""
