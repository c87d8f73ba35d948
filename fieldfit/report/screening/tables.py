"""The tables of the screening page."""

from __future__ import annotations

import math

from fieldfit.field.screens import SCREENS, limit
from fieldfit.field.section import Section
from fieldfit.report.digits import fixed, percent, significant, with_unit
from fieldfit.report.screening.finding import CampaignScreen, Check
from fieldfit.report.tables import Table

PERCENT = ("Share", "Pairs", "Drift", "Steps")
"""Beginnings of the names of checks whose values read best as percentages."""


def checks(found: tuple[Check, ...]) -> Table:
    """Return checks with what was found, what is wanted, and why."""
    rows = []
    for check in found:
        wanted = f"{'at most' if check.at_most else 'at least'} {_value(check.limit, check)}"
        mark = "good" if check.passed else "missing" if check.needed else "weak"
        rows.append(
            (check.what, "–" if check.value is None else _value(check.value, check), wanted, mark, check.because)
        )
    return Table(head=("", "found", "wanted", "", ""), rows=tuple(rows))


def _value(value: float, check: Check) -> str:
    """Return a value of a check."""
    if check.what.startswith(PERCENT):
        return "all" if value == 1.0 else "none" if value == 0.0 else percent(value)
    unit = "" if check.unit == "-" else check.unit
    if value == round(value) and abs(value) < 1e4:
        return with_unit(fixed(value, 0), unit)
    return with_unit(significant(value, 2 if abs(value) < 100.0 else 3), unit)


def steps(campaign: CampaignScreen) -> Table:
    """Return how finely each column was written and what that leaves in a mean."""
    rows = []
    for index, one in enumerate(campaign.steps):
        scale, unit = (1e3, "L/s") if index == 0 else (1e-3, "kPa")
        step = f"{significant(one.step * scale, 3)} {unit}" if one.step else "none seen"
        step += ", as it is written" if one.constant and one.step else ""
        trembling = "–" if math.isnan(one.trembling) else f"{significant(one.trembling, 2)} steps"
        # Less than a thousandth of a step is nothing that anyone need see.
        small = one.standard < 1e-3 * one.step or one.standard == 0.0
        left = "nothing" if small else f"±{significant(1.96 * one.standard * scale, 2)} {unit}"
        rows.append((one.column, step, fixed(one.values, 0), trembling, left))
    return Table(
        head=("column", "step", "different values", "rows tremble by", "left in a mean, 95 %"), rows=tuple(rows)
    )


def screens(campaign: CampaignScreen, section: Section) -> Table:
    """Return every screen in order of precedence with its limits and what it caught."""
    counts = dict(campaign.screening.counts)
    rows = []
    for screen in SCREENS:
        limits = ", ".join(f"{name} {limit(section, name):g}" for name in screen.limits)
        rows.append((screen.reason, screen.asks, limits or "–", fixed(counts.get(screen.reason, 0), 0)))
    return Table(head=("set aside as", "when", "limits in force", "rows"), rows=tuple(rows))
