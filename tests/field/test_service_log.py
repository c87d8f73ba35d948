"""Service logs: told from tests in steps, cut by the clock, grouped without bias."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from instruments import Gauge, Kit, Meter, Pipe, Plan
from service_day import service
from simulator import Errors, friction_factor
from test_plateaus import AREA, log_of, section_of

from fieldfit.errors import InputError
from fieldfit.field.averages import summarise
from fieldfit.field.plateaus import screen
from fieldfit.field.reaches import reach_readings
from fieldfit.field.section_file import read_section
from fieldfit.field.service_log import block_seconds

GRAVITY = 9.80665
BORE, LENGTH, ROUGHNESS = 0.15, 300.0, 1e-3


@pytest.fixture(scope="module")
def three_days():
    """Three days at a row a minute of a section of the tests' bore and length, with a meter noise of 2 %."""
    pipe = Pipe(bore_m=BORE, length_m=LENGTH, roughness_m=ROUGHNESS, temperature_degc=15.0)
    kit = Kit(
        gauge=Gauge(full_scale_pa=1e6, limit=0.001, step_pa=1.0, noise_pa=200.0),
        meter=Meter(limit=0.005, step_m3_s=1e-6, noise=0.02),
    )
    plan = Plan(flows_m3_s=(0.010, 0.030), supply_pa=5e5, interval_s=60.0, statics="none")
    day = service(np.random.default_rng(31), (pipe, kit), plan, Errors())
    log = log_of(day.rows.flow_m3_s, np.zeros(day.rows.time_s.size), seconds=60.0)
    return day, replace(log, pressure_pa=day.rows.pressure_pa)


def surveyed(**changes):
    """The section with gauges of one height."""
    known = section_of(**changes)
    level = replace(known.taps[0].station, value=10.0, standard=0.01)
    return replace(known, taps=tuple(replace(tap, elevation=level) for tap in known.taps))


def test_days_of_service_are_grouped_and_steps_are_not(three_days):
    _, log = three_days
    assert screen(log, surveyed()).block is not None
    # Eight hours of a test in steps, an hour each, are long too, but stand still.
    velocity = np.repeat([0.0, 1.0, 2.0, 3.0, 2.5, 1.5, 0.8, 0.0], 360)
    rng = np.random.default_rng(32)
    flow = velocity * AREA * (1.0 + rng.normal(0.0, 0.005, velocity.size))
    stepped = log_of(flow, 1.5 * velocity**2 + rng.normal(0.0, 0.01, velocity.size), seconds=10.0)
    screening = screen(stepped, surveyed())
    assert screening.block is None
    assert np.unique(screening.plateau[screening.plateau > 0]).size == 8


def test_the_section_file_has_the_last_word(three_days):
    _, log = three_days
    assert screen(log, surveyed(screen_mode="plateaus")).block is None
    short = log_of(np.full(400, 2.0 * AREA), np.full(400, 6.0), seconds=10.0)
    rng = np.random.default_rng(33)
    short = replace(short, pressure_pa=short.pressure_pa + rng.normal(0.0, 200.0, (2, 400)))
    assert screen(short, surveyed()).block is None
    forced = screen(short, surveyed(screen_mode="service"))
    assert forced.block is not None
    assert forced.used > 300


def test_limits_of_the_rule_count(three_days):
    _, log = three_days
    assert screen(log, surveyed(screen_limits=(("service_hours", 100.0),))).block is None
    assert screen(log, surveyed(screen_limits=(("service_steady", 0.0),))).block is None
    assert block_seconds(log, surveyed(screen_limits=(("block", 3600.0),))) == 3600.0
    # A block holds as many rows as a plateau needs, however short it was asked for.
    assert block_seconds(log, surveyed(screen_limits=(("block", 60.0),))) == 480.0


def test_head_loss_of_the_groups_is_true_and_known(three_days):
    """Twelve groups from a meter with 2 % noise: each friction factor within what it states, none with a trend."""
    day, log = three_days
    section = surveyed()
    screening = screen(log, section)
    plateaus = summarise(log, screening, section, day.truth.density_kg_m3 * GRAVITY)
    readings = reach_readings(plateaus, section, 0)
    flow = readings.flow_m3_s
    assert len(flow) >= 8
    velocity = flow / (np.pi / 4.0 * BORE**2)
    factor = friction_factor(velocity * BORE / day.truth.viscosity_m2_s, ROUGHNESS / BORE)
    # Weighed in water of 1000 kg/m³, as the tests' section has it.
    truth = factor * LENGTH / BORE * velocity**2 / (2.0 * GRAVITY) * day.truth.density_kg_m3 / 1000.0
    pull = (readings.head_loss_m - truth) / readings.random_m
    assert np.sqrt(np.mean(pull**2)) < 1.5
    assert np.average(readings.head_loss_m / truth, weights=(truth / readings.random_m) ** 2) == pytest.approx(
        1.0, abs=0.004
    )
    assert np.all(readings.random_m / truth < 0.02)


