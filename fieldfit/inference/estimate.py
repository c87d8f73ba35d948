"""From the readings of one reach to what is found of its wall: fit, state by rule, bands, budget, cross-check."""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.readings import ReachReadings
from fieldfit.field.section import Correlation
from fieldfit.hydraulics.friction import relative_roughness, smooth
from fieldfit.hydraulics.friction_laws import LAWS, relative_roughness_by_law
from fieldfit.hydraulics.hazen_williams import c_from_friction_factor
from fieldfit.inference.fit import Fit, fit_reach
from fieldfit.inference.head_model import HeadModel, head_model
from fieldfit.inference.monte_carlo import monte_carlo
from fieldfit.inference.plateau_values import plateau_values
from fieldfit.inference.wall import Band, BudgetEntry, PlateauValues, Span, State, Wall

Array = NDArray[np.float64]

ROUGHEST_WALL = 0.05
"""ε/D above which the loss is not roughness: the chart ends there."""
SMOOTHEST_SHARE = 0.9
"""Share of the smooth pipe's f under which the data, not the pipe, are at fault."""
ONE_SIDED_95 = 0.05

NOTHING = Band(best=None, measurement=None, with_correlation=None)
READINGS_NOISE = "scatter of the readings"


class Verdict(NamedTuple):
    """State of the answer and why."""

    state: State
    because: str


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
        return _without_readings(readings)
    model = head_model(readings, limit)
    values = plateau_values(model)
    if np.all(values.friction_loss_m < 2.0 * values.friction_loss_standard_m):
        return _without_fit(model, values)
    with_correlation = fit_reach(model, np.ones(len(model.errors.names), dtype=np.bool_))
    measurement = fit_reach(model, ~model.errors.level, with_correlation.random_m)
    verdict = _verdict(model, measurement, with_correlation)
    return Wall(
        state=verdict.state,
        because=verdict.because,
        roughness_m=_roughness(verdict.state, model, measurement, with_correlation),
        hazen_williams_c=_c_band(model, measurement, with_correlation),
        friction_factor=Band(
            best=float(np.exp(measurement.ln_friction)),
            measurement=_exp(measurement.interval),
            with_correlation=_exp(with_correlation.interval),
        ),
        reduced_chi_square=with_correlation.reduced_chi_square,
        budget=_budget(measurement, with_correlation),
        plateaus=plateau_values(model, measurement),
        monte_carlo=monte_carlo(with_correlation),
        other_laws=_other_laws(measurement),
        **_place(model),
    )


def _verdict(model: HeadModel, measurement: Fit, with_correlation: Fit) -> Verdict:
    """Decide the state by rule."""
    at_smooth = _ln_smooth(model)
    best = measurement.ln_friction
    if best < at_smooth + np.log(SMOOTHEST_SHARE) and measurement.interval[1] < at_smooth:
        return Verdict(
            "no estimate",
            f"The friction factor reads {np.exp(best - at_smooth):.2f} of a perfectly smooth pipe's, further below it "
            "than the stated errors allow: a fault in the data, not a good pipe. Check meter, units, bore and the order "
            "of the gauges.",
        )
    wall = _roughness_at(model, best)
    if wall > ROUGHEST_WALL * model.readings.bore.value:
        return Verdict(
            "no estimate",
            f"Read as roughness the loss would need ε/D of {wall / model.readings.bore.value:.2g}, above "
            f"{ROUGHEST_WALL:g}: that is not a roughness. Look for a smaller bore, a local loss or a wrong unit.",
        )
    if with_correlation.interval[0] <= at_smooth:
        return Verdict(
            "upper limit", "Within measurement errors and the correlation's limit the wall may be perfectly smooth."
        )
    return Verdict("measured", "The friction lies clear above a smooth pipe's.")


def _roughness(state: State, model: HeadModel, measurement: Fit, with_correlation: Fit) -> Band:
    """Turn the intervals of ln f into roughness, by state."""
    if state == "no estimate":
        return NOTHING
    if state == "upper limit":
        return Band(
            best=None,
            measurement=(0.0, _upper_limit(model, measurement)),
            with_correlation=(0.0, _upper_limit(model, with_correlation)),
        )
    return Band(
        best=_roughness_at(model, measurement.ln_friction),
        measurement=_roughness_span(model, measurement.interval),
        with_correlation=_roughness_span(model, with_correlation.interval),
    )


def _upper_limit(model: HeadModel, fit: Fit) -> float:
    """Return the 95 % upper limit of roughness [m].

    The wall cannot be smoother than smooth, so only the part of the distribution above smooth counts: the limit
    cuts off 5 % of that part. It stays positive however far below smooth the readings fell (the CLs
    construction; Read, J. Phys. G 28 (2002) 2693, doi:10.1088/0954-3899/28/10/313).
    """
    from scipy.special import ndtr, ndtri

    spread = (fit.interval[1] - fit.ln_friction) / float(ndtri(0.975))
    above = float(ndtr((fit.ln_friction - _ln_smooth(model)) / spread))
    return _roughness_at(model, fit.ln_friction - spread * float(ndtri(ONE_SIDED_95 * max(above, 1e-12))))


