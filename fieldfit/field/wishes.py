"""What is wanted of a test still to be made, and what there is to make it with: the `[plan]` table."""

from __future__ import annotations

from dataclasses import dataclass

from fieldfit.field.uncertain import Accuracy


@dataclass(frozen=True, slots=True, kw_only=True)
class Wishes:
    """The crew leader's side of a plan."""

    c: float | None
    """Wanted 95 % half-width of C, over C [-]."""
    roughness: float | None
    """Wanted 95 % half-width of the roughness by the readings alone, over itself [-]."""
    flow_m3_s: float
    """Largest flow there is [m³/s]."""
    static_pa: float
    """Gauge pressure at the first tap at rest [Pa]."""
    supply_loss_pa: float
    """What that pressure falls by at the largest flow [Pa]."""
    residual_pa: float
    """Least pressure to be kept anywhere [Pa]."""
    flows: int
    """Number of flows."""
    hold_s: float
    """Time each flow is held once it is steady [s]."""
    scatter_pa: float | None
    """Standard deviation of a single reading of the pressure difference [Pa]; None for the gauges' usual one."""
    gauges: tuple[Accuracy, ...]
    """Gauges that could be taken; those of the section file when empty."""
    meters: tuple[Accuracy, ...]
    """Meters that could be taken; that of the section file when empty."""
