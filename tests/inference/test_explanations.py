"""Rival explanations: each fault named, and what cannot be known left open."""

from dataclasses import replace

import numpy as np
import pytest
from fault_maker import NOTHING, PLACES, Fault, draw, take_readings
from fluids.friction import Colebrook
from readings_maker import GRAVITY, make_readings

from fieldfit.field.section import Correlation
from fieldfit.hydraulics.friction_laws import LAWS
from fieldfit.inference.explanations import explain
from fieldfit.inference.telling_apart import apart
from fieldfit.inference.wrong_units import options

PLANT = PLACES["plant line"]
STEEL = (2e-5, 1e-4)


def explained(fault, *, levelled=True, seed=6, place=PLANT):
    """What is made of one simulated test."""
    return explain(
        take_readings(place, fault, draw(np.random.default_rng(seed), place), levelled), Correlation(), place.new_m
    )


def test_a_sound_pipe_is_nothing_unusual():
    found = explained(NOTHING)
    assert found.nothing_unusual
    assert found.alike == ()
    assert found.actions == ()
    assert found.probability("rough wall") > 0.6


@pytest.mark.parametrize(
    ("cause", "fault", "size", "truth", "levelled"),
    [
        ("trapped air", Fault(air_m=0.8), "air", 0.8, True),
        ("leak or open branch", Fault(leak_m3_s=1e-3, side=1, place=0.4), "leak", 1e-3, True),
        ("reduced bore", Fault(bore=0.75), "bore", -np.log(0.75), True),
        ("local loss", Fault(k=60.0), "local", 60.0, True),
        ("gauge offset", Fault(offset_m=-3.0), "offset", -3.0, False),
        ("rough wall", Fault(roughness_m=8e-4), "wall", 8e-4, True),
    ],
)
def test_each_fault_is_named_and_its_size_covered(cause, fault, size, truth, levelled):
    found = explained(fault, levelled=levelled)
    assert found.ranked[0].causes == (cause,) or cause in found.alike
    one = next(one for one in found.ranked if one.causes == (cause,))
    assert one.explains
    measured = next(part for part in one.sizes if part.of == size)
    assert measured.low < truth < measured.high


def test_swapped_taps_and_wrong_units_are_called_by_name():
    found = explained(Fault(swapped=True))
    assert found.ranked[0].causes == ("wrong unit or swapped channel",)
    assert found.ranked[0].option == "the two taps swapped"
    found = explained(Fault(flow_unit=3.785412))
    # 3.6 and 3.785 lie as near each other as the correlation's limit: both are named.
    assert "flow: US gallons taken for litres or the reverse" in found.ranked[0].option
    assert "flow: L/s taken for m³/h or the reverse" in found.ranked[0].option
    assert found.ranked[0].causes == ("wrong unit or swapped channel",)


def test_probabilities_add_up_and_stand_in_order():
    found = explained(Fault(roughness_m=4e-4))
    each = [one.probability for one in found.ranked]
    assert sum(each) == pytest.approx(1.0, abs=1e-9)
    assert each == sorted(each, reverse=True)
    assert len(each) == 9


def test_one_flow_leaves_everything_open_that_raises_the_loss():
    found = explain(make_readings(roughness=5e-4, velocities=(1.5,), seed=1), Correlation(), STEEL)
    assert not found.unexplained
    assert {"rough wall", "reduced bore", "local loss", "trapped air", "meter error"} <= set(found.alike)
    assert {"third tap", "bore check", "vent"} <= {action.name for action in found.actions}


def test_two_faults_are_found_where_one_alone_fails():
    found = explained(Fault(roughness_m=1e-3, air_m=1.5))
    assert found.unexplained
    assert found.ranked[0].causes == ("rough wall", "trapped air")
    wall, air = found.ranked[0].sizes
    assert wall.low < 1e-3 < wall.high
    assert air.low < 1.5 < air.high


def test_no_readings_no_explanation():
    nothing = replace(make_readings(), flow_m3_s=np.array([]), head_loss_m=np.array([]))
    assert explain(nothing, Correlation(), STEEL) is None


def test_an_unknown_material_gives_the_new_wall_more_room():
    readings = take_readings(PLANT, Fault(roughness_m=3e-4), draw(np.random.default_rng(5), PLANT), True)
    known, unknown = (explain(readings, Correlation(), new_m) for new_m in (STEEL, None))
    new = [
        next(one.probability for one in found.ranked if one.causes == ("nothing unusual",))
        for found in (known, unknown)
    ]
    assert new[1] > 5.0 * new[0]


