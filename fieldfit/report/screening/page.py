"""The page of a screening: one HTML file in the style of the report."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from fieldfit.report import captions, figures
from fieldfit.report import tables as report_tables
from fieldfit.report.clock_block import clock_block
from fieldfit.report.digits import fixed, known
from fieldfit.report.page import TEMPLATES, environment, versions
from fieldfit.report.screening import captions as own_captions
from fieldfit.report.screening import tables, words
from fieldfit.report.screening.finding import ReachScreen, ScreenFinding

if TYPE_CHECKING:
    from matplotlib.figure import Figure


def screen_page(finding: ScreenFinding) -> str:
    """Return everything that screening found as one HTML page, without network, script or other files.

    Parameters
    ----------
    finding : ScreenFinding
        What screening found.

    Returns
    -------
    str
        The page.
    """
    from markupsafe import Markup

    drawings: dict[str, Figure] = {}
    campaigns = [_campaign(finding, index, drawings) for index in range(len(finding.campaigns))]
    drawn = {name: Markup(text) for name, text in figures.svg(drawings).items()}
    section = finding.section
    assumed = dict.fromkeys([*section.assumed, *(text for c in finding.campaigns for text in c.log.assumed)])
    context = {
        "css": Markup((TEMPLATES / "page.css").read_text(encoding="utf-8")),
        "title": section.name.strip() or "Pipe section",
        "subtitle": _subtitle(finding),
        "several": len(campaigns) > 1,
        "campaigns": campaigns,
        "drawn": drawn,
        "inputs": report_tables.inputs(section),
        "assumed": list(assumed),
        "versions": versions(),
    }
    return environment().get_template("screen.html").render(context) + "\n"


def _subtitle(finding: ScreenFinding) -> str:
    """Return the pipe in one line."""
    section = finding.section
    length = section.taps[-1].station.value - section.taps[0].station.value
    parts = [
        "screening before any fit",
        section.material or "material unknown",
        f"bore {known(section.bore, 1e3)} mm",
        f"{fixed(length, 1 if length < 100.0 else 0)} m between the outer taps",
    ]
    return " · ".join(parts)


def _campaign(finding: ScreenFinding, index: int, drawings: dict[str, Figure]) -> dict[str, Any]:
    """Return what is printed of one log, and add its figures to the drawings."""
    campaign, section = finding.campaigns[index], finding.section
    drawings[f"c{index}"] = figures.rows(campaign, section)
    return {
        "title": f"{campaign.date.day} {campaign.date:%B %Y}" if campaign.date else campaign.log.file,
        "headline": words.headline(campaign),
        "answer": words.answer(campaign),
        "again": words.again(campaign),
        "reading": f"{words.extent(campaign)}. {words.reading(campaign, section)}",
        "timeline": {"name": f"c{index}", "title": "The log itself", "text": captions.rows(campaign)},
        "reaches": [_reach(finding, (index, k), drawings) for k in range(len(campaign.reaches))],
        "clock_block": _clocks(finding, index, drawings),
        "checks": tables.checks(campaign.checks),
        "rows": report_tables.rows(campaign),
        "screens": tables.screens(campaign, section),
        "steps": tables.steps(campaign),
        "file": campaign.log.file,
        "sha256": campaign.log.sha256,
    }


def _clocks(finding: ScreenFinding, index: int, drawings: dict[str, Figure]) -> dict[str, Any] | None:
    """Return what is printed of several loggers' clocks, and add the figure to the drawings."""
    block = clock_block(finding.campaigns[index].log, finding.section, f"c{index}k")
    for figure in block["figures"] if block else []:
        drawings[figure["name"]] = figure["figure"]
    return block


def _reach(finding: ScreenFinding, place: tuple[int, int], drawings: dict[str, Figure]) -> dict[str, Any]:
    """Return what is printed of one reach, and add its figures to the drawings."""
    campaign = finding.campaigns[place[0]]
    reach: ReachScreen = campaign.reaches[place[1]]
    name = f"c{place[0]}r{place[1]}"
    drawings[f"{name}cloud"] = figures.cloud(campaign, place[1], finding.section)
    shown = [
        {"name": f"{name}cloud", "title": "Head loss against flow", "text": own_captions.cloud(campaign, place[1])}
    ]
    at_rest = figures.statics(campaign, place[1])
    if at_rest is not None:
        drawings[f"{name}statics"] = at_rest
        text = own_captions.statics(campaign, place[1])
        shown.append({"name": f"{name}statics", "title": "The gauges at rest", "text": text})
    return {
        "title": f"{reach.upstream.column} to {reach.downstream.column}",
        "several": len(campaign.reaches) > 1,
        "figures": shown,
        "levelling": report_tables.levelling(reach.heads),
        "checks": tables.checks(reach.checks),
    }
