"""Hazen–Williams: each function undoes another, and Darcy agrees at one flow."""

import math

import numpy as np
import pytest
from fluids.friction import Clamond
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from fieldfit.hydraulics.hazen_williams import (
    c_from_friction_factor,
    c_from_head_loss,
    c_of_roughness,
    flow_from_head_loss,
    friction_factor_from_c,
    head_loss,
)

flows = st.floats(1e-5, 10.0)
cs = st.floats(20.0, 160.0)
bores = st.floats(0.01, 3.0)
lengths = st.floats(1.0, 1e5)


@settings(deadline=None)
@given(flows, cs, bores, lengths)
def test_flow_and_c_come_back_from_the_head_loss(flow, c, bore, length):
    loss = head_loss(flow, c, bore, length)
    assert flow_from_head_loss(loss, c, bore, length) == pytest.approx(flow, rel=1e-12)
    assert c_from_head_loss(flow, loss, bore, length) == pytest.approx(c, rel=1e-12)


@settings(deadline=None)
@given(flows, cs, bores)
def test_c_and_friction_factor_are_two_words_for_one_head_loss(flow, c, bore):
    f = friction_factor_from_c(c, flow, bore)
    velocity = flow / (math.pi / 4.0 * bore**2)
    darcy = f * 100.0 / bore * velocity**2 / (2.0 * 9.80665)
    assert head_loss(flow, c, bore, 100.0) == pytest.approx(float(darcy), rel=1e-12)
    assert c_from_friction_factor(f, flow, bore) == pytest.approx(c, rel=1e-12)


@settings(deadline=None)
@given(flows, cs, bores, lengths)
def test_loss_and_flow_change_sign_together(flow, c, bore, length):
    assert head_loss(-flow, c, bore, length) == -head_loss(flow, c, bore, length)
    assert flow_from_head_loss(-1.0, c, bore, length) == -flow_from_head_loss(1.0, c, bore, length)


def test_head_loss_against_the_flow_is_a_negative_c():
    assert c_from_head_loss(0.01, -2.0, 0.1, 100.0) == -c_from_head_loss(0.01, 2.0, 0.1, 100.0)
    assert c_from_head_loss(-0.01, -2.0, 0.1, 100.0) == c_from_head_loss(0.01, 2.0, 0.1, 100.0)
    assert c_from_friction_factor(-0.02, 0.01, 0.1) == -c_from_friction_factor(0.02, 0.01, 0.1)


def test_no_flow_has_no_loss_and_no_loss_an_endless_c():
    assert head_loss(0.0, 120.0, 0.1, 100.0) == 0.0
    assert flow_from_head_loss(0.0, 120.0, 0.1, 100.0) == 0.0
    assert c_from_head_loss(0.01, 0.0, 0.1, 100.0) == np.inf


def test_sensitivity_of_c_is_that_of_the_exponents():
    # d ln C = d ln Q − 0.54 d ln h + 0.54 d ln L − 2.63 d ln D
    at, step = (0.02, 3.0, 0.15, 200.0), 1e-6
    base = c_from_head_loss(*at)
    for position, wanted in enumerate((1.0, -0.54, -2.63, 0.54)):
        moved = [value * (1.0 + step * (place == position)) for place, value in enumerate(at)]
        assert (c_from_head_loss(*moved) / base - 1.0) / step == pytest.approx(wanted, abs=1e-4)


@settings(deadline=None)
@given(st.floats(0.0, 0.005), st.floats(0.2, 5.0), st.floats(0.05, 2.0), st.floats(3e-7, 3e-6))
def test_c_of_a_roughness_has_the_head_loss_of_colebrook_white(roughness, velocity, bore, viscosity):
    reynolds = velocity * bore / viscosity
    assume(reynolds > 2100.0)
    flow = velocity * math.pi / 4.0 * bore**2
    darcy = Clamond(reynolds, roughness / bore, False) * 50.0 / bore * velocity**2 / (2.0 * 9.80665)
    c = c_of_roughness(roughness, flow, bore, viscosity)
    assert head_loss(flow, c, bore, 50.0) == pytest.approx(darcy, rel=1e-10)


def test_c_of_a_roughness_in_laminar_flow_is_that_of_poiseuille():
    bore, viscosity, velocity = 0.05, 1e-4, 1.0
    flow = velocity * math.pi / 4.0 * bore**2
    poiseuille = 128.0 * viscosity * 10.0 * flow / (math.pi * 9.80665 * bore**4)
    c = c_of_roughness([0.0, 1e-3], flow, bore, viscosity)
    np.testing.assert_allclose(head_loss(flow, c, bore, 10.0), poiseuille, rtol=1e-12)


def test_c_falls_as_the_wall_roughens():
    c = c_of_roughness(np.geomspace(1e-6, 5e-3, 40), 0.02, 0.15, 1.1e-6)
    assert np.all(np.diff(c) < 0.0)


def test_arrays_broadcast():
    assert head_loss(np.full((3, 1), 0.01), np.full(2, 100.0), 0.1, 50.0).shape == (3, 2)
    assert c_of_roughness(np.full((3, 1), 1e-4), np.full(2, 0.01), 0.1, 1e-6).shape == (3, 2)
    assert c_from_head_loss(0.01, 1.0, 0.1, 50.0).shape == ()
