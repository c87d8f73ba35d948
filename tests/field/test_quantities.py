from collections import Counter
from typing import get_args

import pint
import pytest
from hypothesis import given
from hypothesis import strategies as st

from fieldfit.errors import InputError
from fieldfit.field.quantities import quantity, remarks, uncertain
from fieldfit.field.unit_spellings import LARGEST, OFFERED, SI, TRAPS, Dimension, spellings
from fieldfit.field.units import unit

DIMENSIONS = get_args(Dimension)
ROOT_3 = 3.0**0.5


@pytest.fixture(scope="module")
def pint_units():
    """pint's own list of units, which fieldfit's short list does not come from."""
    return pint.UnitRegistry()


AGAINST_PINT = [
    ("psi", "pressure", "psi"),
    ("psig", "pressure", "psi"),
    ("lb/in²", "pressure", "pound_force_per_square_inch"),
    ("bar", "pressure", "bar"),
    ("barg", "pressure", "bar"),
    ("bar(g)", "pressure", "bar"),
    ("mbar", "pressure", "millibar"),
    ("Pa", "pressure", "pascal"),
    ("hPa", "pressure", "hectopascal"),
    ("kPa", "pressure", "kilopascal"),
    ("kPa gauge", "pressure", "kilopascal"),
    ("MPa", "pressure", "megapascal"),
    ("kg/cm²", "pressure", "kilogram_force / centimeter ** 2"),
    ("kgf/cm2", "pressure", "kilogram_force / centimeter ** 2"),
    ("mH2O", "pressure", "100 * centimeter_H2O"),
    ("m H₂O", "pressure", "100 * centimeter_H2O"),
    ("ftH2O", "pressure", "foot_H2O"),
    ("inHg", "pressure", "inch_Hg"),
    ("mmHg", "pressure", "millimeter_Hg"),
    ("gpm", "flow", "gallon / minute"),
    ("US gpm", "flow", "gallon / minute"),
    ("imperial gpm", "flow", "imperial_gallon / minute"),
    ("igpm", "flow", "imperial_gallon / minute"),
    ("UK gpm", "flow", "imperial_gallon / minute"),
    ("UK gal/min", "flow", "imperial_gallon / minute"),
    ("L/s", "flow", "liter / second"),
    ("l/s", "flow", "liter / second"),
    ("l s-1", "flow", "liter / second"),
    ("L/min", "flow", "liter / minute"),
    ("m3/h", "flow", "meter ** 3 / hour"),
    ("m³/h", "flow", "meter ** 3 / hour"),
    ("m³·h⁻¹", "flow", "meter ** 3 / hour"),
    ("m^3/hr", "flow", "meter ** 3 / hour"),
    ("m3 per day", "flow", "meter ** 3 / day"),
    ("ML/d", "flow", "megaliter / day"),
    ("Ml/d", "flow", "megaliter / day"),
    ("MGD", "flow", "1e6 * gallon / day"),
    ("ft3/s", "flow", "foot ** 3 / second"),
    ("cfs", "flow", "foot ** 3 / second"),
    ("mm", "length", "millimeter"),
    ("cm", "length", "centimeter"),
    ("km", "length", "kilometer"),
    ("in", "length", "inch"),
    ('"', "length", "inch"),
    ("″", "length", "inch"),
    ("ft", "length", "foot"),
    ("'", "length", "foot"),
    ("miles", "length", "mile"),
    ("kg/m³", "density", "kilogram / meter ** 3"),
    ("g/cm3", "density", "gram / centimeter ** 3"),
    ("lb/ft3", "density", "pound / foot ** 3"),
    ("cP", "dynamic viscosity", "centipoise"),
    ("mPa·s", "dynamic viscosity", "millipascal * second"),
    ("Pa s", "dynamic viscosity", "pascal * second"),
    ("lb/(ft s)", "dynamic viscosity", "pound / foot / second"),
    ("cSt", "kinematic viscosity", "centistokes"),
    ("mm²/s", "kinematic viscosity", "millimeter ** 2 / second"),
    ("ft2/s", "kinematic viscosity", "foot ** 2 / second"),
    ("min", "duration", "minute"),
    ("days", "duration", "day"),
    ("ft/s", "velocity", "foot / second"),
]


