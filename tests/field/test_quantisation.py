"""What a display's steps do to a mean, against simulated displays whose truth is known."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from fieldfit.field.quantisation import step_standard, steps_left


@pytest.mark.parametrize("trembling", [0.0, 0.05, 0.1, 0.2, 0.3, 0.4, 0.6, 1.0, 3.0])
def test_stated_error_of_a_mean_is_the_true_one(trembling):
    """A signal anywhere between two steps, rounded 4000 times: the mean is off by what is stated, to 10 %."""
    rng = np.random.default_rng(11)
    truth = rng.uniform(0.0, 1.0, 600)
    shown = np.rint(truth[:, None] + trembling * rng.standard_normal((600, 4000)))
    off = shown.mean(axis=1) - truth
    of_the_rows = np.mean(shown.var(axis=1)) / 4000
    stated = step_standard(float(np.mean(shown.var(axis=1))), 1.0)
    assert np.sqrt(np.mean(off**2)) == pytest.approx(np.hypot(stated, np.sqrt(of_the_rows)), rel=0.1)


@pytest.mark.parametrize("trembling", [0.0, 0.1, 0.2, 0.3, 0.5, 1.5])
def test_plateaus_are_never_promised_too_much(trembling):
    """Eight plateaus of 40 rows: over 300 logs, the rms error is within what rows and steps are stated to leave."""
    rng = np.random.default_rng(12)
    off, stated = [], []
    members = [np.arange(k * 40, (k + 1) * 40) for k in range(8)]
    for _ in range(300):
        truth = np.repeat(rng.uniform(100.0, 200.0, 8), 40)
        shown = np.rint(truth + trembling * rng.standard_normal(320))
        off.append([shown[rows].mean() - truth[rows[0]] for rows in members])
        own = np.array([shown[rows].var(ddof=1) / 40 for rows in members])
        stated.append(np.sqrt(own + steps_left(shown, members, 1.0) ** 2))
    off, stated = np.array(off), np.array(stated)
    assert np.sqrt(np.mean((off / stated) ** 2)) < 1.1
    assert np.sqrt(np.mean(stated**2)) < 2.0 * np.sqrt(np.mean(off**2))


@given(variance=st.floats(0.0, 1e6), step=st.floats(1e-9, 1e6), scale=st.floats(1e-3, 1e3))
def test_left_error_lies_between_none_and_a_still_display_in_any_unit(variance, step, scale):
    left = step_standard(variance * step**2, step)
    assert 0.0 <= left <= step / np.sqrt(12.0) * (1.0 + 1e-12)
    assert step_standard(variance * (step * scale) ** 2, step * scale) == pytest.approx(left * scale, rel=1e-6, abs=0)


def test_more_trembling_never_leaves_more():
    left = [step_standard(variance, 1.0) for variance in np.linspace(0.0, 1.0, 200)]
    assert np.all(np.diff(left) <= 1e-15)


def test_a_column_without_steps_leaves_nothing():
    assert step_standard(1.0, 0.0) == 0.0


def test_single_readings_keep_the_whole_step():
    single = [np.array([k]) for k in range(5)]
    np.testing.assert_allclose(steps_left(np.arange(5.0) * 7.0, single, 1.0), 1.0 / np.sqrt(12.0))
