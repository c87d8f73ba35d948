"""Campaigns fitted jointly: what is shared cancels, what is not does not, and the interval is as wide as it should be."""

import datetime as dt
from dataclasses import replace

import numpy as np
import pytest
from readings_maker import exact, make_readings

from fieldfit.field.section import Correlation
from fieldfit.field.uncertain import Accuracy, Uncertain
from fieldfit.inference.campaign_errors import Test as Campaign
from fieldfit.inference.campaigns import fit_jointly
from fieldfit.inference.change import change
from fieldfit.inference.estimate import estimate

LIMIT = Correlation()
LIQUID = 0.005


def campaign(readings, year=2010, **known):
    """A campaign with the results of its own fit."""
    wall = estimate(readings, LIMIT)
    return Campaign(
        date=dt.date(year, 5, 1),
        readings=readings,
        random_m=wall.plateaus.friction_factor_random * np.abs(wall.plateaus.friction_loss_m),
        ln_friction=float(np.log(wall.friction_factor.best)),
        reynolds=wall.reynolds,
        **known,
    ), naive(wall)


def naive(wall):
    low, high = wall.friction_factor.measurement
    return float(np.log(high / low)) / (2.0 * 1.959964)


def pair_of(first, second, worse_by=0.1):
    """Fit two campaigns and return the change between them."""
    (one, u_one), (two, u_two) = first, second
    fit = fit_jointly((one, two), LIMIT, LIQUID)
    return change(fit, (0, 1), (u_one, u_two), worse_by)


def with_meter(readings, serial, gain=0.02):
    meter = replace(readings.meter, serial=serial, accuracy=Accuracy(text="", gain=gain, shape="normal"))
    return replace(readings, meter=meter)


def checks_case(head, year):
    """Meter gain 2 % shared, offset 0.05 m shared, bore 1 %, length 0.3 %; 0.5 % and 0.02 m random; one reading."""
    bore, length = 0.15, 300.0
    readings = make_readings(
        bore=bore,
        length=length,
        velocities=(1.2,),
        head=np.array([head]),
        # Half a per cent of flow is about one of head loss, for 1/0.54 of ln h goes with ln Q.
        noise=float(np.hypot(0.02, 0.005 / 0.54 * head)),
        bore_relative=0.01,
        length_relative=0.003,
        gauge_pa=0.0,
        levelled=False,
        shape="normal",
    )
    readings = replace(
        with_meter(readings, "M-1"),
        elevation_drop=Uncertain(value=0.0, standard=0.05, shape="normal"),
        viscosity_standard=0.0,
    )
    return campaign(readings, year)


def test_the_shared_part_cancels_as_it_should():
    # CALC: u(ln C2/C1) 4.8 % naive, 0.75 % with the shared part cancelled.
    found = pair_of(checks_case(6.0, 2000), checks_case(9.0, 2010))
    assert 0.54 * found.naive_standard == pytest.approx(0.048, abs=0.002)
    assert 0.54 * found.standard == pytest.approx(0.0075, abs=0.0007)
    assert found.naive_standard / found.standard > 3.0
    assert found.head_loss_ratio[1] == pytest.approx(1.5, rel=0.01)
    assert found.c_ratio[1] == pytest.approx(1.5**-0.54, rel=0.01)


def other_serial(pair):
    one, u = pair
    return replace(one, readings=with_meter(one.readings, "M-2")), u


def no_serial(pair):
    one, u = pair
    return replace(one, readings=with_meter(one.readings, None)), u


@pytest.mark.parametrize(
    "other",
    [
        other_serial,
        no_serial,
        lambda pair: (replace(pair[0], calibrations=(("M-1", 1),)), pair[1]),
    ],
    ids=["another meter", "no serial", "calibrated anew"],
)
def test_a_meter_that_is_not_declared_the_same_is_not_shared(other):
    first, second = checks_case(6.0, 2000), checks_case(9.0, 2010)
    shared, apart = pair_of(first, second), pair_of(first, other(second))
    # Two gains of 2 % in flow make 2 × 2 % × √2 of f.
    assert apart.standard == pytest.approx(np.hypot(shared.standard, 2.0 * 0.02 * np.sqrt(2.0)), rel=0.05)


