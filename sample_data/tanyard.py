"""The survey of the Tanyard main: six hydrants with gauges, a valve that nobody remembers, a cable that came loose."""

import datetime as dt

import numpy as np
from instruments import Gauge, Kit, Limits, Meter, Plan
from survey_simulator import SurveyLine, simulate_survey, survey_log_text

FOLDER, LOG = "tanyard_main", "2026-06-03.csv"
STATIONS = (0.0, 84.0, 171.0, 262.0, 340.0, 431.0)
HEIGHTS = (14.20, 13.85, 14.90, 16.05, 15.40, 15.10)
HIDDEN_K = (0.0, 0.0, 22.0, 0.0, 0.0)
LOOSE_ROWS = range(118, 162)

HEAD = """\
# The main under Tanyard Lane, Wexhollow: gauges on six hydrants, flow to waste at the lower end.
name = "Tanyard main"
material = "cast iron"
installed = 1954-10-01
bore = "101.6 mm ± 0.5 %"
fluid = "water"

[flow]
column = "flow"
accuracy = "0.5 % of reading"
meter = "MAG-118"
"""

TAP = """
[[tap]]
column = "hydrant {number}"
station = "{station:g} m ± 0.1 m"
elevation = "{height:.2f} m ± 0.02 m"
accuracy = "0.25 % of 6 bar"
gauge = "TY-{number}"
"""


def survey_day(seed):
    """Draw the day."""
    line = SurveyLine(
        bore_m=0.1016,
        station_m=STATIONS,
        elevation_m=HEIGHTS,
        roughness_m=0.9e-3,
        hidden_k=HIDDEN_K,
        temperature_degc=13.0,
    )
    kit = Kit(
        gauge=Gauge(full_scale_pa=6e5, limit=0.0025, step_pa=100.0, noise_pa=250.0),
        meter=Meter(limit=0.005, step_m3_s=1e-5),
        limits=Limits(bore=0.005, station_m=0.1, elevation_m=0.02, temperature_k=0.5),
    )
    plan = Plan(
        flows_m3_s=tuple(1e-3 * flow for flow in (4.5, 6.5, 8.5, 10.5, 12.5)),
        supply_pa=4.9e5,
        dwell_s=72.0,
        ramp_s=20.0,
        interval_s=2.0,
    )
    return simulate_survey(np.random.default_rng(seed), line, kit, plan)


def section_file():
    """Return the section file."""
    taps = zip(STATIONS, HEIGHTS, strict=True)
    parts = [TAP.format(number=number, station=at, height=z) for number, (at, z) in enumerate(taps, start=1)]
    return HEAD + "".join(parts)


def log_file(day):
    """Return the logger's file; for a while hydrant 5 gave nothing."""
    rows = [line.split(",") for line in survey_log_text(day, start=dt.datetime(2026, 6, 3, 9)).splitlines()]
    rows[0] = [cell.replace("tap ", "hydrant ") for cell in rows[0]]
    for row in LOOSE_ROWS:
        rows[row][6] = ""
    return "\n".join(",".join(row) for row in rows) + "\n"


def truth_row(day):
    """Return one line of truth.csv; the local loss between hydrants 3 and 4 is in the README."""
    truth = day.truth
    length = truth.station_m[-1] - truth.station_m[0]
    values = [
        f"{1e3 * day.line.roughness_m:.4g}",
        "",
        f"{1e3 * day.line.bore_m * (1.0 + truth.bore):.5g}",
        f"{length:.6g}",
        f"{100.0 * truth.meter_gain:.3g}",
        f"{100.0 * truth.level:.3g}",
    ]
    return ",".join([FOLDER, *values])
