"""A test section with known truth, tested by a crew with real instruments.

Nothing here comes from fieldfit: friction is solved by the `fluids` library, water is IAPWS by `chemicals`, and
errors are drawn from what the instruments' makers state. The files a crew would bring home are written by `crew`.

How errors are drawn
--------------------
- A limit ±a is rectangular (GUM 4.3.7). The truth lies around what is stated: bore, stations, elevations, ΣK,
  temperature.
- A gauge, and a meter stated for its span, has a straight error line: the error at the working point is uniform in
  ±a, and the slope is uniform over all lines through that point that keep within ±a over the whole range. So the
  error is nowhere beyond ±a, and a static takes off the zero but not the slope.
- A meter stated for its reading has a gain uniform in ±a.
- The friction correlation is off by a level (normal, sd 5 % of f) and a slope (normal, sd 5 % over 1.5 decades of
  Reynolds number about the centre of the tested flows): the pipe obeys f = (1 + level + slope·x)·Colebrook–White.
- A velocity meter reports velocity times the stated bore's area.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from itertools import pairwise

import numpy as np
from chemicals import iapws95_rho, mu_IAPWS
from fluids.friction import Colebrook
from instruments import Kit, Pipe, Plan
from scipy.signal import lfilter

GRAVITY = 9.80665


@dataclass(frozen=True, slots=True, kw_only=True)
class Errors:
    """What was drawn; gauge and meter lines are the errors at zero and at full scale."""

    bore: float = 0.0
    length_m: float = 0.0
    elevation_m: tuple[float, float] = (0.0, 0.0)
    fitting_k: float = 0.0
    temperature_k: float = 0.0
    gauges_pa: tuple[tuple[float, float], tuple[float, float]] = ((0.0, 0.0), (0.0, 0.0))
    meter_gain: float = 0.0
    meter_zero_m3_s: float = 0.0
    level: float = 0.0
    slope: float = 0.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Truth:
    """What the section really is."""

    roughness_m: float
    equivalent_roughness_m: float
    """Roughness that readings without instrument error would give through Colebrook–White, at the flow where they
    tell most; 0 is smooth."""
    bore_m: float
    length_m: float
    fitting_k: float
    elevation_m: tuple[float, float]
    temperature_degc: float
    density_kg_m3: float
    viscosity_m2_s: float
    flows_m3_s: tuple[float, ...]
    reynolds: tuple[float, ...]
    friction_factor: tuple[float, ...]
    head_loss_m: tuple[float, ...]
    """Fittings included."""
    errors: Errors


@dataclass(frozen=True, slots=True, kw_only=True)
class Rows:
    """What the instruments showed, unrounded, one element per row."""

    time_s: np.ndarray
    window: np.ndarray
    """Number of the setting, statics included, from 0; -1 while a valve moves."""
    flow_m3_s: np.ndarray
    pressure_pa: np.ndarray
    """(2, N)."""
    temperature_degc: np.ndarray


@dataclass(frozen=True, slots=True, kw_only=True)
class Day:
    """One day of testing."""

    pipe: Pipe
    kit: Kit
    plan: Plan
    truth: Truth
    rows: Rows


@lru_cache(maxsize=512)
def water(temperature_degc):
    """Density [kg/m³] and kinematic viscosity [m²/s] of water."""
    kelvin = temperature_degc + 273.15
    density = iapws95_rho(kelvin, 101325.0)
    return density, mu_IAPWS(kelvin, density) / density


def memory_noise(rng, size, seconds, interval_s):
    """First-order autocorrelated noise of unit standard deviation."""
    keep = np.exp(-interval_s / seconds)
    fresh = rng.standard_normal(size) * np.sqrt(1.0 - keep**2)
    return lfilter([1.0], [1.0, -keep], fresh, zi=[keep * rng.standard_normal()])[0]


def draw_line(rng, limit, working_point):
    """Errors at zero and at full scale of an instrument that keeps within its limit over the whole range."""
    here = rng.uniform(-limit, limit)
    before, after = working_point, 1.0 - working_point
    slope = rng.uniform(
        max((here - limit) / before, -(limit + here) / after), min((here + limit) / before, (limit - here) / after)
    )
    return here - slope * before, here + slope * after


def draw_errors(rng, pipe, kit, plan, correlation=0.05):
    """Every shared error, from its stated limit."""
    limits, gauge, meter = kit.limits, kit.gauge, kit.meter
    working = float(np.clip(plan.supply_pa / gauge.full_scale_pa, 0.05, 0.95))
    lines = tuple(draw_line(rng, gauge.limit * gauge.full_scale_pa, working) for _ in range(2))
    if meter.span_m3_s is None:
        gain, zero = rng.uniform(-meter.limit, meter.limit), 0.0
    else:
        at_work = float(np.clip(np.mean(plan.flows_m3_s) / meter.span_m3_s, 0.05, 0.95))
        zero, full = draw_line(rng, meter.limit * meter.span_m3_s, at_work)
        gain = (full - zero) / meter.span_m3_s
    return Errors(
        bore=rng.uniform(-limits.bore, limits.bore),
        length_m=float(np.diff(rng.uniform(-limits.station_m, limits.station_m, 2))[0]),
        elevation_m=tuple(rng.uniform(-limits.elevation_m, limits.elevation_m, 2).tolist()),
        fitting_k=rng.uniform(-limits.fitting_k, limits.fitting_k) * pipe.fitting_k,
        temperature_k=rng.uniform(-limits.temperature_k, limits.temperature_k),
        gauges_pa=lines,
        meter_gain=gain,
        meter_zero_m3_s=zero,
        level=rng.normal(0.0, correlation),
        slope=rng.normal(0.0, correlation),
    )


def friction_factor(reynolds, relative_roughness, errors=None, centre=1.0):
    """Darcy friction factor of each Reynolds number, with the correlation's own error where one is given."""
    smallest = np.maximum(np.asarray(reynolds, dtype=float), 1.0)
    turbulent = np.array([Colebrook(re, float(relative_roughness)) for re in smallest.clip(4000.0).ravel().tolist()])
    turbulent = turbulent.reshape(smallest.shape)
    if errors is not None:
        turbulent = turbulent * (1.0 + errors.level + errors.slope * np.log10(smallest.clip(4000.0) / centre) / 1.5)
    share = np.clip((smallest - 2100.0) / 1900.0, 0.0, 1.0)
    return share * turbulent + (1.0 - share) * 64.0 / smallest


