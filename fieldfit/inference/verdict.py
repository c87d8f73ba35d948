"""Measured, upper limit or no estimate: the state of an answer, by rule, with the reason and what to do."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from fieldfit.field.readings import ReachReadings
from fieldfit.field.screens import CRITICAL, LAMINAR, NEGATIVE, UNRESOLVED
from fieldfit.hydraulics.friction import relative_roughness, smooth
from fieldfit.inference.head_model import HeadModel
from fieldfit.inference.wall import PlateauValues, Span, State

ROUGHEST_WALL = 0.05
"""ε/D above which the loss is not roughness: the chart ends there."""
SMOOTHEST_SHARE = 0.9
"""Share of the smooth pipe's f under which the data, not the pipe, are at fault: the correlation's limit, and the
measurement band must lie below it as a whole."""

RESOLVE = (
    "Level the gauges with a static before and after, and test with a larger flow, a longer section or finer gauges."
)
ORDER = "Put the taps in the order the water runs, check the elevations, or level the gauges with a static."


class Verdict(NamedTuple):
    """State of the answer, why, and what to do."""

    state: State
    """Measured, upper limit or no estimate."""
    because: str
    """Why, as a sentence."""
    advice: str
    """What to do for an estimate, as a sentence; empty when there is one."""


def judge(model: HeadModel, best: float, measurement: Span, with_correlation: Span) -> Verdict:
    """Decide the state of a fitted wall.

    Parameters
    ----------
    model : HeadModel
        The equation fitted.
    best : float
        Best ln f at the reference [-].
    measurement, with_correlation : (float, float)
        95 % intervals of it [-].

    Returns
    -------
    Verdict
    """
    at_smooth = ln_smooth(model)
    if measurement[1] < at_smooth + np.log(SMOOTHEST_SHARE):
        return Verdict(
            "no estimate",
            f"The friction factor reads {np.exp(best - at_smooth):.2f} of a perfectly smooth pipe's, further below it than "
            "stated errors and the correlation's limit allow: a fault in the data, not a good pipe.",
            "Check the meter, the units, the bore and the order of the gauges, and test again with a static before and after.",
        )
    wall = roughness_at(model, best) / model.readings.bore.value
    if wall > ROUGHEST_WALL:
        return Verdict(
            "no estimate",
            f"Read as roughness the loss would need ε/D of {wall:.2g}, above {ROUGHEST_WALL:g}: that is not a roughness.",
            "Look for a smaller bore, a valve not fully open or a wrong unit; a third tap between these two would show where "
            "the head goes.",
        )
    if with_correlation[0] <= at_smooth:
        return Verdict(
            "upper limit", "Within measurement errors and the correlation's limit the wall may be perfectly smooth.", ""
        )
    return Verdict("measured", "The friction lies clear above a smooth pipe's.", "")


def without_readings(readings: ReachReadings) -> Verdict:
    """Say why no plateau is left to fit."""
    reasons = dict.fromkeys(reason for _, reason in readings.set_aside)
    if not reasons:
        return Verdict(
            "no estimate",
            "No steady flow was found in the log: every row was set aside or static.",
            "Hold each flow until it is steady, a minute at least, and test several flows.",
        )
    advice = []
    if LAMINAR in reasons or CRITICAL in reasons:
        litres = 1000.0 * readings.turbulent_from_m3_s
        advice.append(
            f"Only turbulent flow feels the wall, above {litres:.2g} L/s here; several times that tells more."
        )
    if NEGATIVE in reasons:
        advice.append(ORDER)
    if UNRESOLVED in reasons:
        advice.append(RESOLVE)
    return Verdict("no estimate", f"No plateau carries a roughness: {', '.join(reasons)}.", " ".join(advice))


def without_loss(values: PlateauValues) -> Verdict:
    """Say why no head loss to friction stands clear of its uncertainty."""
    if np.all(values.friction_loss_m < -2.0 * values.friction_loss_standard_m):
        return Verdict(
            "no estimate", "The head loss to friction is negative at every flow, by more than its uncertainty.", ORDER
        )
    largest = int(np.argmax(values.friction_loss_m))
    return Verdict(
        "no estimate",
        f"The largest head loss to friction, {values.friction_loss_m[largest]:.2g} m, is less than twice its standard "
        f"uncertainty of {values.friction_loss_standard_m[largest]:.2g} m.",
        RESOLVE,
    )


def roughness_at(model: HeadModel, ln_friction: float) -> float:
    """Return the roughness that gives ln f at the reference [m], zero when smoother than smooth."""
    relative = relative_roughness(np.exp(ln_friction), model.reference.reynolds)
    return max(float(relative), 0.0) * model.readings.bore.value


def ln_smooth(model: HeadModel) -> float:
    """Return ln f of a smooth pipe at the reference [-]."""
    return float(np.log(smooth(model.reference.reynolds)))
