"""Several campaigns on one section with known truth: what nature and instruments share is drawn once."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from instruments import Kit, Meter, Pipe, Plan
from simulator import Day, draw_errors, simulate


@dataclass(frozen=True, slots=True, kw_only=True)
class Campaign:
    """One campaign: the wall on its day, its water, and the meter when it is another one than before."""

    roughness_m: float
    temperature_degc: float
    meter: Meter | None = None


def simulate_campaigns(rng: np.random.Generator, pipe: Pipe, kit: Kit, plan: Plan, campaigns: Sequence[Campaign]):
    """Days of testing on one section, in order.

    Bore, length, elevations, fittings, gauges and the friction correlation are off by the same amount on every day;
    the meter too until it is replaced. The day's temperature is off on its own.
    """
    errors = draw_errors(rng, pipe, kit, plan)
    days: list[Day] = []
    for campaign in campaigns:
        if campaign.meter is not None:
            kit = replace(kit, meter=campaign.meter)
        fresh = draw_errors(rng, pipe, kit, plan)
        errors = replace(errors, temperature_k=fresh.temperature_k)
        if campaign.meter is not None:
            errors = replace(errors, meter_gain=fresh.meter_gain, meter_zero_m3_s=fresh.meter_zero_m3_s)
        as_found = replace(pipe, roughness_m=campaign.roughness_m, temperature_degc=campaign.temperature_degc)
        days.append(simulate(rng, as_found, kit, plan, errors))
    return days
