"""Does the pipe as built meet the contract? Readings reduced to the contract's basis, and JCGM 106 on top."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from fieldfit.decisions.conformity import (
    RULES,
    Interval,
    Outcome,
    Risks,
    Rule,
    chance_to_decide,
    conformance_probability,
    decide,
    global_risks,
    guard,
)
from fieldfit.decisions.contract_scale import Scale, built_on, counted, scale_of
from fieldfit.field.contract import Contract
from fieldfit.field.section import Section
from fieldfit.inference.fit import NORMAL_95, Fit
from fieldfit.inference.prediction import OperatingPoint, predict

DEFAULT_RISK = 0.05
"""Risk the guard bands are shown with under simple acceptance, which needs none to decide [-]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class ExtraMeasurement:
    """A better measurement and what it would do for the decision."""

    what: str
    """What would be done."""
    standard: float
    """Relative standard uncertainty after it [-]."""
    chance: float
    """Probability that the case would then be decided [-]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Acceptance:
    """The verdict on one reach under a contract."""

    contract: Contract
    """What was asked."""
    flow_m3_s: float
    """Flow the comparison is made at [m³/s]."""
    temperature_degc: float
    """Temperature it is made at [°C]."""
    bore_m: float
    """Bore it is made with [m]."""
    value: float
    """Measured value on the contract's basis [-, m or m]; 0 for a wall that reads smoother than smooth."""
    band: tuple[float, float]
    """Its 95 % interval [same unit]."""
    band_why: str
    """Which errors are in it, and why."""
    other_bore_c: float | None
    """C by the true bore where the contract reckons with another [-]; None without a limit on C."""
    outcome: Outcome
    """Pass, fail or undecided."""
    risk: float
    """Risk of the guard bands [-]."""
    acceptance_limit: float
    """Value from which the rule passes [same unit]."""
    rejection_limit: float
    """Value from which the rule fails [same unit]."""
    conformance_probability: float
    """Probability that the pipe conforms [-]."""
    global_risks: Risks | None
    """Risks over all hand-overs of what is usually built; None where nothing says what that is."""
    built: str
    """What those risks were reckoned with, in words."""
    extra: tuple[ExtraMeasurement, ...]
    """Better measurements when undecided, best chance first."""
    decades_outside: float
    """How far the contract's Reynolds number lies outside those tested [decades]."""


def judge_contract(fit: Fit, contract: Contract, section: Section) -> Acceptance:
    """Reduce a fitted reach to the contract's basis and decide by its rule.

    A limit on C or head loss at a flow that was tested is a limit on a measurement; at another flow the correlation
    carries the curve there, and a limit on roughness is an inference through it, so both hold its limit too.

    Parameters
    ----------
    fit : Fit
        The fitted reach.
    contract : Contract
        What is asked.
    section : Section
        The test section: liquid, material and the correlation's limit.

    Returns
    -------
    Acceptance
    """
    readings, reference = fit.model.readings, fit.model.reference
    flow = contract.flow_m3_s or reference.flow_m3_s
    temperature = reference.temperature_degc if contract.temperature_degc is None else contract.temperature_degc
    viscosity = float(section.liquid.viscosity_m2_s(np.array([temperature]))[0])
    point = OperatingPoint(flow_m3_s=flow, viscosity_m2_s=viscosity)
    prediction = predict(fit, point, section.correlation)
    bore = contract.bore_m or readings.bore.value
    scale, why = scale_of(fit, contract, section, point)
    rule: Rule = next(rule for rule in RULES if rule == contract.rule)
    risk = contract.risk or DEFAULT_RISK
    outcome = decide(scale.known, scale.tolerance, rule, risk)
    accepting, rejecting = _limits(scale, rule, risk)
    built, words = built_on(contract, section, point, scale)
    half = NORMAL_95 * scale.known.standard
    ends = sorted((scale.back(scale.known.mean - half), scale.back(scale.known.mean + half)))
    return Acceptance(
        contract=contract,
        flow_m3_s=flow,
        temperature_degc=temperature,
        bore_m=bore,
        value=scale.back(scale.known.mean),
        band=(ends[0], ends[1]),
        band_why=why,
        other_bore_c=counted(contract, prediction).hazen_williams_c.value if contract.subject == "c" else None,
        outcome=outcome,
        risk=risk,
        acceptance_limit=scale.back(_end(accepting)),
        rejection_limit=scale.back(_end(rejecting)),
        conformance_probability=conformance_probability(scale.known, scale.tolerance),
        global_risks=global_risks(built, scale.known.standard, scale.tolerance, accepting) if built else None,
        built=words,
        extra=_extra(scale, risk) if outcome == "undecided" else (),
        decades_outside=prediction.decades_outside,
    )


def _end(interval: Interval) -> float:
    """Return the only finite end of a one-sided interval."""
    return interval.low if math.isfinite(interval.low) else interval.high


def _limits(scale: Scale, rule: Rule, risk: float) -> tuple[Interval, Interval]:
    """Return what is accepted at once and what is not yet rejected, on the scale."""
    if rule == "simple acceptance":
        return scale.tolerance, scale.tolerance
    standard = scale.known.standard
    return guard(scale.tolerance, standard, risk), guard(scale.tolerance, standard, 1.0 - risk)


def _extra(scale: Scale, risk: float) -> tuple[ExtraMeasurement, ...]:
    """Return better measurements by their chance to decide the case."""
    found = [
        ExtraMeasurement(
            what=what, standard=standard, chance=chance_to_decide(scale.known, scale.tolerance, risk, standard)
        )
        for what, standard in scale.better
        if standard < 0.999 * scale.known.standard
    ]
    return tuple(sorted(found, key=lambda one: -one.chance))
