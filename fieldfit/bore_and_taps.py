"""What a campaign gets beside the reading of each reach: all taps together, and bore or roughness."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from fieldfit.field.log import Log
from fieldfit.field.readings import Plateaus, Screening
from fieldfit.field.section import Section

if TYPE_CHECKING:
    from fieldfit.inference.survey_finding import Survey
    from fieldfit.report.finding import ReachFinding


def survey_of(section: Section, plateaus: Plateaus, rows: tuple[Log, Screening]) -> Survey | None:
    """Return what all taps together say; None when no plateau is turbulent and clear of its uncertainty.

    Parameters
    ----------
    section : Section
        The test section, of three taps or more.
    plateaus : Plateaus
        Plateaus of the campaign.
    rows : (Log, Screening)
        The rows behind them.

    Returns
    -------
    Survey or None
    """
    from fieldfit.field.survey_readings import survey_readings
    from fieldfit.inference.survey import survey

    readings = survey_readings(plateaus, section, rows)
    return None if readings is None else survey(readings, section.correlation)


def with_deposit(section: Section, plateaus: Plateaus, found: ReachFinding, reach: int) -> ReachFinding:
    """Return what was found of a reach, with its loss read as roughness, as bore, and as every mixture.

    Parameters
    ----------
    section : Section
        The test section.
    plateaus : Plateaus
        Plateaus of the campaign, for laminar ones that tell the bore.
    found : ReachFinding
        What was found so far.
    reach : int
        The reach from tap `reach` to the next.

    Returns
    -------
    ReachFinding
    """
    if not found.readings.number.size:
        return found
    from fieldfit.decisions.deposit import deposit
    from fieldfit.field.laminar_bore import bore_evidence_of
    from fieldfit.field.reach_pipe import section_of_reach

    evidence = bore_evidence_of(plateaus, section, found.readings, reach)
    return replace(found, deposit=deposit(found.readings, found.wall, section_of_reach(section, reach), evidence))
