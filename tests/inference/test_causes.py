"""The priors: what they promise, and the discrete mistakes of units."""

from dataclasses import replace

import numpy as np
import pytest
from readings_maker import exact, make_readings
from scipy.special import logsumexp
from scipy.stats import norm

from fieldfit.inference.beliefs import BELIEFS, NOTHING
from fieldfit.inference.causes import hypotheses, together
from fieldfit.inference.fault_model import LOCAL, OFFSET, WALL
from fieldfit.inference.wrong_units import options

CAUSES = [
    "rough wall",
    "reduced bore",
    "local loss",
    "gauge offset",
    "leak or open branch",
    "trapped air",
    "meter error",
    "wrong unit or swapped channel",
]


def by_cause(readings, new_m=(2e-5, 1e-4)):
    return {one.causes[0]: one for one in hypotheses(readings, new_m)}


def test_the_table_names_every_cause_with_its_reason_and_adds_up():
    assert list(BELIEFS) == [NOTHING, *CAUSES]
    assert sum(belief.probability for belief in BELIEFS.values()) == pytest.approx(1.0)
    assert all(belief.size and belief.because for belief in BELIEFS.values())


def test_every_hypothesis_carries_its_prior():
    for name, one in by_cause(make_readings(levelled=False)).items():
        assert np.exp(logsumexp(one.trials.ln_weight)) == pytest.approx(BELIEFS[name].probability, rel=1e-9)


def test_a_static_makes_a_gauge_offset_small_and_rare():
    level, free = (by_cause(make_readings(levelled=kind))["gauge offset"].trials for kind in (True, False))
    assert np.max(level.spread[:, OFFSET]) < 0.2 * np.min(free.spread[:, OFFSET])
    assert logsumexp(level.ln_weight) == pytest.approx(logsumexp(free.ln_weight) + np.log(0.2))


def test_a_log_uniform_prior_is_flat_between_its_ends():
    one = by_cause(make_readings())["local loss"].trials
    at = np.linspace(np.log(2.0), np.log(125.0), 60)
    parts = norm.pdf(at[:, None], one.centre[:, LOCAL], one.spread[:, LOCAL])
    density = parts @ np.exp(one.ln_weight - logsumexp(one.ln_weight))
    assert density == pytest.approx(np.full(60, 1.0 / np.log(1000.0)), rel=0.01)


@pytest.mark.parametrize(("new_m", "low", "high"), [((2e-5, 1e-4), 2e-5, 2e-4), (None, 1.5e-6, 1e-3)])
def test_walls_other_than_rough_are_new_or_modestly_aged(new_m, low, high):
    for name, one in by_cause(make_readings(), new_m).items():
        centre, spread = one.trials.centre[:, WALL], one.trials.spread[:, WALL]
        if name != "rough wall":
            assert np.exp(centre - 1.96 * spread) == pytest.approx(np.full(len(centre), low), rel=1e-3)
            assert np.exp(centre + 1.96 * spread) == pytest.approx(np.full(len(centre), high), rel=1e-3)


def test_two_causes_at_once_hold_both_sizes_and_the_rough_wall():
    found = by_cause(make_readings())
    both = together(found["rough wall"], found["local loss"])
    one, two = found["rough wall"].trials, found["local loss"].trials
    assert both.causes == ("rough wall", "local loss")
    assert len(both.trials.side) == len(one.side) * len(two.side)
    assert set(both.trials.centre[:, WALL]) == set(one.centre[:, WALL])
    assert set(both.trials.centre[:, LOCAL]) == set(two.centre[:, LOCAL])
    assert logsumexp(both.trials.ln_weight) == pytest.approx(logsumexp(one.ln_weight) + logsumexp(two.ln_weight))


def test_the_option_named_belongs_to_its_trial():
    found = by_cause(make_readings())
    units = found["wrong unit or swapped channel"]
    both = together(found["rough wall"], units)
    assert len(both.options) == len(both.trials.side)
    swapped = [name for name, ratio in zip(both.options, both.trials.head_ratio, strict=True) if ratio == -1.0]
    assert set(swapped) == {"the two taps swapped"}


def misread(readings, kind):
    """The same test with a mistake in it: what the gauges would have been written down as."""
    weight = readings.density_kg_m3 * 9.80665
    drop = readings.elevation_drop.value
    pressure = np.array([np.full_like(readings.head_loss_m, 4e5), 4e5 - weight * (readings.head_loss_m - drop)])
    ratio = 6.894757
    shown = {
        "the two taps swapped": pressure[::-1],
        "both gauges: psi taken for kPa or the reverse": ratio * pressure,
        "gauge upstream: psi taken for kPa or the reverse": pressure * np.array([[ratio], [1.0]]),
        "gauge downstream: psi taken for kPa or the reverse": pressure * np.array([[1.0], [1.0 / ratio]]),
        "gauge downstream reads absolute pressure": pressure + np.array([[0.0], [101325.0]]),
    }[kind]
    return replace(readings, pressure_pa=shown, head_loss_m=(shown[0] - shown[1]) / weight + drop)


@pytest.mark.parametrize(
    "kind",
    [
        "the two taps swapped",
        "both gauges: psi taken for kPa or the reverse",
        "gauge upstream: psi taken for kPa or the reverse",
        "gauge downstream: psi taken for kPa or the reverse",
        "gauge downstream reads absolute pressure",
    ],
)
def test_each_mistake_foretells_what_would_be_written_down(kind):
    true = replace(make_readings(levelled=False), elevation_drop=exact(-3.0))
    seen = misread(true, kind)
    foretold = [
        option.head_ratio * true.head_loss_m + option.shift_m for option in options(seen) if option.name == kind
    ]
    assert any(head == pytest.approx(seen.head_loss_m, rel=1e-9, abs=1e-9) for head in foretold)


def test_a_static_that_agrees_with_the_survey_rules_a_wrong_gauge_out():
    readings = make_readings()
    alone = [option for option in options(readings) if option.name.startswith("gauge upstream: bar taken for kPa")]
    assert alone
    assert all(option.probability < 1e-12 for option in alone)
