"""The page: one HTML file that needs nothing else, for screen and paper."""

from __future__ import annotations

import functools
import html
import re
import sys
from importlib.metadata import version
from pathlib import Path
from typing import TYPE_CHECKING, Any

from fieldfit import __version__
from fieldfit.hydraulics.regime import LAMINAR_LIMIT, TURBULENT_LIMIT
from fieldfit.report import captions, digits, explanation_tables, explanation_words, tables, words
from fieldfit.report.clock_block import clock_block
from fieldfit.report.finding import CampaignFinding, Finding, ReachFinding
from fieldfit.report.strips import strips
from fieldfit.report.survey_page import deposit_block, survey_block

if TYPE_CHECKING:
    from jinja2 import Environment
    from matplotlib.figure import Figure

TEMPLATES = Path(__file__).parent / "templates"
LIBRARIES = ("numpy", "scipy", "lmfit", "pandas", "matplotlib")
_TIES = re.compile(
    r"(?<=\d) (?=(?:mm|m|m/s|L/s|mL/s|%|°C|K|kPa|times)(?!\w))|(?<=\d) (?=\d{3}(?!\d))|(?<=±) | (?=±)|(?<=\bC) (?=\d)"
)


def page(finding: Finding) -> str:
    """Return the whole report as one HTML page, without network, script or other files.

    Parameters
    ----------
    finding : Finding
        What was found.

    Returns
    -------
    str
        The page.
    """
    from markupsafe import Markup

    from fieldfit.report.figures import svg

    campaigns = [_campaign(finding, index) for index in range(len(finding.campaigns))]
    figures: dict[str, Figure] = {}
    for campaign in campaigns:
        for shown in _shown(campaign):
            figures[shown["name"]] = shown.pop("figure")
    drawn = svg(figures)
    for campaign in campaigns:
        for shown in _shown(campaign):
            shown["svg"] = Markup(drawn[shown["name"]])
    return environment().get_template("page.html").render(_context(finding, campaigns)) + "\n"


def page_in_notebook(finding: Finding) -> str:
    """Return the page in a frame of its own, so that its style does not reach the notebook around it."""
    return in_a_frame(page(finding))


def in_a_frame(whole_page: str) -> str:
    """Return a page in a frame that can stand in a notebook."""
    escaped = html.escape(whole_page)
    return f'<iframe title="Report" style="width: 100%; height: 60em; border: 0" srcdoc="{escaped}"></iframe>'


def tied(text: Any) -> Any:
    r"""Return text whose numbers keep hold of their units at a line's end.

    Examples
    --------
    >>> tied("12 mm") == "12\u00a0mm"
    True
    """
    if type(text) is not str:
        return text
    return _TIES.sub("\u00a0", text).replace("Hazen–Williams", "Hazen–\u2060Williams")


@functools.cache
def environment() -> Environment:
    """Return the templates, everything escaped."""
    from jinja2 import Environment, FileSystemLoader, StrictUndefined

    return Environment(
        loader=FileSystemLoader(TEMPLATES),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
        finalize=tied,
    )


def _context(finding: Finding, campaigns: list[dict[str, Any]]) -> dict[str, Any]:
    """Return what the template prints."""
    from markupsafe import Markup

    section = finding.section
    several = sum(len(campaign["reaches"]) for campaign in campaigns) > 1
    names = [(campaign["title"], reach["title"]) for campaign in campaigns for reach in campaign["reaches"]]
    first = finding.campaigns[0].reaches[0].wall.monte_carlo
    assumed = dict.fromkeys([*section.assumed, *(text for c in finding.campaigns for text in c.log.assumed)])
    return {
        "css": Markup((TEMPLATES / "page.css").read_text(encoding="utf-8")),
        "title": section.name.strip() or "Pipe section",
        "subtitle": _subtitle(finding),
        "several": several,
        "trend": _trend(finding),
        "overview": tables.overview(finding, names) if several else None,
        "campaigns": campaigns,
        "inputs": tables.inputs(section),
        "assumed": list(assumed),
        "liquid": section.liquid.name,
        "liquid_source": section.liquid.source,
        "draws": f"{digits.fixed(first.draws, 0)} draws, seed {first.seed}" if first else "",
        "laminar": f"{LAMINAR_LIMIT:.0f}",
        "turbulent": f"{TURBULENT_LIMIT:.0f}",
        "versions": versions(),
    }


def _trend(finding: Finding) -> dict[str, Any] | None:
    """Return what is printed of the ageing, or None without any."""
    if not finding.ageing and not finding.no_ageing:
        return None
    from fieldfit.report.trend_page import trend_block

    return trend_block(finding)


def _subtitle(finding: Finding) -> str:
    """Return the pipe in one line."""
    section = finding.section
    length = section.taps[-1].station.value - section.taps[0].station.value
    parts = [
        section.material or "material unknown",
        f"bore {words.bore_words(finding.campaigns[0].reaches[0].readings)}",
        f"{digits.fixed(length, 1 if length < 100.0 else 0)} m between the outer taps",
    ]
    if section.installed:
        parts.append(f"laid {section.installed.year}")
    dates = [f"{c.date.day} {c.date:%B %Y}" for c in finding.campaigns if c.date]
    if dates:
        parts.append("tested " + " and ".join(dict.fromkeys(dates)))
    return " · ".join(parts)


