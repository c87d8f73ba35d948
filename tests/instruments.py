"""What a crew knows of a section, measures with, and plans for the day."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal


@dataclass(frozen=True, slots=True, kw_only=True)
class Pipe:
    """The section as it is stated, and the roughness it truly has."""

    bore_m: float
    length_m: float
    roughness_m: float
    fitting_k: float = 0.0
    elevation_m: tuple[float, float] = (0.0, 0.0)
    temperature_degc: float = 12.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Limits:
    """How far what is stated of the section may be off."""

    bore: float = 0.005
    station_m: float = 0.05
    elevation_m: float = 0.02
    fitting_k: float = 0.2
    temperature_k: float = 0.5


@dataclass(frozen=True, slots=True, kw_only=True)
class Gauge:
    """A pressure gauge; both taps have one of the kind."""

    full_scale_pa: float
    limit: float
    """Fraction of full scale."""
    step_pa: float
    noise_pa: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Meter:
    """A flow meter."""

    limit: float
    """Fraction of the reading, or of the span where there is one."""
    step_m3_s: float
    span_m3_s: float | None = None
    senses: Literal["volume", "velocity"] = "volume"
    noise: float = 0.003


@dataclass(frozen=True, slots=True, kw_only=True)
class Kit:
    """Everything the crew measures with."""

    gauge: Gauge
    meter: Meter
    limits: Limits = Limits()


@dataclass(frozen=True, slots=True, kw_only=True)
class Plan:
    """How the day runs: static, flows one after another, static."""

    flows_m3_s: tuple[float, ...]
    supply_pa: float
    """Upstream pressure at rest."""
    statics: Literal["both", "before", "none"] = "both"
    source_loss_pa: float = 0.0
    """How far the upstream pressure falls at the largest flow."""
    dwell_s: float | tuple[float, ...] = 60.0
    """Of every setting, or of each one in turn, statics included."""
    ramp_s: float = 8.0
    interval_s: float = 2.0
    drift: float = 0.004
    """Slow change of the supply over the day."""
