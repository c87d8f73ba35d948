"""Published figures on Hazen–Williams.

READ: seen in the source or a quotation of it; MEM: recalled from the named publication; CALC: computed independently;
PRACTICE: common practice, no source.
"""

import math

import numpy as np
import pytest

from fieldfit.hydraulics.hazen_williams import c_from_head_loss, c_of_roughness, head_loss

FOOT, INCH = 0.3048, 0.0254
GALLON_A_MINUTE = 231.0 * INCH**3 / 60.0
PSI = 6894.757293168
WATER_15 = 999.1020 * 9.80665
"""Weight of water at 15 degC, IAPWS SR6-08 [N/m³]."""


def test_velocity_form():
    # V = 0.849182 C R^0.63 S^0.54.
    bore, slope = 0.3, 0.004
    velocity = 0.849182 * 110.0 * (bore / 4.0) ** 0.63 * slope**0.54
    flow = velocity * math.pi / 4.0 * bore**2
    assert head_loss(flow, 110.0, bore, 250.0) == pytest.approx(250.0 * slope, rel=1e-12)


def test_constant_of_the_head_loss_form():
    # CALC: exactly 10.6699 where books print 10.67.
    assert round(float(head_loss(1.0, 1.0, 1.0, 1.0)), 4) == 10.6699


@pytest.mark.parametrize("flow", [0.001, 0.03, 0.5])
@pytest.mark.parametrize("bore", [0.05, 0.15, 0.6])
def test_printed_metric_form(flow, bore):
    # h = 10.67 L Q^1.852/(C^1.852 D^4.8704): rounded exponents cost up to 0.2 % of C.
    printed = (10.67 * flow**1.852 * 100.0 / (5.0 * bore**4.8704)) ** (1.0 / 1.852)
    assert c_from_head_loss(flow, 5.0, bore, 100.0) == pytest.approx(printed, rel=0.002)


def test_constant_of_the_sprinkler_form():
    # NFPA 13: psi/ft = 4.52 Q^1.85/(C^1.85 d^4.87), gpm and inches; CALC: 4.529 from the exact constants.
    psi = float(head_loss(GALLON_A_MINUTE, 1.0, INCH, FOOT)) * WATER_15 / PSI
    assert psi == pytest.approx(4.529, abs=0.0005)


@pytest.mark.parametrize(
    ("bore_in", "length_ft", "flow_gpm", "loss_psi", "c"),
    [
        # CALC: rounded forms differ by up to 0.4 %.
        (8.39, 1000.0, 500.0, 5.0, 73.4),
        (6.16, 1000.0, 500.0, 20.0, 78.3),
        (4.0, 500.0, 100.0, 3.0, 93.4),
        (24.34, 5000.0, 5000.0, 6.0, 96.4),
    ],
)
def test_back_calculation(bore_in, length_ft, flow_gpm, loss_psi, c):
    loss = loss_psi * PSI / WATER_15
    ours = float(c_from_head_loss(flow_gpm * GALLON_A_MINUTE, loss, bore_in * INCH, length_ft * FOOT))
    assert ours == pytest.approx(c, rel=0.0015)
    sprinkler = (4.52 * flow_gpm**1.85 * length_ft / (bore_in**4.87 * loss_psi)) ** (1.0 / 1.85)
    assert ours == pytest.approx(sprinkler, rel=0.005)


def test_c_drifts_in_one_and_the_same_pipe():
    # CALC: D 150 mm, ε 1 mm, water at 15 degC: 108.9, 103.9 and 98.8 at 0.5, 1 and 2 m/s. The figure at 1 m/s is of the
    # printed metric form (103.89); the exact constants give 103.96.
    velocity, bore = np.array([0.5, 1.0, 2.0]), 0.15
    c = c_of_roughness(1e-3, velocity * math.pi / 4.0 * bore**2, bore, 1.13755e-3 / 999.1020)
    np.testing.assert_allclose(c, [108.9, 103.9, 98.8], atol=0.075)
    np.testing.assert_allclose(c, [108.90, 103.96, 98.82], atol=0.01)


@pytest.mark.parametrize(
    ("roughness_mm", "bore_mm", "c"),
    [
        # CALC: pipe laid as 150 mm, 15 degC, at 0.3, 0.6, 1.2 and 2.0 m/s in that bore: clean, rough, and narrowed.
        (0.1, 150.0, (137.7, 137.9, 135.9, 133.3)),
        (2.0, 150.0, (100.3, 95.7, 90.9, 87.4)),
        (0.1, 129.5, (93.2, 92.7, 90.9, 88.8)),
    ],
)
def test_apparent_c_of_clean_rough_and_narrowed_pipe(roughness_mm, bore_mm, c):
    laid, bore = 0.15, bore_mm / 1000.0
    flow = np.array([0.3, 0.6, 1.2, 2.0]) * math.pi / 4.0 * laid**2
    true_c = c_of_roughness(roughness_mm / 1000.0, flow, bore, 1.13755e-3 / 999.1020)
    apparent = c_from_head_loss(flow, head_loss(flow, true_c, bore, 300.0), laid, 300.0)
    np.testing.assert_allclose(apparent, c, atol=0.15)
