"""Days of ordinary service: a flow that follows demand and never stands still, as a logger writes it."""

from __future__ import annotations

import numpy as np
from scipy.signal import lfilter
from simulator import Day, Rows, find_truth, memory_noise, true_head_loss

GRAVITY = 9.80665
DAY_S = 86_400.0


def demand(rng, time_s, low, high):
    """Flow of a district over days: two peaks a day, slow wander, and taps that open and shut."""
    hour = time_s / 3600.0 % 24.0
    morning = np.exp(-0.5 * ((hour - 7.5) / 1.6) ** 2)
    evening = 0.8 * np.exp(-0.5 * ((hour - 19.0) / 2.4) ** 2)
    midday = 0.45 * np.exp(-0.5 * ((hour - 13.0) / 3.0) ** 2)
    step = float(time_s[1] - time_s[0])
    wander = 0.04 * memory_noise(rng, time_s.size, 1500.0, step) + 0.02 * memory_noise(rng, time_s.size, 200.0, step)
    # Water speeds up and slows down with the pipes it runs through, not from one row to the next.
    smooth = lfilter([min(1.0, step / 60.0)], [1.0, -(1.0 - min(1.0, step / 60.0))], wander)
    return (low + (high - low) * np.minimum(morning + evening + midday, 1.0)) * (1.0 + smooth)


def run_service(rng, day, days=3.0):
    """Replace the rows of a simulated day by days of service of the same pipe and instruments."""
    plan, kit, truth = day.plan, day.kit, day.truth
    time_s = np.arange(0.0, days * DAY_S, plan.interval_s)
    flow = demand(rng, time_s, min(plan.flows_m3_s), max(plan.flows_m3_s))
    inertia = truth.length_m / (np.pi / 4.0 * truth.bore_m**2 * GRAVITY) * np.gradient(flow, plan.interval_s)
    upstream = plan.supply_pa * (1.0 + 0.03 * np.sin(2.0 * np.pi * time_s / DAY_S + 1.0))
    fall = true_head_loss(truth, flow) + inertia + truth.elevation_m[1] - truth.elevation_m[0]
    pressure = np.array([upstream, upstream - truth.density_kg_m3 * GRAVITY * fall])
    for end, (zero, full) in enumerate(truth.errors.gauges_pa):
        pressure[end] += zero + (full - zero) * pressure[end] / kit.gauge.full_scale_pa
        pressure[end] += kit.gauge.noise_pa * memory_noise(rng, time_s.size, 30.0, plan.interval_s)
    noise = 1.0 + kit.meter.noise * memory_noise(rng, time_s.size, 20.0, plan.interval_s)
    as_bore = (day.pipe.bore_m / truth.bore_m) ** 2 if kit.meter.senses == "velocity" else 1.0
    shown = flow * as_bore * (1.0 + truth.errors.meter_gain) * noise + truth.errors.meter_zero_m3_s
    rows = Rows(
        time_s=time_s,
        window=np.full(time_s.size, -1),
        flow_m3_s=shown,
        pressure_pa=pressure,
        temperature_degc=day.pipe.temperature_degc + 0.5 * np.sin(2.0 * np.pi * time_s / DAY_S),
    )
    return Day(pipe=day.pipe, kit=kit, plan=plan, truth=truth, rows=rows)


def service(rng, section, plan, errors, days=3.0):
    """Days of service of a pipe and its kit with known truth; the plan's flows are the lowest and the highest."""
    pipe, kit = section
    truth = find_truth(pipe, kit, plan, errors)
    empty = Rows(
        time_s=np.empty(0),
        window=np.empty(0, dtype=int),
        flow_m3_s=np.empty(0),
        pressure_pa=np.empty((2, 0)),
        temperature_degc=np.empty(0),
    )
    return run_service(rng, Day(pipe=pipe, kit=kit, plan=plan, truth=truth, rows=empty), days)
