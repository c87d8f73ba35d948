"""Propagation of distributions against the additive examples of JCGM 101:2008 (GUM Supplement 1), clause 9.2.

READ second-hand and re-run: the output is the sum of four inputs of zero mean.
"""

import numpy as np
import pytest

from fieldfit.inference.monte_carlo import coverage_interval, draw_errors

DRAWS = 1_000_000


def total(shapes, standards, seed):
    draws = draw_errors(shapes, DRAWS, np.random.default_rng(seed))
    return np.asarray(standards) @ draws


def test_four_normal_inputs():
    # JCGM 101, 9.2.2: u 2.00, 95 % interval [-3.92, 3.92].
    values = total(("normal",) * 4, (1.0,) * 4, 922)
    assert np.std(values) == pytest.approx(2.00, abs=0.005)
    assert coverage_interval(values) == pytest.approx((-3.92, 3.92), abs=0.015)


def test_four_rectangular_inputs():
    # JCGM 101, 9.2.3: [-3.88, 3.88]; analytic end 2√3 (2 - 0.6^(1/4)) = 3.8794.
    values = total(("rectangular",) * 4, (1.0,) * 4, 923)
    analytic = 2.0 * np.sqrt(3.0) * (2.0 - 0.6**0.25)
    assert analytic == pytest.approx(3.8794, abs=5e-5)
    assert np.std(values) == pytest.approx(2.00, abs=0.005)
    assert coverage_interval(values) == pytest.approx((-analytic, analytic), abs=0.012)


def test_one_dominant_rectangle():
    # JCGM 101, 9.2.4: one input ten times the others: u 10.1, [-17.0, 17.0], not the normal law's ±19.9.
    values = total(("rectangular",) * 4, (1.0, 1.0, 1.0, 10.0), 924)
    assert np.std(values) == pytest.approx(10.1, abs=0.05)
    assert coverage_interval(values) == pytest.approx((-17.0, 17.0), abs=0.06)
