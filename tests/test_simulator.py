"""The simulator itself: what the coverage studies rest on."""

import numpy as np
import pytest
from crew import PLANT, PSI, STREET, bring, rounded, sheet_text
from instruments import Gauge, Kit, Meter, Pipe, Plan
from simulator import Errors, draw_line, friction_factor, simulate, true_head_loss

KIT = Kit(
    gauge=Gauge(full_scale_pa=1e6, limit=0.0025, step_pa=100.0, noise_pa=300.0),
    meter=Meter(limit=0.005, step_m3_s=1e-5),
)
PIPE = Pipe(bore_m=0.0525, length_m=38.2, roughness_m=3.5e-4, fitting_k=1.0, elevation_m=(1.2, 2.45))
PLAN = Plan(flows_m3_s=(0.001, 0.002, 0.003, 0.004), supply_pa=4e5)


@pytest.mark.parametrize(
    ("reynolds", "relative", "published"),
    [
        # CALC with mpmath to 12 digits, Colebrook-White.
        (1e5, 0.0, 0.0179897730843),
        (1e5, 1e-3, 0.0221745359445),
        (1e6, 1e-3, 0.0199434658405),
        (1e3, 1e-3, 0.064),
    ],
)
def test_friction_is_colebrook_white(reynolds, relative, published):
    assert friction_factor(reynolds, relative) == pytest.approx(published, rel=1e-9)


def test_gauge_error_stays_within_its_limit_and_is_uniform_at_work():
    rng = np.random.default_rng(1)
    lines = np.array([draw_line(rng, 1.0, 0.4) for _ in range(20000)])
    at_work = 0.6 * lines[:, 0] + 0.4 * lines[:, 1]
    assert np.abs(lines).max() <= 1.0 + 1e-12
    assert at_work.std() == pytest.approx(1.0 / np.sqrt(3.0), rel=0.02)
    assert np.quantile(at_work, 0.975) == pytest.approx(0.95, abs=0.01)


def test_exact_readings_obey_the_head_loss_equation():
    day = simulate(np.random.default_rng(2), PIPE, KIT, PLAN, Errors())
    truth = day.truth
    # Example worked by hand: V = Q/A, h = (f L/D + ΣK) V²/2g at 3 L/s and 12 degC.
    velocity = 0.003 / (np.pi / 4.0 * 0.0525**2)
    assert velocity == pytest.approx(1.38584, rel=1e-5)
    assert truth.reynolds[2] == pytest.approx(velocity * 0.0525 / 1.2347e-6, rel=1e-3)
    expected = (truth.friction_factor[2] * 38.2 / 0.0525 + 1.0) * velocity**2 / (2.0 * 9.80665)
    assert truth.head_loss_m[2] == pytest.approx(expected, rel=1e-12)
    assert true_head_loss(truth, 0.003) == pytest.approx(expected, rel=1e-12)
    assert truth.equivalent_roughness_m == pytest.approx(3.5e-4, rel=1e-4)


def test_correlation_error_moves_the_equivalent_roughness_as_its_slope_says():
    day = simulate(np.random.default_rng(2), PIPE, KIT, PLAN, Errors(level=0.01))
    # d ln ε / d ln f = (ln 10/4)(1 + b/a)/√f + b/(2a), a = ε/3.7D, b = 2.51/(Re√f), Colebrook-White differentiated.
    f, reynolds = day.truth.friction_factor[-1], day.truth.reynolds[-1]
    a, b = 3.5e-4 / 3.7 / 0.0525, 2.51 / (reynolds * np.sqrt(f))
    slope = np.log(10.0) / 4.0 * (1.0 + b / a) / np.sqrt(f) + b / (2.0 * a)
    assert np.log(day.truth.equivalent_roughness_m / 3.5e-4) == pytest.approx(0.01 * slope, rel=0.1)


def test_a_low_correlation_makes_a_smooth_pipe_smooth():
    smooth = Pipe(bore_m=0.1, length_m=100.0, roughness_m=0.0)
    plan = Plan(flows_m3_s=(0.005, 0.01), supply_pa=4e5)
    assert simulate(np.random.default_rng(3), smooth, KIT, plan, Errors(level=-0.03)).truth.equivalent_roughness_m == 0
    assert simulate(np.random.default_rng(3), smooth, KIT, plan, Errors(level=0.03)).truth.equivalent_roughness_m > 1e-6


def test_readings_differ_from_the_truth_by_the_drawn_errors():
    errors = Errors(gauges_pa=((2000.0, 2000.0), (-1000.0, -1000.0)), meter_gain=0.004, bore=0.01)
    rows = simulate(np.random.default_rng(4), PIPE, KIT, PLAN, errors).rows
    static = rows.window == 0
    weight = 999.5 * 9.80665
    difference = (rows.pressure_pa[0, static] - rows.pressure_pa[1, static]).mean()
    assert difference == pytest.approx(weight * 1.25 + 3000.0, abs=300.0)
    assert rows.flow_m3_s[rows.window == 2].mean() == pytest.approx(0.002 * 1.004, rel=0.01)
    clamp_on = Kit(gauge=KIT.gauge, meter=Meter(limit=0.005, step_m3_s=1e-5, senses="velocity"))
    by_velocity = simulate(np.random.default_rng(4), PIPE, clamp_on, PLAN, errors).rows
    assert by_velocity.flow_m3_s[20:] == pytest.approx(rows.flow_m3_s[20:] / 1.01**2, rel=1e-9)


def test_noise_has_memory():
    rows = simulate(np.random.default_rng(5), PIPE, KIT, Plan(flows_m3_s=(0.003,), supply_pa=4e5, dwell_s=4000.0)).rows
    noise = rows.pressure_pa[0, rows.window == 0]
    noise = noise - noise.mean()
    assert (noise[1:] * noise[:-1]).sum() / (noise**2).sum() > 0.4


def test_steps_and_units_of_the_files(tmp_path):
    assert rounded([1.24, 1.26, -0.01], 0.05) == ["1.25", "1.25", "0.00"]
    assert rounded([412.37], 0.5) == ["412.5"]
    day = simulate(np.random.default_rng(6), PIPE, KIT, PLAN)
    section, log = bring(day, tmp_path, PLANT, spoil=np.random.default_rng(7))
    lines = log.read_text(encoding="utf-8").splitlines()
    assert lines[0] == "time,flow [L/s],upstream [kPa],downstream [kPa],temperature [degC]"
    assert len(lines) == 1 + day.rows.time_s.size
    assert any(",," in line for line in lines)
    assert 'accuracy = "0.25 % of 1000 kPa"' in section.read_text(encoding="utf-8")
    sheet = sheet_text(day, STREET).splitlines()
    assert len(sheet) == 1 + 6
    static_psi = float(sheet[1].split(",")[1])
    assert static_psi * PSI == pytest.approx(4e5, rel=0.02)
