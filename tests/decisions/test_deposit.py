from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from readings_maker import make_readings

from fieldfit.decisions.deposit import deposit
from fieldfit.field.section import BoreEvidence, Deposit, Meter, Section
from fieldfit.field.uncertain import Uncertain
from fieldfit.hydraulics.liquids import water
from fieldfit.inference.estimate import estimate


def section_of(readings, material="carbon steel", **changes):
    """A section around readings."""
    return Section(
        name="Line",
        path=Path("section.toml"),
        material=material,
        installed=None,
        bore=readings.bore,
        bore_source="given in the section file",
        liquid=water(),
        temperature=None,
        temperature_standard=0.5,
        meter=Meter(column="flow", accuracy=readings.meter.accuracy),
        taps=(readings.upstream, readings.downstream),
        **changes,
    )


def found_in(readings, evidence=(), **changes):
    """Bore or roughness of a reach."""
    section = section_of(readings, **changes)
    return deposit(readings, estimate(readings, section.correlation), section, evidence)


@pytest.fixture(scope="module")
def rough():
    """52.5 mm as laid, 1 mm rough if its bore were that."""
    return make_readings(roughness=1e-3)


def test_the_three_readings_lie_in_order(rough):
    found = found_in(rough)
    assert found.all_roughness_m.best == pytest.approx(1e-3, rel=0.01)
    assert found.new_wall == "new carbon steel"
    assert found.all_bore_m.best < found.bore_m.best < 52.5e-3 * 1.01
    assert found.all_bore_m.ends[0] < found.all_bore_m.best < found.all_bore_m.ends[1]
    assert found.roughness_m.ends[0] < found.roughness_m.best < found.roughness_m.ends[1]


def test_all_bore_loses_what_was_read(rough):
    """The narrower new pipe against the fluids library."""
    from readings_maker import head_loss

    found = found_in(rough)
    lost = head_loss(rough.flow_m3_s, bore=found.all_bore_m.best, length=38.2, roughness=0.045e-3, viscosity=1e-6)
    assert np.exp(np.mean(np.log(lost / rough.head_loss_m)[-3:])) == pytest.approx(1.0, abs=0.03)


def test_a_coupon_settles_thickness_volume_and_mass(rough):
    narrowed = make_readings(roughness=0.2e-3, bore=47.0e-3)
    readings = replace(rough, head_loss_m=narrowed_head(narrowed, rough))
    coupon = BoreEvidence(kind="coupon", bore=Uncertain(value=47.2e-3, standard=0.3e-3))
    density = Uncertain(value=1900.0, standard=100.0)
    even = Deposit(density_kg_m3=density, variation=0.05)
    found = found_in(readings, (coupon,), deposit=even)
    assert found.map.evidence[0].used
    assert found.thickness_m.ends[0] < 2.75e-3 < found.thickness_m.ends[1]
    volume = np.pi / 4.0 * (52.5e-3**2 - 47e-3**2)
    assert found.volume_m3_m.ends[0] < volume < found.volume_m3_m.ends[1]
    assert found.volume_m3_m.best == pytest.approx(volume, rel=0.08)
    assert found.mass_kg_m.best == pytest.approx(1900.0 * found.volume_m3_m.best, rel=0.02)
    assert np.ptp(found.mass_kg_m.ends) > 1900.0 * np.ptp(found.volume_m3_m.ends)


def narrowed_head(narrowed, laid):
    """Head loss of the narrower pipe at the flows of the laid one."""
    from readings_maker import head_loss

    return head_loss(laid.flow_m3_s, bore=narrowed.bore.value, length=38.2, roughness=0.2e-3, viscosity=1e-6)


def test_an_uneven_deposit_leaves_a_coupon_less_to_say(rough):
    coupon = BoreEvidence(kind="coupon", bore=Uncertain(value=48e-3, standard=0.2e-3))
    spans = [
        np.ptp(found_in(rough, (coupon,), deposit=Deposit(variation=variation)).bore_m.ends) for variation in (0.0, 0.5)
    ]
    assert spans[1] > 1.3 * spans[0]


def test_a_new_pipe_has_no_deposit_to_speak_of():
    found = found_in(make_readings(roughness=0.045e-3))
    assert found.thickness_m.ends[0] < 0.1e-3
    assert found.thickness_m.ends[1] < 1.2e-3
    assert found.mass_kg_m is None


def test_without_a_material_all_bore_means_a_smooth_wall(rough):
    found, steel = found_in(rough, material=None), found_in(rough)
    assert found.new_wall == "a smooth wall"
    assert found.all_bore_m.best < steel.all_bore_m.best


def test_nothing_fitted_is_nothing_found(rough):
    nothing = replace(rough, head_loss_m=np.full_like(rough.head_loss_m, 1e-4))
    assert found_in(nothing) is None
