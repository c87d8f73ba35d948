"""How well flow readings alone part bore from roughness, against figures worked out independently.

CALC: five flows from 0.4 to 2.0 m/s, 20 readings each with 0.05 m of noise in the head and 0.5 % in the flow, in a pipe
of 150 mm and 300 m with Colebrook–White taken as exact. Agreement is asked to 4 %: the calculation does not say the
water's temperature, which moves the figures by as much.
"""

from dataclasses import replace

import numpy as np
import pytest
from readings_maker import colebrook, make_readings

from fieldfit.field.section import Correlation
from fieldfit.inference.bore_or_roughness import bore_map, exact_shape
from fieldfit.inference.estimate import estimate
from fieldfit.inference.head_model import head_model

VISCOSITY = 1.14e-6
VELOCITIES = np.linspace(0.4, 2.0, 5)


def readings(roughness, bore=0.15):
    """Twenty readings at each flow, averaged."""
    made = make_readings(
        roughness=roughness, bore=bore, length=300.0, velocities=VELOCITIES, noise=0.05, viscosity=VISCOSITY
    )
    by_flow = 2.0 * 0.005 * made.head_loss_m
    return replace(made, random_m=np.hypot(0.05, by_flow) / np.sqrt(20.0))


@pytest.mark.parametrize(
    ("roughness_mm", "ln_bore_percent", "ln_roughness_percent"),
    [(0.1, 0.5, None), (1.0, 2.5, 43.0), (3.0, 6.6, 94.0)],  # CALC
)
def test_a_free_fit_would_know_the_bore_so_well(roughness_mm, ln_bore_percent, ln_roughness_percent):
    model = head_model(readings(roughness_mm * 1e-3), Correlation())
    found = exact_shape(model, 0.15, roughness_mm * 1e-3)
    assert 100.0 * found.ln_bore == pytest.approx(ln_bore_percent, rel=0.04, abs=0.05)
    if ln_roughness_percent is not None:
        assert 100.0 * found.ln_roughness == pytest.approx(ln_roughness_percent, rel=0.04)


def test_bore_and_roughness_go_together_almost_wholly():
    found = exact_shape(head_model(readings(0.1e-3), Correlation()), 0.15, 0.1e-3)
    assert found.correlation == pytest.approx(0.997, abs=0.001)  # CALC


def test_a_published_roughness_of_27_6_mm_is_3_mm_and_14_mm_of_deposit():
    """A field report gave ε = 27.6 mm in a 150 mm pipe; the same loss is 3 mm behind 14 mm of deposit (CALC)."""
    made = readings(27.6e-3)
    wall = estimate(made, Correlation())
    assert wall.state == "no estimate"
    assert "not a roughness" in wall.because
    model = head_model(made, Correlation())
    found = bore_map(model, float(np.log(wall.friction_factor.best)), Correlation(), (), 0.3)
    ridge = np.interp(np.log(3e-3), np.log(found.roughness_m), found.ridge_m)
    assert 1e3 * (0.15 - ridge) / 2.0 == pytest.approx(14.0, abs=0.5)
    # The same loss by the fluids library: f L/D V²/2g goes with f/D⁵.
    flow = VELOCITIES[-1] * np.pi / 4.0 * 0.15**2

    def loss(bore, roughness):
        return colebrook(4.0 * flow / (np.pi * bore * VISCOSITY), roughness / bore) / bore**5

    assert loss(ridge, 3e-3) == pytest.approx(loss(0.15, 27.6e-3), rel=0.01)
