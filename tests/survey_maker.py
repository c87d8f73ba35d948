"""Surveys without instrument errors, for tests of the method alone."""

from __future__ import annotations

import numpy as np
from instruments import Gauge, Kit, Limits, Meter, Plan
from survey_simulator import SurveyLine, SurveyTruth, bring_survey, simulate_survey

from fieldfit.assessment import read_campaign
from fieldfit.bore_and_taps import survey_of
from fieldfit.field.section_file import read_section
from fieldfit.field.survey_readings import survey_readings

STATIONS = (0.0, 90.0, 180.0, 270.0, 360.0, 450.0)
HEIGHTS = (14.2, 13.8, 14.9, 16.1, 15.4, 15.0)
KIT = Kit(
    gauge=Gauge(full_scale_pa=6e5, limit=0.0025, step_pa=10.0, noise_pa=60.0),
    meter=Meter(limit=0.005, step_m3_s=1e-6, noise=0.0005),
    limits=Limits(bore=0.005, station_m=0.1, elevation_m=0.02),
)
TREMBLING = Kit(
    gauge=Gauge(full_scale_pa=6e5, limit=0.0025, step_pa=50.0, noise_pa=300.0), meter=KIT.meter, limits=KIT.limits
)
"""The same with gauges that tremble."""
PLAN = Plan(
    flows_m3_s=(5e-3, 7e-3, 9e-3, 11e-3, 13e-3), supply_pa=4.6e5, dwell_s=60.0, ramp_s=20.0, interval_s=2.0, drift=0.001
)


def old_main(**changes):
    """A 4 in main of six taps, 0.6 mm rough unless something else is said."""
    usual = {"bore_m": 0.1016, "station_m": STATIONS, "elevation_m": HEIGHTS, "roughness_m": 0.6e-3}
    return SurveyLine(**(usual | changes))


def no_errors(line):
    """Instruments, stations, heights and friction law all exactly as stated."""
    taps = len(line.station_m)
    return SurveyTruth(
        bore=0.0,
        station_m=np.array(line.station_m),
        elevation_m=np.array(line.elevation_m),
        gauges_pa=((0.0, 0.0),) * taps,
        meter_gain=0.0,
        level=0.0,
        slope=0.0,
        temperature_k=0.0,
    )


def exact_day(line, seed=1, kit=KIT):
    """A day on which only the readings' own noise is off."""
    return simulate_survey(np.random.default_rng(seed), line, kit, PLAN, no_errors(line))


def read(day, folder, edit=None):
    """Section, log, screening and plateaus of a day; `edit` changes the texts of the two files."""
    section_file, log_file = bring_survey(day, folder)
    if edit is not None:
        texts = edit(section_file.read_text(encoding="utf-8"), log_file.read_text(encoding="utf-8"))
        for file, text in zip((section_file, log_file), texts, strict=True):
            file.write_text(text, encoding="utf-8")
    section = read_section(section_file)
    return section, *read_campaign(section, log_file)


def readings_of(day, folder, edit=None):
    """What all taps say."""
    section, log, screening, plateaus = read(day, folder, edit)
    return survey_readings(plateaus, section, (log, screening))


def surveyed(day, folder, edit=None):
    """What the survey finds."""
    section, log, screening, plateaus = read(day, folder, edit)
    return survey_of(section, plateaus, (log, screening))
