"""Lags of made-up signals whose clocks are known."""

import numpy as np
import pytest

from fieldfit.field.lag import recover_lags
from fieldfit.field.signals import Clocks, Signals
from fieldfit.field.track import track

STEPS = np.repeat([0.0, 1.0, 2.0, 3.0, 4.0, 0.0], 60)


def smooth(time, levels, width=6.0):
    """A staircase of flow with soft edges [L/s]."""
    value = np.full(np.shape(time), levels[0], dtype=np.float64)
    edges = np.flatnonzero(np.diff(levels))
    for edge in edges:
        rise = 0.5 * (levels[edge + 1] - levels[edge])
        value += rise * (1.0 + np.tanh((time - edge - 1.0) / (width / 2.0)))
    return value


def supply_at(time, swing=5.0):
    """A supply that drifts [kPa]."""
    return 300.0 + swing * np.sin(time / 97.0)


def signals(*, lag=0.0, drift=0.0, seed=1, interval=1.0, noise=0.05, levels=STEPS, travel=0.0, swing=5.0, margin=0.0):
    """Flow and upper pressure on one clock, lower pressure on another that is ahead."""
    rng = np.random.default_rng(seed)
    span = float(len(levels))
    time = np.arange(margin, span - margin, interval)
    other = time + 0.37 * interval
    flow = smooth(time, levels) + 0.003 * rng.standard_normal(time.size)
    upper = supply_at(time, swing) + noise * rng.standard_normal(time.size)
    lower = supply_at(other, swing) - 4.0 * smooth(other, levels) ** 2 + noise * rng.standard_normal(other.size)
    clock = other + lag + drift * (other - span / 2.0)
    return Signals(
        flow=track(time, flow),
        square=track(time, flow * np.abs(flow)),
        pressures=(track(time, upper), track(clock, lower)),
        loggers=(0, 0, 1),
        inertia=(0.0,),
        travel_s=travel,
    )


@pytest.mark.parametrize("lag", [0.0, 0.4, -7.25, 60.0, 3600.0, -3600.0, 86400.0])
def test_seconds_hours_and_a_day_are_found(lag):
    found = recover_lags(signals(lag=lag), [0.0, None])[1]
    assert found.refused == ""
    assert found.interval_s[0] <= lag <= found.interval_s[1]
    assert found.interval_s[1] - found.interval_s[0] < 1.0


def test_interval_grows_with_noise_and_with_the_travel_of_a_wave():
    quiet, loud = (recover_lags(signals(lag=5.0, noise=noise), [0.0, None])[1] for noise in (0.05, 5.0))
    assert np.diff(loud.interval_s) > 1.5 * np.diff(quiet.interval_s)
    far = recover_lags(signals(lag=5.0, travel=2.0), [0.0, None])[1]
    assert np.diff(far.interval_s) == pytest.approx(np.diff(quiet.interval_s) + 4.0)


def test_a_known_lag_comes_back_as_given():
    found = recover_lags(signals(lag=5.0), [0.0, 4.0])
    assert [one.seconds for one in found] == [0.0, 4.0]
    assert found[1].interval_s == (4.0, 4.0)


def test_clock_that_gains_over_a_day():
    levels = np.repeat(np.random.default_rng(8).uniform(0.2, 4.0, 240), 360)
    found = recover_lags(signals(lag=20.0, drift=150e-6, interval=5.0, levels=levels), [0.0, None])[1]
    assert found.drift == pytest.approx(150e-6, abs=3.0 * found.drift_standard)
    assert found.drift_standard < 20e-6
    assert found.interval_s[0] <= 20.0 <= found.interval_s[1]


def test_clock_that_keeps_time_gets_no_drift():
    levels = np.repeat(np.random.default_rng(8).uniform(0.2, 4.0, 120), 180)
    found = recover_lags(signals(lag=20.0, interval=5.0, levels=levels), [0.0, None])[1]
    assert found.drift == 0.0
    assert found.drift_standard is not None


@pytest.mark.parametrize("level", [0.0, 2.0])
def test_flat_signals_are_refused(level):
    found = recover_lags(signals(lag=5.0, levels=np.full(300, level), swing=0.0), [0.0, None])[1]
    assert "flat" in found.refused or "fits as well" in found.refused or "at rest" in found.refused


def test_a_rhythm_that_repeats_is_ambiguous():
    levels = np.tile(np.repeat([1.0, 3.0], 40), 12)
    found = recover_lags(signals(lag=5.0, levels=levels, swing=0.0, margin=60.0), [0.0, None])[1]
    assert "fits as well as one of" in found.refused


def test_profile_is_least_at_the_lag():
    found = recover_lags(signals(lag=5.0), [0.0, None])[1]
    lags, rise = found.profile
    assert lags[np.argmin(rise)] == pytest.approx(found.seconds, abs=float(lags[1] - lags[0]))
    assert rise[0] > 1.0
    assert rise[-1] > 1.0


def test_spikes_and_gaps_do_not_move_it():
    clean = signals(lag=5.0)
    lower = clean.pressures[1]
    value = lower.value.copy()
    value[[70, 190, 250]] = 900.0
    value[100:118] = np.nan
    spoilt = Signals(
        flow=clean.flow,
        square=clean.square,
        pressures=(clean.pressures[0], track(lower.time_s, value)),
        loggers=clean.loggers,
        inertia=clean.inertia,
    )
    found = recover_lags(spoilt, [0.0, None])[1]
    assert found.interval_s[0] <= 5.0 <= found.interval_s[1]
    assert np.diff(found.interval_s) < 1.0


def test_track_means_are_exact_on_straight_lines():
    line = track(np.array([0.0, 1.0, 3.0, 4.0]), np.array([0.0, 2.0, 6.0, 8.0]))
    assert line.mean(np.array([1.7, 2.2]), 0.8) == pytest.approx([3.4, 4.4])
    assert line.slope(np.array([1.7]), 0.8) == pytest.approx([2.0])
    assert line.covers(np.array([0.5, 3.9, 2.0]), 0.2).tolist() == [True, False, True]


def test_clocks_go_there_and_back():
    clocks = Clocks(lag_s=np.array([0.0, 61.5]), drift=np.array([0.0, 1e-4]), middle_s=500.0)
    time = np.array([0.0, 500.0, 1000.0])
    assert clocks.own(1, time) == pytest.approx([61.45, 561.5, 1061.55])
    assert clocks.reference(1, clocks.own(1, time)) == pytest.approx(time)
