import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from readings_maker import GRAVITY, make_readings

from fieldfit.field.section import BoreEvidence, Correlation
from fieldfit.field.uncertain import Uncertain
from fieldfit.inference.bore_evidence import average
from fieldfit.inference.bore_or_roughness import bore_map, quantiles, region_level
from fieldfit.inference.head_model import friction_by_definition, head_model

LAID = 0.15
VISCOSITY = 1.14e-6


def map_of(readings, evidence=(), variation=0.3, limit=None):
    """The map, with the largest reading's friction factor for the best one."""
    limit = limit or Correlation()
    _, factor = friction_by_definition(readings)
    return bore_map(head_model(readings, limit), float(np.log(factor[-1])), limit, evidence, variation)


def in_pipe(bore, roughness, sharpness=1.0, velocities=(0.4, 0.8, 1.2, 1.6, 2.0), noise=0.004):
    """Readings of a pipe of 300 m laid with 150 mm, whose bore has become another one.

    Colebrook–White with its two parts added as powers: above 1 the wall turns more sharply from smooth to rough.
    """
    flow = np.array(velocities) * np.pi / 4.0 * LAID**2
    velocity = flow / (np.pi / 4.0 * bore**2)
    x = np.full_like(velocity, 7.0)
    for _ in range(200):
        rough, smooth = roughness / bore / 3.7, 2.51 * x / (velocity * bore / VISCOSITY)
        x = -2.0 / sharpness * np.log10(rough**sharpness + smooth**sharpness)
    head = 300.0 / bore / x**2 * velocity**2 / (2.0 * GRAVITY)
    return make_readings(
        bore=LAID, length=300.0, velocities=velocities, viscosity=VISCOSITY, head=head, noise=noise, bore_relative=0.003
    )


def interval(values, probability):
    return quantiles(values, probability, (0.025, 0.975))


@pytest.mark.parametrize("sharpness", [0.8, 1.1, 1.25])
@pytest.mark.parametrize(("bore", "roughness"), [(0.15, 0.3e-3), (0.135, 0.15e-3), (0.128, 0.5e-3)])
def test_a_sharper_turn_from_smooth_to_rough_gives_no_confident_wrong_bore(sharpness, bore, roughness):
    found = map_of(in_pipe(bore, roughness, sharpness))
    low, high = interval(found.bore_m, found.bores())
    assert low <= bore <= high
    low, high = interval(np.log(found.roughness_m), found.walls())
    assert low <= np.log(roughness) <= high


def test_the_trap_is_real():
    """With the correlation taken as exact the same readings give a sharp and wrong bore."""
    readings = in_pipe(0.128, 0.5e-3, 1.25)
    low, high = interval(*bores(map_of(readings, limit=Correlation(standard=0.002))))
    honest_low, honest_high = interval(*bores(map_of(readings)))
    assert not low <= 0.128 <= high
    assert honest_low <= 0.128 <= honest_high


def bores(found):
    return found.bore_m, found.bores()


def test_the_ridge_loses_the_same_head_everywhere():
    found = map_of(in_pipe(0.15, 1e-3))
    flow = 1.2 * np.pi / 4.0 * LAID**2
    inside = (found.roughness_m > 1e-4) & np.isfinite(found.ridge_m)
    loss = []
    for bore, roughness in zip(found.ridge_m[inside], found.roughness_m[inside], strict=True):
        velocity = flow / (np.pi / 4.0 * bore**2)
        x = 7.0
        for _ in range(100):
            x = -2.0 * np.log10(roughness / bore / 3.7 + 2.51 * x / (velocity * bore / VISCOSITY))
        loss.append(velocity**2 / x**2 / bore)
    assert np.ptp(loss) / np.mean(loss) < 0.06
    at_truth = np.interp(np.log(1e-3), np.log(found.roughness_m), found.ridge_m)
    assert at_truth == pytest.approx(0.15, rel=0.004)


