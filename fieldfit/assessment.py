"""The main job, top to bottom: a section and its logs in, a finding out."""

from __future__ import annotations

import datetime as dt
from dataclasses import replace
from pathlib import Path

import numpy as np

from fieldfit.bore_and_taps import survey_of, with_deposit
from fieldfit.decisions.new_pipe import compare_with_new
from fieldfit.decisions.stress_test import stress_test
from fieldfit.errors import InputError
from fieldfit.field.campaign_files import gather_parts, logs_beside, read_campaign_log
from fieldfit.field.dead_taps import bridge_dead_taps, without_dead_taps
from fieldfit.field.log import Log
from fieldfit.field.long_log import open_long_log, read_long_log
from fieldfit.field.plateaus import screen, set_plateaus_aside, summarise
from fieldfit.field.reach_pipe import section_of_reach
from fieldfit.field.reaches import reach_readings
from fieldfit.field.readings import Plateaus, ReachReadings, Screening
from fieldfit.field.screens import DEAD_TAP
from fieldfit.field.section import Section
from fieldfit.field.section_file import read_section
from fieldfit.field.section_outlook import section_on
from fieldfit.hydraulics.friction import STANDARD_GRAVITY
from fieldfit.inference.estimate import estimate
from fieldfit.inference.explanations import explain, new_roughness
from fieldfit.progress import tell
from fieldfit.report.cautions import cautions
from fieldfit.report.finding import CampaignFinding, Finding, ReachFinding
from fieldfit.report.survey_cautions import deposit_cautions, survey_cautions


def assess(section: str | Path | Section, *logs: str | Path) -> Finding:
    """Find out what has become of a pipe.

    Parameters
    ----------
    section : path or Section
        The section file, or the folder that holds it.
    *logs : path
        Logs, one per campaign; without any, those that the section file names, else the folder's only CSV file.

    Returns
    -------
    Finding
        Everything found; it shows itself as a page in a notebook.

    Raises
    ------
    InputError
        When a file cannot be used; the message says where and what to do.
    """
    known = section if isinstance(section, Section) else read_section(Path(section))
    finding = Finding(section=known, campaigns=tuple(assess_each(known, logs)))
    if len(finding.campaigns) < 2:
        return finding
    from fieldfit.trend import with_ageing_if_it_can

    return with_ageing_if_it_can(finding)


def assess_each(section: Section, logs: tuple[str | Path, ...]) -> list[CampaignFinding]:
    """Take every log from its rows to what is found of each reach."""
    section, logs = gather_parts(section, logs)
    return [_campaign(section, path, date) for path, date in logs_to_read(section, logs)]


def _campaign(section: Section, path: Path, date: dt.date | None) -> CampaignFinding:
    """Assess one log with the section as it was on its day."""
    named = [one for one in section.campaigns if one.log.name == path.name]
    if not named:
        return assess_campaign(section, path, date)
    found = assess_campaign(section_on(section, named[0]), path, date or named[0].date)
    return replace(found, campaign=named[0])


def assess_campaign(section: Section, path: Path, date: dt.date | None) -> CampaignFinding:
    """Take one log from its rows to what is found of each reach."""
    log, screening, plateaus = read_campaign(section, path)
    readings = [reach_readings(plateaus, section, reach) for reach in range(len(section.taps) - 1)]
    screening = set_plateaus_aside(screening, of_no_reach([dict(of_reach.set_aside) for of_reach in readings]))
    every = [reach_readings(plateaus, section, reach, every_turbulent=True) for reach in range(len(readings))]
    reaches = tuple(
        _assess_reach(section_of_reach(section, k), of_reach, every[k]) for k, of_reach in enumerate(readings)
    )
    reaches = tuple(with_deposit(section, plateaus, one, k) for k, one in enumerate(reaches))
    together = survey_of(section, plateaus, (log, screening)) if len(section.taps) > 2 else None
    return CampaignFinding(
        date=date or (log.start.date() if log.start else None),
        log=log,
        screening=screening,
        plateaus=plateaus,
        reaches=reaches,
        cautions=(
            *survey_cautions(section, plateaus, together),
            *deposit_cautions(reaches),
            *cautions(section, log, screening, plateaus, reaches),
        ),
        survey=together,
    )


def read_campaign(section: Section, path: Path) -> tuple[Log, Screening, Plateaus]:
    """Read one log and part its rows into plateaus and rows set aside: what screening and assessing begin with."""
    long = open_long_log(path, section)
    if long is not None:
        return read_long_log(long, _weight(section), lambda share: tell(f"Reading {path.name}", share))
    log = read_campaign_log(path, section)
    bridged, dead = bridge_dead_taps(log, section)
    screening = screen(bridged, section)
    return log, screening, without_dead_taps(summarise(bridged, screening, section, _weight(section)), screening, dead)


def logs_to_read(section: Section, given: tuple[str | Path, ...]) -> list[tuple[Path, dt.date | None]]:
    """Return the logs to read with their dates: those given, else the section's campaigns, else the only CSV file."""
    if given:
        twice = next((path for path in given if list(given).count(path) > 1), None)
        if twice is not None:
            raise InputError("this log is named twice", "Name each log once.", str(twice))
        return [(Path(path), None) for path in given]
    if section.campaigns:
        return [(campaign.log, campaign.date) for campaign in section.campaigns]
    found = logs_beside(section)
    if len(found) == 1:
        return [(found[0], None)]
    listed = ", ".join(f"'{path.name}'" for path in found) or "no CSV file"
    raise InputError(
        f"no log was named, and the folder holds {listed}",
        "Name the log on the command line, or add a [[campaign]] table with its date and log.",
        str(section.path),
    )


def _weight(section: Section) -> float:
    """Return a typical weight of the liquid, ρg [Pa/m], for what needs it only roughly."""
    temperature = section.temperature.value if section.temperature else 15.0
    return float(section.liquid.density_kg_m3(np.array([temperature]))[0]) * STANDARD_GRAVITY


def of_no_reach(reasons: list[dict[int, str]]) -> dict[int, str]:
    """Return the plateaus that no reach can use, with the first reach's reason, from those that each sets aside."""
    of_none = {number: why for number, why in reasons[0].items() if all(number in other for other in reasons)}
    # Where a tap was dead, the reach across it may still be known.
    return {number: why for number, why in of_none.items() if all(other[number] != DEAD_TAP for other in reasons)}


def _assess_reach(section: Section, readings: ReachReadings, every: ReachReadings) -> ReachFinding:
    """Estimate one reach's wall, compare it with new pipe, and see what else could explain its readings."""
    wall = estimate(readings, section.correlation)
    material = section.material
    new_pipe = compare_with_new(wall, material, section.bore.value, section.correlation) if material else None
    return ReachFinding(
        readings=readings,
        wall=wall,
        new_pipe=new_pipe,
        explanations=explain(every, section.correlation, new_roughness(material)),
        stress=stress_test(readings, wall, section.correlation, new_pipe),
    )
