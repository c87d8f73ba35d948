"""From rows to plateaus to readings, on records whose truth is known."""

import datetime as dt
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from readings_maker import GRAVITY

from fieldfit.errors import InputError
from fieldfit.field.log import Log
from fieldfit.field.plateaus import screen, set_plateaus_aside, summarise
from fieldfit.field.reaches import reach_readings
from fieldfit.field.screens import (
    CRITICAL,
    LAMINAR,
    MISSING,
    NEGATIVE,
    OUTLIER,
    RANGE,
    REVERSED,
    STUCK,
    UNRESOLVED,
    UNSTEADY,
)
from fieldfit.field.section import Fitting, Meter, Section, Tap
from fieldfit.field.uncertain import Accuracy, Uncertain
from fieldfit.hydraulics.liquids import Liquid

WATER = Liquid(
    name="water",
    source="constant, for tests",
    density_kg_m3=lambda t: np.full(np.shape(t), 1000.0),
    viscosity_m2_s=lambda t: np.full(np.shape(t), 1e-6),
    viscosity_standard=0.005,
)
BORE = 0.15
LENGTH = 300.0
AREA = np.pi * BORE**2 / 4.0
REST_PA = -20_000.0


def section_of(**changes):
    gauge = Accuracy(text="0.25 % of 10 bar", fixed=1443.0, span=1e6)
    tap = Tap(
        column="p1", station=Uncertain(value=0.0, standard=0.1), elevation=None, accuracy=gauge, gauge="A", unit=None
    )
    known = Section(
        name="Invented main",
        path=Path("section.toml"),
        material=None,
        installed=None,
        bore=Uncertain(value=BORE, standard=0.001),
        bore_source="given",
        liquid=WATER,
        temperature=Uncertain(value=12.0, standard=0.5),
        temperature_standard=0.5,
        meter=Meter(column="flow", accuracy=Accuracy(text="0.5 %", gain=0.003)),
        taps=(tap, replace(tap, column="p2", station=Uncertain(value=LENGTH, standard=0.1), gauge="B")),
    )
    return replace(known, **changes)


def log_of(flow, head, *, kind="logger", offset=REST_PA, step=1.0, seconds=1.0):
    """A log in which the pressure difference is the head loss and a difference at rest."""
    flow = np.asarray(flow, dtype=np.float64)
    difference = 1000.0 * GRAVITY * np.asarray(head) + offset
    upper = np.full(len(flow), 4e5)
    return Log(
        file="made.csv",
        sha256="0" * 64,
        kind=kind,
        line=np.arange(2, len(flow) + 2),
        start=dt.datetime(2026, 5, 12, 8, 0),
        time_s=np.arange(len(flow)) * seconds,
        flow_m3_s=flow,
        pressure_pa=np.stack([upper, upper - difference]),
        temperature_degc=None,
        flow_step_m3_s=1e-6,
        pressure_step_pa=np.array([step, step]),
        reason=np.full(len(flow), "", dtype="<U40"),
    )


def staircase(levels=(0.0, 1.0, 2.0, 3.0, 0.0), rows=40):
    """Flow [m³/s] and head [m] of a staircase in velocity, h = 1.5 V² m."""
    velocity = np.repeat(levels, rows)
    return velocity * AREA, 1.5 * velocity**2


def read(log, section):
    screening = screen(log, section)
    plateaus = summarise(log, screening, section, 1000.0 * GRAVITY)
    return screening, plateaus, reach_readings(plateaus, section, 0)


def test_levelled_head_losses_come_back():
    _, plateaus, readings = read(log_of(*staircase()), section_of())
    assert plateaus.static.tolist() == [True, False, False, False, True]
    np.testing.assert_allclose(readings.head_loss_m, [1.5, 6.0, 13.5], rtol=1e-9)
    assert readings.levelling.offset_m == pytest.approx(REST_PA / 1000.0 / GRAVITY)
    assert readings.levelling.plateaus == 2


def test_drift_between_statics_is_shared_out_over_time():
    flow, head = staircase()
    drift = np.linspace(0.0, 0.4, len(flow))
    _, _, readings = read(log_of(flow, head + drift), section_of())
    np.testing.assert_allclose(readings.head_loss_m, [1.5, 6.0, 13.5], atol=0.002)
    assert readings.levelling.drift_m == pytest.approx(0.32, abs=0.01)
    assert readings.levelling.standard_m >= 0.32 / np.sqrt(12.0)


def test_the_survey_stands_in_where_nothing_is_static():
    surveyed = section_of()
    high = REST_PA / 1000.0 / GRAVITY
    taps = (
        replace(surveyed.taps[0], elevation=Uncertain(value=10.0 - high, standard=0.02)),
        replace(surveyed.taps[1], elevation=Uncertain(value=10.0, standard=0.02)),
    )
    _, _, readings = read(log_of(*staircase((1.0, 2.0, 3.0))), replace(surveyed, taps=taps))
    assert readings.levelling is None
    np.testing.assert_allclose(readings.head_loss_m, [1.5, 6.0, 13.5], rtol=1e-9)


