"""The answer in a dozen lines for a terminal."""

from __future__ import annotations

import textwrap

from fieldfit.field.section import Section
from fieldfit.report import digits, explanation_words, words
from fieldfit.report.finding import CampaignFinding, Finding, ReachFinding
from fieldfit.report.survey_page import survey_lines

WIDTH = 88
"""Longest line."""
NAME_WIDTH = 17


def summary(finding: Finding) -> str:
    """Return the answer as plain text of about a dozen lines, without colour.

    Parameters
    ----------
    finding : Finding
        What was found.

    Returns
    -------
    str
        Lines without an end of line after the last; each further reach or campaign adds its own block.
    """
    lines = [title(finding.section)]
    several = len(finding.campaigns) > 1 or len(finding.campaigns[0].reaches) > 1
    for campaign in finding.campaigns:
        for name, text in survey_lines(campaign):
            lines += folded(name, text)
        for reach in campaign.reaches:
            if several:
                lines += ["", _place(campaign, reach)]
            lines += _reach(reach)
        lines += _campaign(campaign)
    return "\n".join(lines)


def title(section: Section) -> str:
    """Return the section in one line."""
    material = section.material or "material unknown"
    # A name may hold line ends or control characters; a terminal must not obey them.
    name = " ".join("".join(letter if letter.isprintable() else " " for letter in section.name).split())
    return f"{name or 'Pipe section'} ({material}, bore {digits.known(section.bore, 1e3)} mm)"


def _place(campaign: CampaignFinding, reach: ReachFinding) -> str:
    date = campaign.date.isoformat() if campaign.date else campaign.log.file
    return f"{date}, {reach.readings.upstream.column} to {reach.readings.downstream.column}"


def _reach(reach: ReachFinding) -> list[str]:
    wall, new = reach.wall, reach.new_pipe
    verdict = words.headline(reach)
    lines = folded("state", f"{wall.state}: {verdict[0].lower()}{verdict[1:]}" if new else wall.state)
    if wall.state == "no estimate":
        lines += folded("why", words.sentence(wall.because))
        return lines + folded("next", words.sentence(wall.advice)) + _explanations(reach)
    lines += _roughness(reach)
    c = wall.hazen_williams_c
    if c.best is not None and c.measurement is not None and c.with_correlation is not None:
        lines += folded("Hazen-Williams C", f"{digits.value_with_band(c.best, c.measurement)}, by the readings")
        flow = f"at {digits.litres(wall.flow_m3_s)}, {digits.fixed(wall.temperature_degc, 0)} °C"
        lines += folded("", f"{flow}, bore {words.bore_words(reach.readings)}")
    if new is not None:
        low, best, high = new.head_loss_ratio
        lines += folded(
            "against new", f"{digits.value_with_band(best, (low, high))} times the head loss of new {new.material}"
        )
        over = f"{100.0 * (new.limit - 1.0):.0f} %"
        lines += folded(
            "", f"probability that it loses over {over} more than new: {digits.percent(new.probability_worse)}"
        )
    lines += _explanations(reach)
    if wall.budget:
        top = sorted(wall.budget, key=lambda entry: -entry.share)[:3]
        lines += folded("limited by", ", ".join(f"{entry.error} {digits.percent(entry.share)}" for entry in top))
    return lines


def _explanations(reach: ReachFinding) -> list[str]:
    """Return the most probable explanations, and what cannot be told apart."""
    found = reach.explanations
    if found is None:
        return []
    lines = folded("explained by", explanation_words.ranked(found))
    return lines + (folded("", f"not to be told apart: {', '.join(found.alike)}") if found.alike else [])


def _roughness(reach: ReachFinding) -> list[str]:
    band = reach.wall.roughness_m
    if band.measurement is None or band.with_correlation is None:
        return []
    own, wide = ((low * 1e3, high * 1e3) for low, high in (band.measurement, band.with_correlation))
    if band.best is None:
        text = f"not rougher than {digits.limit(wide[1])} mm (95 %), {digits.limit(own[1])} mm by the readings alone"
        return folded("roughness", text)
    lines = folded("roughness", f"{digits.value_with_band(band.best * 1e3, own, 'mm')}, 95 %, by the readings alone")
    return lines + folded("", f"{digits.span(*wide, 'mm')}, 95 %, with the limit of friction formulas")


def _campaign(campaign: CampaignFinding) -> list[str]:
    screening, total = campaign.screening, campaign.log.rows
    aside = ", ".join(f"{count} {reason}" for reason, count in screening.counts)
    lines = folded("rows", f"{screening.used} of {total} used" + (f"; set aside: {aside}" if aside else ""))
    count = len(campaign.cautions)
    if count:
        lines += folded("cautions", f"{count}: " + "; ".join(caution.about for caution in campaign.cautions))
    return lines


def folded(name: str, text: str) -> list[str]:
    """Return a named line, wrapped under itself."""
    return textwrap.wrap(
        text,
        WIDTH,
        initial_indent=f"  {name:<{NAME_WIDTH}} ",
        subsequent_indent=" " * (NAME_WIDTH + 3),
        break_long_words=False,
        break_on_hyphens=False,
    )
