"""Each screen on its own: what it must catch, what it must leave, and the order they stand in."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from test_plateaus import AREA, LENGTH, log_of, read, section_of, staircase

from fieldfit.field.plateaus import screen
from fieldfit.field.row_screens import ROW_SCREENS, out_of_range, pauses, reversed_flow, stuck
from fieldfit.field.screens import LIMITS, MISSING, RANGE, REASONS, REVERSED, SCREENS, STUCK, UNSTEADY
from fieldfit.field.stretches import outliers, ramps

FEW = settings(deadline=None, max_examples=40)


def noisy(levels=(0.0, 1.0, 2.0, 3.0, 0.0), rows=40, seed=0):
    """A sound stepped log whose gauges tremble."""
    return trembling(log_of(*staircase(levels, rows)), seed)


def trembling(log, seed=0):
    """The same log, its gauges trembling by 300 Pa."""
    rng = np.random.default_rng(seed)
    return replace(log, pressure_pa=np.rint(log.pressure_pa + rng.normal(0.0, 300.0, log.pressure_pa.shape)))


def caught(judge, log, section=None):
    return set(np.flatnonzero(judge(log, section or section_of())).tolist())


def test_table_and_functions_have_one_order():
    assert len(set(REASONS)) == len(REASONS)
    places = [REASONS.index(why) for why, _ in ROW_SCREENS]
    assert places == sorted(places)
    assert all(SCREENS[place].judges == "row" for place in places)


def test_every_limit_of_a_screen_is_in_the_list():
    assert {name for one in SCREENS for name in one.limits} <= set(LIMITS)


def test_the_first_screen_gives_the_reason():
    """One row that sins against everything: missing beats range beats stuck beats reversed."""
    log = noisy()
    flow, pressure, reason = log.flow_m3_s.copy(), log.pressure_pa.copy(), log.reason.copy()
    flow[100:130], pressure[0, 100:130] = -flow[100:130], 2e6
    reason[110] = MISSING
    screening = screen(replace(log, flow_m3_s=flow, pressure_pa=pressure, reason=reason), section_of())
    assert screening.reason[110] == MISSING
    assert set(screening.reason[111:130]) == {RANGE}
    pressure[0, 100:130] = 5e5
    screening = screen(replace(log, flow_m3_s=flow, pressure_pa=pressure), section_of())
    assert screening.reason[115] == STUCK
    pressure = log.pressure_pa
    screening = screen(replace(log, flow_m3_s=flow), section_of())
    assert screening.reason[115] == REVERSED


@FEW
@given(rows=st.sets(st.integers(0, 199), max_size=20), tap=st.integers(0, 1), below=st.booleans())
def test_out_of_range_catches_those_rows_and_no_others(rows, tap, below):
    log = noisy()
    pressure = log.pressure_pa.copy()
    pressure[tap, sorted(rows)] = -1.1e5 if below else 1.0001e6
    assert caught(out_of_range, replace(log, pressure_pa=pressure)) == rows


@FEW
@given(first=st.integers(45, 120), length=st.integers(12, 35), tap=st.integers(0, 1))
def test_stuck_catches_a_long_run_of_flowing_rows_but_its_first(first, length, tap):
    log = noisy()
    pressure = log.pressure_pa.copy()
    pressure[tap, first : first + length] = 123_456.0
    assert caught(stuck, replace(log, pressure_pa=pressure)) == set(range(first + 1, first + length))


@pytest.mark.parametrize("step", [1e3, 1e4])
def test_a_coarse_gauge_that_often_repeats_itself_is_not_stuck(step):
    log = noisy()
    assert caught(stuck, replace(log, pressure_pa=np.round(log.pressure_pa / step) * step)) == set()


@FEW
@given(rows=st.sets(st.integers(40, 159), max_size=30))
def test_reversed_flow_catches_those_rows_and_no_others(rows):
    log = noisy()
    flow = log.flow_m3_s.copy()
    flow[sorted(rows)] *= -1.0
    assert caught(reversed_flow, replace(log, flow_m3_s=flow)) == rows


def test_trembling_about_zero_is_not_reversed_flow_unless_the_limit_says_so():
    log = noisy()
    flow = log.flow_m3_s.copy()
    flow[:40] = -0.008 * flow.max()
    assert caught(reversed_flow, replace(log, flow_m3_s=flow)) == set()
    strict = section_of(screen_limits=(("reversed", 0.001),))
    assert caught(reversed_flow, replace(log, flow_m3_s=flow), strict) == set(range(40))


@FEW
@given(rows=st.sets(st.integers(0, 59), max_size=12), sign=st.sampled_from([-1.0, 1.0]))
def test_outliers_are_the_rows_far_off_and_no_others(rows, sign):
    log = noisy((2.0,), rows=60, seed=4)
    pressure = log.pressure_pa.copy()
    pressure[1, sorted(rows)] += sign * 2e4
    found = outliers(replace(log, pressure_pa=pressure), np.arange(60), LIMITS["outlier"].value)
    assert set(np.flatnonzero(found).tolist()) == rows


def test_a_pause_of_the_clock_ends_a_plateau():
    log = noisy((0.0, 2.0, 0.0), rows=60)
    time = log.time_s.copy()
    time[90:] += 600.0
    paused = replace(log, time_s=time)
    assert pauses(paused, section_of()).tolist() == [90]
    screening = screen(paused, section_of())
    assert screening.plateau[80] != screening.plateau[100]
    assert min(screening.plateau[80], screening.plateau[100]) > 0
    patient = section_of(screen_limits=(("gap", 1000.0),))
    assert len(pauses(paused, patient)) == 0


def test_rows_that_a_logger_left_out_do_not_end_a_plateau():
    log = noisy((0.0, 2.0, 0.0), rows=60)
    reason = log.reason.copy()
    reason[85:95] = MISSING
    screening = screen(replace(log, reason=reason), section_of())
    assert screening.plateau[80] == screening.plateau[100] > 0


@pytest.mark.parametrize("rows", [60, 100, 200])
@pytest.mark.parametrize("noise", [0.001, 0.005])
def test_a_slow_valve_move_makes_no_plateaus_of_its_own(rows, noise):
    rng = np.random.default_rng(8)
    move = 0.5 - 0.5 * np.cos(np.pi * np.linspace(0.0, 1.0, rows))
    velocity = np.concatenate([np.zeros(40), np.ones(60), 1.0 + 2.0 * move, np.full(60, 3.0)])
    flow = velocity * AREA * (1.0 + rng.normal(0.0, noise, velocity.size))
    screening = screen(trembling(log_of(flow, 1.5 * velocity**2)), section_of())
    inside = screening.plateau[100 + rows // 5 : 100 + 4 * rows // 5]
    # A piece or two may still pass where the move is slow against the noise; most of it must not.
    assert np.mean(inside > 0) < 0.35
    assert np.all(screening.plateau[50:90] > 0)
    assert np.all(screening.plateau[-50:-10] > 0)


def test_a_plateau_that_sags_is_kept():
    """A supply that sags by 3 % through every flow makes no valve move of it."""
    sag = np.tile(np.linspace(1.015, 0.985, 60), 3)
    velocity = np.concatenate([np.zeros(40), np.repeat([1.0, 2.0, 3.0], 60) * sag, np.zeros(40)])
    log = trembling(log_of(velocity * AREA, 1.5 * velocity**2))
    screening = screen(log, section_of())
    assert np.unique(screening.plateau[screening.plateau > 0]).size == 5
    assert screening.used > 250
    assert not ramps(log, section_of(), np.arange(velocity.size), np.arange(100, 160))


def test_inertia_that_cannot_be_corrected_well_sets_a_plateau_aside():
    """Flow noise of 3 % on a long main: dQ/dt is a guess, and inertia weighs more than friction."""
    rng = np.random.default_rng(9)
    velocity = np.concatenate([np.zeros(40), np.full(12, 1.0), np.full(200, 2.0), np.zeros(40)])
    flow = velocity * AREA * (1.0 + rng.normal(0.0, 0.03, velocity.size))
    far = section_of().taps
    long = section_of(
        taps=(far[0], replace(far[1], station=replace(far[1].station, value=6.0 * LENGTH))),
        screen_limits=(("flow_step", 0.3),),
    )
    _, plateaus, readings = read(log_of(flow, 1.5 * velocity**2), long)
    assert (2, UNSTEADY) in readings.set_aside
    assert plateaus.flow_slope_standard_m3_s2[1] > 0.0
    patient = replace(long, screen_limits=(*long.screen_limits, ("inertia", 1e6)))
    _, _, readings = read(log_of(flow, 1.5 * velocity**2), patient)
    assert UNSTEADY not in {why for _, why in readings.set_aside}


def test_doubt_of_the_inertia_is_the_scatter_of_its_correction():
    """200 logs of a steady flow with a noisy meter: what dQ/dt is found to be scatters as it is stated."""
    rng = np.random.default_rng(10)
    velocity = np.concatenate([np.zeros(40), np.full(60, 2.0), np.zeros(40)])
    found, stated = [], []
    for _ in range(200):
        flow = velocity * AREA * (1.0 + rng.normal(0.0, 0.01, velocity.size))
        _, plateaus, _ = read(log_of(flow, 1.5 * velocity**2), section_of())
        found.append(plateaus.flow_slope_m3_s2[1])
        stated.append(plateaus.flow_slope_standard_m3_s2[1])
    assert np.std(found) == pytest.approx(np.sqrt(np.mean(np.square(stated))), rel=0.25)


@FEW
@given(
    seed=st.integers(0, 2**32 - 1),
    spoilt=st.lists(st.sampled_from([MISSING, "spike", "hang", "backwards", "gap"]), max_size=5),
)
def test_whatever_happens_every_row_is_used_or_has_a_reason(seed, spoilt):
    rng = np.random.default_rng(seed)
    log = noisy(seed=seed % 1000)
    flow, pressure, time, reason = (log.flow_m3_s.copy(), log.pressure_pa.copy(), log.time_s.copy(), log.reason.copy())
    for sin in spoilt:
        here = int(rng.integers(0, 180))
        rows = slice(here, here + int(rng.integers(1, 20)))
        if sin == MISSING:
            reason[rows], flow[rows] = MISSING, np.nan
        elif sin == "spike":
            pressure[0, rows] += 1e5
        elif sin == "hang":
            pressure[1, rows] = pressure[1, here]
        elif sin == "backwards":
            flow[rows] *= -1.0
        else:
            time[here:] += 1e4
    made = replace(log, flow_m3_s=flow, pressure_pa=pressure, time_s=time, reason=reason)
    screening = screen(made, section_of())
    assert np.all((screening.reason == "") == (screening.plateau > 0))
    assert screening.used + sum(count for _, count in screening.counts) == screening.rows
    assert {reason for reason, _ in screening.counts} <= set(REASONS)
