"""A plan on paper: what the test would tell, the sheet to take along, and its twin to type the readings into."""

from __future__ import annotations

import math
from itertools import groupby
from typing import Any

from fieldfit import __version__
from fieldfit.decisions.expected import Expected
from fieldfit.decisions.plan import Option, Plan
from fieldfit.decisions.planning import SETTLE_S, STATIC_S, WANTED_C
from fieldfit.inference.fit import NORMAL_95
from fieldfit.report.digits import fixed, litres, percent, significant
from fieldfit.report.sheet import Block, Bullets, Heading, Paragraph, Places, Sheet, Table

CAUTIONS = (
    "Local codes, the authority having jurisdiction and the licensed engineer in charge govern; tell users and the fire "
    "service before the test.",
    "Open and close hydrants and valves slowly, over a minute and more; never above the pipe's test pressure.",
    "Watch the lowest pressure: stop opening when it comes down to the pressure to be kept.",
    "Guard against backflow; lead the water off safely, without chlorine into a stream; expect it to be discoloured.",
    "Mind traffic, trenches and chambers; hot or hazardous liquids only through rated taps; lock out what could start.",
)
EXTRA_ROWS = 2
"""Empty rows of the sheet beyond the plan's."""


def plan_words(plan: Plan) -> str:
    """Return the answer in a paragraph: is the trip worth making, and what limits it."""
    worst = max(plan.expected, key=lambda one: one.ln_c)
    wanted = plan.wishes.c if plan.wishes.c is not None else WANTED_C
    reach = "gives what is wanted" if plan.reached else "does not give what is wanted"
    asked = [f"C to ±{_percent(wanted)}"] if plan.wishes.c is not None or plan.wishes.roughness is None else []
    if plan.wishes.roughness is not None:
        asked.append(f"the roughness to ±{_percent(plan.wishes.roughness)}")
    first, second = plan.budget[0], plan.budget[1]
    return (
        f"With {plan.layout.gauge.text} gauges and a meter of {plan.layout.meter.text}, {plan.layout.flows} flows up to "
        f"{litres(plan.layout.top_flow_m3_s)} held {plan.layout.hold_s / 60.0:.3g} min each, the test {reach} "
        f"({' and '.join(asked)}, 95 %): C would come out to ±{_percent(NORMAL_95 * worst.ln_c)} at worst. What limits it "
        f"most: {first[0]} ({percent(first[1])} of the variance), then {second[0]} ({percent(second[1])}). However good the "
        f"gauges, bore, meter and length leave ±{_percent(NORMAL_95 * plan.floor_ln_c)}."
    )


def plan_sheet(plan: Plan) -> Sheet:
    """Return the plan's report.

    Parameters
    ----------
    plan : Plan
        What was planned.

    Returns
    -------
    Sheet
        Answer first, then what each choice would change, then the limits.
    """
    blocks: list[Block] = [
        Paragraph(text="Worth the trip" if plan.reached else "Not enough as it stands", kind="verdict"),
        Paragraph(text=plan_words(plan)),
        Heading(text="What the test would tell"),
        _expected_table(plan),
        Paragraph(
            text="± is 95 %. The first-order formula is a check on the full model, not a second opinion. By the readings "
            "alone is what this test can tell of this pipe; with the limit of friction formulas is what may be compared "
            "with a handbook.",
            kind="note",
        ),
        Heading(text="What it could see"),
        Bullets(items=_seen(plan)),
        Heading(text="What other choices would give"),
        Paragraph(
            text="95 % half-widths, one thing changed at a time. Roughness by the readings alone | with the limit of friction "
            "formulas; ×÷1.7 means within a factor of 1.7 either way.",
            kind="note",
        ),
    ]
    for name, group in groupby(plan.options, key=lambda option: option.of):
        blocks.append(_options_table(name, list(group), plan))
    blocks += [
        Heading(text="What limits it"),
        Table(
            head=("error", "share in the variance of C, aged wall"),
            rows=tuple((name, percent(share)) for name, share in plan.budget if share >= 0.005),
            widths=(0.6, 0.4),
        ),
        Table(
            head=("change to the plan", "C then to, 95 %"),
            rows=tuple((gain.what, f"±{_percent(NORMAL_95 * gain.ln_c)}") for gain in plan.gains),
            widths=(0.7, 0.3),
        ),
        Heading(text="Limits of the real world"),
        Table(
            head=("", "what", "plan", "limit", "why"),
            rows=tuple(
                ("kept" if one.passed else "NOT KEPT", one.what, one.value, one.limit, one.because)
                for one in plan.checks
            ),
            widths=(0.1, 0.2, 0.17, 0.18, 0.35),
        ),
        Heading(text="Before anyone opens a valve"),
        Bullets(items=CAUTIONS),
    ]
    return Sheet(
        title=f"Test plan: {plan.section.name}",
        subtitle=_pipe(plan),
        blocks=tuple(blocks),
        footer=f"fieldfit {__version__} · made from {plan.section.path.name}",
    )


