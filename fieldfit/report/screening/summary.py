"""What screening found, in a dozen lines for a terminal."""

from __future__ import annotations

import numpy as np

from fieldfit.report.digits import COVERAGE, fixed, significant
from fieldfit.report.screening import words
from fieldfit.report.screening.finding import CampaignScreen, ReachScreen, ScreenFinding
from fieldfit.report.summary import folded, title


def screen_summary(finding: ScreenFinding) -> str:
    """Return what screening found as plain text of about a dozen lines, without colour.

    Parameters
    ----------
    finding : ScreenFinding
        What screening found.

    Returns
    -------
    str
        Lines without an end of line after the last; each further log or reach adds its own block.
    """
    lines = [title(finding.section)]
    for campaign in finding.campaigns:
        if len(finding.campaigns) > 1:
            lines.append("")
        lines += _campaign(campaign, finding)
    return "\n".join(lines)


def _campaign(campaign: CampaignScreen, finding: ScreenFinding) -> list[str]:
    """Return the lines of one log."""
    verdict = words.headline(campaign)
    lines = folded("log", f"{campaign.log.file}: {words.extent(campaign)}")
    lines += folded("verdict", f"{verdict[0].lower()}{verdict[1:]}")
    lines += folded("read", words.reading(campaign, finding.section))
    for reach in campaign.reaches:
        if len(campaign.reaches) > 1:
            lines += folded("reach", f"{reach.upstream.column} to {reach.downstream.column}")
        lines += _reach(reach)
    for number, text in enumerate(words.clocks(campaign)):
        lines += folded("clocks" if number == 0 else "", text)
    lines += folded("steps", _steps(campaign))
    total = campaign.log.rows
    aside = ", ".join(f"{number} {reason}" for reason, number in campaign.screening.counts)
    lines += folded("rows", f"{campaign.screening.used} of {total} used" + (f"; set aside: {aside}" if aside else ""))
    for name, needed in (("missing", True), ("weak", False)):
        for number, because in enumerate(dict.fromkeys(c.because for c in words.failed(campaign, needed))):
            lines += folded(name if number == 0 else "", because)
    for number, text in enumerate(words.again(campaign)):
        lines += folded("do" if number == 0 else "", text)
    assumed = len(dict.fromkeys([*finding.section.assumed, *campaign.log.assumed]))
    return lines + (folded("assumed", f"{words.count(assumed, 'thing')}; the page lists them") if assumed else [])


def _reach(reach: ReachScreen) -> list[str]:
    """Return flows, head losses and statics of one reach."""
    heads = reach.heads
    flowing = ~heads.plateaus.static
    if not np.any(flowing):
        lines = folded("flows", "no steady flow")
    else:
        flow, head = heads.plateaus.flow_m3_s[flowing] * 1e3, heads.head_loss_m[flowing]
        ends = f"{significant(float(flow.min()))} to {significant(float(flow.max()))} L/s"
        losses = f"{significant(float(head.min()))} to {significant(float(head.max()))} m"
        counted = int(np.count_nonzero(heads.reason[flowing] == ""))
        lines = folded("flows", f"{counted} of {flow.size} count: {ends}, losing {losses}")
    level = heads.levelling
    if level is None:
        return lines + folded(
            "statics", "none" + ("" if heads.elevation_drop else ", and the gauges were not surveyed")
        )
    told = f"{words.count(level.plateaus, 'static')}: {fixed(level.offset_m, 3)} m at rest"
    told += "" if level.drift_m is None else f", drift {fixed(level.drift_m, 3)} m"
    if heads.elevation_drop:
        told += f"; survey and gauges allow ±{significant(COVERAGE * level.expected_m, 2)} m"
    return lines + folded("statics", told)


def _steps(campaign: CampaignScreen) -> str:
    """Return the step of each column."""
    told = []
    for index, one in enumerate(campaign.steps):
        scale, unit = (1e3, "L/s") if index == 0 else (1e-3, "kPa")
        told.append(f"{one.column} {significant(one.step * scale)} {unit}" if one.step else f"{one.column} none seen")
    return ", ".join(told)
