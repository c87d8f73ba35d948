"""The second job, top to bottom: a section and its campaigns in, how it ages out."""

from __future__ import annotations

import datetime as dt
from dataclasses import replace
from pathlib import Path

from fieldfit.assessment import assess_each
from fieldfit.decisions.ageing import ageing
from fieldfit.decisions.visits import Visit, check_dates
from fieldfit.errors import InputError
from fieldfit.field.campaign_files import gather_parts, logs_beside
from fieldfit.field.reach_pipe import section_of_reach
from fieldfit.field.section import Section
from fieldfit.field.section_file import read_section
from fieldfit.report.finding import CampaignFinding, Finding


def trend(section: str | Path | Section, *logs: str | Path) -> Finding:
    """Find out how a pipe ages, from all its campaigns together; one campaign stands on a published growth rate.

    Parameters
    ----------
    section : path or Section
        The section file, or the folder that holds it.
    *logs : path
        Logs, one per campaign; without any, those that the section file names, else every log in the folder.

    Returns
    -------
    Finding
        Everything found, the ageing of each reach with it.

    Raises
    ------
    InputError
        When a file cannot be used, or the campaigns cannot be put in order of time.
    """
    known = section if isinstance(section, Section) else read_section(Path(section))
    finding = Finding(section=known, campaigns=tuple(assess_each(known, logs or _every_log(known))))
    return with_ageing(finding)


def _every_log(section: Section) -> tuple[Path, ...]:
    """Return all logs of a folder whose section file names no campaign; none where its files are parts of one."""
    gathered, parts = gather_parts(section, ())
    return () if gathered.campaigns or parts else tuple(logs_beside(section))


def with_ageing(finding: Finding) -> Finding:
    """Return a finding with the ageing of every reach that has an estimate.

    Raises
    ------
    InputError
        When the campaigns cannot be put in order of time, or the forecast ends before the last one.
    """
    section = finding.section
    # Equal days keep the order of the file, in which a cleaning stands between them.
    campaigns = [campaign for campaign in finding.campaigns if campaign.date is not None]
    check_dates([_dated(one) for one in finding.campaigns], section.installed, str(section.path.name))
    campaigns.sort(key=lambda campaign: campaign.date.toordinal() if campaign.date else 0)
    until, last = section.outlook.until, campaigns[-1].date
    if until is not None and last is not None and until <= last:
        seen = f"the forecast is to end on {until}, before the last test of {last}"
        raise InputError(seen, "Write until = 2046-01-01 in [growth], a later day.", section.path.name)
    reaches = [(section_of_reach(section, k), _visits(campaigns, k)) for k in range(len(section.taps) - 1)]
    found = [ageing(one, visits) for one, visits in reaches if any(v.wall.state != "no estimate" for v in visits)]
    return replace(finding, ageing=tuple(found))


def with_ageing_if_it_can(finding: Finding) -> Finding:
    """Return a finding with its ageing, or with the reason why its campaigns do not give one."""
    try:
        return with_ageing(finding)
    except InputError as error:
        return replace(finding, no_ageing=str(error))


def _dated(campaign: CampaignFinding) -> tuple[dt.date | None, str, bool]:
    """Return day, log and whether the wall was made new before."""
    said = campaign.campaign
    return campaign.date, campaign.log.file, said is not None and (said.cleaned or said.changes.relined)


def _visits(campaigns: list[CampaignFinding], reach: int) -> list[Visit]:
    """Return the campaigns of one reach."""
    return [
        Visit(
            date=campaign.date,
            file=campaign.log.file,
            readings=campaign.reaches[reach].readings,
            wall=campaign.reaches[reach].wall,
            campaign=campaign.campaign,
        )
        for campaign in campaigns
        if campaign.date is not None and reach < len(campaign.reaches)
    ]
