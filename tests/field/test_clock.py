import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays

from fieldfit.field.clock import repeated_or_backwards


@pytest.mark.parametrize(
    ("times", "wrong"),
    [
        ([0, 1, 2, 3], []),
        ([0, 1, 1, 2], [2]),
        ([0, 1, 0.5, 2], [1]),  # one row ahead or one behind looks alike: one row goes
        ([0, 1, 99, 2, 3], [2]),
        ([99, 0, 1, 2], [0]),
        ([10, 11, 12, 9, 10, 11, 12, 13], [3, 4, 5, 6]),  # the clock was set back
        ([0, float("nan"), 1, 1], [3]),
        ([], []),
    ],
)
def test_rows_that_the_clock_spoils(times, wrong):
    assert np.flatnonzero(repeated_or_backwards(np.array(times, dtype=float))).tolist() == wrong


@given(arrays(np.float64, st.integers(0, 40), elements=st.integers(0, 20).map(float) | st.just(np.nan)))
def test_what_is_left_runs_forward(times):
    kept = times[~repeated_or_backwards(times) & np.isfinite(times)]
    assert np.all(np.diff(kept) > 0.0)
    assert kept.size or not np.isfinite(times).any()
