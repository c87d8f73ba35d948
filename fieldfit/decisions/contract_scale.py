"""A contract's limit and what was measured, brought to one scale on which the decision is made."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldfit.decisions.conformity import Interval, Knowledge
from fieldfit.field.contract import Contract
from fieldfit.field.section import Section
from fieldfit.field.uncertain import Uncertain
from fieldfit.hydraulics.friction import colebrook_white, relative_roughness
from fieldfit.hydraulics.hazen_williams import c_from_head_loss, c_of_roughness
from fieldfit.hydraulics.materials import material
from fieldfit.inference.fit import NORMAL_95, Fit, covariance
from fieldfit.inference.prediction import C_BY_BORE, C_BY_LOSS, Loss, OperatingPoint, Predicted, Prediction, predict

SHARPER = 3.0
"""How much better an error is made in the search for what would decide."""
SHARPEST = 1e-9
"""Smallest relative standard uncertainty that is reckoned with [-]."""
BETTER = (
    (("bore",), "Know the bore three times better: callipers at both ends, or the maker's certificate."),
    (("meter",), "Use a flow meter three times better, or calibrate this one on site."),
    (("gain of", "zero of", "span of"), "Use gauges three times better, or one differential transmitter."),
    (("static levelling", "elevations"), "Take longer statics, before and after."),
    (("fittings",), "Put the taps on straight pipe, clear of fittings."),
    (("length",), "Measure the length between the taps three times better."),
)
"""What could be measured better: how the names of its errors begin, and how it would be done."""
MORE_READINGS = "Take nine times as many readings at the same flows."


@dataclass(frozen=True, slots=True, kw_only=True)
class Scale:
    """The scale the decision is made on: a logarithm, on which errors are normal."""

    known: Knowledge
    """What was measured, on the scale."""
    tolerance: Interval
    """What conforms, on the scale."""
    back: Callable[[float], float]
    """From the scale to the contract's unit."""
    forth: Callable[[float], float]
    """From the contract's unit to the scale."""
    better: tuple[tuple[str, float], ...]
    """Better measurements with the standard uncertainty after each."""


def scale_of(fit: Fit, contract: Contract, section: Section, point: OperatingPoint) -> tuple[Scale, str]:
    """Return the measured value on a scale for the decision, and which errors its band holds and why."""
    if contract.subject == "roughness":
        return _roughness_scale(fit, contract, section)

    def known(better: NDArray[np.float64] | None = None) -> Predicted:
        return _found(fit, contract, predict(fit, point, section.correlation, better))

    found, end = known(), math.log(contract.limit)
    scale = Scale(
        known=Knowledge(mean=math.log(found.value), standard=max(found.standard, SHARPEST)),
        tolerance=Interval(high=end) if contract.subject == "head_loss" else Interval(low=end),
        back=math.exp,
        forth=math.log,
        better=tuple((what, known(factor).standard) for what, factor in _better(fit)),
    )
    if found.extrapolation == 0.0:
        return scale, "measurement errors only, for the flow was tested"
    return scale, (
        "measurement errors and the correlation's limit, which carries the readings to a flow outside those tested"
    )


def _found(fit: Fit, contract: Contract, prediction: Prediction) -> Predicted:
    """Return the head loss or the C that the contract limits, on its basis."""
    part = counted(contract, prediction)
    if contract.subject == "head_loss":
        return part.head_loss_m
    if contract.bore_m is None:
        return part.hazen_williams_c
    # A bore by convention has no error of its own: C then follows from flow and loss per length alone.
    per_length = part.per_length
    return Predicted(
        value=float(c_from_head_loss(prediction.flow_m3_s, per_length.value, contract.bore_m, 1.0)),
        measurement=abs(C_BY_LOSS) * per_length.measurement,
        extrapolation=abs(C_BY_LOSS) * per_length.extrapolation,
    )


def _roughness_scale(fit: Fit, contract: Contract, section: Section) -> tuple[Scale, str]:
    """Return ln f at the reference as the scale of a limit on roughness: it exists for smooth walls too."""
    reynolds, bore = fit.model.reference.reynolds, fit.model.readings.bore.value
    level = section.correlation.standard

    def back(ln_friction: float) -> float:
        return max(float(relative_roughness(math.exp(ln_friction), reynolds)), 0.0) * bore

    def forth(roughness_m: float) -> float:
        return math.log(float(colebrook_white(reynolds, roughness_m / bore)))

    scale = Scale(
        known=Knowledge(mean=fit.ln_friction, standard=float(np.hypot(fit.standard, level))),
        tolerance=Interval(high=forth(contract.limit)),
        back=back,
        forth=forth,
        better=tuple((what, float(np.sqrt(covariance(fit, factor)[0, 0] + level**2))) for what, factor in _better(fit)),
    )
    return scale, "measurement errors and the correlation's limit, for a roughness is inferred through a correlation"


def _better(fit: Fit) -> list[tuple[str, NDArray[np.float64]]]:
    """Return what could be measured better and the factors that it means for each error, the readings' noise last."""
    names = fit.model.errors.names
    found = []
    for beginnings, what in BETTER:
        mask = np.array([*(name.startswith(beginnings) for name in names), False])
        if np.any(mask):
            found.append((what, np.where(mask, SHARPER, 1.0)))
    found.append((MORE_READINGS, np.append(np.ones(len(names)), SHARPER)))
    return found


def built_on(contract: Contract, section: Section, point: OperatingPoint, scale: Scale) -> tuple[Knowledge | None, str]:
    """Return what is usually built, on the decision's scale, and whose word that is."""
    if contract.built is not None:
        return _built_by_word(contract, contract.built, scale), "what the section file says is usually built"
    if section.material is None or contract.subject == "head_loss":
        return None, ""
    new, bore, level = material(section.material), section.bore.value, section.correlation.standard
    if contract.subject == "roughness":
        ends = [scale.forth(roughness) for roughness in new.roughness_m]
    else:
        level *= abs(C_BY_LOSS)
        shift = C_BY_BORE * math.log((contract.bore_m or bore) / bore)
        c = c_of_roughness(np.array(new.roughness_m), point.flow_m3_s, bore, point.viscosity_m2_s)
        ends = [math.log(value) + shift for value in c.tolist()]
    # The table's range read as 95 %, and the correlation's limit on top: real pipes do not follow it exactly.
    own = abs(ends[2] - ends[0]) / (2.0 * NORMAL_95)
    return (
        Knowledge(mean=ends[1], standard=float(np.hypot(own, level))),
        f"new {new.name} by the new-pipe table, its range and the correlation's limit",
    )


def _built_by_word(contract: Contract, built: Uncertain, scale: Scale) -> Knowledge:
    """Return the user's word on what is built, on the decision's scale."""
    if contract.subject != "roughness":
        return Knowledge(mean=math.log(built.value), standard=max(built.relative, SHARPEST))
    # The scale is no plain logarithm of roughness: carry one standard uncertainty to either side over to it.
    ends = [scale.forth(max(built.value + side * built.standard, 0.0)) for side in (-1.0, 1.0)]
    return Knowledge(mean=scale.forth(built.value), standard=max(0.5 * (ends[1] - ends[0]), SHARPEST))


def counted(contract: Contract, prediction: Prediction) -> Loss:
    """Return the loss the contract counts, with or without fittings."""
    return prediction.whole if contract.fittings else prediction.friction
