"""The ageing part of the record, as plain data."""

from __future__ import annotations

import math
from collections.abc import Iterable
from typing import TYPE_CHECKING, Any

from fieldfit.report.finding import Finding

if TYPE_CHECKING:
    from fieldfit.decisions.ageing import Ageing
    from fieldfit.decisions.cleaning import Cleaning
    from fieldfit.decisions.forecast import Crossing, Fan, Forecast
    from fieldfit.decisions.points import Point
    from fieldfit.inference.change import Change

Record = dict[str, Any]


def ageing_record(finding: Finding) -> Record | None:
    """Return the ageing as plain data; None when there is none.

    Parameters
    ----------
    finding : Finding
        What was found.

    Returns
    -------
    dict or None
        One entry per reach; triples are 95 % low, best, 95 % high.
    """
    if not finding.ageing:
        return {"reaches": [], "because": finding.no_ageing} if finding.no_ageing else None
    return {"reaches": [_reach(ageing) for ageing in finding.ageing], "because": None}


def _reach(ageing: Ageing) -> Record:
    duty = ageing.duty
    return {
        "place": ageing.place,
        "duty": {
            "flow_m3_s": duty.flow_m3_s,
            "given": duty.given,
            "temperature_degc": duty.temperature_degc,
            "bore_m": duty.bore_m,
            "length_m": duty.length_m,
            "head_m": duty.head_m,
        },
        "tests": [_point(point) for point in ageing.points],
        "reduced_chi_square": _number(ageing.reduced_chi_square),
        "changes": [_change(change) for change in ageing.changes],
        "stages": [
            {
                "start": stage.start.isoformat(),
                "event": stage.event,
                "material": stage.material,
                "start_roughness_beforehand_mm": _list(belief.span, 1e3),
                "start_roughness_source": belief.source,
            }
            for stage, belief in zip(ageing.stages, ageing.starts, strict=True)
        ],
        "growth": {
            "laws": [{"law": name, "probability": share} for name, share in ageing.growth.probabilities],
            "rate_past_mm_year": _list(ageing.rate_past_m_year, 1e3),
            "rate_ahead_mm_year": _list(ageing.rate_ahead_m_year, 1e3),
            "rate_beforehand_mm_year": _list(ageing.rate.span, 1e3),
            "rate_source": ageing.rate.source,
            "from_publication": ageing.published,
        },
        "forecast": _forecast(ageing.forecast),
        "thresholds": [_crossing(crossing) for crossing in ageing.crossings],
        "cleanings": [_cleaning(cleaning) for cleaning in ageing.cleanings],
        "remarks": list(ageing.remarks),
    }


def _point(point: Point) -> Record:
    return {
        "date": point.date.isoformat(),
        "roughness_mm": _list(point.roughness_m, 1e3),
        "roughness_own_errors_mm": _list(point.roughness_own_m, 1e3),
        "hazen_williams_c": _list(point.c),
        "hazen_williams_c_own_errors": _list(point.c_own),
        "events": list(point.events),
    }


def _change(change: Change) -> Record:
    return {
        "from": change.since.isoformat(),
        "to": change.until.isoformat(),
        "years": change.years,
        "head_loss_ratio": _list(change.head_loss_ratio),
        "hazen_williams_c_ratio": _list(change.c_ratio),
        "roughness_ratio": _list(change.roughness_ratio),
        "roughness_change_mm": _list(change.roughness_change_m, 1e3),
        "standard_uncertainty": change.standard,
        "naive_standard_uncertainty": _number(change.naive_standard),
        "probability_worse": change.probability_worse,
        "worse_by": change.worse_by,
        "probability_worse_by": change.probability_worse_by,
        "smallest_rise_seen": change.smallest,
    }


def _forecast(forecast: Forecast) -> Record:
    return {
        "dates": [day.isoformat() for day in forecast.dates],
        "stage": [int(number) for number in forecast.stage],
        "roughness_mm": _fan(forecast.roughness_m, 1e3),
        "equivalent_roughness_mm": _fan(forecast.equivalent_m, 1e3),
        "hazen_williams_c": _fan(forecast.c),
        "head_loss_m": _fan(forecast.head_loss_m),
        "capacity_m3_s": None if forecast.capacity_m3_s is None else _fan(forecast.capacity_m3_s),
        "deposit_mm": _fan(forecast.deposit_m, 1e3),
    }


def _fan(fan: Fan, scale: float = 1.0) -> Record:
    low, high = fan.most
    lower, upper = fan.half
    columns = {"median": fan.middle, "low_50": lower, "high_50": upper, "low_95": low, "high_95": high}
    return {name: _list(column.tolist(), scale) for name, column in columns.items()}


def _crossing(crossing: Crossing) -> Record:
    unit = {"c": "hazen_williams_c", "head_loss": "head_loss_m", "capacity": "capacity_m3_s"}[crossing.what]
    early, middle, late = (None if day is None else day.isoformat() for day in crossing.dates)
    return {
        unit: crossing.limit,
        "date_10": early,
        "date_50": middle,
        "date_90": late,
        "not_before": None if crossing.not_before is None else crossing.not_before.isoformat(),
        "probability_already": crossing.already,
        "probability_not_within_100_years": crossing.never,
        "by": None if crossing.by is None else crossing.by.isoformat(),
        "probability_by": _number(crossing.probability_by),
    }


def _cleaning(cleaning: Cleaning) -> Record:
    return {
        "event": cleaning.event,
        "date": cleaning.date.isoformat(),
        "hazen_williams_c_before": _list(cleaning.c_before),
        "hazen_williams_c_after": _list(cleaning.c_after),
        "hazen_williams_c_gain": _list(cleaning.c_gain),
        "probability_gain": cleaning.probability_gain,
        "capacity_ratio": _list(cleaning.capacity_ratio),
        "head_loss_ratio": _list(cleaning.head_loss_ratio),
        "power_saved_w": _list(cleaning.power_saved_w),
        "promised_c": _number(cleaning.promised_c),
        "probability_promise": _number(cleaning.probability_promise),
        "promise": cleaning.promise,
        "regrowth_over_growth_before": _list(cleaning.regrowth),
        "probability_faster": _number(cleaning.probability_faster),
    }


def _number(value: float | None) -> float | None:
    """Return a plain float, or None for what is not defined."""
    return None if value is None or not math.isfinite(value) else float(value)


def _list(values: Iterable[float] | None, scale: float = 1.0) -> list[float | None] | None:
    if values is None:
        return None
    return [float(value) * scale if math.isfinite(value) else None for value in values]
