"""What the reader must know of the statics: disagreement with the survey, drift, and water that still moved."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from fieldfit.field.log import Log
from fieldfit.field.readings import Levelling, Plateaus, ReachReadings, Screening
from fieldfit.field.section import Section, Tap
from fieldfit.field.static_doubts import static_doubts
from fieldfit.field.static_reasons import AtRest, say_reasons
from fieldfit.report.finding import Caution

ROUGH_WEIGHT_PA_M = 9800.0
"""Weight of water, where no reading tells that of the liquid [Pa/m]."""
DISAGREES = 2.5
"""Standard uncertainties by which statics may differ from survey and gauges."""
DRIFT_SHARE = 0.05
"""Share of the smallest head loss that the levelling may drift."""


def at_rest(
    levelling: Levelling, taps: tuple[Tap, Tap], weight_pa_m: float, smallest_loss_m: float | None, *, apart: bool
) -> AtRest:
    """Return what two gauges and the survey say at rest.

    Parameters
    ----------
    levelling : Levelling
        What the statics gave.
    taps : tuple of Tap
        Upper and lower tap.
    weight_pa_m : float
        Weight of the liquid [Pa/m].
    smallest_loss_m : float or None
        Head loss of the smallest flow [m].
    apart : bool
        Whether there are two gauges, and not one transmitter.

    Returns
    -------
    AtRest
    """
    upper, lower = (tap.elevation for tap in taps)
    known = apart and upper is not None and lower is not None
    return AtRest(
        pressure_pa=levelling.pressure_pa,
        weight_pa_m=weight_pa_m,
        expected_m=levelling.expected_m,
        elevation_m=(upper.value, lower.value) if known and upper and lower else None,
        smallest_loss_m=smallest_loss_m,
    )


def disagreement_cautions(readings: ReachReadings, section: Section) -> Iterator[Caution]:
    """Hold the levelling of a reach against survey and gauges, with the likely reason where they disagree."""
    level = readings.levelling
    if level is None or abs(level.offset_m) <= DISAGREES * level.expected_m:
        return
    weight = 9.80665 * float(readings.density_kg_m3[0]) if readings.density_kg_m3.size else ROUGH_WEIGHT_PA_M
    loss = float(np.min(readings.head_loss_m)) if readings.head_loss_m.size else None
    rest = at_rest(level, (readings.upstream, readings.downstream), weight, loss, apart=section.differential is None)
    what = (
        "the gauges disagree with the surveyed elevations" if section.differential is None else "the transmitter is off"
    )
    yield Caution(
        about="static",
        text=f"At rest {what} by {level.offset_m:+.2f} m, where stated limits allow about {2.0 * level.expected_m:.2f} m. "
        f"The static was believed. {say_reasons(rest)}",
    )


def drift_cautions(readings: ReachReadings) -> Iterator[Caution]:
    """Hold the drift between statics against the smallest head loss."""
    level = readings.levelling
    smallest = float(np.min(np.abs(readings.head_loss_m), initial=np.inf))
    if level is None or level.drift_m is None or abs(level.drift_m) <= DRIFT_SHARE * smallest:
        return
    when = "last" if level.drift_m > 0.0 else "first"
    yield Caution(
        about="static",
        text=f"The gauges moved by {level.drift_m:+.3f} m against each other between the first and the last static; the "
        f"smallest head loss used is {smallest:.2f} m. Either a gauge drifted, or water still flowed in the {when} one, "
        "which shows the greater loss. The drift was shared out over time.",
    )


def doubt_cautions(log: Log, screening: Screening, plateaus: Plateaus, section: Section) -> Iterator[Caution]:
    """Say where water still moved in a static."""
    for doubt in static_doubts(log, screening, plateaus, section):
        yield Caution(about="static", text=doubt.text)
