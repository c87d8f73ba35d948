"""The look before the main job: a section and its logs in, what became of every row and whether it will do out."""

from __future__ import annotations

import datetime as dt
from pathlib import Path

import numpy as np

from fieldfit.assessment import logs_to_read, of_no_reach, read_campaign
from fieldfit.field.campaign_files import gather_parts
from fieldfit.field.plateaus import set_plateaus_aside
from fieldfit.field.quantisation import channel_steps
from fieldfit.field.reach_pipe import section_of_reach
from fieldfit.field.reaches import reach_heads
from fieldfit.field.readings import Plateaus
from fieldfit.field.row_screens import still_below
from fieldfit.field.section import Section
from fieldfit.field.section_file import read_section
from fieldfit.field.section_outlook import section_on
from fieldfit.report.screening.finding import CampaignScreen, ReachScreen, ScreenFinding
from fieldfit.report.screening.log_checks import log_checks
from fieldfit.report.screening.reach_checks import reach_checks
from fieldfit.report.screening.static_checks import static_checks


def screen_logs(section: str | Path | Section, *logs: str | Path) -> ScreenFinding:
    """Look at logs before anything is fitted to them: used rows, rows set aside, statics, and whether it will do.

    It says as much of a log that cannot be assessed at all.

    Parameters
    ----------
    section : path or Section
        The section file, or the folder that holds it.
    *logs : path
        Logs, one per campaign; without any, those that the section file names, else the folder's only CSV file.

    Returns
    -------
    ScreenFinding
        Everything found; it shows itself as a page in a notebook.

    Raises
    ------
    InputError
        When a file cannot be used; the message says where and what to do.
    """
    known = section if isinstance(section, Section) else read_section(Path(section))
    joined, paths = gather_parts(known, logs)
    campaigns = [_campaign(joined, path, date) for path, date in logs_to_read(joined, paths)]
    return ScreenFinding(section=known, campaigns=tuple(campaigns))


def _campaign(section: Section, path: Path, date: dt.date | None) -> CampaignScreen:
    """Screen one log with the section as it was on its day."""
    named = [one for one in section.campaigns if one.log.name == path.name]
    section = section_on(section, named[0] if named else None)
    log, screening, plateaus = read_campaign(section, path)
    moving = bool(np.any(np.abs(log.flow_m3_s) >= still_below(log, section)))
    reaches = tuple(_reach(section, plateaus, reach, moving) for reach in range(len(section.taps) - 1))
    screening = set_plateaus_aside(screening, of_no_reach([_set_aside(reach) for reach in reaches]))
    steps = channel_steps(log, screening, section)
    return CampaignScreen(
        date=date or (log.start.date() if log.start else None),
        log=log,
        screening=screening,
        plateaus=plateaus,
        steps=steps,
        reaches=reaches,
        checks=(
            *log_checks(log, screening, plateaus, reaches, steps),
            *static_checks(log, screening, plateaus, reaches, section),
        ),
    )


def _reach(section: Section, plateaus: Plateaus, reach: int, moving: bool) -> ReachScreen:
    """Look at one reach."""
    heads = reach_heads(plateaus, section, reach)
    return ReachScreen(
        upstream=section.taps[reach],
        downstream=section.taps[reach + 1],
        heads=heads,
        checks=reach_checks(heads, section_of_reach(section, reach), moving),
    )


def _set_aside(reach: ReachScreen) -> dict[int, str]:
    """Return the plateaus that carry nothing for a reach, with their reasons."""
    heads = reach.heads
    caught = np.flatnonzero(heads.reason != "")
    return {int(heads.plateaus.number[k]): str(heads.reason[k]) for k in caught} | dict(heads.dead)