def test_a_lining_makes_the_bore_a_new_one():
    first, second = checks_case(6.0, 2000), checks_case(9.0, 2010)
    lined = replace(second[0], linings=1), second[1]
    as_laid, as_lined = pair_of(first, second), pair_of(first, lined)
    # C belongs to a bore, and two bores are each off by 1 %; the head loss is what it is.
    of_c = [np.log(found.c_ratio[2] / found.c_ratio[0]) / (2.0 * 1.96) for found in (as_laid, as_lined)]
    assert of_c[1] == pytest.approx(np.hypot(of_c[0], 0.54 * 5.0 * 0.01 * np.sqrt(2.0)), rel=0.05)
    assert as_lined.standard == pytest.approx(as_laid.standard, rel=0.01)


def test_one_campaign_alone_is_its_own_fit():
    readings = make_readings(roughness=0.5e-3, seed=3)
    one, _ = campaign(readings)
    fit = fit_jointly((one,), LIMIT, LIQUID)
    wall = estimate(readings, LIMIT)
    # The reference is the same, so is the value; the interval too but for the split of the viscosity.
    assert np.exp(fit.ln_friction[0]) == pytest.approx(wall.friction_factor.best, rel=2e-4)
    assert np.sqrt(fit.walls[0, 0]) == pytest.approx(naive(wall), rel=0.05)


def test_another_season_and_other_flows_are_no_change():
    winter = make_readings(roughness=0.5e-3, viscosity=1.5e-6, velocities=(0.6, 0.8, 1.0, 1.2), noise=0.002)
    summer = make_readings(roughness=0.5e-3, viscosity=0.9e-6, velocities=(1.5, 1.8, 2.1, 2.4), noise=0.002)
    found = pair_of(campaign(with_meter(winter, "M-1"), 2000), campaign(with_meter(summer, "M-1"), 2010))
    assert found.head_loss_ratio[1] == pytest.approx(1.0, abs=0.004)
    assert found.head_loss_ratio[0] < 1.0 < found.head_loss_ratio[2]
    assert 0.05 < found.probability_worse < 0.95


def test_smallest_rise_is_called_nine_times_in_ten():
    found = pair_of(checks_case(6.0, 2000), checks_case(6.0, 2010))
    rng = np.random.default_rng(5)
    seen = np.log1p(found.smallest) + found.standard * rng.standard_normal(20_000)
    assert np.mean(seen > 1.6449 * found.standard) == pytest.approx(0.9, abs=0.01)


def test_the_interval_of_the_change_is_no_narrower_than_it_should_be():
    """Noise of the readings and levelling drawn anew, bore, meter and length off alike: 95 % hold the truth."""
    rng = np.random.default_rng(11)
    errors = []
    for _ in range(60):
        off = rng.normal(0.0, (0.02, 0.01, 0.003))
        pair = []
        for year, roughness in ((2000, 0.3e-3), (2010, 0.9e-3)):
            true = make_readings(
                roughness=roughness, bore=0.15 * (1 + off[1]), length=300.0 * (1 + off[2]), velocities=NARROW
            )
            head = true.head_loss_m + rng.normal(0.0, 0.01) + rng.normal(0.0, 0.03, len(true.head_loss_m))
            read = replace(
                with_meter(true, "M-1"),
                flow_m3_s=true.flow_m3_s * (1.0 + off[0]),
                head_loss_m=head,
                random_m=np.full(len(head), 0.03),
                bore=Uncertain(value=0.15, standard=0.0015, shape="normal"),
                length=Uncertain(value=300.0, standard=0.9, shape="normal"),
                fitting_k=exact(0.0),
            )
            pair.append(campaign(read, year))
        found = pair_of(*pair)
        true_ratio = _loss_ratio()
        errors.append(np.log(found.head_loss_ratio[1] / true_ratio) / found.standard)
    assert np.mean(np.abs(errors) < 1.96) >= 0.88
    assert 0.75 < np.std(errors) < 1.25


NARROW = (1.9, 1.95, 2.0, 2.05, 2.1)
"""Flows so close that the ratio of head losses is one number [m/s]."""


def _loss_ratio():
    """Head loss of the rougher wall over the smoother one in the middle of the flows."""
    before, after = (
        make_readings(roughness=e, bore=0.15, length=300.0, velocities=NARROW).head_loss_m for e in (0.3e-3, 0.9e-3)
    )
    return float((after / before)[2])
