"""A section of several taps with known truth: what `simulator` does for two taps, reach by reach.

Errors are drawn as there; every tap has its own gauge, station and height. A reach may have a roughness and a bore of
its own, and hide a local loss that no section file names; side flows may leave between the taps.
"""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass

import numpy as np
from crew import PLANT, meter_accuracy, rounded, text
from instruments import Kit, Plan
from scipy.signal import lfilter
from simulator import GRAVITY, draw_line, friction_factor, memory_noise, settings_over_time, water


@dataclass(frozen=True, slots=True, kw_only=True)
class SurveyLine:
    """A line as it is stated, with the truth that nobody knows."""

    bore_m: float
    station_m: tuple[float, ...]
    elevation_m: tuple[float, ...]
    roughness_m: float | tuple[float, ...]
    """Of all reaches, or of each."""
    hidden_k: tuple[float, ...] = ()
    """Local loss in each reach that nobody knows of; none when empty."""
    reach_bore_m: tuple[float, ...] = ()
    """Stated bore of each reach where they differ; empty when they don't."""
    side_flow: tuple[float, float] | None = None
    """Station [m] and flow [m³/s] of a side flow."""
    temperature_degc: float = 12.0


@dataclass(frozen=True, slots=True, kw_only=True)
class SurveyTruth:
    """What was drawn."""

    bore: float
    station_m: np.ndarray
    elevation_m: np.ndarray
    gauges_pa: tuple[tuple[float, float], ...]
    meter_gain: float
    level: float
    slope: float
    temperature_k: float


@dataclass(frozen=True, slots=True, kw_only=True)
class SurveyDay:
    """One day of testing with several taps."""

    line: SurveyLine
    kit: Kit
    plan: Plan
    truth: SurveyTruth
    time_s: np.ndarray
    flow_m3_s: np.ndarray
    pressure_pa: np.ndarray
    """(T, N)."""
    temperature_degc: np.ndarray


def draw_truth(rng, line, kit, plan, correlation=0.05):
    """Every shared error, from its stated limit."""
    limits, gauge, meter = kit.limits, kit.gauge, kit.meter
    working = float(np.clip(plan.supply_pa / gauge.full_scale_pa, 0.05, 0.95))
    taps = len(line.station_m)
    return SurveyTruth(
        bore=rng.uniform(-limits.bore, limits.bore),
        station_m=np.array(line.station_m) + rng.uniform(-limits.station_m, limits.station_m, taps),
        elevation_m=np.array(line.elevation_m) + rng.uniform(-limits.elevation_m, limits.elevation_m, taps),
        gauges_pa=tuple(draw_line(rng, gauge.limit * gauge.full_scale_pa, working) for _ in range(taps)),
        meter_gain=rng.uniform(-meter.limit, meter.limit),
        level=rng.normal(0.0, correlation),
        slope=rng.normal(0.0, correlation),
        temperature_k=rng.uniform(-limits.temperature_k, limits.temperature_k),
    )


def per_reach(line):
    """Stated bore, roughness and hidden loss of each reach."""
    reaches = len(line.station_m) - 1
    bore = np.array(line.reach_bore_m or (line.bore_m,) * reaches)
    roughness = np.broadcast_to(np.asarray(line.roughness_m, dtype=float), reaches)
    return bore, roughness, np.array(line.hidden_k or (0.0,) * reaches)


def falls(line, truth, plan, flow):
    """Fall of the piezometric head from the first tap to each tap at every flow [m], (T, N)."""
    bores, roughness, hidden = per_reach(line)
    bores = bores * (1.0 + truth.bore)
    _, viscosity = water(line.temperature_degc + truth.temperature_k)
    middle = np.exp(np.mean(np.log(plan.flows_m3_s))) * 4.0 / (np.pi * line.bore_m * viscosity)
    total, found = np.zeros_like(flow), [np.zeros_like(flow)]
    taken = line.side_flow or (np.inf, 0.0)
    for reach, (bore, rough, k) in enumerate(zip(bores, roughness, hidden, strict=True)):
        first, last = truth.station_m[reach], truth.station_m[reach + 1]
        cut = float(np.clip(taken[0], first, last))
        for length, here in ((cut - first, flow), (last - cut, np.maximum(flow - taken[1], 0.0))):
            velocity = here / (np.pi / 4.0 * bore**2)
            f = friction_factor(np.abs(velocity) * bore / viscosity, rough / bore, truth, middle)
            total = total + (f * length / bore) * velocity**2 / (2.0 * GRAVITY)
        above = flow if taken[0] > first else np.maximum(flow - taken[1], 0.0)
        total = total + k * (above / (np.pi / 4.0 * bore**2)) ** 2 / (2.0 * GRAVITY)
        at_tap = flow if taken[0] > last else np.maximum(flow - taken[1], 0.0)
        change = (at_tap / bore**2) ** 2 - (flow / bores[0] ** 2) ** 2
        found.append(total + 8.0 / (np.pi**2 * GRAVITY) * change)
    return np.array(found)


