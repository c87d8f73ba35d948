"""Days of testing that went wrong, each in one way, as the crew would bring them home."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from crew import bring
from instruments import Gauge, Kit, Meter, Pipe, Plan
from service_day import service
from simulator import Errors, simulate

PIPE = Pipe(bore_m=0.15, length_m=300.0, roughness_m=1e-3, elevation_m=(10.0, 9.0))
KIT = Kit(
    gauge=Gauge(full_scale_pa=1e6, limit=0.0025, step_pa=100.0, noise_pa=200.0),
    meter=Meter(limit=0.005, step_m3_s=1e-5),
)
PLAN = Plan(flows_m3_s=(0.010, 0.015, 0.020, 0.025, 0.030), supply_pa=5e5)


def day(seed=1, kit=KIT, **plan):
    """A sound day of testing without instrument errors, but for what the plan changes."""
    return simulate(np.random.default_rng(seed), PIPE, kit, replace(PLAN, **plan), Errors())


def spoilt(**changes):
    """A sound day whose rows are changed; each change is a function of the rows."""
    sound = day()
    rows = replace(sound.rows, **{name: change(sound.rows) for name, change in changes.items()})
    return replace(sound, rows=rows)


def still(rows):
    rng = np.random.default_rng(2)
    return rows.pressure_pa[:, :1] + rng.normal(0.0, 200.0, rows.pressure_pa.shape)


def noise(rows):
    rng = np.random.default_rng(3)
    return np.array([[4e5], [3.8e5]]) + rng.normal(0.0, 2e4, rows.pressure_pa.shape)


def hanging(rows):
    pressure = rows.pressure_pa.copy()
    pressure[1, 100:] = pressure[1, 100]
    return pressure


def half_backwards(rows):
    return np.where(np.arange(rows.time_s.size) < rows.time_s.size // 2, 1.0, -1.0) * rows.flow_m3_s


LOGS = {
    "sound": day,
    "all static": lambda: spoilt(flow_m3_s=lambda rows: 0.0 * rows.flow_m3_s, pressure_pa=still),
    "too short": lambda: day(dwell_s=12.0),
    "stuck gauge": lambda: spoilt(pressure_pa=hanging),
    "half backwards": lambda: spoilt(flow_m3_s=half_backwards),
    "noise": lambda: spoilt(pressure_pa=noise),
    "swapped": lambda: spoilt(pressure_pa=lambda rows: rows.pressure_pa[::-1]),
    "laminar": lambda: day(flows_m3_s=(6e-5, 8e-5, 1e-4), kit=replace(KIT, meter=Meter(limit=0.005, step_m3_s=1e-7))),
    "one flow": lambda: day(flows_m3_s=(0.02,)),
    "service": lambda: service(
        np.random.default_rng(4),
        (PIPE, KIT),
        Plan(flows_m3_s=(0.010, 0.030), supply_pa=5e5, interval_s=60.0, statics="none"),
        Errors(),
        days=2.0,
    ),
    "unsurveyed": lambda: day(statics="none"),
}
"""Every log by the name of its sin."""


def brought(name, folder):
    """Write the files of one of the logs and return the section file's folder."""
    folder.mkdir(parents=True, exist_ok=True)
    section, _ = bring(LOGS[name](), folder)
    text = section.read_text(encoding="utf-8").replace("Simulated section", name)
    if name == "unsurveyed":
        text = "\n".join(line for line in text.splitlines() if not line.startswith("elevation"))
    section.write_text(text, encoding="utf-8")
    return folder