def test_neither_static_nor_survey_is_an_error():
    with pytest.raises(InputError, match="no surveyed elevation"):
        read(log_of(*staircase((1.0, 2.0, 3.0))), section_of())


def test_every_row_has_a_plateau_or_a_reason():
    flow, head = staircase()
    flow, head = flow.copy(), head.copy()
    log = log_of(flow, head)
    flow[60], log.pressure_pa[1, 100] = -0.5 * AREA, 0.0
    reason = log.reason.copy()
    reason[70] = MISSING
    flow[70] = np.nan
    screening, _, _ = read(replace(log, flow_m3_s=flow, reason=reason), section_of())
    assert screening.reason[60] == REVERSED
    assert screening.reason[70] == MISSING
    assert screening.reason[100] == OUTLIER
    assert np.all((screening.reason == "") == (screening.plateau > 0))
    assert screening.used + sum(count for _, count in screening.counts) == len(flow)


def test_ramps_are_unsteady():
    velocity = np.concatenate([np.zeros(30), np.full(40, 1.0), np.linspace(1.0, 3.0, 20), np.full(40, 3.0)])
    screening, plateaus, _ = read(log_of(velocity * AREA, 1.5 * velocity**2), section_of())
    assert len(plateaus.number) == 3
    assert set(screening.reason[72:88]) == {UNSTEADY}


def test_wandering_flow_does_not_bias_the_head_loss():
    """The mean of Q² is not the square of the mean: at 5 % wander the plain mean is 0.25 % high."""
    rng = np.random.default_rng(4)
    velocity = 2.0 * (1.0 + 0.05 * np.sin(np.linspace(0.0, 40.0, 400)))
    velocity = np.concatenate([np.zeros(30), velocity])
    noise = np.where(velocity > 0.0, rng.normal(0.0, 0.01, len(velocity)), 0.0)
    log = log_of(velocity * AREA * (1.0 + noise), 1.5 * velocity**2)
    limits = (("flow_step", 0.3), ("outlier", 20.0))
    _, plateaus, readings = read(log, section_of(screen_limits=limits))
    assert len(plateaus.number) == 2
    plain = float(np.mean(1.5 * velocity[30:] ** 2)) / float(1.5 * np.mean(velocity[30:]) ** 2)
    assert plain - 1.0 > 0.001
    corrected = readings.head_loss_m[0] / (1.5 * (readings.flow_m3_s[0] / AREA) ** 2)
    # the mean of the metered flow itself scatters by 0.01/√400, and the loss by twice that
    assert corrected == pytest.approx(1.0, abs=0.0012)


def test_inertia_of_a_changing_flow_is_taken_off():
    velocity = np.concatenate([np.zeros(30), np.linspace(2.0, 2.06, 60)])
    acceleration = np.concatenate([np.zeros(30), np.full(60, 0.06 / 59.0)])
    head = 1.5 * velocity**2 + LENGTH / GRAVITY * acceleration
    _, _, readings = read(log_of(velocity * AREA, head), section_of(screen_limits=(("flow_step", 0.2),)))
    expected = 1.5 * (readings.flow_m3_s / AREA) ** 2
    assert LENGTH / GRAVITY * 0.06 / 59.0 > 0.03
    np.testing.assert_allclose(readings.head_loss_m, expected, atol=0.003)


def test_noise_of_a_mean_counts_independent_rows_only():
    """120 logs with noise of known memory: the stated standard errors match the true spread."""
    rng = np.random.default_rng(5)
    velocity = np.repeat([0.0, 1.0, 2.0, 3.0], 60)
    found, stated = [], []
    for _ in range(120):
        shock = rng.normal(0.0, 0.02, len(velocity))
        noise = np.zeros(len(velocity))
        for index in range(1, len(noise)):
            noise[index] = 0.7 * noise[index - 1] + shock[index]
        limits = (("outlier", 50.0),)
        _, _, readings = read(log_of(velocity * AREA, 1.5 * velocity**2 + noise), section_of(screen_limits=limits))
        found.append(readings.head_loss_m - readings.head_loss_m.mean())
        stated.append(readings.random_m)
    truth = 1.5 * np.array([1.0, 4.0, 9.0])
    spread = np.std(np.array(found) - (truth - truth.mean()), axis=0)
    expected = np.sqrt(np.mean(np.array(stated) ** 2, axis=0)) * np.sqrt(2.0 / 3.0)
    np.testing.assert_allclose(spread, expected, rtol=0.25)


def test_a_column_in_steps_is_no_better_than_its_step():
    _, _, readings = read(log_of(*staircase(), step=2000.0), section_of())
    assert np.all(readings.random_m >= 2000.0 * np.sqrt(2.0 / 12.0) / (1000.0 * GRAVITY) * 0.999)