def true_head_loss(truth, flow_m3_s):
    """Head loss of the true pipe [m], fittings included, at any flow."""
    velocity = np.asarray(flow_m3_s) / (np.pi / 4.0 * truth.bore_m**2)
    reynolds = np.abs(velocity) * truth.bore_m / truth.viscosity_m2_s
    centre = np.exp(np.mean(np.log(truth.reynolds)))
    f = friction_factor(reynolds, truth.roughness_m / truth.bore_m, truth.errors, centre)
    return (f * truth.length_m / truth.bore_m + truth.fitting_k) * velocity * np.abs(velocity) / (2.0 * GRAVITY)


def colebrook_roughness(friction, reynolds):
    """ε/D that gives a friction factor by Colebrook–White solved for it; zero at smooth and below."""
    root = np.sqrt(friction)
    return max(3.7 * (10.0 ** (-0.5 / root) - 2.51 / (reynolds * root)), 0.0)


def weight_of_flows(kit, plan, flows, head_loss_m, density):
    """Weight of each flow by what the instruments can tell of f there."""
    gauge, meter = kit.gauge, kit.meter
    metres = np.sqrt(2.0) / (density * GRAVITY)
    head = np.hypot(0.2 * gauge.noise_pa, gauge.step_pa / 4.0) * metres
    if plan.statics == "none":
        head = np.hypot(head, gauge.limit * gauge.full_scale_pa / np.sqrt(3.0) * metres)
    flow = 0.0 if meter.span_m3_s is None else meter.limit * meter.span_m3_s / np.sqrt(3.0)
    weight = 1.0 / ((head / head_loss_m) ** 2 + (2.0 * flow / flows) ** 2 + meter.noise**2)
    return weight / weight.sum()


