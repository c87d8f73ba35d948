"""Rival explanations and the bias stress test as plain data."""

from __future__ import annotations

import math
from typing import Any

from fieldfit.decisions.stress_test import Stress
from fieldfit.inference.beliefs import BELIEFS, NOTHING
from fieldfit.inference.explanations import Explanation, Explanations
from fieldfit.report.explanation_words import natural, next_step

Record = dict[str, Any]


def explanations_record(found: Explanations | None) -> Record | None:
    """Return what else could explain the readings, as plain data.

    The wall as new and nothing else counts as a rough wall in the ranking, and stands apart in `nothing_unusual`.

    Parameters
    ----------
    found : Explanations or None
        What was weighed.

    Returns
    -------
    dict or None
        Keys in a fixed order.
    """
    if found is None:
        return None
    bore = found.readings.bore.value
    ranked = [
        _explanation(one, found.probability("rough wall") if one.causes == ("rough wall",) else one.probability, bore)
        for one in found.ranked
        if one.causes != (NOTHING,)
    ]
    return {
        "ranked": sorted(ranked, key=lambda one: -one["probability"]),
        "cannot_be_told_apart": [list(found.alike)] if found.alike else [],
        "next_step": next_step(found),
        "nothing_unusual": sum(one.probability for one in found.ranked if one.causes == (NOTHING,)),
        "no_single_cause_fits": found.unexplained,
        "noise_widened": found.noise_scale,
        "actions": [
            {"action": one.name, "text": one.text, "parts": list(one.parts), "standard_errors": _finite(one.separation)}
            for one in found.actions
        ],
        "priors": {name: {"probability": belief.probability, "size": belief.size} for name, belief in BELIEFS.items()},
    }


def _explanation(one: Explanation, probability: float, bore_m: float) -> Record:
    sizes: Record = {}
    for size in one.sizes:
        key, best, low, high = natural(size, bore_m)
        sizes[key] = {"best": _finite(best), "range_95": [_finite(low), _finite(high)]}
    return {
        "cause": one.causes[0],
        "probability": probability,
        "with": one.causes[1] if len(one.causes) > 1 else None,
        "sizes": sizes,
        "option": one.option or None,
        "meter_upstream": one.meter_upstream,
        "fits": one.explains,
        "reduced_chi_square": _finite(one.reduced_chi_square),
    }


def stress_record(stress: tuple[Stress, ...]) -> list[Record]:
    """Return the bias stress test as plain data."""
    return [
        {
            "input": one.input,
            "finding": one.finding,
            "becomes": one.becomes,
            "error": one.error,
            "unit": one.unit,
            "limit": one.limit,
            "times_limit": one.times_limit,
        }
        for one in stress
    ]


def _finite(value: float) -> float | None:
    return float(value) if math.isfinite(value) else None
