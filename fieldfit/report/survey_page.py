"""What the page prints of a survey and of bore or roughness."""

from __future__ import annotations

from typing import Any

from fieldfit.field.section import Section
from fieldfit.report import deposit_words, survey_tables, survey_words
from fieldfit.report.finding import CampaignFinding, ReachFinding


def survey_block(campaign: CampaignFinding, name: str) -> dict[str, Any] | None:
    """Return what is printed of a campaign's survey, its figure under a name; None without one."""
    found = campaign.survey
    if found is None:
        return None
    from fieldfit.report.figures.grade_line import grade_line

    return {
        "headline": survey_words.headline(found),
        "paragraph": survey_words.paragraph(found),
        "figure": {
            "name": name,
            "title": "Hydraulic grade line",
            "text": survey_words.caption(found),
            "figure": grade_line(found),
        },
        "reaches": survey_tables.reach_by_reach(found, campaign.reaches),
        "ranking": survey_tables.ranking(found),
    }


def deposit_block(reach: ReachFinding, section: Section, name: str) -> dict[str, Any] | None:
    """Return what is printed of a reach's bore or roughness; None where it is no question."""
    found = reach.deposit
    if found is None or not deposit_words.worth_a_map(reach):
        return None
    from fieldfit.report.figures.deposit_map import deposit_map

    new = None if reach.new_pipe is None else (reach.new_pipe.roughness_m[0], reach.new_pipe.roughness_m[2])
    return {
        "figure": {
            "name": name,
            "title": "Bore against roughness",
            "text": deposit_words.caption(found),
            "figure": deposit_map(found, new, section.deposit.variation),
        },
        "readings": deposit_words.readings_table(found),
        "deposit": deposit_words.deposit_table(found),
        "evidence": deposit_words.evidence_lines(found),
        "note": deposit_words.exact_note(found),
    }


def survey_lines(campaign: CampaignFinding) -> list[tuple[str, str]]:
    """Return name and text of each line that a terminal shows of a survey."""
    found = campaign.survey
    if found is None:
        return []
    return [("survey", survey_words.headline(found)), ("", survey_words.paragraph(found))]
