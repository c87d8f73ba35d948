"""Liquids: the interpolation of water, pairs, library liquids, and what is refused."""

import subprocess
import sys

import numpy as np
import pytest
from chemicals.iapws import iapws95_rho
from chemicals.viscosity import mu_IAPWS
from hypothesis import given
from hypothesis import strategies as st

from fieldfit.errors import InputError
from fieldfit.hydraulics.liquids import fixed_pair, from_library, water

LIQUID_DEGC = st.floats(0.0, 100.0)


@given(st.lists(st.floats(0.0, 99.6), min_size=1, max_size=20))
def test_water_follows_the_scalar_library_everywhere(temperatures):
    density = np.array([iapws95_rho(t + 273.15, 1e5) for t in temperatures])
    dynamic = np.array([mu_IAPWS(t + 273.15, rho) for t, rho in zip(temperatures, density, strict=True)])
    at = np.array(temperatures)
    np.testing.assert_allclose(water().density_kg_m3(at), density, rtol=1e-12)
    np.testing.assert_allclose(water().viscosity_m2_s(at), dynamic / density, rtol=1e-12)


def test_water_just_below_100_degc_goes_on_as_the_liquid_under_pressure():
    # At 0.1 MPa water boils at 99.6 °C; at 0.2 MPa it does not, and is denser by 1e5 Pa × 4.9e-10 /Pa.
    density = iapws95_rho(373.15, 2e5)
    assert water().density_kg_m3(np.array(100.0)) == pytest.approx(density * (1 - 4.9e-5), rel=1e-6)
    assert water().viscosity_m2_s(np.array(100.0)) * density == pytest.approx(mu_IAPWS(373.15, density), rel=2e-4)


@given(LIQUID_DEGC, LIQUID_DEGC)
def test_warmer_water_is_thinner(one, other):
    cold, warm = sorted((one, other))
    nu = water().viscosity_m2_s(np.array([cold, warm]))
    assert nu[1] <= nu[0] * (1 + 1e-12)


def test_water_is_densest_at_four_degrees():
    at = np.linspace(0.0, 10.0, 10_001)
    assert at[np.argmax(water().density_kg_m3(at))] == pytest.approx(3.98, abs=0.01)


@pytest.mark.parametrize("shape", [(), (1,), (3, 2), (0,)])
def test_shape_is_kept(shape):
    at = np.full(shape, 15.0)
    for liquid in (water(), fixed_pair("oil", 870.0, kinematic_m2_s=32e-6)):
        assert np.shape(liquid.density_kg_m3(at)) == shape
        assert np.shape(liquid.viscosity_m2_s(at)) == shape


def test_a_missing_temperature_stays_missing():
    values = water().viscosity_m2_s(np.array([15.0, np.nan]))
    assert np.isfinite(values[0])
    assert np.isnan(values[1])


@pytest.mark.parametrize("temperature", [-0.01, 100.5, 155.0, np.inf])
def test_ice_and_steam_are_refused_with_the_value(temperature):
    with pytest.raises(InputError, match=rf"{temperature:.6g} degC.*0 to 100 degC.*unit"):
        water().viscosity_m2_s(np.array([15.0, temperature]))


@given(st.floats(500.0, 2000.0), st.floats(1e-4, 10.0))
def test_a_pair_is_the_same_dynamic_or_kinematic(density, dynamic):
    by_dynamic = fixed_pair("brine", density, dynamic_pa_s=dynamic)
    by_kinematic = fixed_pair("brine", density, kinematic_m2_s=dynamic / density)
    at = np.array([5.0, 80.0])
    np.testing.assert_allclose(by_dynamic.viscosity_m2_s(at), by_kinematic.viscosity_m2_s(at), rtol=1e-12)
    np.testing.assert_allclose(by_dynamic.density_kg_m3(at), density, rtol=0)
    assert by_dynamic.viscosity_standard == 0.02