def test_groups_run_up_in_flow_and_hold_many_blocks(three_days):
    _, log = three_days
    screening = screen(log, surveyed())
    numbers = np.unique(screening.plateau[screening.plateau > 0])
    flow = [log.flow_m3_s[screening.plateau == number].mean() for number in numbers]
    assert np.all(np.diff(flow) > 0.0)
    for number in numbers:
        assert np.unique(screening.block[screening.plateau == number]).size >= 4
    assert screening.used + sum(count for _, count in screening.counts) == log.rows


def test_a_stop_within_the_days_levels_the_gauges(three_days):
    _, log = three_days
    flow = log.flow_m3_s.copy()
    pressure = log.pressure_pa.copy()
    flow[1500:1560] = 0.0
    rng = np.random.default_rng(34)
    pressure[:, 1500:1560] = 5e5 + rng.normal(0.0, 200.0, (2, 60)) - np.array([[0.0], [4000.0]])
    section = surveyed()
    stopped = replace(log, flow_m3_s=flow, pressure_pa=pressure)
    screening = screen(stopped, section)
    plateaus = summarise(stopped, screening, section, 1000.0 * GRAVITY)
    assert plateaus.static.tolist().count(True) == 1
    readings = reach_readings(plateaus, section, 0)
    assert readings.levelling.offset_m == pytest.approx(4000.0 / 1000.0 / GRAVITY, abs=0.02)
    assert plateaus.random_pa[0, plateaus.static][0] > 0.0


def test_fast_demand_is_set_aside():
    """A flow that doubles within every block cannot be averaged: no block of it is used."""
    rng = np.random.default_rng(35)
    time = np.arange(0.0, 86_400.0, 30.0)
    velocity = 1.0 + time % 900.0 / 900.0
    log = log_of(velocity * AREA, 1.5 * velocity**2, seconds=30.0)
    log = replace(log, pressure_pa=log.pressure_pa + rng.normal(0.0, 200.0, log.pressure_pa.shape))
    screening = screen(log, surveyed(screen_mode="service"))
    assert screening.used == 0


@settings(deadline=None, max_examples=25)
@given(
    seed=st.integers(0, 2**32 - 1),
    rows=st.integers(1, 3000),
    interval=st.sampled_from([1.0, 10.0, 60.0, 900.0]),
    still=st.floats(0.0, 1.0),
)
def test_any_flow_whatever_adds_up(seed, rows, interval, still):
    rng = np.random.default_rng(seed)
    velocity = np.abs(np.cumsum(rng.normal(0.0, 0.05, rows))) * (rng.random(rows) > still * 0.2)
    log = log_of(velocity * AREA, 1.5 * velocity**2, seconds=interval)
    section = surveyed(screen_mode="service")
    screening = screen(log, section)
    assert screening.used + sum(count for _, count in screening.counts) == rows
    plateaus = summarise(log, screening, section, 1000.0 * GRAVITY)
    assert np.all(np.isfinite(plateaus.random_pa))
    assert np.all(np.isfinite(plateaus.flow_slope_standard_m3_s2))


SECTION = """
name = "Invented main"
bore = "150 mm"
temperature = "12 degC"
[flow]
column = "flow"
accuracy = "0.5 % of reading"
[[tap]]
column = "p1"
station = "0 m"
accuracy = "0.25 % of 10 bar"
[[tap]]
column = "p2"
station = "300 m"
accuracy = "0.25 % of 10 bar"
[screen]
"""


@pytest.mark.parametrize(("word", "mode"), [("auto", None), ("Service", "service"), ("plateaus", "plateaus")])
def test_mode_is_read(tmp_path, word, mode):
    (tmp_path / "section.toml").write_text(SECTION + f'mode = "{word}"\ngap = 30\n', encoding="utf-8")
    section = read_section(tmp_path)
    assert section.screen_mode == mode
    assert section.screen_limits == (("gap", 30.0),)


def test_another_mode_is_refused_with_a_near_miss(tmp_path):
    (tmp_path / "section.toml").write_text(SECTION + 'mode = "servcie"\n', encoding="utf-8")
    with pytest.raises(InputError, match=r"'servcie' is no way to read a log. Did you mean 'service'\?"):
        read_section(tmp_path)
