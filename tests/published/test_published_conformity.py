"""Conformity and risks against published and computed figures."""

import numpy as np
import pytest

from fieldfit.decisions.conformity import (
    Interval,
    Knowledge,
    Risks,
    chance_to_decide,
    conformance_probability,
    decide,
    global_risks,
    guard,
)


@pytest.mark.parametrize(
    ("mean", "standard", "tolerance", "expected"),
    [
        # JCGM 106:2012, one-sided example (inputs MEM, probability CALC).
        (-5.47, 0.05, Interval(high=-5.40), 0.919),
        # JCGM 106:2012, breakdown voltage-like example (inputs MEM, probability CALC).
        (509.7, 8.6, Interval(low=490.0), 0.989),
        # CALC: C of 135 with u 4 against a limit of 130.
        (135.0, 4.0, Interval(low=130.0), 0.89),
    ],
)
def test_conformance_probability(mean, standard, tolerance, expected):
    found = conformance_probability(Knowledge(mean=mean, standard=standard), tolerance)
    assert found == pytest.approx(expected, abs=0.5 * 10.0 ** -(2 if expected == 0.89 else 3))


def test_global_risks_of_the_resistor_example():
    # JCGM 106:2012, resistors: prior sd 0.12, u 0.04, tolerance ±0.2, simple acceptance (inputs MEM, risks CALC).
    tolerance = Interval(low=-0.2, high=0.2)
    risks = global_risks(Knowledge(mean=0.0, standard=0.12), 0.04, tolerance, tolerance)
    assert risks.consumer == pytest.approx(0.0189, abs=0.00005)
    assert risks.producer == pytest.approx(0.0372, abs=0.00005)


def test_global_risks_by_simulation():
    """A million items built, measured and judged."""
    rng = np.random.default_rng(106)
    true = rng.normal(1.0, 0.5, 1_000_000)
    read = true + rng.normal(0.0, 0.2, true.size)
    tolerance, acceptance = Interval(low=0.4), Interval(low=0.6)
    expected = Risks(
        consumer=float(np.mean((read >= 0.6) & (true < 0.4))), producer=float(np.mean((read < 0.6) & (true >= 0.4)))
    )
    found = global_risks(Knowledge(mean=1.0, standard=0.5), 0.2, tolerance, acceptance)
    assert found.consumer == pytest.approx(expected.consumer, abs=0.0004)
    assert found.producer == pytest.approx(expected.producer, abs=0.0008)


def test_acceptance_limit_of_a_guard_band():
    # CALC: limit 130, u 4, 5 % risk: acceptance limit 136.6, so a C of 135 is not accepted.
    assert guard(Interval(low=130.0), 4.0, 0.05).low == pytest.approx(136.6, abs=0.05)
    known = Knowledge(mean=135.0, standard=4.0)
    assert decide(known, Interval(low=130.0), "guarded acceptance", 0.05) == "undecided"
    assert decide(known, Interval(low=130.0), "simple acceptance", 0.05) == "pass"
    assert decide(Knowledge(mean=120.0, standard=4.0), Interval(low=130.0), "guarded rejection", 0.05) == "fail"
    assert decide(Knowledge(mean=140.0, standard=4.0), Interval(low=130.0), "guarded acceptance", 0.05) == "pass"


def test_a_guarded_pass_conforms_but_for_the_agreed_risk():
    limit = Interval(low=130.0)
    at = guard(limit, 4.0, 0.05).low
    assert conformance_probability(Knowledge(mean=at, standard=4.0), limit) == pytest.approx(0.95, abs=1e-9)


def test_chance_to_decide_by_simulation():
    rng = np.random.default_rng(5)
    known, limit, new = Knowledge(mean=133.0, standard=4.0), Interval(low=130.0), 2.0
    true = rng.normal(known.mean, known.standard, 400_000)
    # The combined result of old and new knowledge has the new standard uncertainty.
    own = (1.0 / new**2 - 1.0 / known.standard**2) ** -0.5
    read = true + rng.normal(0.0, own, true.size)
    combined = new**2 * (read / own**2 + known.mean / known.standard**2)
    passed, failed = combined >= 130.0 + 1.6449 * new, combined <= 130.0 - 1.6449 * new
    expected = float(np.mean(passed | failed))
    assert chance_to_decide(known, limit, 0.05, new) == pytest.approx(expected, abs=0.003)