@pytest.mark.parametrize(
    ("density", "viscosities", "message"),
    [
        (1.2, {"kinematic_m2_s": 1.5e-5}, "1.2 kg/m3: that is a gas"),
        (99.0, {"kinematic_m2_s": 1.5e-5}, "that is a gas"),
        (0.0, {"kinematic_m2_s": 1e-6}, "which no liquid has"),
        (-870.0, {"kinematic_m2_s": 1e-6}, "which no liquid has"),
        (float("nan"), {"kinematic_m2_s": 1e-6}, "which no liquid has"),
        (870_000.0, {"kinematic_m2_s": 1e-6}, "which no liquid has"),
        (870.0, {}, "needs one viscosity"),
        (870.0, {"kinematic_m2_s": 1e-6, "dynamic_pa_s": 1e-3}, "needs one viscosity"),
        (870.0, {"kinematic_m2_s": 32.0}, "which no liquid in a pipe has"),
        (870.0, {"kinematic_m2_s": 0.0}, "which no liquid in a pipe has"),
        (870.0, {"dynamic_pa_s": -0.001}, "which no liquid in a pipe has"),
        (870.0, {"dynamic_pa_s": float("nan")}, "which no liquid in a pipe has"),
    ],
)
def test_a_pair_no_liquid_has_is_refused(density, viscosities, message):
    with pytest.raises(InputError, match=message):
        fixed_pair("oil", density, **viscosities)


def test_without_the_library_the_message_says_how_to_get_it(monkeypatch):
    monkeypatch.setitem(sys.modules, "CoolProp", None)
    with pytest.raises(InputError, match=r'pip install "fieldfit\[liquids\]"'):
        from_library("toluene")


def test_library_water_agrees_with_iapws():
    pytest.importorskip("CoolProp")
    at = np.array([[0.5, 5.0, 15.0], [40.0, 80.0, 99.0]])
    library = from_library("water")
    # 1e-6 is the 1325 Pa between the library's atmosphere and 0.1 MPa, and how it rounds its own constants.
    np.testing.assert_allclose(library.density_kg_m3(at), water().density_kg_m3(at), rtol=2e-6)
    np.testing.assert_allclose(library.viscosity_m2_s(at), water().viscosity_m2_s(at), rtol=2e-5)


def test_library_liquids_and_solutions():
    pytest.importorskip("CoolProp")
    at = np.array([20.0, np.nan, 20.0])
    # MEM, CRC Handbook of Chemistry and Physics: toluene at 20 °C 866.9 kg/m³; 30 % propylene glycol about 1023 kg/m³.
    toluene = from_library("Toluene").density_kg_m3(at)
    assert toluene[0] == toluene[2] == pytest.approx(866.9, abs=0.3)
    assert np.isnan(toluene[1])
    glycol = from_library("Propylene glycol 30 %")
    assert glycol.density_kg_m3(np.array(20.0)) == pytest.approx(1023.0, abs=2.0)
    assert glycol.viscosity_m2_s(np.array(20.0)) > 2.0 * water().viscosity_m2_s(np.array(20.0))
    assert glycol.viscosity_standard == 0.02


@pytest.mark.parametrize(
    ("name", "message"),
    [
        ("tolune", "Did you mean 'Toluene'"),
        ("propylen glycol 30 %", "Did you mean 'propylene glycol'"),
        ("glycerol", "percentage by mass"),
        ("ethylene glycol 90 %", "cannot give"),
        ("acetone", "[Vv]iscosity"),
        ("CO2", "as a liquid at atmospheric pressure"),
        ("", "knows no fluid"),
    ],
)
def test_names_the_library_cannot_serve_are_refused(name, message):
    pytest.importorskip("CoolProp")
    with pytest.raises(InputError, match=message):
        from_library(name)


@pytest.mark.parametrize(
    ("name", "temperature"), [("propane", 20.0), ("ethanol", 90.0), ("ethylene glycol 30 %", -30.0)]
)
def test_a_fluid_that_is_not_liquid_is_refused(name, temperature):
    pytest.importorskip("CoolProp")
    with pytest.raises(InputError, match=rf"{temperature:g} degC, but {name}.*under pressure"):
        from_library(name).density_kg_m3(np.array([temperature]))


def test_the_tables_load_no_library_until_one_is_needed():
    code = (
        "import sys, fieldfit.hydraulics.liquids, fieldfit.hydraulics.materials, fieldfit.hydraulics.pipe_sizes, "
        "fieldfit.hydraulics.fitting_losses; "
        "print(*[name for name in ('chemicals', 'fluids', 'CoolProp', 'scipy') if name in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.split() == []
