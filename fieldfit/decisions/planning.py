"""Is the trip worth making, and what should be done there: layouts compared, a plan recommended, limits checked."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

import numpy as np

from fieldfit.decisions.expected import Expected, Layout, expected, planned_flows, planned_readings
from fieldfit.decisions.plan import Gain, Option, Plan, Wall
from fieldfit.decisions.plan_checks import plan_checks
from fieldfit.errors import InputError
from fieldfit.field.section import Section
from fieldfit.field.uncertain import Accuracy
from fieldfit.field.wishes import Wishes
from fieldfit.hydraulics.friction import STANDARD_GRAVITY
from fieldfit.hydraulics.materials import material
from fieldfit.inference.fit import NORMAL_95, covariance
from fieldfit.inference.prediction import C_BY_LOSS

WANTED_C = 0.05
"""Half-width of C that is wanted where the file says nothing [-]."""
POWER = 1.645 + 0.842
"""Standard uncertainties of a shift that is seen at 5 % risk with a chance of 80 % [-]."""
UNKNOWN_ROUGHNESS_M = 1e-4
"""New wall where the material is unknown [m]."""
SETTLE_S, STATIC_S = 120.0, 180.0
"""Time to let a flow settle, and to hold each static [s]."""
FAR_BETTER = 1e6


def plan_test(section: Section) -> Plan:
    """Recommend a test and say what it would tell.

    Of the gauges and meters on offer the plainest pair that reaches what is wanted for every wall is chosen, the
    best pair if none does.

    Parameters
    ----------
    section : Section
        With its `[plan]` table.

    Returns
    -------
    Plan

    Raises
    ------
    InputError
        When there is no such table, or the supply cannot give the flow.
    """
    wishes = section.wishes
    if wishes is None:
        raise InputError(
            "there is no [plan] table",
            'Write [plan] with flow = "30 L/s", static = "4.5 bar" and c = "3 %" as far as you know them.',
            section.path.name,
        )
    walls = _walls(section)
    _check_supply(section, wishes, walls[0])
    layout = _recommended(section, wishes, walls)
    found = tuple(expected(section, wishes, layout, wall.roughness_m) for wall in walls)
    middle = found[len(found) // 2]
    readings = middle.fit.model.readings
    seen = POWER * _ln_loss_random(middle)
    flows = planned_flows(section, layout)
    held = SETTLE_S + layout.hold_s
    return Plan(
        section=section,
        wishes=wishes,
        layout=layout,
        walls=walls,
        expected=found,
        reached=all(_reaches(wishes, one) for one in found),
        options=tuple(_options(section, wishes, walls, layout)),
        budget=_budget(middle),
        floor_ln_c=_floor(middle),
        gains=tuple(_gains(section, wishes, layout, middle)),
        smallest_loss_m=POWER * middle.fit.standard * float(readings.head_loss_m[-1]),
        smallest_k=POWER * middle.fit.standard * float(readings.head_loss_m[-1]) / _velocity_head(section, flows[-1]),
        smallest_change=np.sqrt(2.0) * seen,
        flows_m3_s=tuple(flows.tolist()),
        duration_s=2.0 * STATIC_S + held * len(flows),
        volume_m3=float(np.sum(flows)) * held,
        checks=tuple(plan_checks(section, wishes, layout, walls)),
    )


def _walls(section: Section) -> tuple[Wall, ...]:
    """Return the plausible range of the wall's state: as new, aged, heavily aged."""
    new = material(section.material).roughness_m[1] if section.material else UNKNOWN_ROUGHNESS_M
    bore = section.bore.value
    worst = max(0.02 * bore, 3.0 * new)
    return (
        Wall(name="as new", roughness_m=new),
        Wall(name="aged", roughness_m=float(np.sqrt(new * worst))),
        Wall(name="heavily aged", roughness_m=worst),
    )


def _check_supply(section: Section, wishes: Wishes, new: Wall) -> None:
    """Refuse a flow that the supply cannot push through even a new wall."""
    layout = _layouts(section, wishes)[-1]
    lowest = float(np.min(planned_readings(section, wishes, layout, new.roughness_m).pressure_pa))
    if lowest < 0.0:
        raise InputError(
            f"the supply cannot give {1000.0 * wishes.flow_m3_s:.3g} L/s: even with a new wall the last gauge would read "
            f"{lowest / 1e3:.0f} kPa",
            "Write a smaller flow, or taps closer together.",
            f"{section.path.name}, key 'plan.flow'",
        )


def _reaches(wishes: Wishes, found: Expected) -> bool:
    """Return whether a layout gives what is wanted; a smooth wall's roughness is never wanted to a share."""
    c = wishes.c if wishes.c is not None or wishes.roughness is not None else WANTED_C
    if c is not None and NORMAL_95 * found.ln_c > c:
        return False
    return wishes.roughness is None or NORMAL_95 * found.ln_roughness <= wishes.roughness


def _recommended(section: Section, wishes: Wishes, walls: tuple[Wall, ...]) -> Layout:
    """Return the plainest pair of instruments that reaches what is wanted, else the best pair."""
    layouts = _layouts(section, wishes)
    for layout in layouts:
        if all(_reaches(wishes, expected(section, wishes, layout, wall.roughness_m)) for wall in walls):
            return layout
    return layouts[-1]


