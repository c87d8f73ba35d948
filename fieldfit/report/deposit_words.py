"""Bore or roughness of one reach, in words and tables."""

from __future__ import annotations

from fieldfit.decisions.deposit import DepositFinding, Interval
from fieldfit.inference.bore_evidence import Weighed
from fieldfit.report.digits import fixed, limit, significant, value_with_band
from fieldfit.report.finding import ReachFinding
from fieldfit.report.tables import Table


def worth_a_map(reach: ReachFinding) -> bool:
    """Return whether bore against roughness is a question for a reach: it loses too much, or the bore was looked at."""
    found, new = reach.deposit, reach.new_pipe
    if found is None:
        return False
    if found.map.evidence or reach.wall.state == "no estimate":
        return True
    return reach.wall.state == "measured" and (new is None or new.head_loss_ratio[1] > new.limit)


def caption(found: DepositFinding) -> str:
    """Say what to see in the map."""
    told = (
        "Every point of the ridge loses the same head: a rough wall in the bore as laid at its right end, a narrower and "
        "smoother pipe to the left"
    )
    if any(one.used for one in found.map.evidence):
        kinds = " and ".join(dict.fromkeys(one.evidence.kind for one in found.map.evidence if one.used))
        return f"{told}; the {kinds} cuts the piece out of it that is coloured."
    return (
        f"{told}. Only a look at the bore (coupon, calliper, gauge plate, tracer) would say where on it the pipe lies."
    )


def readings_table(found: DepositFinding) -> Table:
    """Return the three readings of one evidence: all roughness, all bore, and the mixtures."""
    wall = found.all_roughness_m
    rough, laid = "no roughness", f"{significant(found.map.laid_m * 1e3, 4)}, as laid"
    if wall.with_correlation is not None:
        low, high = (end * 1e3 for end in wall.with_correlation)
        rough = f"under {limit(high)}" if wall.best is None else value_with_band(wall.best * 1e3, (low, high))
    rows = [
        ("all roughness", rough, laid),
        ("all bore", f"as {found.new_wall}", _span(found.all_bore_m)),
        ("any mixture of the two", _roughness(found.roughness_m), _span(found.bore_m)),
    ]
    head = ("the loss read as", "roughness [mm], 95 %", "bore [mm], 95 %")
    return Table(head=head, rows=tuple(rows))


def deposit_table(found: DepositFinding) -> Table:
    """Return thickness, volume and mass of the deposit."""
    rows = [
        ("Mean thickness on the wall [mm]", _span(found.thickness_m)),
        ("Volume per metre of pipe [L/m]", _span(found.volume_m3_m)),
    ]
    if found.mass_kg_m is not None:
        rows.append(("Mass per metre of pipe [kg/m]", _span(found.mass_kg_m, 1.0)))
    return Table(head=("deposit, over all mixtures", "best, with its 95 % range"), rows=tuple(rows))


def evidence_lines(found: DepositFinding) -> list[str]:
    """Return what became of each piece of bore evidence."""
    return [_evidence(one, found) for one in found.map.evidence]


def exact_note(found: DepositFinding) -> str:
    """Say what a free fit with an exact formula would have claimed, and why it is not believed."""
    claimed = found.map.exact_shape.ln_bore
    own = (found.bore_m.ends[1] - found.bore_m.ends[0]) / (2.0 * 1.96 * found.bore_m.best)
    if not claimed < 0.5 * own:
        return ""
    limit_percent = significant(196.0 * claimed, 2)
    return (
        f"If the friction formula were exact in its shape, these flows alone would give the bore to ±{limit_percent} %. "
        "No formula is: one only slightly sharper would fit as well with quite another bore, so that claim is not made here."
    )


def _evidence(one: Weighed, found: DepositFinding) -> str:
    bore = f"{one.evidence.kind[0].upper()}{one.evidence.kind[1:]}"
    date = f" of {one.evidence.date.day} {one.evidence.date:%B %Y}" if one.evidence.date else ""
    said = f"{bore}{date}: {value_with_band(one.evidence.bore.value * 1e3, _ends(one), 'mm')}"
    if not one.used:
        return (
            f"{said}. It contradicts the readings, which at any roughness leave so far-off a value under "
            f"{significant(max(100.0 * one.tail, 0.01), 1)} % of chance. It was left out: one of the two is wrong, and the deposit "
            "above stands on the readings alone. Check the place, the unit and the bore as laid."
        )
    spread = one.allowance_m * 1e3 * 1.96
    allowance = (
        f", ±{significant(spread, 2)} mm more allowed because it sees another average than friction does"
        if spread > 0.005
        else ""
    )
    return f"{said}{allowance}. It agrees with the readings and narrows them."


def _ends(one: Weighed) -> tuple[float, float]:
    half = 1.96 * one.evidence.bore.standard * 1e3
    return one.evidence.bore.value * 1e3 - half, one.evidence.bore.value * 1e3 + half


def _span(found: Interval, scale: float = 1e3) -> str:
    low, high = found.ends[0] * scale, found.ends[1] * scale
    if low <= 0.02 * high:
        return f"under {limit(high)}" if high > 0.0 else fixed(0.0, 0)
    return value_with_band(found.best * scale, (low, high))


def _roughness(found: Interval) -> str:
    low, high = found.ends[0] * 1e3, found.ends[1] * 1e3
    return f"under {limit(high)}" if low <= 0.0 else value_with_band(found.best * 1e3, (low, high))
