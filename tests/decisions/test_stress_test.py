"""The bias stress test: every error it names does turn the finding, when the readings are assessed again with it."""

from dataclasses import replace

import numpy as np
import pytest
from readings_maker import make_readings

from fieldfit.decisions.new_pipe import compare_with_new
from fieldfit.decisions.stress_test import stress_test
from fieldfit.field.section import Correlation
from fieldfit.field.uncertain import Uncertain
from fieldfit.inference.estimate import estimate

LIMIT = Correlation()
SECTIONS = {
    "scaled": make_readings(roughness=0.35e-3, bore_relative=0.003),
    "as new": make_readings(roughness=0.05e-3, levelled=False),
    "velocity meter": make_readings(roughness=0.8e-3, senses="velocity"),
}


def finding(readings):
    """Wall and comparison, as the main job makes them."""
    wall = estimate(readings, LIMIT)
    return wall, compare_with_new(wall, "carbon steel", readings.bore.value, LIMIT)


def with_error(readings, name, error):
    """What the readings mean if an input is too high by `error`."""
    if name == "meter":
        return replace(readings, flow_m3_s=readings.flow_m3_s / (1.0 + error))
    if name in ("bore", "length"):
        old = getattr(readings, name)
        value = old.value / (1.0 + error)
        changed = {name: Uncertain(value=value, standard=old.relative * value, shape=old.shape)}
        if name == "bore" and readings.meter.senses == "velocity":
            changed["flow_m3_s"] = readings.flow_m3_s / (1.0 + error) ** 2
        return replace(readings, **changed)
    return replace(readings, head_loss_m=readings.head_loss_m - error)


def told(readings):
    """State, and whether worse than new."""
    wall, new = finding(readings)
    worse = "no estimate"
    if new is not None:
        worse = "worse than new" if new.head_loss_ratio[1] > new.limit else "not worse than new"
    return {wall.state, worse}


@pytest.mark.parametrize("name", SECTIONS)
def test_each_error_turns_the_finding_and_a_smaller_one_does_not(name):
    readings = SECTIONS[name]
    wall, new = finding(readings)
    stresses = stress_test(readings, wall, LIMIT, new)
    assert {one.input for one in stresses} >= {"meter", "bore", "length", "gauges"}
    checked = 0
    for one in stresses:
        assert one.finding in told(readings)
        # An assessment done again lets its gauges' zeros follow a large offset; the relative errors are plain.
        if one.error is None or one.unit != "relative" or one.becomes == "no estimate":
            continue
        assert one.finding in told(with_error(readings, one.input, 0.85 * one.error))
        assert one.becomes in told(with_error(readings, one.input, 1.15 * one.error))
        checked += 1
    assert checked >= 3


def test_an_error_of_head_turns_the_finding_of_levelled_gauges():
    readings = make_readings(roughness=0.35e-3, velocities=(1.5, 2.0, 2.5))
    wall, new = finding(readings)
    one = next(
        s for s in stress_test(readings, wall, LIMIT, new) if (s.input, s.finding) == ("gauges", "worse than new")
    )
    assert one.error > 0.0
    assert one.limit == pytest.approx(0.02)
    assert one.times_limit == pytest.approx(one.error / 0.02)


def test_the_size_follows_from_the_sensitivity():
    """h ∝ Q² / D⁵: to lower f by its distance to the limit, the meter must read low by about half of it."""
    readings = make_readings(roughness=0.35e-3, bore_relative=0.0, length_relative=0.0)
    wall, new = finding(readings)
    found = {one.input: one for one in stress_test(readings, wall, LIMIT, new) if one.finding == "worse than new"}
    far = np.log(new.head_loss_ratio[1] / new.limit)
    assert np.log1p(found["meter"].error) == pytest.approx(-far / 2.0, rel=0.1)
    assert np.log1p(found["bore"].error) == pytest.approx(far / 5.0, rel=0.1)
    assert np.log1p(found["length"].error) == pytest.approx(-far, rel=0.1)
    assert found["meter"].times_limit == pytest.approx(abs(found["meter"].error) / 0.005, rel=1e-6)
    assert found["bore"].times_limit is None


def test_elevations_count_only_where_no_static_levels_the_gauges():
    for levelled in (True, False):
        readings = make_readings(levelled=levelled)
        names = {one.input for one in stress_test(readings, *finding(readings)[:1], LIMIT, finding(readings)[1])}
        assert ("elevations" in names) is not levelled


def test_without_an_estimate_or_a_material_less_is_tested():
    readings = make_readings(roughness=0.35e-3)
    wall, _ = finding(readings)
    alone = stress_test(readings, wall, LIMIT, None)
    assert {one.finding for one in alone} == {"measured"}
    lost = estimate(replace(readings, head_loss_m=-readings.head_loss_m), LIMIT)
    assert stress_test(readings, lost, LIMIT, None) == ()