def crew_sheet(plan: Plan) -> Sheet:
    """Return the one page to take along, with a table to fill in by hand."""
    taps = plan.section.taps
    head = ("step", "time", "flow to set", "flow read", f"{taps[0].column} read", f"{taps[-1].column} read", "water °C")
    steps = [("static before", ""), *((f"flow {n}", litres(q)) for n, q in enumerate(plan.flows_m3_s, start=1))]
    steps += [("static after", ""), *(("again", "") for _ in range(EXTRA_ROWS))]
    rows = tuple((name, "", flow, "", "", "", "") for name, flow in steps)
    lowest = f"{plan.wishes.residual_pa / 1e3:.0f} kPa ({plan.wishes.residual_pa / 6894.757:.0f} psi)"
    return Sheet(
        title=f"Test sheet: {plan.section.name}",
        subtitle=f"{_pipe(plan)} · about {plan.duration_s / 60.0:.0f} min · {plan.volume_m3:.0f} m³ of water",
        blocks=(
            Bullets(
                items=(
                    f"Gauges: {plan.layout.gauge.text}; meter: {plan.layout.meter.text}. Vent both hoses before the first static.",
                    f"Static first: flow stopped, {STATIC_S / 60.0:.0f} min, both gauges to the last digit; again at the end.",
                    f"Then the flows from low to high: let each settle {SETTLE_S / 60.0:.0f} min, hold it "
                    f"{plan.layout.hold_s / 60.0:.3g} min, read at its end. Never let a pressure fall under {lowest}.",
                    "Write units into the column heads. Leave a reading empty rather than guess it.",
                )
            ),
            Table(head=head, rows=rows, widths=(0.14, 0.1, 0.14, 0.15, 0.17, 0.17, 0.13), form=True),
            Heading(text="Remarks (weather, valves moved, gauges swapped, anything odd)"),
            Table(head=(), rows=(("",), ("",)), widths=(1.0,), form=True),
            Bullets(items=CAUTIONS),
            Places(labels=("Crew leader: name, date", "Checked by")),
        ),
        footer="Type the readings into the table file beside this sheet; the program reads it as a log.",
    )


def crew_table(plan: Plan) -> str:
    """Return the sheet's twin as CSV, headings with units and a row for every reading, to be filled in."""
    section = plan.section
    units = [section.meter.unit or "L/s", *(tap.unit or "kPa" for tap in (section.taps[0], section.taps[-1]))]
    names = [section.meter.column, section.taps[0].column, section.taps[-1].column]
    head = [f"{name} [{unit}]" for name, unit in zip(names, units, strict=True)]
    lines = ["step," + ",".join(_quoted(text) for text in head) + ",temperature [degC]"]
    lines += ["static before,,,,", *(f"flow {n},,,," for n in range(1, len(plan.flows_m3_s) + 1)), "static after,,,,"]
    return "\n".join(lines) + "\n"


def _quoted(text: str) -> str:
    """Return a heading that may hold a comma."""
    return f'"{text}"' if "," in text else text


def plan_summary(plan: Plan) -> str:
    """Return the plan for the terminal."""
    from fieldfit.report.summary import folded

    lines = [f"{plan.section.name}: {'worth the trip' if plan.reached else 'not enough as it stands'}"]
    lines += folded("answer", plan_words(plan))
    for wall, found in zip(plan.walls, plan.expected, strict=True):
        text = f"C ±{_percent(NORMAL_95 * found.ln_c)}, roughness {_roughness(found)}"
        lines += folded(wall.name, f"{significant(wall.roughness_m * 1e3, 2)} mm: {text}")
    lines += folded("flows", ", ".join(litres(flow) for flow in plan.flows_m3_s))
    lines += folded("takes", f"{plan.duration_s / 60.0:.0f} min and {plan.volume_m3:.0f} m³ of water")
    for check in plan.checks:
        if not check.passed:
            lines += folded("mind", f"{check.what}: {check.value}, limit {check.limit}. {check.because}")
    return "\n".join(lines)


