"""From the readings of one reach to what is found of its wall: fit, state by rule, bands, budget, cross-check."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.readings import ReachReadings
from fieldfit.field.section import Correlation
from fieldfit.hydraulics.friction import smooth
from fieldfit.hydraulics.friction_laws import LAWS, relative_roughness_by_law
from fieldfit.hydraulics.hazen_williams import c_from_friction_factor
from fieldfit.inference.fit import NORMAL_95, Fit, fit_reach
from fieldfit.inference.head_model import HeadModel, head_model
from fieldfit.inference.monte_carlo import monte_carlo
from fieldfit.inference.plateau_values import plateau_values
from fieldfit.inference.verdict import Verdict, judge, ln_smooth, roughness_at, without_loss, without_readings
from fieldfit.inference.wall import Band, BudgetEntry, PlateauValues, Span, State, Wall

Array = NDArray[np.float64]

ONE_SIDED_95 = 0.05

NOTHING = Band(best=None, measurement=None, with_correlation=None)
READINGS_NOISE = "scatter of the readings"
CORRELATION = "friction correlation"


def estimate(readings: ReachReadings, limit: Correlation) -> Wall:
    """Say what the readings tell of the wall.

    Parameters
    ----------
    readings : ReachReadings
        Plateaus that carry roughness; K may be zero.
    limit : Correlation
        How far friction correlations can be trusted.

    Returns
    -------
    Wall
        Always an answer, or *no estimate* with the reason.
    """
    if len(readings.flow_m3_s) == 0:
        return _no_estimate(without_readings(readings), None, None)
    model = head_model(readings, limit)
    values = plateau_values(model)
    if np.all(values.friction_loss_m < 2.0 * values.friction_loss_standard_m):
        return _no_estimate(without_loss(values), model, values)
    fit = fit_reach(model)
    wide = _with_correlation(fit, limit.standard)
    verdict = judge(fit.model, fit.ln_friction, fit.interval, wide)
    return Wall(
        state=verdict.state,
        because=verdict.because,
        advice=verdict.advice,
        roughness_m=_roughness(verdict.state, fit, wide),
        hazen_williams_c=_c_band(fit, wide),
        friction_factor=Band(
            best=float(np.exp(fit.ln_friction)), measurement=_exp(fit.interval), with_correlation=_exp(wide)
        ),
        reduced_chi_square=fit.reduced_chi_square,
        budget=_budget(fit, limit.standard),
        plateaus=plateau_values(model, fit),
        monte_carlo=monte_carlo(fit, limit.standard),
        other_laws=_other_laws(fit),
        **_place(model),
    )


def _with_correlation(fit: Fit, standard: float) -> Span:
    """Return the interval of the Colebrook-equivalent ln f with the correlation's level added [-].

    The level shifts every reading alike and the readings know nothing of it, so each side widens in quadrature.
    """
    level = NORMAL_95 * standard
    below, above = fit.ln_friction - fit.interval[0], fit.interval[1] - fit.ln_friction
    return fit.ln_friction - float(np.hypot(below, level)), fit.ln_friction + float(np.hypot(above, level))


def _roughness(state: State, fit: Fit, wide: Span) -> Band:
    """Turn the intervals of ln f into roughness, by state."""
    if state == "no estimate":
        return NOTHING
    if state == "upper limit":
        return Band(
            best=None,
            measurement=(0.0, _upper_limit(fit, fit.interval[1])),
            with_correlation=(0.0, _upper_limit(fit, wide[1])),
        )
    return Band(
        best=roughness_at(fit.model, fit.ln_friction),
        measurement=_roughness_span(fit.model, fit.interval),
        with_correlation=_roughness_span(fit.model, wide),
    )


def _upper_limit(fit: Fit, high: float) -> float:
    """Return the 95 % upper limit of roughness [m], from the upper end of a two-sided interval of ln f.

    The wall cannot be smoother than smooth, so only the part of the distribution above smooth counts: the limit
    cuts off 5 % of that part. It stays positive however far below smooth the readings fell (the CLs
    construction; Read, J. Phys. G 28 (2002) 2693, doi:10.1088/0954-3899/28/10/313).
    """
    from scipy.special import ndtr, ndtri

    spread = (high - fit.ln_friction) / NORMAL_95
    above = float(ndtr((fit.ln_friction - ln_smooth(fit.model)) / spread))
    return roughness_at(fit.model, fit.ln_friction - spread * float(ndtri(ONE_SIDED_95 * max(above, 1e-12))))


def _roughness_span(model: HeadModel, interval: Span) -> Span:
    """Return the roughness at both ends of an interval of ln f [m]."""
    return roughness_at(model, interval[0]), roughness_at(model, interval[1])


def _c_at(model: HeadModel, ln_friction: float) -> float:
    """Return the Hazen–Williams C that ln f means at the reference flow [-]."""
    return float(c_from_friction_factor(np.exp(ln_friction), model.reference.flow_m3_s, model.readings.bore.value))


def _c_band(fit: Fit, wide: Span) -> Band:
    """Turn the intervals of ln f into C; the larger f is the lower C."""
    low, high = fit.interval
    return Band(
        best=_c_at(fit.model, fit.ln_friction),
        measurement=(_c_at(fit.model, high), _c_at(fit.model, low)),
        with_correlation=(_c_at(fit.model, wide[1]), _c_at(fit.model, wide[0])),
    )


def _budget(fit: Fit, correlation_standard: float) -> tuple[BudgetEntry, ...]:
    """List the errors by share in ln ε, the correlation's level among them; terms of one name are added up."""
    names = [*fit.model.errors.names, READINGS_NOISE, CORRELATION]
    pulls = [*fit.u, 0.0, 0.0]
    own = np.append(fit.share, 0.0)
    variance = np.append(fit.share * fit.standard**2, correlation_standard**2)
    entries = []
    for name in dict.fromkeys(names):
        rows = [index for index, other in enumerate(names) if other == name]
        entries.append(
            BudgetEntry(
                error=name,
                share=float(np.sum(variance[rows]) / np.sum(variance)),
                measurement_share=float(np.sum(own[rows])),
                standard=float(np.sqrt(np.sum(variance[rows]))),
                pull=float(max((pulls[row] for row in rows), key=abs)),
            )
        )
    return tuple(sorted(entries, key=lambda entry: -entry.share))


