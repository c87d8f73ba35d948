import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from fieldfit.field.resolution import written_step


@pytest.mark.parametrize(
    ("values", "step"),
    [
        ([412.1, 400.3], 0.1),
        ([412.0, 400.0], 1.0),
        ([0.0, 0.25, 0.5], 0.01),
        ([400, 402, 408, 412, 396, 390], 2.0),
        ([400, 410, 420, 400, 410], 1.0),  # three different values may keep to tens by accident
        ([7.0], 1.0),
        ([float("nan"), 3.25], 0.01),
        ([float("nan")], 0.0),
        ([], 0.0),
    ],
)
def test_step_of_few_values(values, step):
    assert written_step(np.array(values, dtype=float)) == pytest.approx(step, rel=1e-12)


@given(
    step=st.sampled_from([0.01, 0.02, 0.05, 0.1, 0.5, 1.0, 2.0, 5.0]),
    factor=st.floats(min_value=1e-4, max_value=1e4),
    seed=st.integers(0, 2**32 - 1),
)
def test_step_survives_conversion_to_another_unit(step, factor, seed):
    whole = np.random.default_rng(seed).integers(0, 400, 300)
    assert written_step(whole * step * factor) == pytest.approx(step * factor, rel=1e-12)


def test_values_without_a_step_have_none():
    assert written_step(np.random.default_rng(1).normal(400.0, 3.0, 2000)) == 0.0
    assert written_step(np.array([1e300, -1e300, 3.0])) == 0.0