def simulate_survey(rng, line, kit, plan, truth=None):
    """What the instruments show over the day."""
    truth = draw_truth(rng, line, kit, plan) if truth is None else truth
    density, _ = water(line.temperature_degc + truth.temperature_k)
    time_s, level, _ = settings_over_time(plan)
    size, step, top = time_s.size, plan.interval_s, max(plan.flows_m3_s)
    supply = plan.drift * np.sin(np.pi * time_s / time_s[-1] + rng.uniform(0.0, np.pi))
    wander = 0.003 * lfilter([0.3], [1.0, -0.7], memory_noise(rng, size, 15.0, step))
    flow = level * (1.0 + 0.5 * supply + wander)
    upstream = plan.supply_pa * (1.0 + supply) - plan.source_loss_pa * (flow / top) ** 2
    upstream += 0.5 * kit.gauge.noise_pa * memory_noise(rng, size, 20.0, step)
    bores, _, _ = per_reach(line)
    inertia = np.cumsum(np.append(0.0, np.diff(truth.station_m) / (np.pi / 4.0 * bores**2 * GRAVITY)))
    height = truth.elevation_m - truth.elevation_m[0]
    fall = falls(line, truth, plan, flow) + np.outer(inertia, np.gradient(flow, step)) + height[:, None]
    pressure = upstream - density * GRAVITY * fall
    for tap, (zero, full) in enumerate(truth.gauges_pa):
        pressure[tap] += zero + (full - zero) * pressure[tap] / kit.gauge.full_scale_pa
        pressure[tap] += kit.gauge.noise_pa * memory_noise(rng, size, 4.0, step)
    shown = flow * (1.0 + truth.meter_gain) * (1.0 + kit.meter.noise * memory_noise(rng, size, 5.0, step))
    return SurveyDay(
        line=line,
        kit=kit,
        plan=plan,
        truth=truth,
        time_s=time_s,
        flow_m3_s=np.where(flow < 0.02 * top, 0.0, shown),
        pressure_pa=pressure,
        temperature_degc=np.full(size, line.temperature_degc) + 0.03 * memory_noise(rng, size, 60.0, step),
    )


def tap_names(line):
    """Column of each tap."""
    return [f"tap {number}" for number in range(1, len(line.station_m) + 1)]


def survey_section_text(day, units=PLANT, name="Simulated survey", extra=""):
    """The section file; `extra` goes above the tables."""
    line, limits, gauge = day.line, day.kit.limits, day.kit.gauge
    lines = [
        f'name = "{name}"',
        f'bore = "{text(line.bore_m, units.bore)} ± {100.0 * limits.bore:.6g} %"',
        f'temperature = "{line.temperature_degc:g} degC ± {limits.temperature_k:g} degC"',
        extra,
        "[flow]",
        'column = "flow"',
        f'accuracy = "{meter_accuracy(day.kit.meter, units)}"',
    ]
    for column, station, elevation in zip(tap_names(line), line.station_m, line.elevation_m, strict=True):
        lines += [
            "",
            "[[tap]]",
            f'column = "{column}"',
            f'station = "{text(station, units.length)} ± {text(limits.station_m, units.length, 6)}"',
            f'elevation = "{text(elevation, units.length)} ± {text(limits.elevation_m, units.length, 6)}"',
            f'accuracy = "{100.0 * gauge.limit:.6g} % of {text(gauge.full_scale_pa, units.pressure, 6)}"',
        ]
    for reach, bore in enumerate(line.reach_bore_m):
        if bore != line.bore_m:
            ends = tap_names(line)[reach : reach + 2]
            stated = f"{text(bore, units.bore)} ± {100.0 * limits.bore:.6g} %"
            lines += ["", "[[reach]]", f'from = "{ends[0]}"', f'to = "{ends[1]}"', f'bore = "{stated}"']
    return "\n".join(lines) + "\n"


def survey_log_text(day, units=PLANT, start=dt.datetime(2026, 6, 3, 9)):
    """The logger's file."""
    flow, pressure = units.flow, units.pressure
    columns = [
        rounded(day.flow_m3_s / flow[1], day.kit.meter.step_m3_s / flow[1]),
        *(rounded(row / pressure[1], day.kit.gauge.step_pa / pressure[1]) for row in day.pressure_pa),
        rounded(day.temperature_degc, 0.1),
    ]
    headings = [f"flow [{flow[0]}]", *(f"{name} [{pressure[0]}]" for name in tap_names(day.line)), "temperature [degC]"]
    clock = [(start + dt.timedelta(seconds=float(t))).isoformat() for t in day.time_s]
    table = [["time", *headings], *zip(clock, *columns, strict=True)]
    return "\n".join(",".join(row) for row in table) + "\n"


def bring_survey(day, folder, extra=""):
    """Write the section file and the log; return their paths."""
    folder.mkdir(parents=True, exist_ok=True)
    section, log = folder / "section.toml", folder / "log.csv"
    section.write_text(survey_section_text(day, extra=extra), encoding="utf-8")
    log.write_text(survey_log_text(day), encoding="utf-8")
    return section, log
