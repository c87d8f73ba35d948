"""Stretches, plateaus and their noise, against records whose truth is known."""

import itertools

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fieldfit.field.row_noise import autocorrelation_time
from fieldfit.field.steady import steady_stretches


def with_memory(rng, count, sd, memory):
    """First-order autoregressive noise."""
    shock = rng.normal(0.0, sd * np.sqrt(1.0 - memory**2), count)
    noise = np.zeros(count)
    for index in range(1, count):
        noise[index] = memory * noise[index - 1] + shock[index]
    return noise


@pytest.mark.parametrize("sd", [0.0, 0.002, 0.01])
def test_a_staircase_is_cut_at_its_stairs(sd):
    rng = np.random.default_rng(1)
    flow = np.repeat([0.0, 1.0, 2.0, 3.0, 2.2, 0.0], 40)
    flow = flow * (1.0 + with_memory(rng, len(flow), sd, 0.8))
    long = [stretch for stretch in steady_stretches(flow, 0.04) if stretch[1] - stretch[0] >= 8]
    assert [first for first, _ in long] == pytest.approx([0, 40, 80, 120, 160, 200], abs=1)


def test_a_ramp_makes_no_long_stretch():
    flow = np.concatenate([np.full(40, 1.0), np.linspace(1.0, 3.0, 30), np.full(40, 3.0)])
    long = [stretch for stretch in steady_stretches(flow, 0.04) if stretch[1] - stretch[0] >= 8]
    assert len(long) == 2


def test_a_long_record_is_cut_in_the_same_places():
    rng = np.random.default_rng(2)
    flow = np.repeat(np.arange(1.0, 9.0), 20_000) * (1.0 + with_memory(rng, 160_000, 0.01, 0.9))
    long = [stretch for stretch in steady_stretches(flow, 0.04) if stretch[1] - stretch[0] >= 5000]
    np.testing.assert_allclose([first for first, _ in long], np.arange(8) * 20_000, atol=120)


@settings(deadline=None, max_examples=60)
@given(st.lists(st.floats(-1e3, 1e3), min_size=1, max_size=60))
def test_stretches_always_cover_the_record(values):
    stretches = steady_stretches(np.array(values), 0.04)
    assert stretches[0][0] == 0
    assert stretches[-1][1] == len(values)
    assert all(left[1] == right[0] for left, right in itertools.pairwise(stretches))


@pytest.mark.parametrize(("memory", "expected"), [(0.0, 1.0), (0.5, 3.0), (0.8, 9.0)])
def test_memory_of_noise_is_found(memory, expected):
    """An AR(1) series has integrated autocorrelation time (1 + φ)/(1 − φ), a textbook result."""
    rng = np.random.default_rng(3)
    series = [with_memory(rng, 120, 1.0, memory) for _ in range(60)]
    assert autocorrelation_time(series) == pytest.approx(expected, rel=0.2)
