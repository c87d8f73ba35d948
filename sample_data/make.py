"""Write the sample data: six test sections of an invented works and its town, with known truth.

Run it with ``python sample_data/make.py``: it writes the same files every time. The physics comes from the simulator
in ``tests/``, which shares nothing with the program, so what the program finds can be held against ``truth.csv``.
"""

import datetime as dt
import sys
from dataclasses import replace
from pathlib import Path

import numpy as np

HERE = Path(__file__).resolve().parent
sys.path[:0] = [str(HERE), str(HERE.parent / "tests")]

import tanyard  # noqa: E402
from campaign_simulator import Campaign, simulate_campaigns  # noqa: E402
from crew import FOOT, GPM, INCH, PLANT, PSI, STREET, WORKS, log_text, sheet_text  # noqa: E402
from instruments import Gauge, Kit, Limits, Meter, Pipe, Plan  # noqa: E402
from simulator import draw_errors, simulate  # noqa: E402

SEED = 20260520
MILL_RISE_DAYS = ("2008-05-14", "2013-09-24", "2018-04-11", "2018-06-05", "2026-05-07")
CUBIC_METRE_PER_HOUR = 1.0 / 3600.0

KILN_COOLING = """\
# Cooling water to kiln 2 of the Wexhollow Tileworks, tested on 12 May 2026.
name = "Kiln cooling supply"
material = "carbon steel"
installed = 2009-03-01
bore = "52.5 mm ± 0.5 %"
fluid = "water"

[flow]
column = "flow"
accuracy = "0.5 % of reading"
meter = "MAG-118"

[[tap]]
column = "upstream"
station = "0 m ± 0.02 m"
elevation = "1.20 m ± 0.02 m"
accuracy = "0.25 % of 10 bar"
gauge = "PG-07"

[[tap]]
column = "downstream"
station = "38.2 m ± 0.02 m"
elevation = "2.45 m ± 0.02 m"
accuracy = "0.25 % of 10 bar"
gauge = "PG-11"

[[fitting]]
name = "two long-radius bends"
k = "0.25 ± 30 %"
count = 2

[duty]
flow = "3.0 L/s"
"""

LANTERN_ROW = """\
# The old main under Lantern Row, Wexhollow: two hydrants, a third one flowing, gauges read by hand.
name = "Lantern Row main"
material = "cast iron"
installed = 1931-06-01
bore = "6.00 in ± 1 %"
temperature = "52 degF ± 2 degF"

[flow]
column = "Q"
accuracy = "2 % of reading"

[[tap]]
column = "P1"
station = "0 ft ± 1 ft"
elevation = "212.4 ft ± 0.1 ft"
accuracy = "ASME B40.100 grade 2A, 0-100 psi"
gauge = "LR-1"

[[tap]]
column = "P2"
station = "984 ft ± 1 ft"
elevation = "207.9 ft ± 0.1 ft"
accuracy = "ASME B40.100 grade 2A, 0-100 psi"
gauge = "LR-2"

[plan]
c = "5 %"
flow = "40 L/s"
static = "60 psi"
supply_loss = "8 psi"
gauges = "ASME B40.100 grade 2A, 0-100 psi; ASME B40.100 grade A, 0-100 psi"
meters = "2 % of reading; 5 % of reading"
"""

HERON_LANE = """\
# The new main under Heron Lane, Wexhollow, before it is handed over.
name = "Heron Lane main"
material = "PE"
installed = 2026-04-20
bore = "163.0 mm ± 0.5 %"          # calliper at both cut ends

[flow]
column = "flow"
accuracy = "0.5 % of reading"
meter = "MAG-131"

[[tap]]
column = "upstream"
station = "0 m ± 0.1 m"
elevation = "31.62 m ± 0.02 m"
accuracy = "0.1 % of 6 bar"
gauge = "PT-21"

[[tap]]
column = "downstream"
station = "412 m ± 0.1 m"
elevation = "30.05 m ± 0.02 m"
accuracy = "0.1 % of 6 bar"
gauge = "PT-22"

[[fitting]]
name = "bends, 45 degrees"
k = "0.2 ± 30 %"
count = 3

[contract]
c = 145
flow = "25 L/s"
temperature = "10 degC"
rule = "guarded acceptance"
risk = "5 %"
"""

