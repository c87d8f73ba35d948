"""How far off an instrument or a dimension would have to be to change the verdict on a contract."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import replace
from typing import NamedTuple

import numpy as np

from fieldfit.decisions.acceptance import Acceptance, judge_contract
from fieldfit.decisions.conformity import Outcome
from fieldfit.decisions.stress_test import LARGEST, Stress, stated_limits
from fieldfit.field.readings import ReachReadings
from fieldfit.field.section import Section
from fieldfit.inference.fit import fit_reach
from fieldfit.inference.head_model import head_model

SMALLEST = 8
"""Halvings from the largest error thought through to the first one tried."""
NEARLY_ALL = 0.9
"""Share of the smallest head loss that an error of the gauges may take: beyond it nothing is left to fit."""
HALVINGS = 6
"""Halvings between an error that changes nothing and one that does: within a hundredth of the answer."""


class _Input(NamedTuple):
    """One input, and the readings with so much of an error taken out of it."""

    name: str
    unit: str
    largest: float
    without: Callable[[float], ReachReadings]


def stress_contract(readings: ReachReadings, verdict: Acceptance, section: Section) -> tuple[Stress, ...]:
    """Find the smallest error of each input that would change the verdict.

    The readings are fitted and judged afresh with the error taken out, so that every rule holds as it did.

    Parameters
    ----------
    readings : ReachReadings
        What the fit used.
    verdict : Acceptance
        The verdict on them.
    section : Section
        The test section, with its contract.

    Returns
    -------
    tuple of Stress
        One per input; its `becomes` is None where no error thought through changes the verdict.
    """
    limits = stated_limits(readings)
    return tuple(
        min(
            (_smallest(one, sign, limits[one.name], verdict, section) for sign in (1.0, -1.0)),
            key=lambda found: np.inf if found.error is None else abs(found.error),
        )
        for one in _inputs(readings)
        if one.name in limits
    )


def _inputs(readings: ReachReadings) -> Iterator[_Input]:
    """List the inputs: an error is how much too high each reads or is stated."""
    power = 2.0 if readings.meter.senses == "velocity" else 0.0
    flow, head, bore, length = readings.flow_m3_s, readings.head_loss_m, readings.bore, readings.length
    yield _Input("meter", "relative", LARGEST, lambda x: replace(readings, flow_m3_s=flow / (1.0 + x)))
    yield _Input(
        "bore",
        "relative",
        LARGEST,
        lambda x: replace(
            readings,
            bore=replace(bore, value=bore.value / (1.0 + x)),
            flow_m3_s=flow / (1.0 + x) ** power,
        ),
    )
    yield _Input(
        "length",
        "relative",
        LARGEST,
        lambda x: replace(readings, length=replace(length, value=length.value / (1.0 + x))),
    )
    largest = NEARLY_ALL * float(np.min(head))
    yield _Input("gauges", "m", largest, lambda x: replace(readings, head_loss_m=head - x))


def _smallest(one: _Input, sign: float, limit: float, verdict: Acceptance, section: Section) -> Stress:
    """Return the smallest error in one direction that changes the verdict, by halving."""
    still, changed, becomes = 0.0, None, None
    error = sign * one.largest / 2.0**SMALLEST
    while abs(error) <= one.largest:
        outcome = _outcome(one.without(error), verdict, section)
        if outcome != verdict.outcome:
            changed, becomes = error, outcome
            break
        still, error = error, 2.0 * error
    if changed is not None:
        for _ in range(HALVINGS):
            middle = 0.5 * (still + changed)
            outcome = _outcome(one.without(middle), verdict, section)
            still, changed, becomes = (
                (middle, changed, becomes) if outcome == verdict.outcome else (still, middle, outcome)
            )
    return Stress(input=one.name, finding=verdict.outcome, becomes=becomes, error=changed, unit=one.unit, limit=limit)


def _outcome(readings: ReachReadings, verdict: Acceptance, section: Section) -> Outcome:
    """Judge readings afresh."""
    fit = fit_reach(head_model(readings, section.correlation))
    return judge_contract(fit, verdict.contract, section).outcome
