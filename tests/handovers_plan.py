"""Repeated simulated tests of one pipe by a planned layout: what is found, and how it spreads."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from readings_maker import colebrook

from fieldfit.decisions.expected import planned_readings
from fieldfit.hydraulics.friction import relative_roughness
from fieldfit.inference.fit import fit_reach
from fieldfit.inference.head_model import head_model
from fieldfit.inference.prediction import OperatingPoint, predict

GRAVITY = 9.80665


def spread_found(section, layout, roughness, *, tests, seed):
    """Standard deviation of ln C and of ln ε found, over tests with all errors drawn afresh.

    The pipe of each test has its own true bore and length within their limits and the wall's roughness is the one
    asked for; what is found is held against the truth of that test.
    """
    rng = np.random.default_rng(seed)
    exact = planned_readings(section, section.wishes, layout, roughness)
    bore, length, limit = section.bore, exact.length, np.sqrt(3.0)
    ln_c, ln_roughness = [], []
    for _ in range(tests):
        true_bore = bore.value + bore.standard * limit * rng.uniform(-1.0, 1.0)
        true_length = length.value + length.standard * limit * rng.uniform(-1.0, 1.0)
        gain = layout.meter.gain * limit * rng.uniform(-1.0, 1.0)
        flow = exact.flow_m3_s * (1.0 + gain)
        viscosity = exact.viscosity_m2_s * np.exp(exact.viscosity_standard * rng.normal())
        area = np.pi * true_bore**2 / 4.0
        factor = np.array(
            [
                colebrook(4.0 * q / (np.pi * true_bore * v), roughness / true_bore)
                for q, v in zip(flow, viscosity, strict=True)
            ]
        )
        head = factor * true_length / true_bore * (flow / area) ** 2 / (2.0 * GRAVITY)
        spans = layout.gauge.fixed * limit * rng.uniform(-1.0, 1.0, 2) / layout.gauge.span
        rise = exact.pressure_pa - np.array(exact.levelling.pressure_pa)[:, None]
        read = head + (spans[0] * rise[0] - spans[1] * rise[1]) / (exact.density_kg_m3 * GRAVITY)
        read = read + rng.normal(0.0, exact.levelling.standard_m) + rng.normal(0.0, exact.random_m)
        model = head_model(replace(exact, head_loss_m=read), section.correlation)
        fit = fit_reach(model)
        point = OperatingPoint(flow_m3_s=model.reference.flow_m3_s, viscosity_m2_s=model.reference.viscosity_m2_s)
        found = predict(fit, point, section.correlation).friction.hazen_williams_c.value
        slope = np.interp(point.flow_m3_s, flow, head) / true_length
        truth = point.flow_m3_s / area / (0.849182 * (true_bore / 4.0) ** 0.63 * slope**0.54)
        ln_c.append(np.log(found / truth))
        wall = float(relative_roughness(np.exp(fit.ln_friction), model.reference.reynolds)) * bore.value
        ln_roughness.append(np.log(wall / roughness))
    return float(np.std(ln_c)), float(np.std(ln_roughness))