CLAY_PIT = """\
# Discharge line of the clay pit pumps, Wexhollow Tileworks: one row per flow, written down on the spot.
name = "Clay pit discharge"
material = "carbon steel"
installed = 1998-09-01
pipe = "NPS 4 schedule 40"          # its bore is known no better than the standard's wall tolerance
temperature = "11 degC ± 1 degC"

[flow]
column = "flow"
accuracy = "1.5 % of reading"
meter = "CO-3"
senses = "velocity"                 # clamp-on: it was told the bore of that pipe

[[tap]]
column = "upstream"
station = "0 m ± 0.1 m"
elevation = "4.10 m ± 0.02 m"
accuracy = "EN 837-1 class 0.6 of 6 bar"
gauge = "CP-1"

[[tap]]
column = "downstream"
station = "126 m ± 0.1 m"
elevation = "9.85 m ± 0.02 m"
accuracy = "EN 837-1 class 0.6 of 6 bar"
gauge = "CP-2"
"""

MILL_RISE = """\
# The main up Mill Rise, Wexhollow: five campaigns in eighteen years, the same two gauges in the same box.
name = "Mill Rise main"
material = "uncoated cast iron"
installed = 1981-05-18
bore = "150.0 mm ± 0.7 %"

[flow]
column = "flow"
accuracy = "1 % of reading"
meter = "MAG-88"

[[tap]]
column = "upstream"
station = "0 m ± 0.2 m"
elevation = "18.34 m ± 0.02 m"
accuracy = "0.1 % of 6 bar"
gauge = "PT-3"

[[tap]]
column = "downstream"
station = "340 m ± 0.2 m"
elevation = "21.07 m ± 0.02 m"
accuracy = "0.1 % of 6 bar"
gauge = "PT-4"

[[fitting]]
name = "bends, 45 degrees"
k = "0.3 ± 30 %"
count = 3

[[campaign]]
date = 2008-05-14
log = "2008-05-14.csv"

[[campaign]]
date = 2013-09-24
log = "2013-09-24.csv"

[[campaign]]
date = 2018-04-11
log = "2018-04-11.csv"
meter = "MAG-140"                    # the old meter had been struck by lightning
meter_accuracy = "0.5 % of reading"

[[campaign]]
date = 2018-06-05
log = "2018-06-05.csv"
meter = "MAG-140"
meter_accuracy = "0.5 % of reading"
cleaned = 2018-05-22
promised_c = 108

[[campaign]]
date = 2026-05-07
log = "2026-05-07.csv"
meter = "MAG-140"
meter_accuracy = "0.5 % of reading"

[water]
langelier = -1.3

[duty]
flow = "18 L/s"
head = "6 m"

[threshold]
c = 95
capacity = "19.5 L/s"
by = 2034-01-01
"""


def kiln_cooling():
    """Plant line, clearly rougher than new: logger at 2 s, eight flows, one of them cut short by a valve."""
    pipe = Pipe(
        bore_m=0.0525, length_m=38.2, roughness_m=0.35e-3, fitting_k=0.5, elevation_m=(1.20, 2.45), temperature_degc=14
    )
    kit = Kit(
        gauge=Gauge(full_scale_pa=1e6, limit=0.0025, step_pa=100.0, noise_pa=350.0),
        meter=Meter(limit=0.005, step_m3_s=1e-5),
        limits=Limits(bore=0.005, station_m=0.02, elevation_m=0.02, fitting_k=0.3, temperature_k=0.3),
    )
    plan = Plan(
        flows_m3_s=tuple(1e-3 * flow for flow in (1.4, 1.9, 2.4, 2.9, 3.5, 4.0, 4.5, 5.0)),
        dwell_s=(44.0, 54.0, 54.0, 54.0, 30.0, 54.0, 54.0, 54.0, 54.0, 44.0),
        ramp_s=14.0,
        supply_pa=4.12e5,
        source_loss_pa=0.9e5,
    )
    return day_of("kiln_cooling", 1, pipe, kit, plan)


