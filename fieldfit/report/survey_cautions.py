"""What the reader of a survey must know beside its answer."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from fieldfit.field.readings import Plateaus
from fieldfit.field.section import Section
from fieldfit.inference.survey_finding import Survey
from fieldfit.report.digits import fixed, litres, percent, significant
from fieldfit.report.finding import Caution, ReachFinding

PULL = 2.5
"""Standard uncertainties by which a stated accuracy may be exceeded in the fit."""
RISES = 2.5
"""Standard uncertainties a reach must gain in head to be named."""
SCATTER = 3.0
"""Reduced χ² from which the taps do not agree with each other."""


def survey_cautions(section: Section, plateaus: Plateaus, found: Survey | None) -> tuple[Caution, ...]:
    """Return what to say of dead taps, reaches that gain head, gauges that had to give way, and unknown side flows.

    Parameters
    ----------
    section : Section
        The test section.
    plateaus : Plateaus
        Plateaus of the campaign.
    found : Survey or None
        The survey; None where there was none to make.

    Returns
    -------
    tuple of Caution
        Most weighty first.
    """
    told = [*_rising(section, found), *_dead(section, plateaus, found), *_pulls(found), *_branches(section, found)]
    return tuple(told)


def deposit_cautions(reaches: tuple[ReachFinding, ...]) -> tuple[Caution, ...]:
    """Return what to say of bore evidence that contradicts the readings.

    Parameters
    ----------
    reaches : tuple of ReachFinding
        What was found of each reach.

    Returns
    -------
    tuple of Caution
    """
    told = []
    for reach in reaches:
        prefix = f"{reach.readings.upstream.column} to {reach.readings.downstream.column}: " if len(reaches) > 1 else ""
        for one in reach.deposit.map.evidence if reach.deposit else ():
            if not one.used:
                bore = significant(1e3 * one.evidence.bore.value)
                text = (
                    f"{prefix}The {one.evidence.kind}'s bore of {bore} mm contradicts the readings at any roughness and was left "
                    "out of the deposit. One of the two is wrong: check its place and unit, the bore as laid, and the meter."
                )
                told.append(Caution(about="bore", text=text))
    return tuple(told)


def _dead(section: Section, plateaus: Plateaus, found: Survey | None) -> Iterator[Caution]:
    """Name taps that were dead; one that was dead at rest cannot be levelled."""
    used = set() if found is None else {int(tap) for tap in (*found.readings.upper, *found.readings.lower)}
    total = len(plateaus.number)
    for index, tap in enumerate(section.taps):
        dead = int(np.count_nonzero(np.isnan(plateaus.pressure_pa[index])))
        if dead:
            beside = [one.column for one in section.taps[max(index - 1, 0) : index + 2] if one is not tap]
            between = (
                f"; the taps beside it, {' and '.join(beside)}, were fitted as one reach" if len(beside) > 1 else ""
            )
            where = (
                "there"
                if not used or index in used
                else "throughout, for it was dead at rest and could not be levelled"
            )
            yield Caution(
                about="dead tap",
                text=f"{tap.column} gave no usable reading in {dead} of {total} plateaus{between}{f' {where}' if between else ''}. "
                "What is said of the reaches beside it stands on the others. Look at its gauge, hose and cable.",
            )


def _rising(section: Section, found: Survey | None) -> Iterator[Caution]:
    """Name reaches in which the head seems to rise along the flow."""
    if found is None:
        return
    grade = found.grade
    fall = grade.head_m[:-1] - grade.head_m[1:]
    names = {tap.station.value: tap.column for tap in section.taps}
    for index in np.flatnonzero(fall < 0.0):
        upper, lower = (names[float(grade.station_m[end])] for end in (index, index + 1))
        yield Caution(
            about="negative loss",
            text=f"From {upper} to {lower} the head seems to rise by {fixed(-float(fall[index]), 3)} m at "
            f"{litres(grade.flow_m3_s)}, which no pipe does: a gauge or a height there is off, or water comes in. On its own "
            "that reach gives no roughness; fitted together, the error of the tap they share is set against its neighbour, "
            "which reads too high by as much. Check both gauges against each other at one tap.",
        )


def _pulls(found: Survey | None) -> Iterator[Caution]:
    """Name stated errors that the fit had to stretch."""
    if found is None:
        return
    for name, pull in found.pulls:
        if abs(pull) > PULL and name != "uneven wall":
            yield Caution(
                about="survey",
                text=f"To fit all taps together, '{name}' had to be {significant(abs(pull), 2)} times its stated standard "
                "uncertainty. Check that instrument or dimension.",
            )
    if found.reduced_chi_square is not None and found.reduced_chi_square > SCATTER:
        yield Caution(
            about="survey",
            text=f"The taps agree with each other less well than their noise explains (reduced χ² "
            f"{significant(found.reduced_chi_square, 2)}); the noise was widened to match. {_suspected(found)}".strip(),
        )


def _suspected(found: Survey) -> str:
    """Return which tap would account for a disagreement."""
    one = found.suspect
    if one is None:
        return "No single tap accounts for it: taps may be mixed up, or the flow may not be what the meter says."
    off = f"{significant(abs(one.offset_m), 2)} m too {'high' if one.offset_m > 0.0 else 'low'}"
    return (
        f"If {one.column} read {off} throughout, {percent(one.share)} of it would be gone: "
        "check its height and its gauge, or level all gauges with a static."
    )


def _branches(section: Section, found: Survey | None) -> Iterator[Caution]:
    """Say what a side flow of unknown size means for reaches read on their own."""
    if found is None or found.side_flow is None:
        return
    yield Caution(
        about="side flow",
        text=f"The flow of {found.side_flow.name} is inferred from the survey. Reaches read on their own know nothing of it and "
        "take the metered flow: below the branch their C is too high.",
    )
