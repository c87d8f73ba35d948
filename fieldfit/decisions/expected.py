"""What a test still to be made would find out: readings that a known wall would give, through the same model."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.reaches import elevation_drop, sum_of_k, tap_distance
from fieldfit.field.readings import Levelling, ReachReadings
from fieldfit.field.section import Section
from fieldfit.field.uncertain import Accuracy
from fieldfit.field.wishes import Wishes
from fieldfit.hydraulics.friction import STANDARD_GRAVITY, colebrook_white, relative_roughness
from fieldfit.inference.fit import Fit, fit_known
from fieldfit.inference.head_model import head_model
from fieldfit.inference.prediction import OperatingPoint, predict

Array = NDArray[np.float64]

LOWEST_SHARE = 0.35
"""Lowest flow of a plan over its largest: a span of three shows a wrong zero, lower flows cost more than they tell."""
TURBULENT_FROM = 5000.0
"""Reynolds number that the lowest flow keeps to, clear of the critical zone [-]."""
MEMORY_S = 10.0
"""Time after which a reading counts as independent of the one before [s]: common practice, and the fit checks it."""
USUAL_SCATTER = 0.0005
"""Scatter of a pressure difference over the gauges' range, where nothing is said [-]."""
USUAL_TEMPERATURE_DEGC = 15.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Layout:
    """One way to make the test."""

    top_flow_m3_s: float
    """Largest flow [m³/s]."""
    flows: int
    """Number of flows."""
    hold_s: float
    """Time each is held [s]."""
    length_m: float
    """Distance between the taps [m]."""
    gauge: Accuracy
    """Both gauges."""
    meter: Accuracy
    """The meter."""
    statics: bool = True
    """Whether the gauges are levelled on statics before and after."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Expected:
    """What a layout would tell of one wall; standard uncertainties."""

    roughness_m: float
    """The wall it is for [m]."""
    flow_m3_s: float
    """Flow the pooled values are for [m³/s]."""
    largest_loss_m: float
    """Largest head loss [m]."""
    hazen_williams_c: float
    """C there [-]."""
    ln_c: float
    """Of ln C, a measurement [-]."""
    ln_c_first_order: float
    """The same by the first-order formula at the largest flow, as a check [-]."""
    ln_friction: float
    """Of ln f [-]."""
    ln_roughness: float
    """Of ln ε, by the readings alone [-]."""
    ln_roughness_wide: float
    """Of ln ε, with the correlation's limit [-]."""
    fit: Fit
    """The fit it would be, to first order."""


def expected(section: Section, wishes: Wishes, layout: Layout, roughness_m: float) -> Expected:
    """Say what a layout would tell of a wall, with the model that will fit the readings.

    Parameters
    ----------
    section : Section
        The test section; its first and last tap are used.
    wishes : Wishes
        What there is.
    layout : Layout
        How the test would be made.
    roughness_m : float
        The wall [m].

    Returns
    -------
    Expected
    """
    readings = planned_readings(section, wishes, layout, roughness_m)
    model = head_model(readings, section.correlation)
    reynolds, bore = model.reference.reynolds, section.bore.value
    factor = float(colebrook_white(reynolds, roughness_m / bore))
    fit = fit_known(model, float(np.log(factor)))
    point = OperatingPoint(flow_m3_s=model.reference.flow_m3_s, viscosity_m2_s=model.reference.viscosity_m2_s)
    c = predict(fit, point, section.correlation).friction.hazen_williams_c
    sensitivity = _roughness_by_friction(factor, reynolds)
    return Expected(
        roughness_m=roughness_m,
        flow_m3_s=point.flow_m3_s,
        largest_loss_m=float(np.max(readings.head_loss_m)),
        hazen_williams_c=c.value,
        ln_c=c.measurement,
        ln_c_first_order=_first_order(fit),
        ln_friction=fit.standard,
        ln_roughness=sensitivity * fit.standard,
        ln_roughness_wide=sensitivity * float(np.hypot(fit.standard, section.correlation.standard)),
        fit=fit,
    )


def planned_flows(section: Section, layout: Layout) -> Array:
    """Return the flows of a layout, lowest first [m³/s]."""
    viscosity = float(section.liquid.viscosity_m2_s(np.array([_temperature(section)]))[0])
    turbulent = TURBULENT_FROM * np.pi / 4.0 * section.bore.value * viscosity
    lowest = min(max(LOWEST_SHARE * layout.top_flow_m3_s, turbulent), layout.top_flow_m3_s)
    return (
        np.linspace(lowest, layout.top_flow_m3_s, layout.flows)
        if layout.flows > 1
        else np.array([layout.top_flow_m3_s])
    )


