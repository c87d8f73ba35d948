"""Published figures on friction in pipes.

READ: seen in the source or a quotation of it; MEM: recalled from the named publication; CALC: computed independently;
PRACTICE: common practice, no source.
"""

import math

import fluids.friction
import numpy as np
import pytest

from fieldfit.hydraulics.friction import STANDARD_GRAVITY, colebrook_white, laminar, relative_roughness, smooth
from fieldfit.hydraulics.friction_laws import LAWS
from fieldfit.hydraulics.regime import regime

FOOT, INCH = 0.3048, 0.0254
SAND = LAWS["Nikuradse sand grain"].friction_factor


@pytest.mark.parametrize(
    ("reynolds", "rough", "friction_factor"),
    [
        # CALC: mpmath, 12 digits.
        (1e5, 0.0, 0.0179897730843),
        (1e5, 1e-4, 0.0185138660775),
        (1e5, 1e-3, 0.0221745359445),
        (1e5, 1e-2, 0.0385035435273),
        (1e6, 1e-3, 0.0199434658405),
        (1e7, 0.05, 0.0715529818409),
        (4e3, 0.0, 0.0399070140556),
    ],
)
def test_colebrook_white_to_twelve_digits(reynolds, rough, friction_factor):
    assert round(float(colebrook_white(reynolds, rough)), 13) == friction_factor


@pytest.mark.parametrize(
    ("name", "percent"),
    [
        # CALC: worst deviation from Colebrook–White over Re 4e3 to 1e8 and ε/D 0 to 0.05.
        ("Haaland", 1.42),
        ("Swamee–Jain", 3.36),
        ("Churchill", 3.15),
    ],
)
def test_worst_deviation_of_the_explicit_laws(name, percent):
    re, rough = np.geomspace(4e3, 1e8, 500)[:, None], np.append(0.0, np.geomspace(1e-7, 0.05, 500))
    ratio = LAWS[name].friction_factor(re, rough) / colebrook_white(re, rough)
    assert 100.0 * np.max(np.abs(ratio - 1.0)) == pytest.approx(percent, abs=0.01)


def test_worst_deviation_of_serghides():
    # CALC: Serghides 1984 keeps within 0.003 % of Colebrook–White; here by the formula in the `fluids` library.
    grid = [(re, rough) for re in np.geomspace(4e3, 1e8, 50) for rough in (0.0, *np.geomspace(1e-7, 0.05, 40))]
    theirs = np.array([fluids.friction.Serghides_1(*at) for at in grid])
    ratio = theirs / colebrook_white(*np.transpose(grid))
    assert 100.0 * np.max(np.abs(ratio - 1.0)) == pytest.approx(0.003, abs=0.0005)


@pytest.mark.parametrize("radius_over_grain", [507.0, 252.0, 126.0, 60.0, 30.6, 15.0])
def test_fully_rough_limit_of_nikuradse(radius_over_grain):
    # Nikuradse 1933 (NACA TM 1292): f = (1.74 + 2 log10(r/k))^-2 fully rough, at his six grain sizes.
    limit = (1.74 + 2.0 * math.log10(radius_over_grain)) ** -2
    rough = 0.5 / radius_over_grain
    assert regime(1e9, rough) == "fully rough"
    assert SAND(1e9, rough) == pytest.approx(limit, rel=1e-12)
    # Colebrook and White rounded the constant to 3.7: 0.1 % of f.
    assert colebrook_white(1e9, rough) == pytest.approx(limit, rel=1e-3)


def test_transition_of_nikuradse():
    # MEM: Nikuradse 1933, his straight pieces for A in u/u* = A + 5.75 log10(y/k), by log10 k⁺; 1/√f changes by A/√8.
    rough = 1.0 / 252.0
    re = np.geomspace(4e3, 1e6, 300)
    f = SAND(re, rough)
    log_k = np.log10(rough * re * np.sqrt(f / 8.0))
    pieces = [5.5 + 5.75 * log_k, 6.59 + 3.5 * log_k, np.full(300, 9.58), 11.5 - 1.62 * log_k]
    published = np.select([log_k < limit for limit in (0.55, 0.85, 1.15, 1.83)], pieces, 8.48)
    ours = 8.48 + math.sqrt(8.0) * (1.0 / np.sqrt(f) - 2.0 * math.log10(126.0) - 1.74)
    assert log_k[0] < 0.2
    assert log_k[-1] > 2.1
    np.testing.assert_allclose(ours, published, atol=0.16)


