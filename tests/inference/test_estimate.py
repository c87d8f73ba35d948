"""The three states, decided by rule, and what each one says."""

from dataclasses import replace

import numpy as np
import pytest
from readings_maker import make_readings

from fieldfit.field.section import Correlation
from fieldfit.inference.estimate import CORRELATION, estimate

LIMIT = Correlation()


def wall_of(**changes):
    return estimate(make_readings(**changes), LIMIT)


def test_a_rough_wall_is_measured_and_the_bands_nest():
    wall = wall_of(roughness=0.3e-3)
    assert wall.state == "measured"
    low, high = wall.roughness_m.measurement
    wide_low, wide_high = wall.roughness_m.with_correlation
    assert wide_low < low < 0.3e-3 < high < wide_high
    assert wall.roughness_m.best == pytest.approx(0.3e-3, rel=1e-6)
    assert wall.hazen_williams_c.measurement[0] < wall.hazen_williams_c.best < wall.hazen_williams_c.measurement[1]


def test_with_correlation_adds_ten_percent_of_f_in_quadrature():
    wall = wall_of(roughness=1e-3)
    own = np.log(wall.friction_factor.measurement[1] / wall.friction_factor.best)
    wide = np.log(wall.friction_factor.with_correlation[1] / wall.friction_factor.best)
    assert wide == pytest.approx(np.hypot(own, 1.96 * 0.05), rel=1e-4)


@pytest.mark.parametrize("factor", [0.93, 1.0, 1.05])
def test_near_smooth_is_an_upper_limit_and_c_is_still_measured(factor):
    wall = wall_of(head=make_readings(roughness=0.0).head_loss_m * factor)
    assert wall.state == "upper limit"
    assert wall.roughness_m.best is None
    assert wall.roughness_m.measurement[0] == wall.roughness_m.with_correlation[0] == 0.0
    assert 0.0 < wall.roughness_m.measurement[1] < wall.roughness_m.with_correlation[1]
    assert wall.hazen_williams_c.best > 140.0


def test_the_limit_grows_with_the_reading():
    limits = [
        wall_of(head=make_readings(roughness=0.0).head_loss_m * factor).roughness_m.with_correlation[1]
        for factor in (0.92, 0.96, 1.0, 1.04, 1.08)
    ]
    assert limits == sorted(limits)


def test_far_below_smooth_is_a_data_fault():
    wall = wall_of(head=make_readings(roughness=0.0).head_loss_m * 0.8)
    assert wall.state == "no estimate"
    assert "smooth" in wall.because
    assert wall.roughness_m.best is wall.roughness_m.measurement is wall.roughness_m.with_correlation is None
    assert wall.friction_factor.best == pytest.approx(0.8 * wall.smooth_friction_factor, rel=0.02)


def test_below_smooth_within_what_the_instruments_allow_is_no_fault():
    wall = wall_of(head=make_readings(roughness=0.0).head_loss_m * 0.88, bore_relative=0.03)
    assert wall.state == "upper limit"


def test_beyond_the_chart_is_no_roughness():
    wall = wall_of(roughness=0.08 * 0.0525)
    assert wall.state == "no estimate"
    assert "not a roughness" in wall.because
    assert wall.hazen_williams_c.best is not None


def test_unresolved_head_loss_is_no_estimate():
    readings = make_readings(levelled=False, gauge_pa=60_000.0)
    wall = estimate(readings, LIMIT)
    assert wall.state == "no estimate"
    assert "uncertainty" in wall.because


def test_negative_head_loss_is_named():
    wall = wall_of(head=-make_readings().head_loss_m)
    assert wall.state == "no estimate"
    assert "negative" in wall.because


@pytest.mark.parametrize("reason", ["laminar", "critical zone"])
def test_nothing_left_says_why(reason):
    readings = make_readings()
    nothing = {
        name: getattr(readings, name)[..., :0]
        for name in (
            "number",
            "flow_m3_s",
            "head_loss_m",
            "random_m",
            "pressure_pa",
            "temperature_degc",
            "density_kg_m3",
            "viscosity_m2_s",
        )
    }
    wall = estimate(replace(readings, **nothing, set_aside=((1, reason),)), LIMIT)
    assert wall.state == "no estimate"
    assert reason in wall.because
    assert "turbulent flow feels the wall, above 0.16 L/s" in wall.advice


def test_each_reason_gets_its_own_advice():
    told = [
        wall_of(head=make_readings(roughness=0.0).head_loss_m * 0.5),
        wall_of(roughness=0.08 * 0.0525),
        wall_of(head=-make_readings().head_loss_m),
        wall_of(levelled=False, gauge_pa=60_000.0),
    ]
    assert {wall.state for wall in told} == {"no estimate"}
    assert len({wall.advice for wall in told}) == len(told)
    assert all(wall.advice for wall in told)
    assert wall_of().advice == ""


def test_budget_lists_the_correlation_and_adds_up():
    wall = wall_of(roughness=1e-3)
    assert sum(entry.share for entry in wall.budget) == pytest.approx(1.0)
    assert sum(entry.measurement_share for entry in wall.budget) == pytest.approx(1.0)
    entry = next(entry for entry in wall.budget if entry.error == CORRELATION)
    assert entry.measurement_share == 0.0
    assert entry.standard == pytest.approx(0.05)
    assert [one.share for one in wall.budget] == sorted((one.share for one in wall.budget), reverse=True)


def test_plateau_values_follow_their_definitions():
    readings = make_readings(roughness=3e-4, fitting_k=(3.0, 0.5))
    values = estimate(readings, LIMIT).plateaus
    velocity = readings.flow_m3_s / (np.pi * 0.0525**2 / 4.0)
    friction = readings.head_loss_m - 3.0 * velocity**2 / 2.0 / 9.80665
    np.testing.assert_allclose(values.friction_loss_m, friction, rtol=1e-12)
    np.testing.assert_allclose(
        values.friction_factor, 2.0 * 9.80665 * 0.0525 * friction / (38.2 * velocity**2), rtol=1e-12
    )
    c = velocity / (0.849182 * (0.0525 / 4.0) ** 0.63 * (friction / 38.2) ** 0.54)
    np.testing.assert_allclose(values.hazen_williams_c, c, rtol=1e-5)


def test_uncertainty_of_c_follows_the_first_order_formula():
    """u²(ln C) = u_Q² + (0.54 u_h/h)² + (2.63 u_D)² + (0.54 u_L)², from C's definition."""
    readings = make_readings(velocities=(1.8,), bore_relative=0.004, length_relative=0.003, noise=0.02)
    values = estimate(readings, LIMIT).plateaus
    weight = readings.density_kg_m3[0] * 9.80665
    gauge = readings.upstream.accuracy.fixed / weight * np.hypot(*((readings.pressure_pa[:, 0] - 4e5) / 1e6))
    head = np.sqrt(0.02**2 + 0.01**2 + gauge**2) / readings.head_loss_m[0]
    expected = np.sqrt((0.005**2) / 3.0 + (0.54 * head) ** 2 + (2.63 * 0.004) ** 2 + (0.54 * 0.003) ** 2)
    assert values.hazen_williams_relative[0] == pytest.approx(expected, rel=1e-6)
