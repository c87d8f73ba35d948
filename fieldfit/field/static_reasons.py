"""Why gauges at rest may disagree with the survey: named mistakes, each with what it would leave over."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

ATMOSPHERE_M = 10.33
"""Head of the air [m]."""
FOOT = 0.3048
UNIT_RATIOS = (
    (6.894757, "psi were read as kPa", "kPa were read as psi"),
    (14.503774, "bar were read as psi", "psi were read as bar"),
    (100.0, "bar were read as kPa", "kPa were read as bar"),
    (10.19716, "bar were read as mH2O", "mH2O were read as bar"),
    (9.80665, "mH2O were read as kPa", "kPa were read as mH2O"),
    (2.306659, "psi were read as ftH2O", "ftH2O were read as psi"),
    (3.280840, "mH2O were read as ftH2O", "ftH2O were read as mH2O"),
)
"""Ratios between units of pressure, with what happened when a pressure must be multiplied or divided by one."""
SLIPS_M = (1.0, 10.0, 100.0)
"""Whole steps by which an elevation is mistyped [m]."""
CLOSE = 2.0
"""Standard uncertainties within which a mistake explains the disagreement."""
STANDS_OUT = 6.0
"""Times the standard uncertainty that the disagreement must be for slips of a metre to be more than chance."""
NEGLIGIBLE_M = 0.05
PLAUSIBLE_PA = (3e4, 5e6)
"""Pressures that a pipe at rest may have [Pa]: a unit that leads elsewhere was not the one."""


@dataclass(frozen=True, slots=True, kw_only=True)
class AtRest:
    """What two gauges say with the water at rest, and what the survey says."""

    pressure_pa: tuple[float, float]
    """Gauge pressure at the upper and the lower tap [Pa]."""
    weight_pa_m: float
    """Weight of the liquid, ρg [Pa/m]."""
    expected_m: float
    """Standard uncertainty that gauges and survey allow the disagreement [m]."""
    elevation_m: tuple[float, float] | None = None
    """Surveyed elevation of the gauges [m]; None for one instrument between the taps."""
    smallest_loss_m: float | None = None
    """Head loss of the smallest flow tested [m]; None when there is none."""

    def disagreement_m(self, pressure_pa: tuple[float, float], elevation_m: tuple[float, float] | None) -> float:
        """Return the apparent head loss at rest for these pressures and elevations [m]."""
        upper, lower = elevation_m or (0.0, 0.0)
        return (pressure_pa[0] - pressure_pa[1]) / self.weight_pa_m + upper - lower


@dataclass(frozen=True, slots=True, kw_only=True)
class StaticReason:
    """A mistake that would explain the disagreement."""

    name: str
    """Short name, for records and tests."""
    text: str
    """What happened, as the end of a sentence that begins "It would be explained if"."""
    left_m: float
    """Disagreement that it would leave [m]."""


def static_reasons(rest: AtRest) -> tuple[StaticReason, ...]:
    """Return the mistakes that explain a disagreement at rest, the best first.

    Each candidate is undone and the disagreement worked out again: gauges swapped, sign of the elevations, feet for
    metres in one elevation or both, a unit of pressure for another at one gauge or both, absolute for gauge pressure,
    a slip of whole metres, water that still flows. What leaves no more than gauges and survey allow is kept. None of
    them fits a valve shut between the taps, which can leave any difference.

    Parameters
    ----------
    rest : AtRest
        Gauges and survey.

    Returns
    -------
    tuple of StaticReason
        Empty when the disagreement is within limits, or nothing explains it.

    Examples
    --------
    >>> level = AtRest(pressure_pa=(4e5, 3.0e5), weight_pa_m=9800.0, expected_m=0.2, elevation_m=(10.2, 0.0))
    >>> [one.name for one in static_reasons(level)][:2]
    ['gauges swapped', 'elevation sign']
    """
    given = rest.disagreement_m(rest.pressure_pa, rest.elevation_m)
    if abs(given) <= CLOSE * rest.expected_m:
        return ()
    found = [one for one in _candidates(rest, given) if abs(one.left_m) <= CLOSE * rest.expected_m]
    # Mistakes that touch one thing alone come before rarer ones that fit no better than chance lets them.
    return tuple(sorted(found, key=lambda one: (RANKS[one.name], abs(one.left_m))))


RANKS = {
    "gauges swapped": 0,
    "elevation sign": 0,
    "both elevations in another unit": 1,
    "absolute pressure": 1,
    "one elevation in another unit": 2,
    "both pressures in another unit": 2,
    "one pressure in another unit": 2,
    "water still flows": 3,
    "slip in an elevation": 4,
}
"""How readily each mistake is believed, the readiest first."""


def _candidates(rest: AtRest, given: float) -> Iterator[StaticReason]:
    """Yield every mistake with what is left when it is undone."""
    upper, lower = rest.pressure_pa
    swapped = rest.disagreement_m((lower, upper), rest.elevation_m)
    what = "the two gauges or their columns are swapped" if rest.elevation_m else "the transmitter's lines are swapped"
    yield StaticReason(name="gauges swapped", text=what, left_m=swapped)
    yield from _of_elevations(rest)
    yield from _of_units(rest)
    for end, sign in (("upper", -1.0), ("lower", 1.0)):
        text = f"the {end} gauge shows absolute pressure, 10.33 m more"
        yield StaticReason(name="absolute pressure", text=text, left_m=given + sign * ATMOSPHERE_M)
    if rest.smallest_loss_m is not None and 0.0 < given < rest.smallest_loss_m:
        text = "water still flowed while the gauges were levelled"
        yield StaticReason(name="water still flows", text=text, left_m=0.0)
    if rest.elevation_m is not None and abs(given) > STANDS_OUT * rest.expected_m:
        for slip in SLIPS_M:
            left = abs(given) - slip
            yield StaticReason(
                name="slip in an elevation",
                text=f"an elevation was written {slip:g} m too high or too low",
                left_m=left,
            )


def _of_elevations(rest: AtRest) -> Iterator[StaticReason]:
    """Yield mistakes in the survey."""
    if rest.elevation_m is None:
        return
    upper, lower = rest.elevation_m
    turned = rest.disagreement_m(rest.pressure_pa, (-upper, -lower))
    yield StaticReason(name="elevation sign", text="the elevations have the wrong sign, or are swapped", left_m=turned)
    for factor, what in ((FOOT, "feet were written as metres"), (1.0 / FOOT, "metres were written as feet")):
        both = rest.disagreement_m(rest.pressure_pa, (factor * upper, factor * lower))
        name = "both elevations in another unit"
        yield StaticReason(name=name, text=f"{what} in both elevations", left_m=both)
        for end, pair in (("upper", (factor * upper, lower)), ("lower", (upper, factor * lower))):
            if abs((factor - 1.0) * (upper if end == "upper" else lower)) < NEGLIGIBLE_M:
                continue
            left = rest.disagreement_m(rest.pressure_pa, pair)
            text = f"{what} in the {end} gauge's elevation"
            yield StaticReason(name="one elevation in another unit", text=text, left_m=left)


def _of_units(rest: AtRest) -> Iterator[StaticReason]:
    """Yield units of pressure taken for others."""
    upper, lower = rest.pressure_pa
    for ratio, less, more in UNIT_RATIOS:
        for factor, what in ((ratio, less), (1.0 / ratio, more)):
            likely = [PLAUSIBLE_PA[0] <= factor * one <= PLAUSIBLE_PA[1] for one in rest.pressure_pa]
            both = rest.disagreement_m((factor * upper, factor * lower), rest.elevation_m)
            ends = "at both gauges" if rest.elevation_m else "at the transmitter"
            if all(likely):
                yield StaticReason(name="both pressures in another unit", text=f"{what} {ends}", left_m=both)
            if rest.elevation_m is None:
                continue
            for end, pair, may in zip(
                ("upper", "lower"), ((factor * upper, lower), (upper, factor * lower)), likely, strict=True
            ):
                left = rest.disagreement_m(pair, rest.elevation_m)
                if may:
                    text = f"{what} at the {end} gauge"
                    yield StaticReason(name="one pressure in another unit", text=text, left_m=left)


def say_reasons(rest: AtRest, most: int = 2) -> str:
    """Return a sentence on what would explain a disagreement, or on what to look for when nothing simple does.

    Examples
    --------
    >>> say_reasons(AtRest(pressure_pa=(5.013e5, 4e5), weight_pa_m=9806.65, expected_m=0.1, elevation_m=(3.0, 3.0)))
    'It would be explained if the upper gauge shows absolute pressure, 10.33 m more.'
    """
    found = static_reasons(rest)[:most]
    if found:
        return f"It would be explained if {', or if '.join(one.text for one in found)}."
    if abs(rest.disagreement_m(rest.pressure_pa, rest.elevation_m)) <= CLOSE * rest.expected_m:
        return ""
    return (
        "No simple slip of unit, sign or place explains it: look for a valve shut between the taps, air in a gauge's "
        "line, or a gauge that has moved."
    )