def test_smooth_law_of_prandtl():
    # 1/√f = 2 log10(Re √f) − 0.8; the program's smooth pipe has −0.79935 there.
    f = smooth(np.geomspace(4e3, 1e8, 50))
    np.testing.assert_allclose(
        1.0 / np.sqrt(f), 2.0 * np.log10(np.geomspace(4e3, 1e8, 50) * np.sqrt(f)) - 0.8, atol=7e-4
    )


def test_laminar_law():
    np.testing.assert_allclose(laminar([100.0, 1000.0, 2000.0]), [0.64, 0.064, 0.032], rtol=1e-14)


def test_measured_smooth_pipe_of_oregon():
    # Swanson et al. 2002, 59 rows as shipped in `fluids`; turbulent rows lie -4.6 to +3.7 % from Prandtl (CALC).
    reynolds, measured = (np.array(column) for column in fluids.friction.oregon_smooth_data)
    assert reynolds.size == 59
    turbulent = reynolds > 4000.0
    percent = 100.0 * (measured[turbulent] / smooth(reynolds[turbulent]) - 1.0)
    assert np.min(percent) == pytest.approx(-4.6, abs=0.05)
    assert np.max(percent) == pytest.approx(3.7, abs=0.05)


def test_smooth_pipe_of_munson():
    # READ: Munson, Young & Okiishi, Example 7.4, dimensionless groups; their answer: smooth.
    reynolds = np.array([4010.0, 6680.0, 9970.0, 20000.0, 38100.0, 58000.0, 80000.0, 98500.0])
    f = np.array([0.039, 0.035, 0.031, 0.0264, 0.0226, 0.0202, 0.01878, 0.01786])
    np.testing.assert_allclose(f, smooth(reynolds), rtol=0.023)
    assert abs(np.mean(f / smooth(reynolds) - 1.0)) < 0.005
    assert np.max(np.abs(relative_roughness(f, reynolds))) < 1e-3


def test_readings_of_munson_give_his_groups():
    # MEM: Example 7.4, 0.496 in bore, 5 ft between taps, water at 60 degF (density 1.94 slug/ft3, 1.21e-5 ft2/s).
    velocity = np.array([1.17, 1.95, 2.91, 5.84, 11.13, 16.92, 23.34, 28.73])
    loss = np.array([6.26, 15.6, 30.9, 106.0, 329.0, 681.0, 1200.0, 1730.0])
    bore = 0.496 / 12.0
    f = loss * bore / 5.0 / (0.5 * 1.94 * velocity**2)
    np.testing.assert_allclose(f, [0.039, 0.035, 0.031, 0.0264, 0.0226, 0.0202, 0.01878, 0.01786], rtol=0.005)
    np.testing.assert_allclose(
        velocity * bore / 1.21e-5, [4010.0, 6680.0, 9970.0, 20000.0, 38100.0, 58000.0, 80000.0, 98500.0], rtol=0.005
    )


def test_nearly_smooth_pipe_of_cengel():
    # READ: Çengel & Cimbala, Example 8-3, in feet and pounds; printed Re 126 400, f 0.0174, Δp 11.8 psi.
    bore, flow, length, rough, density, viscosity = 2.0 / 12.0, 0.2, 200.0, 7e-6, 62.36, 7.536e-4
    velocity = flow / (math.pi / 4.0 * bore**2)
    reynolds = density * velocity * bore / viscosity
    assert reynolds == pytest.approx(126_400, rel=5e-4)
    f = float(colebrook_white(reynolds, rough / bore))
    assert f == pytest.approx(0.0174, abs=0.00005)
    dynamic_psi = density * velocity**2 / 2.0 / 32.174 / 144.0
    assert f * length / bore * dynamic_psi == pytest.approx(11.8, abs=0.05)
    # Backwards: half a unit of the last printed digit either way is half the roughness, and 3 % of f is smooth.
    low, high = (
        float(relative_roughness(psi * bore / (length * dynamic_psi), reynolds)) * bore for psi in (11.75, 11.85)
    )
    assert low < 0.7 * rough
    assert high > 1.2 * rough
    assert relative_roughness(0.97 * f, reynolds) < 0.0


def test_head_loss_of_ashrae():
    # READ: ASHRAE Fundamentals 2021, chapter 3, Example 2; printed 15.7 m, CALC 15.6 m.
    bore, flow, rough, viscosity, length, fittings = 0.150, 0.060, 0.00025, 1.01e-6, 102.0, 11.1
    velocity = flow / (math.pi / 4.0 * bore**2)
    f = float(colebrook_white(velocity * bore / viscosity, rough / bore))
    loss = (f * length / bore + fittings) * velocity**2 / (2.0 * STANDARD_GRAVITY)
    assert loss == pytest.approx(15.6, abs=0.05)
    assert loss == pytest.approx(15.7, abs=0.1)