def _roughness_at(model: HeadModel, ln_friction: float) -> float:
    """Return the roughness that gives ln f at the reference [m], zero when smoother than smooth."""
    relative = relative_roughness(np.exp(ln_friction), model.reference.reynolds)
    return max(float(relative), 0.0) * model.readings.bore.value


def _roughness_span(model: HeadModel, interval: Span) -> Span:
    """Return the roughness at both ends of an interval of ln f [m]."""
    return _roughness_at(model, interval[0]), _roughness_at(model, interval[1])


def _c_at(model: HeadModel, ln_friction: float) -> float:
    """Return the Hazen–Williams C that ln f means at the reference flow [-]."""
    return float(c_from_friction_factor(np.exp(ln_friction), model.reference.flow_m3_s, model.readings.bore.value))


def _c_band(model: HeadModel, measurement: Fit, with_correlation: Fit) -> Band:
    """Turn the intervals of ln f into C; the larger f is the lower C."""
    return Band(
        best=_c_at(model, measurement.ln_friction),
        measurement=(_c_at(model, measurement.interval[1]), _c_at(model, measurement.interval[0])),
        with_correlation=(_c_at(model, with_correlation.interval[1]), _c_at(model, with_correlation.interval[0])),
    )


def _budget(measurement: Fit, with_correlation: Fit) -> tuple[BudgetEntry, ...]:
    """List the errors by share; terms of one name are added up."""
    names = [*with_correlation.model.errors.names, READINGS_NOISE]
    pulls = [*with_correlation.u, 0.0]
    entries = []
    for name in dict.fromkeys(names):
        rows = [index for index, other in enumerate(names) if other == name]
        share = float(np.sum(with_correlation.share[rows]))
        entries.append(
            BudgetEntry(
                error=name,
                share=share,
                measurement_share=float(np.sum(measurement.share[rows])),
                standard=float(np.sqrt(share)) * with_correlation.standard,
                pull=float(max((pulls[row] for row in rows), key=abs)),
            )
        )
    return tuple(sorted(entries, key=lambda entry: -entry.share))


def _other_laws(measurement: Fit) -> tuple[tuple[str, float | None], ...]:
    """Return the roughness the same f at the reference means under each published law [m]."""
    reynolds, bore = measurement.model.reference.reynolds, measurement.model.readings.bore.value
    factor = float(np.exp(measurement.ln_friction))
    found = [(name, relative_roughness_by_law(name, factor, reynolds)) for name in LAWS]
    return tuple((name, None if relative is None else relative * bore) for name, relative in found)


def _ln_smooth(model: HeadModel) -> float:
    """Return ln f of a smooth pipe at the reference [-]."""
    return float(np.log(smooth(model.reference.reynolds)))


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


def _without_readings(readings: ReachReadings) -> Wall:
    """Return the answer when no plateau carries roughness."""
    return _no_estimate(_why_no_readings(readings), None, None)


def _why_no_readings(readings: ReachReadings) -> str:
    """Say why no plateau is left."""
    reasons = dict.fromkeys(reason for _, reason in readings.set_aside)
    if not reasons:
        return (
            "No steady flow was found in the log: every row was set aside or static. Hold each flow until it is steady."
        )
    listed = ", ".join(reasons)
    return f"No plateau carries a roughness ({listed}). Test at a larger flow."


def _without_fit(model: HeadModel, values: PlateauValues) -> Wall:
    """Return the answer when no head loss stands clear of its uncertainty."""
    if np.all(values.friction_loss_m < -2.0 * values.friction_loss_standard_m):
        because = (
            "The head loss is negative at every flow, by more than its uncertainty: gauges swapped, flow the other way, "
            "or wrong elevations."
        )
    else:
        largest = int(np.argmax(values.friction_loss_m))
        because = (
            f"The largest head loss, {values.friction_loss_m[largest]:.2g} m, is less than twice its standard "
            f"uncertainty of {values.friction_loss_standard_m[largest]:.2g} m. Take a static reading to level the gauges, "
            "a larger flow, a longer section or finer gauges."
        )
    return _no_estimate(because, model, values)


def _no_estimate(because: str, model: HeadModel | None, values: PlateauValues | None) -> Wall:
    """Return a wall that nothing is known of."""
    nowhere = dict.fromkeys(
        ("flow_m3_s", "velocity_m_s", "reynolds", "temperature_degc", "viscosity_m2_s", "smooth_friction_factor"),
        float("nan"),
    )
    return Wall(
        state="no estimate",
        because=because,
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
