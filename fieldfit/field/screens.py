"""The screens a row or a plateau must pass, each with its named limit and the reason it leaves behind."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

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
            name="gap",
            value=60.0,
            unit="-",
            meaning="A pause of the clock over this many usual intervals ends a plateau.",
        ),
        Limit(
            name="ramp",
            value=0.02,
            unit="-",
            meaning="A stretch whose flow changes by more than this share, and goes on changing alike beyond both ends, is a "
            "piece of a valve move.",
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
            name="inertia",
            value=0.05,
            unit="-",
            meaning="A plateau whose correction for inertia is uncertain by more than this share of its head loss is unsteady.",
        ),
        Limit(
            name="service_hours",
            value=6.0,
            unit="h",
            meaning="A log at least this long, whose flow seldom stands still, is read as a service log.",
        ),
        Limit(
            name="service_steady",
            value=0.5,
            unit="-",
            meaning="Share of the flowing rows that must lie on steady plateaus for a long log to be read by plateaus.",
        ),
        Limit(
            name="block",
            value=900.0,
            unit="s",
            meaning="Length of the time blocks that a service log is cut into before they are grouped by flow.",
        ),
        Limit(
            name="reversed",
            value=0.01,
            unit="-",
            meaning="Backward flow under this share of the largest counts as the meter's noise about zero.",
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
SIGNAL = "signal fault"
CUT_OFF = "line cut off"
STUCK = "stuck gauge"
UNPAIRED = "no reading of another logger"
RANGE = "out of range"
UNSTEADY = "unsteady"
OUTLIER = "outlier"
REVERSED = "reversed flow"
LAMINAR = "laminar"
CRITICAL = "critical zone"
UNRESOLVED = "head loss below resolution"
NEGATIVE = "negative head loss"
DEAD_TAP = "dead tap"


@dataclass(frozen=True, slots=True, kw_only=True)
class Screen:
    """One screen: what it leaves behind, what it looks at, and the limits that steer it."""

    reason: str
    """Reason it leaves with what it sets aside."""
    judges: Literal["row", "stretch", "plateau"]
    """What it looks at: a single row, a stretch of rows, or the means of a plateau."""
    limits: tuple[str, ...]
    """Names of its limits."""
    asks: str
    """What it sets aside, in one sentence."""


SCREENS: tuple[Screen, ...] = (
    Screen(reason=MISSING, judges="row", limits=(), asks="A value that is needed is not there."),
    Screen(reason=CLOCK, judges="row", limits=(), asks="The clock repeats itself or runs backwards."),
    Screen(reason=SIGNAL, judges="row", limits=(), asks="The raw signal of a transmitter says that it has failed."),
    Screen(reason=CUT_OFF, judges="row", limits=(), asks="The logger stopped in the middle of writing the line."),
    Screen(reason=UNPAIRED, judges="row", limits=(), asks="Another logger had not begun, or had ended."),
    Screen(reason=RANGE, judges="row", limits=(), asks="A gauge reads beyond its range, or less than a vacuum."),
    Screen(
        reason=STUCK,
        judges="row",
        limits=("stuck", "static_flow"),
        asks="A gauge repeats one reading while water flows.",
    ),
    Screen(reason=REVERSED, judges="row", limits=("reversed", "static_flow"), asks="The water runs backwards."),
    Screen(reason=OUTLIER, judges="stretch", limits=("outlier",), asks="A row lies far off the middle of its plateau."),
    Screen(
        reason=UNSTEADY,
        judges="stretch",
        limits=("flow_step", "plateau_rows", "gap", "ramp", "drift", "inertia"),
        asks="The flow is on its way, or is steady for too few rows; or its inertia cannot be corrected well.",
    ),
    Screen(reason=DEAD_TAP, judges="plateau", limits=("stuck",), asks="One of several taps gave nothing for a while."),
    Screen(reason=LAMINAR, judges="plateau", limits=("laminar",), asks="Laminar flow does not feel the wall."),
    Screen(
        reason=CRITICAL,
        judges="plateau",
        limits=("laminar", "turbulent"),
        asks="Between laminar and turbulent no law holds.",
    ),
    Screen(reason=NEGATIVE, judges="plateau", limits=("resolution",), asks="The head loss is clearly below zero."),
    Screen(
        reason=UNRESOLVED,
        judges="plateau",
        limits=("resolution",),
        asks="The head loss does not stand clear of its own uncertainty.",
    ),
)
"""Every screen in order of precedence: the first that catches a row gives the reason."""

REASONS = tuple(screen.reason for screen in SCREENS)
"""Every reason a row can be set aside for, in order of precedence."""


def limit(section: Section, name: str) -> float:
    """Return a limit's value for this section, the file's word before the default."""
    return dict(section.screen_limits).get(name, LIMITS[name].value)