def planned_readings(section: Section, wishes: Wishes, layout: Layout, roughness_m: float) -> ReachReadings:
    """Return the readings that a known wall would give, exact but with the noise they would be known to.

    Raises
    ------
    Nothing; a layout whose pressures fall below zero is the caller's to judge.
    """
    flow = planned_flows(section, layout)
    temperature = np.full(len(flow), _temperature(section))
    density, viscosity = section.liquid.density_kg_m3(temperature), section.liquid.viscosity_m2_s(temperature)
    bore = section.bore.value
    velocity_head = (flow / (np.pi * bore**2 / 4.0)) ** 2 / (2.0 * STANDARD_GRAVITY)
    fitting_k = sum_of_k(section.fittings)
    factor = colebrook_white(4.0 * flow / (np.pi * bore * viscosity), roughness_m / bore)
    head = (factor * layout.length_m / bore + fitting_k.value) * velocity_head
    weight = density * STANDARD_GRAVITY
    upper = wishes.static_pa - wishes.supply_loss_pa * (flow / wishes.flow_m3_s) ** 2
    fall = elevation_drop(section.taps[0], section.taps[-1])
    lower = upper - weight * (head - (fall.value if fall else 0.0))
    noise = scatter_pa(wishes, layout) / np.sqrt(max(layout.hold_s / MEMORY_S, 1.0)) / weight
    first, last = section.taps[0], section.taps[-1]
    static = (wishes.static_pa, wishes.static_pa + float(weight[0]) * (fall.value if fall else 0.0))
    return ReachReadings(
        upstream=replace(first, accuracy=layout.gauge),
        downstream=replace(last, accuracy=layout.gauge),
        meter=replace(section.meter, accuracy=layout.meter),
        length=replace(tap_distance(first, last), value=layout.length_m),
        bore=section.bore,
        fitting_k=fitting_k,
        elevation_drop=fall,
        levelling=_levelling(float(noise[0]), static) if layout.statics else None,
        number=np.arange(1, len(flow) + 1),
        flow_m3_s=flow,
        head_loss_m=head,
        random_m=noise,
        pressure_pa=np.array([upper, lower]),
        temperature_degc=temperature,
        density_kg_m3=density,
        viscosity_m2_s=viscosity,
        viscosity_standard=section.liquid.viscosity_standard,
        turbulent_from_m3_s=float(flow[0]),
        set_aside=(),
    )


def scatter_pa(wishes: Wishes, layout: Layout) -> float:
    """Return the scatter of a single reading of the pressure difference [Pa]."""
    if wishes.scatter_pa is not None:
        return wishes.scatter_pa
    return USUAL_SCATTER * (layout.gauge.span or wishes.static_pa)


def _levelling(noise_m: float, static_pa: tuple[float, float]) -> Levelling:
    """Return what two statics, before and after, would give: held as long as a flow."""
    return Levelling(
        offset_m=0.0,
        standard_m=noise_m / np.sqrt(2.0),
        drift_m=0.0,
        plateaus=2,
        pressure_pa=static_pa,
        expected_m=float("inf"),
    )


def _temperature(section: Section) -> float:
    """Return the temperature to plan for [°C]."""
    return section.temperature.value if section.temperature else USUAL_TEMPERATURE_DEGC


def _roughness_by_friction(factor: float, reynolds: float) -> float:
    """Return d ln ε / d ln f; infinite for a smooth wall."""
    step = 1e-4
    above, below = (float(relative_roughness(factor * np.exp(sign * step), reynolds)) for sign in (1.0, -1.0))
    return float("inf") if below <= 0.0 else float(np.log(above / below)) / (2.0 * step)


def _first_order(fit: Fit) -> float:
    """Return u(ln C) at the largest flow by u² = u_Q² + (0.54 u_h/h)² + (2.63 u_D)² + (0.54 u_L)²."""
    readings = fit.model.readings
    top = int(np.argmax(readings.flow_m3_s))
    errors = fit.model.errors
    head = np.hypot(readings.random_m[top], np.sqrt(np.sum(errors.head_m[:, top] ** 2)))
    flow = readings.meter.accuracy.standard_at(readings.flow_m3_s[top : top + 1])[0] / readings.flow_m3_s[top]
    bore = 0.63 if readings.meter.senses == "velocity" else 2.63
    parts = (
        flow,
        0.54 * head / readings.head_loss_m[top],
        bore * readings.bore.relative,
        0.54 * readings.length.relative,
    )
    return float(np.sqrt(np.sum(np.square(parts))))