def versions() -> str:
    """Return the program and what it stands on."""
    libraries = ", ".join(f"{name} {version(name)}" for name in LIBRARIES)
    return f"fieldfit {__version__}, Python {sys.version_info.major}.{sys.version_info.minor}, {libraries}"


def _campaign(finding: Finding, index: int) -> dict[str, Any]:
    """Return what is printed of one campaign."""
    from fieldfit.report import figures

    campaign = finding.campaigns[index]
    date = f"{campaign.date.day} {campaign.date:%B %Y}" if campaign.date else campaign.log.file
    return {
        "title": date,
        "cautions": [
            c for c in campaign.cautions if not any(c.text.endswith(r.wall.because) for r in campaign.reaches)
        ],
        "survey": survey_block(campaign, f"c{index}s"),
        "reaches": [_reach(finding, campaign, (index, k)) for k in range(len(campaign.reaches))],
        "rows": tables.rows(campaign),
        "file": campaign.log.file,
        "sha256": campaign.log.sha256,
        "clock_block": clock_block(campaign.log, finding.section, f"c{index}k"),
        "log_figure": {
            "name": f"c{index}",
            "title": "The log itself",
            "text": captions.rows(campaign),
            "figure": figures.rows(campaign, finding.section),
        },
    }


def _reach(finding: Finding, campaign: CampaignFinding, place: tuple[int, int]) -> dict[str, Any]:
    """Return what is printed of one reach."""
    reach = campaign.reaches[place[1]]
    readings, wall = reach.readings, reach.wall
    chi = wall.reduced_chi_square
    return {
        "title": f"{readings.upstream.column} to {readings.downstream.column}",
        "headline": words.headline(reach),
        "answer": words.answer(reach),
        "strips": strips(reach),
        "figures": [] if campaign.survey else _figures(campaign, reach, f"c{place[0]}r{place[1]}"),
        "results": tables.results(reach),
        "correlation": digits.significant(200.0 * finding.section.correlation.standard, 2),
        "comparison": tables.comparison(reach),
        "plateaus": tables.plateaus(reach),
        "plateaus_aside": "; ".join(f"{number} ({reason})" for number, reason in readings.set_aside),
        "chi": ""
        if chi is None
        else f"Reduced χ² is {digits.significant(chi, 2)}, with {wall.degrees_of_freedom} degrees of freedom.",
        "levelling": tables.levelling(readings),
        "budget": tables.budget(reach),
        "explanations": None if campaign.survey else _explanations(reach, f"c{place[0]}r{place[1]}e"),
        "deposit": None if campaign.survey else deposit_block(reach, finding.section, f"c{place[0]}r{place[1]}d"),
        "stress": explanation_tables.stress_lines(reach.stress),
    }


def _explanations(reach: ReachFinding, name: str) -> dict[str, Any] | None:
    """Return what is printed of rival explanations, drawn only where there is a rival to see."""
    from fieldfit.report import figures

    found = reach.explanations
    if found is None:
        return None
    figure = None
    if found.alike or not found.nothing_unusual:
        text = explanation_words.caption(found)
        figure = {"name": name, "text": text, "figure": figures.explanations(found)}
    return {
        "paragraph": explanation_words.paragraph(found),
        "ranking": explanation_tables.ranking(found, reach.readings.bore.value),
        "figure": figure,
        "actions": explanation_tables.actions(found),
    }


def _figures(campaign: CampaignFinding, reach: ReachFinding, name: str) -> list[dict[str, Any]]:
    """Return the figures of one reach that have something to show."""
    from fieldfit.report import figures

    if not reach.readings.number.size:
        return []
    curves = figures.curves(reach)
    found = [
        ("Head loss against flow", captions.head_loss(reach), figures.head_loss(curves)),
        ("Friction-factor chart", captions.friction_chart(reach), figures.friction_chart(curves)),
    ]
    if reach.wall.plateaus is not None and reach.wall.state != "no estimate":
        found.append(("C against flow", captions.hazen_williams(reach), figures.hazen_williams(curves)))
        found.append(("What the fit leaves over", captions.residuals(reach), figures.residuals(campaign, reach)))
    if reach.wall.budget:
        found.append(("What limits the certainty", captions.budget(reach), figures.budget(reach)))
    return [
        {"name": f"{name}f{index}", "title": title, "text": text, "figure": figure}
        for index, (title, text, figure) in enumerate(found)
    ]


def _shown(campaign: dict[str, Any]) -> list[dict[str, Any]]:
    """Return all figures of a campaign."""
    rivals = [reach["explanations"]["figure"] for reach in campaign["reaches"] if reach["explanations"]]
    rivals += [reach["deposit"]["figure"] for reach in campaign["reaches"] if reach["deposit"]]
    rivals += [campaign["survey"]["figure"]] if campaign["survey"] else []
    several = [figure for reach in campaign["reaches"] for figure in reach["figures"]]
    rivals += campaign["clock_block"]["figures"] if campaign["clock_block"] else []
    return several + [figure for figure in rivals if figure] + [campaign["log_figure"]]
