"""Variances of short stretches, pooled as far as they are alike."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from fieldfit.field.variances import pooled_variance


def chance(rng, true, freedom):
    """Sample variances of normal noise: a scaled chi-square."""
    return true * rng.chisquare(freedom) / freedom


def test_a_mean_is_not_trusted_for_a_variance_that_is_small_by_chance():
    """Six plateaus of four degrees of freedom: the mean square pull is 2 unpooled (ν/(ν − 2)), and 1 as it should be."""
    rng = np.random.default_rng(21)
    freedom = np.full(6, 4.0)
    plain, pooled = [], []
    for _ in range(3000):
        noise = rng.standard_normal(6) ** 2
        own = chance(rng, 1.0, freedom)
        plain.append(noise / own)
        pooled.append(noise / pooled_variance(own, freedom))
    assert np.mean(plain) == pytest.approx(2.0, rel=0.15)
    assert np.mean(pooled) == pytest.approx(1.0, abs=0.15)


def test_variances_that_truly_differ_are_left_alone():
    rng = np.random.default_rng(22)
    true, freedom = np.geomspace(1e-2, 1e2, 12), np.full(12, 30.0)
    own = chance(rng, true, freedom)
    np.testing.assert_allclose(pooled_variance(own, freedom), own, rtol=0.5)


@given(st.lists(st.floats(1e-6, 1e6), min_size=3, max_size=12), st.floats(1.0, 200.0))
def test_pooling_never_reaches_beyond_all_variances(values, freedom):
    own = np.array(values)
    found = pooled_variance(own, np.full(own.size, freedom))
    assert np.all(np.isfinite(found))
    assert np.all(found > 0.0)
    # Order is kept: what was noisier stays noisier.
    assert np.all(np.diff(found[np.argsort(own)]) >= -1e-9 * found.max())


@pytest.mark.parametrize("values", [[], [2.0], [1.0, 3.0], [0.0, 0.0, 0.0]])
def test_too_few_or_silent_ones_stay_as_they_are(values):
    own = np.array(values)
    np.testing.assert_array_equal(pooled_variance(own, np.full(own.size, 5.0)), own)


def test_a_display_that_stood_still_once_borrows_the_others_noise():
    found = pooled_variance(np.array([0.0, 1.0, 1.1, 0.9, 1.0]), np.full(5, 6.0))
    assert found[0] > 0.05
