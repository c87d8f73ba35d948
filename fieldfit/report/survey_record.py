"""Survey and deposit as plain data."""

from __future__ import annotations

import math
from typing import Any

from fieldfit.decisions.deposit import DepositFinding, Interval
from fieldfit.inference.survey_finding import Likely, Survey, SurveyReach
from fieldfit.inference.survey_wall import SurveyWall
from fieldfit.inference.wall import Band

Record = dict[str, Any]


def survey_record(found: Survey | None) -> Record | None:
    """Return a survey as plain data; None when there is none."""
    if found is None:
        return None
    test, side = found.same_wall, found.side_flow
    return {
        "plateaus": len(found.readings.number),
        "head_losses": len(found.readings.head_m),
        "reduced_chi_square": found.reduced_chi_square,
        "one_roughness": None
        if test is None
        else {
            "chi_square": test.chi_square,
            "degrees_of_freedom": test.degrees_of_freedom,
            "probability": test.probability,
        },
        "pooled": [_wall(wall) for wall in found.pooled],
        "explanations": {
            "ranked": [_likely(found, one) for one in found.likely],
            "cannot_be_told_apart": [0, *found.alike] if found.alike else [],
            "tap_halfway_parts_by": found.apart,
        },
        "reaches": [_reach(one) for one in found.reaches],
        "side_flow": None
        if side is None
        else {
            "name": side.name,
            "best_m3_s": side.flow_m3_s,
            "one_wall_m3_s": list(side.interval_m3_s),
            "free_walls_m3_s": list(side.free_interval_m3_s),
        },
        "grade_line": {
            "flow_m3_s": found.grade.flow_m3_s,
            "station_m": found.grade.station_m.tolist(),
            "head_m": found.grade.head_m.tolist(),
            "half_width_m": found.grade.bar_m.tolist(),
        },
    }


def deposit_record(found: DepositFinding | None) -> Record | None:
    """Return bore and roughness as plain data; None when nothing was fitted."""
    if found is None:
        return None
    exact = found.map.exact_shape
    return {
        "all_roughness_mm": _band(found.all_roughness_m, 1e3),
        "all_bore_mm": _interval(found.all_bore_m, 1e3),
        "as_new_means": found.new_wall,
        "bore_mm": _interval(found.bore_m, 1e3),
        "roughness_mm": _interval(found.roughness_m, 1e3),
        "thickness_mm": _interval(found.thickness_m, 1e3),
        "volume_m3_m": _interval(found.volume_m3_m),
        "mass_kg_m": _interval(found.mass_kg_m),
        "evidence": [
            {
                "kind": one.evidence.kind,
                "bore_mm": 1e3 * one.evidence.bore.value,
                "date": one.evidence.date.isoformat() if one.evidence.date else None,
                "probability_so_far_off": one.tail,
                "used": one.used,
            }
            for one in found.map.evidence
        ],
        "ridge": [
            {"roughness_mm": 1e3 * float(roughness), "bore_mm": 1e3 * float(bore)}
            for roughness, bore in zip(found.map.roughness_m[::12], found.map.ridge_m[::12], strict=True)
            if math.isfinite(bore)
        ],
        "if_the_correlation_were_exact": {
            "ln_bore_standard": _number(exact.ln_bore),
            "ln_roughness_standard": _number(exact.ln_roughness),
            "correlation": exact.correlation,
        },
    }


def _reach(one: SurveyReach) -> Record:
    return {
        "from": one.upper,
        "to": one.lower,
        "own_wall": None if one.wall is None else _wall(one.wall),
        "explained": _wall(one.explained),
        "rival": None if one.rival is None else _wall(one.rival),
        "smallest_local_k": one.smallest_k,
        "smallest_local_m": one.smallest_m,
    }


def _wall(wall: SurveyWall) -> Record:
    return {
        "state": wall.state,
        "roughness_mm": _band(wall.roughness_m, 1e3),
        "hazen_williams_c": _band(wall.hazen_williams_c) | {"flow_m3_s": wall.flow_m3_s, "bore_m": wall.bore_m},
        "friction_factor": _band(wall.friction_factor) | {"reynolds": wall.reynolds},
    }


def _likely(found: Survey, one: Likely) -> Record:
    return {
        "cause": one.cause,
        "probability": one.probability,
        "between": [[found.reaches[reach].upper, found.reaches[reach].lower] for reach in one.reaches],
        "local_k": [{"best": k.best, "measurement": list(k.measurement or ())} for k in one.local_k],
        "head_m": list(one.head_m),
        "wall": None if one.wall is None else _wall(one.wall),
        "friction_ratio": one.friction_ratio,
    }


def _band(band: Band, scale: float = 1.0) -> Record:
    return {
        "best": None if band.best is None else band.best * scale,
        "measurement": None if band.measurement is None else [end * scale for end in band.measurement],
        "with_correlation": None if band.with_correlation is None else [end * scale for end in band.with_correlation],
    }


def _interval(found: Interval | None, scale: float = 1.0) -> Record | None:
    if found is None:
        return None
    return {"best": found.best * scale, "interval": [end * scale for end in found.ends]}


def _number(value: float) -> float | None:
    return value if math.isfinite(value) else None