def sharper(law, roughness=1.2e-3, bore=0.1524, length=300.0, viscosity=1.24e-6):
    """A rough wall whose transition from smooth to rough is sharper than Colebrook and White's."""
    velocities = np.array([0.3, 0.5, 0.8, 1.2, 1.6, 2.0])
    reynolds = velocities * bore / viscosity
    factor = law(reynolds, roughness / bore)
    head = factor * length / bore * velocities**2 / (2.0 * GRAVITY)
    return make_readings(bore=bore, length=length, velocities=velocities, viscosity=viscosity, head=head, noise=0.01)


def test_a_sharper_transition_is_not_taken_for_a_bore():
    """The correlation's own error is in every model: a curve only a little sharper must not be sworn to as a bore."""

    def law(reynolds, relative):
        exact = np.array([Colebrook(re, relative, tol=1e-12) for re in reynolds])
        return exact * (1.0 + 0.01 * np.tanh(2.0 * np.log10(reynolds / 1e5)))

    for readings in (sharper(law), sharper(LAWS["Nikuradse sand grain"].friction_factor)):
        found = explain(readings, Correlation(), (1.5e-4, 5e-4))
        assert not found.unexplained
        assert found.probability("reduced bore") < 0.5
        assert found.probability("rough wall") > 0.2
        bore = next(one for one in found.ranked if one.causes == ("reduced bore",))
        assert bore.probability < 0.2 or "rough wall" in found.alike


def test_the_correlation_trusted_blindly_would_swear_to_a_shape():
    """With no limit on the correlation the same curve decides between causes that it cannot decide between."""
    readings = sharper(lambda re, e: np.array([Colebrook(r, e, tol=1e-12) * (r / 1e5) ** 0.03 for r in re]))
    trusting = explain(readings, Correlation(standard=1e-5), (1.5e-4, 5e-4))
    careful = explain(readings, Correlation(), (1.5e-4, 5e-4))
    assert trusting.probability("rough wall") < 0.02
    assert trusting.ranked[0].probability > 0.5
    assert careful.probability("rough wall") > 0.3


def test_widened_noise_softens_the_verdict():
    rng = np.random.default_rng(9)
    readings = take_readings(PLANT, Fault(roughness_m=5e-4), draw(np.random.default_rng(5), PLANT), True)
    rough = replace(readings, head_loss_m=readings.head_loss_m * (1.0 + 0.05 * rng.standard_normal(8)))
    quiet, loud = (explain(one, Correlation(), STEEL) for one in (readings, rough))
    assert quiet.noise_scale < 1.5
    assert loud.noise_scale > 3.0
    assert loud.probability("rough wall") < quiet.probability("rough wall")


def test_the_action_named_does_part_the_causes():
    """Predict the third reading under both causes by hand: half the local loss, in the gauges' own errors."""
    found = explain(make_readings(roughness=5e-4, velocities=(1.5,), seed=1), Correlation(), STEEL)
    action = next(one for one in found.actions if one.name == "third tap")
    assert action.parts == ("rough wall", "local loss")
    k = next(one for one in found.ranked if one.causes == ("local loss",)).fitted.size(2)[0]
    loss = k * 1.5**2 / (2.0 * GRAVITY)
    assert action.separation == pytest.approx(0.5 * loss / np.hypot(0.01, 0.01), rel=0.05)


def test_curves_of_one_cause_do_not_part_from_themselves():
    found = explained(Fault(roughness_m=5e-4))
    first = found.ranked[0].fitted
    wide = found.conditions.at(np.array([1e-4, 1e-3, 1e-2]))
    assert apart(first, first, wide, np.full(3, 0.01)) == pytest.approx(np.zeros(3))


def test_water_that_ran_unseen_during_the_static_is_laid_to_the_meter():
    """A meter with a low-flow cut-off shows zero while 8 % of the largest flow runs: the levelling takes its loss off."""
    readings = take_readings(PLANT, NOTHING, draw(np.random.default_rng(6), PLANT), True)
    unseen = 0.08**1.85 * readings.head_loss_m[-1]
    found = explain(replace(readings, head_loss_m=readings.head_loss_m - unseen), Correlation(), STEEL)
    meter = next(one for one in found.ranked if one.causes == ("meter error",))
    assert not found.nothing_unusual
    assert found.ranked[0] is meter or "meter error" in found.alike
    assert "low-flow cut-off" in meter.option
    assert meter.sizes[0].low < -unseen < meter.sizes[0].high
    sound = explain(readings, Correlation(), STEEL)
    assert sound.nothing_unusual


def test_a_transmitter_of_the_difference_has_no_gauge_of_the_wrong_unit_at_its_other_end():
    readings = make_readings(levelled=False)
    one = replace(readings, pressure_pa=np.array([9790.0 * readings.head_loss_m, np.zeros(6)]))
    names = {trial for trial in options_of(one) if "gauge " in trial}
    assert names == set()
    assert any("gauge upstream" in name for name in options_of(readings))


def options_of(readings):
    """Names of all mistakes that are tried."""
    return [option.name for option in options(readings)]