@pytest.mark.parametrize(("spelling", "dimension", "expression"), AGAINST_PINT)
def test_spelling_means_what_pint_says(pint_units, spelling, dimension, expression):
    expected = pint_units.Quantity(1.0, "") * pint_units.parse_expression(expression)
    # pint's water and mercury columns carry five or six digits.
    loose = 2e-6 if "H2O" in expression or "Hg" in expression else 1e-14
    assert unit(spelling, dimension).factor == pytest.approx(
        expected.to(SI[dimension].replace("celsius", "degC")).m, rel=loose
    )


@pytest.mark.parametrize("dimension", DIMENSIONS)
def test_every_spelling_is_a_unit_and_means_one_thing(dimension):
    every = [key for keys in spellings(dimension).values() for key in keys.split()]
    assert [key for key, count in Counter(every).items() if count > 1] == []
    for key in set(every) - set(TRAPS.get(dimension, {})):
        assert unit(key, dimension).factor > 0.0
    assert all(unit(offered, dimension) for offered in OFFERED[dimension])


@pytest.mark.parametrize(
    ("text", "celsius"),
    [
        ("18 degC", 18.0),
        ("18 °C", 18.0),
        ("18 C", 18.0),
        ("64.4 degF", 18.0),
        ("64.4 F", 18.0),
        ("291.15 K", 18.0),
        ("-40 °F", -40.0),
    ],
)
def test_temperatures_come_out_in_celsius(text, celsius):
    assert quantity(text, "temperature", "18 degC") == pytest.approx(celsius, abs=1e-12)


@pytest.mark.parametrize(
    ("text", "metres"),
    [
        ("8 1/2 in", 0.2159),
        ("1/2 in", 0.0127),
        ("5 ft 3 in", 1.6002),
        ("5' 3\"", 1.6002),
        ("5'-3 1/2\"", 1.6129),
        ("1e3 mm", 1.0),
        (".5m", 0.5),
    ],
)
def test_lengths_as_a_fitter_writes_them(text, metres):
    assert quantity(text, "length", "52.5 mm") == pytest.approx(metres, rel=1e-12)


@pytest.mark.parametrize(
    ("text", "dimension", "begins"),
    [
        ("52.5", "length", "'52.5' has no unit"),
        ("52,5 mm", "length", "'52,5 mm' has a comma in its number"),
        ("1,200 m", "length", "'1,200 m' has a comma in its number"),
        ("1 200 m", "length", "'1 200 m' has a gap in its number"),
        ("nan mm", "length", "'nan mm' does not begin with a number"),
        ("inf mm", "length", "'inf mm' does not begin with a number"),
        ("1e400 mm", "length", "'1e400 mm' is beyond any pipe"),
        ("1e30 m", "length", "'1e30 m' is beyond any pipe"),
        ("1/0 in", "length", "'1/0' divides by zero"),
        ("٣ mm", "length", "'٣ mm' does not begin with a number"),
        ("", "length", "nothing is written"),
        ("12 kPa", "length", "unit 'kPa' measures pressure, where length is wanted"),
        ("12 m", "pressure", "unit 'm' is a length"),
        ("12 psia", "pressure", "'12 psia' is an absolute pressure"),
        ("12 mPa", "pressure", "unit 'mPa' is thousandths of a pascal"),
        ("12 mpa", "pressure", "unit 'mpa' may be millions or thousandths of a pascal"),
        ("12 ml/d", "flow", "unit 'ml/d' may be millions or thousandths of a litre"),
        ("12 ML/S", "flow", "'ML/S' is no unit of flow that fieldfit knows"),
        ("-300 degC", "temperature", "'-300 degC' is below absolute zero"),
        ("7" * 300 + " mm", "length", "'777"),
    ],
)
def test_refused_with_what_was_seen(text, dimension, begins):
    with pytest.raises(InputError) as caught:
        quantity(text, dimension, "52.5 mm")
    assert str(caught.value).startswith(begins)


def test_error_shows_an_example_and_the_near_miss():
    with pytest.raises(InputError, match="Did you mean 'kPa'") as caught:
        quantity("12 kPb", "pressure", "412 kPa")
    assert 'Write it like "412 kPa".' in caught.value.do


def test_bare_gallons_are_said_and_named_ones_are_not():
    assert "US gallons" in remarks("50 gpm ± 1 %", "flow")[0]
    assert "US gallons" in remarks("0.3 % of 2 MGD", "flow")[0]
    assert remarks("50 US gpm", "flow") == remarks("50 imperial gpm", "flow") == remarks("3 L/s", "flow") == ()


