"""Limits of the real world that a planned test must keep to."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from fieldfit.decisions.expected import Layout, planned_flows, planned_readings, scatter_pa
from fieldfit.decisions.plan import Check, Wall
from fieldfit.field.section import Section
from fieldfit.field.wishes import Wishes
from fieldfit.hydraulics.friction import STANDARD_GRAVITY

WAVE_SPEED_M_S = 1000.0
"""Speed of a pressure wave in a metal main [m/s]: about 100 m of head for each metre per second stopped."""
FASTEST_M_S = 3.0
"""Velocity above which a test loosens deposit and shakes pipe, by common practice [m/s]."""


def plan_checks(section: Section, wishes: Wishes, layout: Layout, walls: tuple[Wall, ...]) -> Iterator[Check]:
    """Hold the plan against the limits of the real world, worst wall first."""
    worst = planned_readings(section, wishes, layout, walls[-1].roughness_m)
    area = np.pi * section.bore.value**2 / 4.0
    velocity, lowest = wishes.flow_m3_s / area, float(np.min(worst.pressure_pa))
    yield Check(
        what="pressure left at the largest flow",
        value=f"{lowest / 1e3:.0f} kPa with a heavily aged wall",
        limit=f"{wishes.residual_pa / 1e3:.0f} kPa",
        passed=lowest >= wishes.residual_pa,
        because="Below it the main may draw in dirty water. Watch the gauge, and stop at this pressure whatever the flow.",
    )
    yield Check(
        what="velocity at the largest flow",
        value=f"{velocity:.2g} m/s",
        limit=f"{FASTEST_M_S:.0f} m/s",
        passed=velocity <= FASTEST_M_S,
        because="Faster water stirs up deposit and strains pipe and hydrants.",
    )
    surge = WAVE_SPEED_M_S * velocity / STANDARD_GRAVITY
    room = (_lowest_range(layout) - wishes.static_pa) / (1000.0 * STANDARD_GRAVITY)
    yield Check(
        what="surge if the flow were stopped at once",
        value=f"{surge:.0f} m of head",
        limit=f"{room:.0f} m up to the gauges' range"
        if np.isfinite(room)
        else "the gauges' range, which is not stated",
        passed=surge <= room,
        because="Open and close over a minute and more: a sudden stop sends this surge through pipe, gauges and customers.",
    )
    yield from _more_checks(section, wishes, layout, worst.pressure_pa)


def _lowest_range(layout: Layout) -> float:
    """Return the gauges' range [Pa], without limit where none is stated."""
    return layout.gauge.span if layout.gauge.span is not None else float("inf")


def _more_checks(
    section: Section, wishes: Wishes, layout: Layout, pressure: np.ndarray[tuple[int, ...], np.dtype[np.float64]]
) -> Iterator[Check]:
    """Check gauges, Reynolds number and the size of the head loss."""
    fall = (section.taps[0].elevation, section.taps[-1].elevation)
    rise = fall[0].value - fall[1].value if fall[0] and fall[1] else 0.0
    highest = max(wishes.static_pa, wishes.static_pa + rise * 1000.0 * STANDARD_GRAVITY)
    span = _lowest_range(layout)
    yield Check(
        what="gauge range at rest",
        value=f"{highest / 1e5:.2g} bar",
        limit=f"{span / 1e5:.2g} bar" if np.isfinite(span) else "not stated",
        passed=highest <= span,
        because="A gauge beyond its range is wrong and may burst; one used at a small part of it is coarse.",
    )
    flows = planned_flows(section, layout)
    viscosity = float(section.liquid.viscosity_m2_s(np.array([15.0]))[0])
    reynolds = 4.0 * float(flows[0]) / (np.pi * section.bore.value * viscosity)
    yield Check(
        what="Reynolds number at the lowest flow",
        value=f"{reynolds:.2g}",
        limit="4000",
        passed=reynolds >= 4000.0,
        because="Below it the flow does not feel the wall.",
    )
    drop = float(np.min(pressure[0] - pressure[1])) + rise * 1000.0 * STANDARD_GRAVITY
    noise = scatter_pa(wishes, layout)
    yield Check(
        what="smallest head loss against the scatter of one reading",
        value=f"{drop / noise:.2g} times",
        limit="5 times",
        passed=drop >= 5.0 * noise,
        because="A head loss that drowns in scatter tells little: longer section, larger flow or finer gauges.",
    )