def _layouts(section: Section, wishes: Wishes) -> list[Layout]:
    """Return the layouts that the instruments on offer allow, plainest first."""
    gauges = wishes.gauges or (
        max((tap.accuracy for tap in section.taps), key=lambda one: _size(one, wishes.static_pa)),
    )
    meters = wishes.meters or (section.meter.accuracy,)
    usual = Layout(
        top_flow_m3_s=wishes.flow_m3_s,
        flows=wishes.flows,
        hold_s=wishes.hold_s,
        length_m=section.taps[-1].station.value - section.taps[0].station.value,
        gauge=gauges[0],
        meter=meters[0],
    )
    found = [replace(usual, gauge=gauge, meter=meter) for gauge in gauges for meter in meters]
    return sorted(
        found, key=lambda one: -_size(one.gauge, wishes.static_pa) - 10.0 * _size(one.meter, wishes.flow_m3_s)
    )


def _size(accuracy: Accuracy, reading: float) -> float:
    """Return the relative uncertainty of an instrument at a reading [-]."""
    return float(accuracy.standard_at(np.array([reading]))[0]) / reading


def _options(section: Section, wishes: Wishes, walls: tuple[Wall, ...], layout: Layout) -> Iterator[Option]:
    """Vary one thing at a time."""

    def option(of: str, value: str, other: Layout) -> Option:
        found = tuple(expected(section, wishes, other, wall.roughness_m) for wall in walls)
        return Option(of=of, value=value, chosen=other == layout, expected=found)

    for share in (0.25, 0.5, 0.75, 1.0):
        flow = share * layout.top_flow_m3_s
        yield option("largest flow", f"{1000.0 * flow:.3g} L/s", replace(layout, top_flow_m3_s=flow))
    for share in (0.25, 0.5, 1.0, 2.0):
        yield option(
            "tap spacing", f"{share * layout.length_m:.3g} m", replace(layout, length_m=share * layout.length_m)
        )
    for gauge in wishes.gauges or (layout.gauge,):
        yield option("gauges", gauge.text, replace(layout, gauge=gauge))
    for meter in wishes.meters or (layout.meter,):
        yield option("meter", meter.text, replace(layout, meter=meter))
    for flows in sorted({1, 3, layout.flows, 2 * layout.flows}):
        yield option("number of flows", str(flows), replace(layout, flows=flows))
    for share in (0.2, 1.0, 3.0):
        hold = share * layout.hold_s
        yield option("time each is held", f"{hold / 60.0:.3g} min", replace(layout, hold_s=hold))
    yield option("levelling", "no static", replace(layout, statics=False))
    yield option("levelling", "statics before and after", layout)


def _budget(found: Expected) -> tuple[tuple[str, float], ...]:
    """Return the errors and their shares, terms of one name added up."""
    names = [*found.fit.model.errors.names, "scatter of the readings"]
    shares: dict[str, float] = {}
    for name, share in zip(names, found.fit.share.tolist(), strict=True):
        shares[name] = shares.get(name, 0.0) + share
    return tuple(sorted(shares.items(), key=lambda entry: -entry[1]))


def _ln_c_with(found: Expected, perfect: tuple[str, ...]) -> float:
    """Return u(ln C) when some errors, told by how their names begin, are made away with [-]."""
    names = [*found.fit.model.errors.names, "readings"]
    factor = np.array([FAR_BETTER if name.startswith(perfect) else 1.0 for name in names])
    return abs(C_BY_LOSS) * float(np.sqrt(covariance(found.fit, factor)[0, 0]))


def _gains(section: Section, wishes: Wishes, layout: Layout, middle: Expected) -> Iterator[Gain]:
    """Say what changes to the plan would be worth for the middle wall."""

    def with_(other: Layout) -> float:
        return expected(section, wishes, other, middle.roughness_m).ln_c

    yield Gain(what="as planned, with statics before and after", ln_c=middle.ln_c)
    if section.taps[0].elevation is not None and section.taps[-1].elevation is not None:
        yield Gain(what="without a static, by survey and gauges alone", ln_c=with_(replace(layout, statics=False)))
    span_m = 1.2 * middle.largest_loss_m
    # One instrument feels the difference alone, so the pressure both ends share no longer matters.
    own = abs(C_BY_LOSS) * 0.001 * span_m / np.sqrt(3.0) / _loss_at_reference(middle)
    yield Gain(
        what=f"with one differential transmitter, 0.1 % of {span_m:.2g} m of water",
        ln_c=float(np.hypot(own, _ln_c_with(middle, ("gain of", "zero of", "span of")))),
    )
    yield Gain(what="with the bore known exactly", ln_c=_ln_c_with(middle, ("bore",)))
    yield Gain(what="with a meter without error", ln_c=_ln_c_with(middle, ("meter",)))


def _floor(found: Expected) -> float:
    """Return u(ln C) that bore, meter and length make alone [-]: no better gauge can beat it."""
    shares = dict(_budget(found))
    kept = sum(share for name, share in shares.items() if name.startswith(("bore", "meter", "length")))
    return abs(C_BY_LOSS) * found.fit.standard * float(np.sqrt(kept))


def _loss_at_reference(found: Expected) -> float:
    """Return the head loss at the flow that tells most [m]."""
    readings = found.fit.model.readings
    return float(np.interp(found.flow_m3_s, readings.flow_m3_s, readings.head_loss_m))


def _ln_loss_random(found: Expected) -> float:
    """Return what a repeat with the same instruments would differ by [-]: noise and levelling, the rest cancels."""
    names = [*found.fit.model.errors.names, "readings"]
    changing = ("static", "readings", "viscosity")
    kept = [share for name, share in zip(names, found.fit.share.tolist(), strict=True) if name.startswith(changing)]
    return found.fit.standard * float(np.sqrt(sum(kept)))


def _velocity_head(section: Section, flow_m3_s: float) -> float:
    """Return the velocity head at a flow [m]."""
    return float((flow_m3_s / (np.pi * section.bore.value**2 / 4.0)) ** 2 / (2.0 * STANDARD_GRAVITY))
