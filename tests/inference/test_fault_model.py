"""The forward model of faults: its slopes, and its agreement with the model of the fit and with outside physics."""

import numpy as np
import pytest
from readings_maker import GRAVITY, colebrook, make_readings

from fieldfit.field.section import Correlation
from fieldfit.inference.conditions import conditions_of, noise_of, pooled
from fieldfit.inference.fault_model import GAIN, OFFSET, PLACE, SIZES, WALL, ZERO, Trials, read, unknowns
from fieldfit.inference.head_model import head_model


def trials(readings, *, side=0.0, head_ratio=1.0, flow_ratio=1.0, shift=0.0, spread=0.0, **sizes):
    """One trial of given sizes."""
    centre = np.full((1, len(SIZES)), -np.inf)
    centre[:, [OFFSET, GAIN, ZERO, PLACE]] = 0.0
    centre[:, WALL] = np.log(3e-4)
    for name, value in sizes.items():
        centre[:, SIZES.index(name)] = value
    wide = np.where(np.isfinite(centre), spread, 0.0)
    return Trials(
        ln_weight=np.zeros(1),
        centre=centre,
        spread=wide,
        side=np.array([side]),
        flow_ratio=np.array([flow_ratio]),
        head_ratio=np.array([head_ratio]),
        shift_m=np.full((1, len(readings.flow_m3_s)), shift),
    )


EVERYTHING = {
    "wall": np.log(1e-4),
    "bore": np.log(0.05),
    "local": np.log(3.0),
    "offset": 0.1,
    "air": np.log(0.2),
    "leak": np.log(2e-4),
    "branch": np.log(0.1),
    "gain": 0.03,
    "zero": 5e-5,
    "place": 0.4,
}


@pytest.mark.parametrize("senses", ["volume", "velocity"])
@pytest.mark.parametrize("side", [1.0, -1.0, 0.0])
def test_slopes_are_those_of_finite_differences(senses, side):
    readings = make_readings(fitting_k=(2.0, 0.3), senses=senses, levelled=False)
    conditions = conditions_of(readings, Correlation())
    given = trials(readings, side=side, head_ratio=-2.0, flow_ratio=1.5, shift=0.3, spread=0.02, **EVERYTHING)
    rng = np.random.default_rng(11)
    u = 0.3 * rng.standard_normal((1, unknowns(conditions)))
    slopes = read(conditions, given, u).slopes[0]
    for index in range(u.shape[1]):
        step = np.zeros_like(u)
        step[:, index] = 1e-4
        by_difference = (read(conditions, given, u + step).head_m - read(conditions, given, u - step).head_m)[0] / 2e-4
        assert slopes[index] == pytest.approx(by_difference, rel=1e-5, abs=1e-8)


def test_without_a_fault_it_is_the_model_of_the_fit():
    readings = make_readings(roughness=3e-4, fitting_k=(2.0, 0.3))
    conditions = conditions_of(readings, Correlation())
    model = head_model(readings, Correlation())
    at = np.log(colebrook(model.reference.reynolds, 3e-4 / 0.0525))
    expected = model.predict(float(at), np.zeros(len(model.errors.names))).head_m
    found = read(conditions, trials(readings), np.zeros((1, unknowns(conditions)))).head_m[0]
    assert found == pytest.approx(expected, rel=1e-9)


@pytest.mark.parametrize("side", [1.0, -1.0])
def test_a_leak_halfway_carries_each_half_its_own_flow(side):
    readings = make_readings(velocities=(0.8, 1.6, 2.4))
    area = np.pi / 4.0 * 0.0525**2
    lost = 0.2 * area
    conditions = conditions_of(readings, Correlation())
    given = trials(readings, side=side, leak=np.log(lost), place=0.3)
    found = read(conditions, given, np.zeros((1, unknowns(conditions)))).head_m[0]

    def loss(flow):
        v = flow / area
        return np.array([colebrook(x * 0.0525 / 1e-6, 3e-4 / 0.0525) for x in v]) * 38.2 / 0.0525 * v**2 / 2 / GRAVITY

    flow = readings.flow_m3_s
    upper, lower = (flow, flow - lost) if side > 0.0 else (flow + lost, flow)
    assert found == pytest.approx(0.3 * loss(upper) + 0.7 * loss(lower), rel=1e-9)


def test_a_velocity_meter_reads_high_in_a_narrowed_bore():
    """It measures v and reports v times the stated area: f changes by D to the first power, not to the fifth."""
    found = {}
    for senses in ("volume", "velocity"):
        readings = make_readings(roughness=2e-3, velocities=(2.0, 2.5), senses=senses)
        conditions = conditions_of(readings, Correlation())
        nothing = np.zeros((1, unknowns(conditions)))
        as_new = read(conditions, trials(readings, wall=np.log(2e-3)), nothing).head_m[0]
        narrow = read(conditions, trials(readings, wall=np.log(2e-3), bore=np.log(0.01)), nothing).head_m[0]
        found[senses] = np.log(narrow / as_new) / 0.01
    assert found["volume"] == pytest.approx([5.35, 5.35], abs=0.15)
    assert found["velocity"] == pytest.approx([1.35, 1.35], abs=0.15)


def test_at_other_flows_it_predicts_what_readings_there_would_give():
    every = make_readings(velocities=(0.6, 1.0, 1.4, 1.8, 2.2))
    some = conditions_of(make_readings(velocities=(0.6, 1.4, 2.2)), Correlation())
    wanted = conditions_of(every, Correlation())
    carried = some.at(every.flow_m3_s)
    nothing = np.zeros((1, unknowns(some)))
    given = trials(every)
    assert read(carried, given, nothing).head_m == pytest.approx(read(wanted, given, nothing).head_m, rel=1e-12)
    gain = some.names.index("meter gain")
    assert carried.flow_errors_m3_s[gain] == pytest.approx(wanted.flow_errors_m3_s[gain], rel=1e-9)
    beyond = some.at(np.array([2.0 * every.flow_m3_s[-1]]))
    assert beyond.flow_errors_m3_s[gain] / beyond.flow_m3_s == pytest.approx(
        some.flow_errors_m3_s[gain, :1] / some.flow_m3_s[:1]
    )


def test_many_readings_are_pooled_without_moving_the_curve():
    velocities = np.random.default_rng(3).uniform(0.5, 2.5, 400)
    many = make_readings(velocities=velocities, noise=0.05)
    few = pooled(many)
    assert len(few.flow_m3_s) == 16
    assert np.sum(noise_of(few) ** -2) == pytest.approx(np.sum(noise_of(many) ** -2), rel=0.01)
    truth = make_readings(velocities=few.flow_m3_s / (np.pi / 4.0 * 0.0525**2))
    assert few.head_loss_m == pytest.approx(truth.head_loss_m, rel=2e-3)
    assert pooled(few) is few