def plan_record(plan: Plan) -> dict[str, Any]:
    """Return the plan as plain data, units in the keys."""
    return {
        "section": plan.section.name,
        "reached": plan.reached,
        "gauge": plan.layout.gauge.text,
        "meter": plan.layout.meter.text,
        "flows_m3_s": list(plan.flows_m3_s),
        "hold_s": plan.layout.hold_s,
        "expected": [
            {
                "wall": wall.name,
                "roughness_mm": wall.roughness_m * 1e3,
                "hazen_williams_c": found.hazen_williams_c,
                "u_ln_c": found.ln_c,
                "u_ln_c_first_order": found.ln_c_first_order,
                "u_ln_roughness": found.ln_roughness,
                "u_ln_roughness_with_correlation": found.ln_roughness_wide,
            }
            for wall, found in zip(plan.walls, plan.expected, strict=True)
        ],
        "budget": [{"error": name, "share": share} for name, share in plan.budget],
        "floor_u_ln_c": plan.floor_ln_c,
        "smallest_local_loss_m": plan.smallest_loss_m,
        "smallest_local_loss_k": plan.smallest_k,
        "smallest_relative_change": plan.smallest_change,
        "duration_s": plan.duration_s,
        "volume_m3": plan.volume_m3,
        "checks": [
            {"what": one.what, "value": one.value, "limit": one.limit, "passed": one.passed, "because": one.because}
            for one in plan.checks
        ],
    }


def _pipe(plan: Plan) -> str:
    """Return the pipe in one line."""
    section = plan.section
    return (
        f"{section.material or 'material unknown'} · bore {significant(section.bore.value * 1e3, 4)} mm · "
        f"{significant(plan.layout.length_m, 4)} m between the outer taps"
    )


def _expected_table(plan: Plan) -> Table:
    """Return what the test would tell of each wall."""
    rows = tuple(
        (
            f"{wall.name}, {significant(wall.roughness_m * 1e3, 2)} mm",
            f"{found.hazen_williams_c:.0f} ± {_percent(NORMAL_95 * found.ln_c)}",
            f"± {_percent(NORMAL_95 * found.ln_c_first_order)}",
            _roughness(found),
            _spread(found.ln_roughness_wide),
            f"{significant(found.largest_loss_m, 2)} m",
        )
        for wall, found in zip(plan.walls, plan.expected, strict=True)
    )
    head = (
        "wall",
        "C",
        "by the first-order formula",
        "roughness, by the readings alone",
        "with the limit of friction formulas",
        "largest head loss",
    )
    return Table(head=head, rows=rows, widths=(0.22, 0.15, 0.16, 0.17, 0.17, 0.13))


def _options_table(name: str, options: list[Option], plan: Plan) -> Table:
    """Return what choices of one thing would give: C, and roughness in both bands."""
    rows = []
    for option in options:
        cells = [f"{option.value}{' (plan)' if option.chosen else ''}"]
        for one in option.expected:
            bands = (_short(one.ln_roughness), _short(one.ln_roughness_wide))
            cells += [_short(one.ln_c), " | ".join(bands)]
        rows.append(tuple(cells))
    head = (name, *(text for wall in plan.walls for text in (f"{wall.name}: C", "roughness")))
    return Table(head=head, rows=tuple(rows), widths=(0.25, *(0.11, 0.14) * len(plan.walls)))


def _seen(plan: Plan) -> tuple[str, ...]:
    """Return the smallest things the test would see."""
    return (
        f"A local loss from about {significant(plan.smallest_loss_m, 2)} m at the largest flow "
        f"(K {significant(plan.smallest_k, 2)}) would show against a wall that is otherwise known.",
        f"A second test with the same instruments would see the head loss change by {_percent(plan.smallest_change)}.",
        "Both with a chance of 80 % at a risk of 5 % of a false alarm.",
        f"The water between the taps, {significant(_contents(plan), 2)} m³, is changed in {_minutes(plan)} min at the lowest flow; "
        "its temperature settles no sooner, and the whole of it drains away when the section is emptied.",
    )


def _contents(plan: Plan) -> float:
    """Return the water between the taps [m³]."""
    return math.pi / 4.0 * plan.section.bore.value**2 * plan.layout.length_m


def _minutes(plan: Plan) -> str:
    """Return how long the lowest flow takes to change it [min]."""
    return significant(_contents(plan) / plan.flows_m3_s[0] / 60.0, 2)


def _roughness(found: Expected) -> str:
    """Return how well the roughness would be known by the readings alone."""
    return _spread(found.ln_roughness)


def _spread(ln_standard: float) -> str:
    """Return a 95 % spread of a logarithm: a percentage while it is small, a factor beyond."""
    half = NORMAL_95 * ln_standard
    if half > 2.0:
        return "upper limit only"
    return f"± {_percent(half)}" if half < 0.4 else f"within a factor of {math.exp(half):.1f}"


def _short(ln_standard: float) -> str:
    """Return the same in the least room."""
    half = NORMAL_95 * ln_standard
    if half > 2.0:
        return "limit only"
    return f"±{_percent(half)}" if half < 0.4 else f"×÷{math.exp(half):.1f}"


def _percent(share: float) -> str:
    """Return a share as a percentage to two digits."""
    value = 100.0 * share
    return f"{fixed(value, 1 if value < 9.95 else 0)} %"