def _other_laws(fit: Fit) -> tuple[tuple[str, float | None], ...]:
    """Return the roughness the same f at the reference means under each published law [m]."""
    reynolds, bore = fit.model.reference.reynolds, fit.model.readings.bore.value
    factor = float(np.exp(fit.ln_friction))
    found = [(name, relative_roughness_by_law(name, factor, reynolds)) for name in LAWS]
    return tuple((name, None if relative is None else relative * bore) for name, relative in found)


def _exp(interval: Span) -> Span:
    """Return an interval of ln f as one of f."""
    return float(np.exp(interval[0])), float(np.exp(interval[1]))


def _place(model: HeadModel) -> dict[str, Any]:
    """Return where the pooled values hold."""
    reference, bore = model.reference, model.readings.bore.value
    return {
        "flow_m3_s": reference.flow_m3_s,
        "velocity_m_s": reference.flow_m3_s / (np.pi * bore**2 / 4.0),
        "reynolds": reference.reynolds,
        "temperature_degc": reference.temperature_degc,
        "viscosity_m2_s": reference.viscosity_m2_s,
        "smooth_friction_factor": float(smooth(reference.reynolds)),
        "degrees_of_freedom": len(model.readings.flow_m3_s) - 1,
    }


def _no_estimate(verdict: Verdict, model: HeadModel | None, values: PlateauValues | None) -> Wall:
    """Return a wall that nothing is known of."""
    nowhere = dict.fromkeys(
        ("flow_m3_s", "velocity_m_s", "reynolds", "temperature_degc", "viscosity_m2_s", "smooth_friction_factor"),
        float("nan"),
    )
    return Wall(
        state=verdict.state,
        because=verdict.because,
        advice=verdict.advice,
        roughness_m=NOTHING,
        hazen_williams_c=NOTHING,
        friction_factor=NOTHING,
        reduced_chi_square=None,
        budget=(),
        plateaus=values,
        monte_carlo=None,
        other_laws=(),
        **(_place(model) if model else {**nowhere, "degrees_of_freedom": 0}),
    )