def find_truth(pipe, kit, plan, errors):
    """The true section behind the stated one."""
    bore, length = pipe.bore_m * (1.0 + errors.bore), pipe.length_m + errors.length_m
    temperature, k = pipe.temperature_degc + errors.temperature_k, pipe.fitting_k + errors.fitting_k
    density, viscosity = water(temperature)
    flows = np.array(plan.flows_m3_s)
    velocity = flows / (np.pi / 4.0 * bore**2)
    reynolds = velocity * bore / viscosity
    relative, middle = pipe.roughness_m / bore, np.exp(np.mean(np.log(reynolds)))
    f = friction_factor(reynolds, relative, errors, middle)
    head_loss = (f * length / bore + k) * velocity**2 / (2.0 * GRAVITY)
    centre = np.exp(weight_of_flows(kit, plan, flows, head_loss, density) @ np.log(reynolds))
    at_centre = friction_factor(centre, relative, errors, middle)
    return Truth(
        roughness_m=pipe.roughness_m,
        equivalent_roughness_m=colebrook_roughness(float(at_centre), centre) * bore,
        bore_m=bore,
        length_m=length,
        fitting_k=k,
        elevation_m=tuple(z + e for z, e in zip(pipe.elevation_m, errors.elevation_m, strict=True)),
        temperature_degc=temperature,
        density_kg_m3=density,
        viscosity_m2_s=viscosity,
        flows_m3_s=plan.flows_m3_s,
        reynolds=tuple(reynolds.tolist()),
        friction_factor=tuple(f.tolist()),
        head_loss_m=tuple(head_loss.tolist()),
        errors=errors,
    )


def settings_over_time(plan):
    """Time, set flow and window number of each row: plateaus joined by smooth valve moves."""
    flows = list(plan.flows_m3_s)
    flows = ([0.0] if plan.statics != "none" else []) + flows + ([0.0] if plan.statics == "both" else [])
    dwells = np.broadcast_to(plan.dwell_s, len(flows))
    per_dwell = [max(1, round(dwell / plan.interval_s)) for dwell in dwells]
    per_ramp = max(1, round(plan.ramp_s / plan.interval_s))
    move = 0.5 - 0.5 * np.cos(np.pi * (np.arange(per_ramp) + 0.5) / per_ramp)
    level, window = [np.full(per_dwell[0], flows[0])], [np.full(per_dwell[0], 0)]
    for number, (old, new) in enumerate(pairwise(flows), start=1):
        level += [old + (new - old) * move, np.full(per_dwell[number], new)]
        window += [np.full(per_ramp, -1), np.full(per_dwell[number], number)]
    level = np.concatenate(level)
    return np.arange(level.size) * plan.interval_s, level, np.concatenate(window)


def run_test(rng, pipe, kit, plan, truth):
    """What the instruments show over the day."""
    time_s, level, window = settings_over_time(plan)
    size, step = time_s.size, plan.interval_s
    supply = plan.drift * np.sin(np.pi * time_s / time_s[-1] + rng.uniform(0.0, np.pi))
    wander = 0.003 * lfilter([0.3], [1.0, -0.7], memory_noise(rng, size, 15.0, step))
    flow = level * (1.0 + 0.5 * supply + wander)
    top = max(plan.flows_m3_s)
    upstream = plan.supply_pa * (1.0 + supply) - plan.source_loss_pa * (flow / top) ** 2
    upstream += 0.5 * kit.gauge.noise_pa * memory_noise(rng, size, 20.0, step)
    inertia = truth.length_m / (np.pi / 4.0 * truth.bore_m**2 * GRAVITY) * np.gradient(flow, step)
    fall = true_head_loss(truth, flow) + inertia + truth.elevation_m[1] - truth.elevation_m[0]
    errors, gauge, meter = truth.errors, kit.gauge, kit.meter
    pressure = np.array([upstream, upstream - truth.density_kg_m3 * GRAVITY * fall])
    for end, (zero, full) in enumerate(errors.gauges_pa):
        pressure[end] += zero + (full - zero) * pressure[end] / gauge.full_scale_pa
        pressure[end] += gauge.noise_pa * memory_noise(rng, size, 4.0, step)
    as_bore = (pipe.bore_m / truth.bore_m) ** 2 if meter.senses == "velocity" else 1.0
    shown = flow * as_bore * (1.0 + errors.meter_gain) + errors.meter_zero_m3_s
    shown *= 1.0 + meter.noise * memory_noise(rng, size, 5.0, step)
    return Rows(
        time_s=time_s,
        window=window,
        flow_m3_s=np.where(flow < 0.02 * top, 0.0, shown),
        pressure_pa=pressure,
        temperature_degc=np.full(size, pipe.temperature_degc) + 0.03 * memory_noise(rng, size, 60.0, step),
    )


def simulate(rng, pipe, kit, plan, errors=None):
    """A day of testing; errors are drawn unless they are given."""
    if errors is None:
        errors = draw_errors(rng, pipe, kit, plan)
    truth = find_truth(pipe, kit, plan, errors)
    return Day(pipe=pipe, kit=kit, plan=plan, truth=truth, rows=run_test(rng, pipe, kit, plan, truth))
