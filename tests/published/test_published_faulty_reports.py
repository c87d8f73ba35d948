"""Published field reports that are no plain roughness: each must be flagged for what it is."""

from dataclasses import replace

import numpy as np
import pytest
from readings_maker import head_loss, make_readings

from fieldfit.field.section import Correlation
from fieldfit.inference.estimate import estimate
from fieldfit.inference.explanations import explain
from fieldfit.report.explanation_words import paragraph

GPM = 231.0 * 0.0254**3 / 60.0
PSI_M = 6894.757293168361 / (998.2 * 9.80665)


def hydrant_record(bore_m=0.1524):
    """READ: static 68 psi; 50 at 223 gpm, 39 at 416, 13 at 538. Pipe unknown: six inch, 300 m. Gauge read to 0.5 psi."""
    flow = np.array([223.0, 416.0, 538.0]) * GPM
    drop = 68.0 - np.array([50.0, 39.0, 13.0])
    velocity = flow / (np.pi / 4.0 * bore_m**2)
    made = make_readings(bore=bore_m, length=300.0, velocities=velocity, head=drop * PSI_M, noise=0.5 * PSI_M)
    psi = 6894.757293168361
    return replace(
        made,
        pressure_pa=np.array([np.full(3, 68.0 * psi), (68.0 - drop) * psi]),
        levelling=replace(made.levelling, pressure_pa=(68.0 * psi, 68.0 * psi)),
    )


@pytest.mark.parametrize("new_m", [None, (1.5e-4, 5e-4)])
def test_the_hydrant_record_that_no_single_law_fits_is_flagged(new_m):
    found = explain(hydrant_record(), Correlation(), new_m)
    assert found.unexplained
    singles = [one for one in found.ranked if len(one.causes) == 1]
    assert len(singles) == 9
    assert not any(one.explains for one in singles)
    assert found.noise_scale > 3.0
    assert found.alike == ()
    assert "no one law fits them" in paragraph(found)


def deep_scale_report():
    """A report of ε = 27.6 mm in a 150 mm pipe (ε/D 0.18); the loss it stands for, at three flows."""
    velocity = np.array([0.5, 1.0, 1.5])
    head = head_loss(velocity * np.pi / 4.0 * 0.15**2, bore=0.15, length=200.0, roughness=27.6e-3, viscosity=1e-6)
    return make_readings(bore=0.15, length=200.0, velocities=velocity, head=head, noise=0.05)


def test_the_deep_roughness_is_refused_as_roughness():
    wall = estimate(deep_scale_report(), Correlation())
    assert wall.state == "no estimate"
    assert "not a roughness" in wall.because
    assert explain(deep_scale_report(), Correlation(), None).probability("rough wall") < 0.02


def test_the_same_loss_is_explained_by_a_smaller_bore():
    found = explain(deep_scale_report(), Correlation(), None)
    bore = next(one for one in found.ranked if one.causes == ("reduced bore",))
    assert bore.explains
    assert "reduced bore" in found.alike
    assert any(action.name == "bore check" for action in found.actions)
    shrink = bore.sizes[0]
    # CALC: 3 mm of roughness and 14 mm of deposit give the same loss; that bore, 122 mm, is among those it allows.
    low, high = 0.15 * np.exp(-shrink.high), 0.15 * np.exp(-shrink.low)
    assert low < 0.122 < high


def test_three_millimetres_and_fourteen_of_deposit_lose_the_same():
    readings = deep_scale_report()
    flow = readings.flow_m3_s
    thick = head_loss(flow, bore=0.15 - 0.028, length=200.0, roughness=3e-3, viscosity=1e-6)
    assert thick == pytest.approx(readings.head_loss_m, rel=0.02)