def lantern_row():
    """Street main, far gone: hydrants, hand-read gauges, United States units."""
    pipe = Pipe(
        bore_m=6.0 * INCH,
        length_m=984.0 * FOOT,
        roughness_m=2.4e-3,
        elevation_m=(212.4 * FOOT, 207.9 * FOOT),
        temperature_degc=100.0 / 9.0,
    )
    kit = Kit(
        gauge=Gauge(full_scale_pa=100.0 * PSI, limit=0.005, step_pa=0.2 * PSI, noise_pa=0.15 * PSI),
        meter=Meter(limit=0.02, step_m3_s=5.0 * GPM, noise=0.008),
        limits=Limits(bore=0.01, station_m=1.0 * FOOT, elevation_m=0.1 * FOOT, temperature_k=1.0),
    )
    plan = Plan(
        flows_m3_s=tuple(GPM * flow for flow in (260.0, 390.0, 520.0, 630.0)),
        dwell_s=180.0,
        ramp_s=45.0,
        interval_s=15.0,
        supply_pa=71.0 * PSI,
        source_loss_pa=12.0 * PSI,
    )
    return day_of("lantern_row", 2, pipe, kit, plan)


def heron_lane():
    """Street main of new polyethylene, as smooth as can be told."""
    pipe = Pipe(
        bore_m=0.163, length_m=412.0, roughness_m=1.5e-6, fitting_k=0.6, elevation_m=(31.62, 30.05), temperature_degc=9
    )
    kit = Kit(
        gauge=Gauge(full_scale_pa=6e5, limit=0.001, step_pa=50.0, noise_pa=150.0),
        meter=Meter(limit=0.005, step_m3_s=0.1 * CUBIC_METRE_PER_HOUR),
        limits=Limits(bore=0.005, station_m=0.1, elevation_m=0.02, fitting_k=0.3, temperature_k=0.3),
    )
    plan = Plan(
        flows_m3_s=tuple(CUBIC_METRE_PER_HOUR * flow for flow in (48.0, 66.0, 84.0, 102.0, 120.0)),
        dwell_s=48.0,
        ramp_s=12.0,
        interval_s=1.0,
        supply_pa=3.9e5,
        source_loss_pa=0.6e5,
    )
    return day_of("heron_lane", 3, pipe, kit, plan)


def clay_pit():
    """Pump discharge, somewhat rough: a hand sheet without times."""
    pipe = Pipe(bore_m=0.10226, length_m=126.0, roughness_m=0.6e-3, elevation_m=(4.10, 9.85), temperature_degc=11)
    kit = Kit(
        gauge=Gauge(full_scale_pa=6e5, limit=0.006, step_pa=1000.0, noise_pa=800.0),
        meter=Meter(limit=0.015, step_m3_s=0.05e-3, senses="velocity", noise=0.006),
        limits=Limits(bore=0.0147, station_m=0.1, elevation_m=0.02, temperature_k=1.0),
    )
    plan = Plan(
        flows_m3_s=tuple(1e-3 * flow for flow in (8.0, 11.0, 14.0, 17.0, 20.0)),
        supply_pa=4.6e5,
        source_loss_pa=1.1e5,
    )
    return day_of("clay_pit", 4, pipe, kit, plan)


def mill_rise():
    """Street main over eighteen years: 0.055 mm a year since 1981, cleaned in 2018, 0.09 mm a year since."""
    pipe = Pipe(bore_m=0.150, length_m=340.0, roughness_m=0.26e-3, fitting_k=0.9, elevation_m=(18.34, 21.07))
    kit = Kit(
        gauge=Gauge(full_scale_pa=6e5, limit=0.001, step_pa=50.0, noise_pa=180.0),
        meter=Meter(limit=0.01, step_m3_s=1e-5),
        limits=Limits(bore=0.007, station_m=0.2, elevation_m=0.02, fitting_k=0.3, temperature_k=0.5),
    )
    plan = Plan(
        flows_m3_s=tuple(1e-3 * flow for flow in (9.0, 13.0, 17.0, 21.0, 25.0)),
        dwell_s=100.0,
        ramp_s=40.0,
        interval_s=5.0,
        supply_pa=4.3e5,
        source_loss_pa=0.5e5,
    )
    campaigns = (
        Campaign(roughness_m=1.744e-3, temperature_degc=10.0),
        Campaign(roughness_m=2.040e-3, temperature_degc=16.0),
        Campaign(roughness_m=2.290e-3, temperature_degc=8.0, meter=replace(kit.meter, limit=0.005)),
        Campaign(roughness_m=0.620e-3, temperature_degc=13.0),
        Campaign(roughness_m=1.333e-3, temperature_degc=11.0),
    )
    return simulate_campaigns(np.random.default_rng([SEED, 29]), pipe, kit, plan, campaigns)


