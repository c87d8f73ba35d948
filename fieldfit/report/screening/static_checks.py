"""Whether statics are statics, and why they may disagree with the survey: checks as data."""

from __future__ import annotations

import numpy as np

from fieldfit.field.log import Log
from fieldfit.field.readings import Plateaus, Screening
from fieldfit.field.section import Section
from fieldfit.field.static_doubts import static_doubts
from fieldfit.field.static_reasons import say_reasons
from fieldfit.report.screening.finding import Check, ReachScreen
from fieldfit.report.screening.reach_checks import AGREE
from fieldfit.report.static_cautions import ROUGH_WEIGHT_PA_M, at_rest

UNITS = {"decaying loss": "m", "draining": "Pa", "flow": "m³/s", "nearly still": "m³/s"}
"""Unit of what each sign was seen by."""


def static_checks(
    log: Log, screening: Screening, plateaus: Plateaus, reaches: tuple[ReachScreen, ...], section: Section
) -> tuple[Check, ...]:
    """Return a check for each sign that water still moved in a static, and for each disagreement with its reason.

    Parameters
    ----------
    log, screening, plateaus
        The log, its rows and its steady windows.
    reaches : tuple of ReachScreen
        What screening found of each reach.
    section : Section
        The test section.

    Returns
    -------
    tuple of Check
        None of them needed: an assessment is possible, and its zero is in doubt.
    """
    found = []
    for doubt in static_doubts(log, screening, plateaus, section):
        seen, _, do = doubt.text.rpartition(". ")
        what = f"Water at rest in plateau {doubt.plateau}: {doubt.sign}"
        found.append(_failed(what, f"{seen}.", do, (abs(doubt.value), doubt.limit, UNITS[doubt.sign])))
    if not found and np.any(plateaus.static) and log.kind == "logger":
        found.append(
            Check(
                what="Signs that water still moved in a static",
                value=0.0,
                limit=0.0,
                unit="-",
                passed=True,
                because="Flow, pressures and their difference stand still in every static.",
                do="",
                needed=False,
                at_most=True,
            )
        )
    return (*found, *(check for reach in reaches for check in _disagreement(reach, section)))


def _disagreement(reach: ReachScreen, section: Section) -> list[Check]:
    """Return what would explain a static that disagrees with the survey."""
    heads, level = reach.heads, reach.heads.levelling
    if level is None or heads.elevation_drop is None or abs(level.offset_m) <= AGREE * level.expected_m:
        return []
    flowing = heads.head_loss_m[~heads.plateaus.static]
    loss = float(np.min(flowing)) if flowing.size else None
    taps = (reach.upstream, reach.downstream)
    rest = at_rest(level, taps, ROUGH_WEIGHT_PA_M, loss, apart=section.differential is None)
    what = f"Gauges at rest, {reach.upstream.column} to {reach.downstream.column}"
    seen = (abs(level.offset_m), AGREE * level.expected_m, "m")
    return [_failed(what, say_reasons(rest), "Look into it, and read the gauges at rest again.", seen)]


def _failed(what: str, because: str, do: str, seen: tuple[float, float, str]) -> Check:
    """Return a check that was not passed."""
    value, limit, unit = seen
    told = {"what": what, "because": because, "do": do}
    return Check(**told, value=value, limit=limit, unit=unit, passed=False, needed=False, at_most=True)
