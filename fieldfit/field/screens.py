"""The screens a row or a plateau must pass, each with its named limit and the reason it leaves behind."""

from __future__ import annotations

from dataclasses import dataclass

from fieldfit.field.section import Section


@dataclass(frozen=True, slots=True, kw_only=True)
class Limit:
    """A named limit that the section file's `[screen]` table can change."""

    name: str
    """Key in the section file."""
    value: float
    """Default."""
    unit: str
    """Unit, "-" for none."""
    meaning: str
    """What it does, in one sentence."""


LIMITS = {
    limit.name: limit
    for limit in (
        Limit(
            name="static_flow",
            value=0.002,
            unit="-",
            meaning="Flow under this share of the largest, or under what the meter can tell from none, is static.",
        ),
        Limit(
            name="flow_step",
            value=0.04,
            unit="-",
            meaning="The smallest relative change of flow that parts two plateaus.",
        ),
        Limit(
            name="drift",
            value=0.10,
            unit="-",
            meaning="A plateau whose flow drifts by more than this share from end to end is unsteady.",
        ),
        Limit(
            name="plateau_rows", value=8.0, unit="-", meaning="Fewer rows than this make no plateau in a logger's file."
        ),
        Limit(
            name="stuck",
            value=10.0,
            unit="-",
            meaning="A gauge that repeats itself over this many times its usual run of equal readings is stuck.",
        ),
        Limit(
            name="outlier",
            value=6.0,
            unit="-",
            meaning="A row this many robust standard deviations off its plateau's middle is an outlier.",
        ),
        Limit(name="laminar", value=2100.0, unit="-", meaning="Reynolds number under which flow counts as laminar."),
        Limit(name="turbulent", value=4000.0, unit="-", meaning="Reynolds number from which flow counts as turbulent."),
        Limit(
            name="resolution",
            value=2.0,
            unit="-",
            meaning="A plateau whose head loss is under this many standard uncertainties carries no roughness.",
        ),
    )
}
"""Every limit, by name."""

MISSING = "missing value"
CLOCK = "clock repeated or backwards"
STUCK = "stuck gauge"
RANGE = "out of range"
UNSTEADY = "unsteady"
OUTLIER = "outlier"
REVERSED = "reversed flow"
LAMINAR = "laminar"
CRITICAL = "critical zone"
UNRESOLVED = "head loss below resolution"
NEGATIVE = "negative head loss"

REASONS = (MISSING, CLOCK, RANGE, STUCK, REVERSED, UNSTEADY, OUTLIER, LAMINAR, CRITICAL, NEGATIVE, UNRESOLVED)
"""Every reason a row can be set aside for, in the order they are tried."""


def limit(section: Section, name: str) -> float:
    """Return a limit's value for this section, the file's word before the default."""
    return dict(section.screen_limits).get(name, LIMITS[name].value)