@pytest.mark.parametrize(("velocity", "reason"), [(0.01, LAMINAR), (0.02, CRITICAL)])
def test_slow_flows_carry_no_roughness(velocity, reason):
    flow, head = staircase((0.0, velocity, 2.0))
    _, _, readings = read(log_of(flow, head + 0.5 * (flow > 0.0)), section_of(screen_limits=(("static_flow", 0.001),)))
    assert readings.set_aside == ((2, reason),)


def test_small_and_negative_losses_are_told_apart():
    velocity = np.repeat([0.0, 1.0, 2.0, 3.0], 40)
    head = np.repeat([0.0, 1e-5, -2.0, 13.5], 40)
    _, _, readings = read(log_of(velocity * AREA, head, step=10.0), section_of())
    assert readings.set_aside == ((2, UNRESOLVED), (3, NEGATIVE))


def test_a_meter_that_runs_backwards_is_refused():
    flow, head = staircase()
    with pytest.raises(InputError, match="negative in every row"):
        screen(log_of(-flow, head), section_of())


def test_no_complete_row_is_refused():
    log = log_of(*staircase())
    with pytest.raises(InputError, match="no row has a value"):
        screen(replace(log, reason=np.full(len(log.reason), MISSING)), section_of())


def test_a_sheet_makes_every_row_a_plateau():
    flow, head = staircase(rows=1)
    screening, plateaus, readings = read(log_of(flow, head, kind="sheet", step=500.0), section_of())
    assert screening.plateau.tolist() == [1, 2, 3, 4, 5]
    assert plateaus.static.tolist() == [True, False, False, False, True]
    np.testing.assert_allclose(readings.head_loss_m, [1.5, 6.0, 13.5], rtol=1e-9)


def test_fittings_are_counted_in_their_reach():
    bend = Fitting(name="bend", k=Uncertain(value=0.5, standard=0.1), count=4)
    _, _, readings = read(log_of(*staircase()), section_of(fittings=(bend,)))
    assert readings.fitting_k.value == 2.0
    assert readings.fitting_k.standard == pytest.approx(0.4)


def test_plateaus_can_be_set_aside_by_number():
    screening, _, _ = read(log_of(*staircase()), section_of())
    fewer = set_plateaus_aside(screening, {2: LAMINAR})
    assert dict(fewer.counts)[LAMINAR] == int(np.count_nonzero(screening.plateau == 2))
    assert fewer.used == screening.used - dict(fewer.counts)[LAMINAR]


def noisy_staircase(seed=6):
    rng = np.random.default_rng(seed)
    flow, head = staircase(rows=60)
    log = log_of(flow, head)
    return replace(log, pressure_pa=np.rint(log.pressure_pa + rng.normal(0.0, 300.0, log.pressure_pa.shape)))


def test_a_stuck_gauge_is_found_and_a_quiet_static_is_not():
    log = noisy_staircase()
    log.pressure_pa[0, 100:130] = log.pressure_pa[0, 100]
    log.pressure_pa[1, :50] = log.pressure_pa[1, 0]
    screening, _, _ = read(log, section_of())
    assert set(screening.reason[101:130]) == {STUCK}
    assert screening.plateau[100] > 0
    assert STUCK not in set(screening.reason[:50])


def test_readings_beyond_the_gauge_or_below_vacuum_are_out_of_range():
    log = noisy_staircase()
    log.pressure_pa[0, 100], log.pressure_pa[1, 130] = 1.2e6, -2e5
    screening, _, _ = read(log, section_of())
    assert screening.reason[100] == screening.reason[130] == RANGE


def test_the_tail_of_a_valve_move_is_left_out():
    """What is left of a slow approach moves the flow by well under its noise."""
    rng = np.random.default_rng(9)
    time = np.arange(120.0)
    velocity = 2.0 + 0.5 * np.exp(-time / 8.0)
    velocity = np.concatenate([np.zeros(30), velocity]) * (1.0 + rng.normal(0.0, 0.002, 150))
    screening, plateaus, _ = read(log_of(velocity * AREA, 1.5 * velocity**2), section_of())
    assert plateaus.static[0]
    kept = np.flatnonzero(screening.plateau == plateaus.number[-1]) - 30
    assert len(kept) > 60
    assert 0.5 * np.exp(-kept[0] / 8.0) < 0.02
    assert set(screening.reason[30:38]) == {UNSTEADY}


def test_a_sheet_with_a_clock_is_still_a_sheet():
    flow, head = staircase(rows=2)
    screening, _, readings = read(log_of(flow, head, seconds=120.0), section_of())
    assert screening.used == len(flow)
    np.testing.assert_allclose(readings.head_loss_m, np.repeat([1.5, 6.0, 13.5], 2), rtol=1e-9)


def test_a_short_fast_log_without_plateaus_is_not_a_sheet():
    velocity = np.linspace(0.5, 3.0, 60)
    screening, _, _ = read(
        log_of(velocity * AREA, 1.5 * velocity**2),
        section_of(taps=tuple(replace(tap, elevation=Uncertain(value=0.0, standard=0.1)) for tap in section_of().taps)),
    )
    assert screening.used == 0
