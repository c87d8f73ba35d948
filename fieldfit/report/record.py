"""The record: a finding as plain data, from which every report is printed."""

from __future__ import annotations

import json
import math
from typing import Any

from fieldfit import __version__
from fieldfit.decisions.new_pipe import NewPipeComparison
from fieldfit.field.section import Section
from fieldfit.inference.wall import Band, BudgetEntry, PlateauValues, Wall
from fieldfit.report.clock_block import clock_records
from fieldfit.report.explanation_record import explanations_record, stress_record
from fieldfit.report.finding import CampaignFinding, Finding, ReachFinding
from fieldfit.report.survey_record import deposit_record, survey_record
from fieldfit.report.trend_record import ageing_record

SCHEMA = 1
"""Number of the record's layout: a key is never renamed under the same number."""
Record = dict[str, Any]


def record(finding: Finding) -> Record:
    """Return a finding as plain data: dicts, lists, texts, numbers and None.

    Numbers keep all their digits; what is not defined is None, never NaN; the unit stands in the key.

    Parameters
    ----------
    finding : Finding
        What was found.

    Returns
    -------
    dict
        The record; keys in a fixed order.
    """
    return {
        "schema": SCHEMA,
        "fieldfit": __version__,
        "section": _section(finding.section),
        "campaigns": [_campaign(campaign) for campaign in finding.campaigns],
        "ageing": ageing_record(finding),
        "decisions": None,
    }


def record_json(finding: Finding) -> str:
    """Return the record as JSON text, ending with a line end.

    Parameters
    ----------
    finding : Finding
        What was found.

    Returns
    -------
    str
        JSON without NaN or infinity.
    """
    return as_json(record(finding))


def as_json(data: Record) -> str:
    """Return plain data as JSON text, ending with a line end; NaN and infinity are refused."""
    return json.dumps(data, ensure_ascii=False, allow_nan=False, indent=2) + "\n"


def _section(section: Section) -> Record:
    return {
        "name": section.name,
        "material": section.material,
        "bore_m": _number(section.bore.value),
        "length_m": _number(section.taps[-1].station.value - section.taps[0].station.value),
        "installed": section.installed.isoformat() if section.installed else None,
        "liquid": section.liquid.name,
    }


def _campaign(campaign: CampaignFinding) -> Record:
    flowing = int((~campaign.plateaus.static).sum())
    return {
        "date": campaign.date.isoformat() if campaign.date else None,
        "log": {
            "file": campaign.log.file,
            "sha256": campaign.log.sha256,
            "rows": campaign.log.rows,
            "used": campaign.screening.used,
            "set_aside": {reason: int(count) for reason, count in campaign.screening.counts},
        },
        "plateaus": flowing,
        "reaches": [_reach(reach) for reach in campaign.reaches],
        "warnings": [{"about": caution.about, "text": caution.text} for caution in campaign.cautions],
        "statics": int(campaign.plateaus.static.size) - flowing,
        "clocks": clock_records(campaign.log),
        "survey": survey_record(campaign.survey),
    }


def _reach(reach: ReachFinding) -> Record:
    wall, readings = reach.wall, reach.readings
    c, f = wall.hazen_williams_c, wall.friction_factor
    return {
        "from": readings.upstream.column,
        "to": readings.downstream.column,
        "state": wall.state,
        "roughness_mm": _band(wall.roughness_m, 1e3),
        "hazen_williams_c": _band(c)
        | {
            "flow_m3_s": _number(wall.flow_m3_s),
            "temperature_degc": _number(wall.temperature_degc),
            "bore_m": _number(readings.bore.value),
        },
        "friction_factor": {
            "best": _number(f.best),
            "measurement": _span(f.measurement),
            "reynolds": _number(wall.reynolds),
            "with_correlation": _span(f.with_correlation),
            "smooth": _number(wall.smooth_friction_factor),
        },
        "new_pipe": _new_pipe(reach.new_pipe),
        "reduced_chi_square": _number(wall.reduced_chi_square),
        "budget": [_share(entry) for entry in wall.budget],
        "explanations": explanations_record(reach.explanations),
        "because": wall.because,
        "length_m": _number(readings.length.value),
        "velocity_m_s": _number(wall.velocity_m_s),
        "degrees_of_freedom": wall.degrees_of_freedom,
        "roughness_by_other_laws_mm": {name: _number(value, 1e3) for name, value in wall.other_laws},
        "monte_carlo": _monte_carlo(wall),
        "readings": _readings(wall.plateaus),
        "stress": stress_record(reach.stress),
        "deposit": deposit_record(reach.deposit),
    }


def _band(band: Band, scale: float = 1.0) -> Record:
    return {
        "best": _number(band.best, scale),
        "measurement": _span(band.measurement, scale),
        "with_correlation": _span(band.with_correlation, scale),
    }


def _new_pipe(new: NewPipeComparison | None) -> Record | None:
    if new is None:
        return None
    return {
        "roughness_mm": _list(new.roughness_m, 1e3),
        "source": new.source,
        "head_loss_ratio": _list(new.head_loss_ratio),
        "probability_worse": _number(new.probability_worse),
        "material": new.material,
        "hazen_williams_c": _list(new.hazen_williams_c),
        "limit": _number(new.limit),
    }


def _share(entry: BudgetEntry) -> Record:
    return {
        "error": entry.error,
        "share": _number(entry.share),
        "measurement_share": _number(entry.measurement_share),
        "standard": _number(entry.standard),
        "pull": _number(entry.pull),
    }


def _monte_carlo(wall: Wall) -> Record | None:
    check = wall.monte_carlo
    if check is None:
        return None
    return {
        "draws": check.draws,
        "seed": check.seed,
        "friction_factor": _span(check.friction_factor),
        "with_correlation": _span(check.with_correlation),
        "unconverged": check.unconverged,
    }


def _readings(values: PlateauValues | None) -> list[Record]:
    if values is None:
        return []
    names = (
        "flow_m3_s",
        "velocity_m_s",
        "reynolds",
        "temperature_degc",
        "friction_loss_m",
        "friction_loss_standard_m",
        "friction_factor",
        "friction_factor_relative",
        "hazen_williams_c",
        "hazen_williams_relative",
        "residual",
    )
    return [
        {"plateau": int(number)} | {name: _number(getattr(values, name)[index]) for name in names}
        for index, number in enumerate(values.number)
    ]


def _number(value: float | None, scale: float = 1.0) -> float | None:
    """Return a plain float, or None for what is not defined."""
    return None if value is None or not math.isfinite(value) else float(value) * scale


def _list(values: tuple[float, ...], scale: float = 1.0) -> list[float | None]:
    return [_number(value, scale) for value in values]


def _span(values: tuple[float, float] | None, scale: float = 1.0) -> list[float | None] | None:
    return None if values is None else _list(values, scale)