@pytest.mark.parametrize(
    ("text", "standard", "shape"),
    [
        ("52.5 mm ± 0.4 mm", 0.4e-3 / ROOT_3, "rectangular"),
        ("52.5 mm +/- 0.4 mm", 0.4e-3 / ROOT_3, "rectangular"),
        ("52.5 ± 0.4 mm", 0.4e-3 / ROOT_3, "rectangular"),
        ("52.5 mm ± 0.5 %", 0.2625e-3 / ROOT_3, "rectangular"),
        ("52.5 mm ±0.3 mm (k=2)", 0.15e-3, "normal"),
        ("52.5 mm ±0.3 mm (k = 3)", 0.1e-3, "normal"),
        ("52.5 mm ± 0.3 mm (95 %)", 0.3e-3 / 1.959963984540054, "normal"),
        ("52.5 mm ± 0.3 mm (standard)", 0.3e-3, "normal"),
        ("52.5 mm ± 0.3 mm (limit)", 0.3e-3 / ROOT_3, "rectangular"),
        ("52.5 mm ± 1/16 in", 0.0015875 / ROOT_3, "rectangular"),
        ("52.5 mm ± 0", 0.0, "rectangular"),
    ],
)
def test_limits_become_standard_uncertainties(text, standard, shape):
    found = uncertain(text, "length", "52.5 mm", "1 %")
    assert (found.value, found.standard) == (pytest.approx(52.5e-3, rel=1e-14), pytest.approx(standard, rel=1e-12))
    assert (found.shape, found.assumed) == (shape, False)


def test_default_limit_is_marked_as_assumed():
    found = uncertain("100 mm", "length", "52.5 mm", "1 %")
    assert (found.standard, found.assumed) == (pytest.approx(1e-3 / ROOT_3), True)


@pytest.mark.parametrize("text", ["18 degC ± 1 degC", "18 degC ± 1 K", "18 °C ± 1.8 degF", "64.4 degF ± 1.8 degF"])
def test_temperature_limits_are_differences(text):
    found = uncertain(text, "temperature", "18 degC", "1 degC")
    assert (found.value, found.standard) == (pytest.approx(18.0, abs=1e-12), pytest.approx(1.0 / ROOT_3))


@pytest.mark.parametrize(
    ("text", "begins"),
    [
        ("52.5 mm ± 0.3", "'0.3' has no unit"),
        ("52.5 mm ± -1 mm", "the limit '-1 mm' is negative"),
        ("52.5 mm ± 1 mm ± 2 mm", "'52.5 mm ± 1 mm ± 2 mm' does not say one limit"),
        ("52.5 mm (95 %)", "'52.5 mm (95 %)' does not say one limit"),
        ("52.5 mm ± 1 mm (k=0)", "'(k=0)' is no usable coverage"),
        ("52.5 mm ± 1 mm (20 %)", "'(20 %)' is no usable coverage"),
        ("52.5 mm ± 1 mm (roughly)", "'mm (roughly)' is no unit of length"),
        ("52.5 mm ± 1 kPa", "unit 'kPa' measures pressure"),
    ],
)
def test_limits_that_say_nothing_are_refused(text, begins):
    with pytest.raises(InputError) as caught:
        uncertain(text, "length", "52.5 mm", "1 %")
    assert str(caught.value).startswith(begins)


@given(
    value=st.floats(min_value=1e-3, max_value=1e3),
    spelling=st.sampled_from([("kPa", 1e3), ("psi", 6894.757293168361), ("bar", 1e5), ("kg/cm²", 98066.5)]),
)
def test_any_number_survives_writing_and_reading(value, spelling):
    name, factor = spelling
    assert quantity(f"{value!r} {name}", "pressure", "412 kPa") == pytest.approx(value * factor, rel=1e-14)


@given(
    text=st.text(max_size=40) | st.from_regex(r"[-+0-9.,eE/ ]{0,8} ?[a-zA-Z°³/%'\"()±=]{0,8}", fullmatch=True),
    dimension=st.sampled_from(DIMENSIONS),
)
def test_any_text_is_a_plausible_value_or_an_input_error(text, dimension):
    for read in (quantity, lambda *words: uncertain(*words, "1 %").value):
        try:
            value = read(text, dimension, "52.5 mm")
        except InputError:
            continue
        assert abs(value) <= LARGEST[dimension]