def day_of(name, number, pipe, kit, plan):
    """Draw the day's errors and readings from the section's own stream, and keep them under the folder's name."""
    rng = np.random.default_rng([SEED, number])
    return name, simulate(rng, pipe, kit, plan, draw_errors(rng, pipe, kit, plan))


def spoil_kiln_log(text):
    """Add what a real log holds besides readings: gaps, a spike, a gauge that hangs, a doubled row."""
    rows = [line.split(",") for line in text.splitlines()]
    for row, column in ((61, 2), (62, 2), (140, 1), (251, 3)):
        rows[row][column] = ""
    rows[118][2] = "1638.4"
    for row in range(205, 214):
        rows[row][3] = rows[204][3]
    rows.insert(171, list(rows[170]))
    return "\n".join(",".join(row) for row in rows) + "\n"


def street_hand(text):
    """Rewrite a log as the street crew typed it: own headings, semicolons, gaps, a time left out."""
    rows = [line.split(",")[:4] for line in text.splitlines()]
    rows[0] = ["time", "Q (gpm)", "P1 (psi)", "P2 (psi)"]
    rows[17][3] = ""
    rows[35][1] = ""
    rows[55][0] = ""
    return "\n".join(";".join(row) for row in rows) + "\n"


def named(hill):
    """Name the campaigns up Mill Rise by folder and date."""
    return {f"mill_rise {date}": day for date, day in hill.items()}


def truth_row(name, day):
    """One line of truth.csv."""
    truth, errors = day.truth, day.truth.errors
    values = [
        f"{1e3 * truth.roughness_m:.4g}",
        f"{1e3 * truth.equivalent_roughness_m:.4g}",
        f"{1e3 * truth.bore_m:.5g}",
        f"{truth.length_m:.6g}",
        f"{100.0 * errors.meter_gain:.3g}",
        f"{100.0 * errors.level:.3g}",
    ]
    return ",".join([name, *values])


def write(path, text):
    """Write a file with the same bytes on every system."""
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_bytes(text.encode("utf-8"))


def main():
    """Write everything."""
    days = dict([kiln_cooling(), lantern_row(), heron_lane(), clay_pit()])
    kiln = log_text(days["kiln_cooling"], PLANT, start=dt.datetime(2026, 5, 12, 8))
    street = log_text(days["lantern_row"], STREET, start=dt.datetime(2026, 5, 19, 5, 30))
    lane = log_text(days["heron_lane"], WORKS, start=dt.datetime(2026, 5, 6, 10, 15))
    files = {
        "kiln_cooling": (KILN_COOLING, "2026-05-12.csv", spoil_kiln_log(kiln)),
        "lantern_row": (LANTERN_ROW, "2026-05-19.csv", street_hand(street)),
        "heron_lane": (HERON_LANE, "2026-05-06.csv", lane),
        "clay_pit": (CLAY_PIT, "sheet.csv", sheet_text(days["clay_pit"], PLANT)),
    }
    hill = dict(zip(MILL_RISE_DAYS, mill_rise(), strict=True))
    write(HERE / "mill_rise" / "section.toml", MILL_RISE)
    for date, day in hill.items():
        write(
            HERE / "mill_rise" / f"{date}.csv", log_text(day, PLANT, start=dt.datetime.fromisoformat(f"{date}T09:00"))
        )
    survey = tanyard.survey_day([SEED, 6])
    files[tanyard.FOLDER] = (tanyard.section_file(), tanyard.LOG, tanyard.log_file(survey))
    for folder, (section, log_name, log) in files.items():
        write(HERE / folder / "section.toml", section)
        write(HERE / folder / log_name, log)
    columns = "section,roughness_mm,equivalent_roughness_mm,bore_mm,length_m,meter_gain_percent,correlation_percent"
    rows = [truth_row(*item) for item in {**days, **named(hill)}.items()]
    write(HERE / "truth.csv", "\n".join([columns, *rows, tanyard.truth_row(survey)]) + "\n")


if __name__ == "__main__":
    main()