def test_probabilities_add_up_and_regions_nest():
    found = map_of(in_pipe(0.15, 1e-3))
    assert np.sum(found.probability) == pytest.approx(1.0)
    half, most = region_level(found.probability, 0.5), region_level(found.probability, 0.95)
    assert half > most > 0.0
    assert np.sum(found.probability[found.probability >= most]) == pytest.approx(0.95, abs=0.01)


def coupon(bore, standard=0.5e-3, kind="coupon"):
    return BoreEvidence(kind=kind, bore=Uncertain(value=bore, standard=standard))


def test_a_coupon_narrows_the_ridge_to_the_truth():
    readings = in_pipe(0.135, 0.5e-3)
    alone, found = map_of(readings), map_of(readings, (coupon(0.136),))
    assert found.evidence[0].used
    wide, narrow = interval(*bores(alone)), interval(*bores(found))
    assert narrow[0] < 0.135 < narrow[1]
    assert narrow[1] - narrow[0] < 0.6 * (wide[1] - wide[0])
    low, high = interval(np.log(found.roughness_m), found.walls())
    assert np.exp(low) < 0.5e-3 < np.exp(high)
    assert np.array_equal(found.by_readings, alone.by_readings)


@pytest.mark.parametrize("bore", [0.09, 0.175])
def test_evidence_that_contradicts_the_readings_is_left_out_and_says_so(bore):
    readings = in_pipe(0.145, 0.5e-3)
    found = map_of(readings, (coupon(bore),))
    assert not found.evidence[0].used
    assert found.evidence[0].tail < 0.01
    assert np.array_equal(found.probability, found.by_readings)


def test_a_velocity_meter_leaves_the_bore_nearly_open():
    volume = in_pipe(0.15, 1e-3)
    made = make_readings(
        bore=LAID, length=300.0, velocities=(0.4, 0.8, 1.2, 1.6, 2.0), viscosity=VISCOSITY, noise=0.004, roughness=1e-3,
        senses="velocity", head=volume.head_loss_m,
    )  # fmt: skip
    narrow, wide = (interval(*bores(map_of(one))) for one in (volume, made))
    assert wide[0] < narrow[0] - 0.015


@given(
    thickness=st.lists(st.floats(0.0, 0.012), min_size=40, max_size=80),
    kind=st.sampled_from(["tracer", "laminar flow", "coupon"]),
)
@settings(max_examples=60, deadline=None)
def test_averages_are_those_of_an_uneven_deposit(thickness, kind):
    """Against plain means over the reach; the formulas are of second order in the unevenness."""
    bore = LAID - 2.0 * np.array(thickness)
    friction = float(np.mean(bore**-5.0) ** -0.2)
    deposit = np.mean(LAID - bore)
    if deposit < 1e-4:
        return
    variation = float(np.std(bore) / deposit)
    s = float(np.std(bore) / np.mean(bore))
    true = {
        "tracer": np.mean(bore**2.0) ** 0.5,
        "laminar flow": np.mean(bore**-4.0) ** -0.25,
        "coupon": np.mean(bore),
    }[kind]
    found = average(kind, np.array([friction]), LAID, variation).mean_m[0]
    assert found == pytest.approx(true, rel=0.2 * s + 6.0 * s**2 + 1e-6)


def test_a_gauge_plate_sees_the_narrowest_place_and_even_deposits_one_bore():
    uneven = {
        kind: average(kind, np.array([0.12]), LAID, 0.3).mean_m[0] for kind in ("gauge plate", "coupon", "tracer")
    }
    assert uneven["gauge plate"] < 0.12 < uneven["coupon"] < uneven["tracer"]
    even = [average(kind, np.array([0.12]), LAID, 0.0) for kind in ("gauge plate", "coupon", "tracer", "laminar flow")]
    assert [float(one.mean_m[0]) for one in even] == [0.12] * 4
    assert [float(one.standard_m[0]) for one in even] == [0.0] * 4
