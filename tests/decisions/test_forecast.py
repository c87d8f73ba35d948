"""The years ahead: every number against the physics computed apart."""

import datetime as dt
from dataclasses import replace

import numpy as np
import pytest
from fluids.friction import Colebrook
from scipy.optimize import brentq

from fieldfit.decisions.duty import Duty
from fieldfit.decisions.forecast import Carried, crossings, forecast, rate_over
from fieldfit.decisions.growth import LAWS, Draws
from fieldfit.decisions.visits import Stage
from fieldfit.field.outlook import Thresholds

GRAVITY = 9.80665
DUTY = Duty(
    flow_m3_s=0.018,
    given=True,
    temperature_degc=12.0,
    viscosity_m2_s=1.24e-6,
    density_kg_m3=999.5,
    bore_m=0.15,
    length_m=340.0,
    fitting_k=0.9,
    head_m=6.0,
)
LAID = dt.date(2000, 1, 1)
STAGE = Stage(start=LAID, event="laid", first=0, material="uncoated cast iron")
LAST = dt.date(2020, 1, 1)


def loss(flow, wall, bore=0.15):
    velocity = flow / (np.pi / 4.0 * bore**2)
    f = Colebrook(Re=float(velocity * bore / 1.24e-6), eD=float(wall / bore), tol=1e-13)
    return (f * 340.0 / bore + 0.9) * velocity**2 / (2.0 * GRAVITY)


def certain(law=LAWS[0], rate=0.05e-3, start=0.3e-3, constant=15.0):
    draws = Draws(
        law=law,
        rate_m_year=np.full((8, 1), rate),
        constant_years=np.full(8, constant),
        start_m=np.full((8, 1), start),
        level=np.zeros(8),
    )
    return (Carried(draws=draws, to_c=np.zeros(8), to_loss=np.zeros(8)),)


def test_head_loss_capacity_and_c_follow_the_friction_law():
    found = forecast(certain(), (STAGE,), (DUTY,), dt.date(2040, 1, 1), 0.26e-3)
    wall = 0.3e-3 + 0.05e-3 * 40.0
    assert found.roughness_m.middle[-1] == pytest.approx(wall, rel=1e-3)
    assert found.head_loss_m.middle[-1] == pytest.approx(loss(0.018, wall), rel=1e-4)
    flow = brentq(lambda q: loss(q, wall) - 6.0, 1e-3, 0.1)
    assert found.capacity_m3_s.middle[-1] == pytest.approx(flow, rel=1e-4)


def test_the_deposit_loses_the_same_head_as_new_pipe_of_its_bore():
    thin = replace(DUTY, fitting_k=0.0)
    thickness = float(thin.deposit_m(np.array([2.0e-3]), 0.26e-3)[0])

    def apart(t):
        bare = []
        for bore, wall in ((0.15 - 2.0 * t, 0.26e-3), (0.15, 2.0e-3)):
            velocity = 0.018 / (np.pi / 4.0 * bore**2)
            bare.append(Colebrook(Re=velocity * bore / 1.24e-6, eD=wall / bore, tol=1e-13) * velocity**2 / bore)
        return bare[0] - bare[1]

    assert thickness == pytest.approx(brentq(apart, 0.0, 0.03), rel=2e-3)


@pytest.mark.parametrize("law", LAWS, ids=[law.name for law in LAWS])
def test_a_threshold_is_crossed_when_the_hydraulics_cross_it(law):
    carried = certain(law)
    at = dt.date(2031, 7, 1)
    wall = carried[0].draws.roughness_m(np.array([(at - LAID).days / 365.25]), np.array([0]))[0, 0]
    thresholds = Thresholds(head_loss_m=loss(0.018, wall), by=dt.date(2032, 1, 1))
    (found,) = crossings(carried, STAGE, DUTY, LAST, thresholds)
    assert all(abs((day - at).days) <= 2 for day in found.dates)
    assert (found.already, found.never, found.probability_by) == (0.0, 0.0, 1.0)
    flow = brentq(lambda q: loss(q, wall) - 6.0, 1e-3, 0.1)
    (found,) = crossings(carried, STAGE, DUTY, LAST, Thresholds(capacity_m3_s=flow))
    assert all(abs((day - at).days) <= 2 for day in found.dates)


def test_a_wall_that_saturates_below_a_threshold_never_reaches_it():
    carried = certain(LAWS[2], rate=0.02e-3, constant=10.0)
    (found,) = crossings(carried, STAGE, DUTY, LAST, Thresholds(head_loss_m=loss(0.018, 2.0e-3)))
    assert (found.dates, found.never, found.not_before) == ((None, None, None), 1.0, None)


def test_a_threshold_behind_the_last_test_was_crossed_already():
    (found,) = crossings(certain(), STAGE, DUTY, LAST, Thresholds(head_loss_m=loss(0.018, 0.5e-3)))
    assert found.already == 1.0
    assert found.dates[1] < LAST


def test_a_head_loss_that_fittings_make_alone_was_always_crossed():
    (found,) = crossings(certain(), STAGE, DUTY, LAST, Thresholds(head_loss_m=1e-4))
    assert found.already == 1.0


def test_a_cleaning_makes_a_step():
    draws = replace(certain()[0].draws, rate_m_year=np.full((8, 2), 0.05e-3), start_m=np.tile([0.3e-3, 0.4e-3], (8, 1)))
    carried = (Carried(draws=draws, to_c=np.zeros(8), to_loss=np.zeros(8)),)
    cleaned = Stage(start=dt.date(2015, 1, 1), event="cleaned", first=2, material="uncoated cast iron")
    found = forecast(carried, (STAGE, cleaned), (DUTY, DUTY), dt.date(2040, 1, 1), 0.26e-3)
    step = int(np.flatnonzero(np.diff(found.stage))[0])
    assert found.dates[step] == found.dates[step + 1] == cleaned.start
    assert found.roughness_m.middle[step] > 1.0e-3
    assert found.roughness_m.middle[step + 1] == pytest.approx(0.4e-3)
    assert found.c.middle[step + 1] > found.c.middle[step] + 10.0


def test_the_mean_rate_of_a_law_is_its_growth_over_the_time():
    low, middle, high = rate_over(certain(LAWS[1]), 0, (5.0, 20.0))
    assert low == middle == high == pytest.approx(0.05e-3 * (20.0 - 10.0) / 15.0)
