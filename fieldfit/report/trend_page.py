"""The page of the ageing, and the block of it inside the page of an assessment."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from fieldfit.decisions.ageing import Ageing
from fieldfit.report import trend_tables as tables
from fieldfit.report import trend_words as words
from fieldfit.report.digits import known
from fieldfit.report.finding import Finding

if TYPE_CHECKING:
    from matplotlib.figure import Figure


def trend_page(finding: Finding) -> str:
    """Return how a pipe ages as one HTML page, without network, script or other files.

    Parameters
    ----------
    finding : Finding
        What was found, with its ageing.

    Returns
    -------
    str
        The page.
    """
    from markupsafe import Markup

    from fieldfit.report.page import TEMPLATES, environment, versions
    from fieldfit.report.tables import inputs

    campaigns = [campaign.log for campaign in finding.campaigns]
    return (
        environment()
        .get_template("trend.html")
        .render(
            css=Markup((TEMPLATES / "page.css").read_text(encoding="utf-8")),
            title=finding.section.name.strip() or "Pipe section",
            subtitle=_subtitle(finding),
            trend=trend_block(finding),
            inputs=inputs(finding.section),
            logs=[(log.file, log.sha256) for log in campaigns],
            versions=versions(),
        )
        + "\n"
    )


def _subtitle(finding: Finding) -> str:
    """Return the pipe and its campaigns in one line."""
    section = finding.section
    parts = [section.material or "material unknown", f"bore {known(section.bore, 1e3)} mm"]
    if section.installed:
        parts.append(f"laid {section.installed.year}")
    years = sorted(campaign.date.year for campaign in finding.campaigns if campaign.date)
    if len(years) == 1:
        parts.append(f"tested {years[0]}")
    elif years:
        parts.append(f"{len(years)} tests from {years[0]} to {years[-1]}")
    return " · ".join(parts)


def trend_block(finding: Finding) -> dict[str, Any]:
    """Return what the template prints of the ageing: reaches, or why there are none."""
    from markupsafe import Markup

    from fieldfit.report.figures import svg

    reaches = [_reach(ageing, f"a{number}", len(finding.ageing) > 1) for number, ageing in enumerate(finding.ageing)]
    drawn = svg({shown["name"]: shown.pop("figure") for reach in reaches for shown in reach["figures"]})
    for reach in reaches:
        for shown in reach["figures"]:
            shown["svg"] = Markup(drawn[shown["name"]])
    return {"reaches": reaches, "because": finding.no_ageing}


def _reach(ageing: Ageing, name: str, several: bool) -> dict[str, Any]:
    """Return what is printed of one reach."""
    outlook = tables.outlook(ageing)
    return {
        "place": ageing.place if several else "",
        "headline": words.headline(ageing),
        "answer": words.answer(ageing),
        "thresholds_told": " ".join(words.crossing_words(crossing, ageing) for crossing in ageing.crossings),
        "cleanings_told": [words.cleaning_words(cleaning, ageing) for cleaning in ageing.cleanings],
        "remarks": ageing.remarks,
        "figures": _figures(ageing, name),
        "campaigns": tables.campaigns(ageing),
        "changes": tables.changes(ageing),
        "certainty": tables.certainty(ageing),
        "cleanings": tables.cleanings(ageing),
        "growth": tables.growth(ageing),
        "outlook": outlook,
        "thresholds": tables.thresholds(ageing),
        "duty_given": ageing.duty.given,
    }


def _figures(ageing: Ageing, name: str) -> list[dict[str, Any]]:
    """Return the figures with their captions."""
    from fieldfit.report.figures.crossings import crossings
    from fieldfit.report.figures.forecast import forecast
    from fieldfit.report.figures.timeline import timeline

    found: list[tuple[str, str, Figure]] = [
        ("The years tested", _timeline_caption(ageing), timeline(ageing)),
        ("The years ahead", _forecast_caption(ageing), forecast(ageing)),
    ]
    if ageing.crossings:
        caption = "Steep means the date is well known; where a curve levels off below 100 % the threshold may never be reached."
        found.append(("When thresholds are reached", caption, crossings(ageing)))
    return [
        {"name": f"{name}f{index}", "title": title, "text": text, "figure": figure}
        for index, (title, text, figure) in enumerate(found)
    ]


def _timeline_caption(ageing: Ageing) -> str:
    """Say what the bars are."""
    if len(ageing.points) < 2:
        return "One test; the growth before it rests on what is known of new pipe and on a published rate."
    return (
        "Thin bars hold every error of a test (95 %). Thick bars hold only what the tests do not share: a shared error moves "
        "all points up or down together and leaves the change as it is. The bands are the growth that follows them."
    )


def _forecast_caption(ageing: Ageing) -> str:
    """Say what the bands are."""
    stand = "a published rate" if ageing.published else "the tests"
    return (
        f"Growth of the roughness by {stand}, carried to the duty through the friction law; C is not drawn as a line through "
        "the tested values."
    )
