import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from fieldfit.errors import InputError
from fieldfit.field.accuracy import accuracy, accuracy_remark

ROOT_3 = 3.0**0.5


@pytest.mark.parametrize(
    ("text", "gain_percent", "fixed_l_s", "span_l_s"),
    [
        ("0.5 % of reading", 0.5, 0.0, None),
        ("± 0.5% of the reading", 0.5, 0.0, None),
        ("+/- 0.5 % o.r.", 0.5, 0.0, None),
        ("0.5 % of rate", 0.5, 0.0, None),
        ("0.3 % of 50 L/s", 0.0, 0.15, 50.0),
        ("0.3 % of full scale (50 L/s)", 0.0, 0.15, 50.0),
        ("0.3 % FS 50 L/s", 0.0, 0.15, 50.0),
        ("0.3 % of 0-180 m3/h", 0.0, 0.15, 50.0),
        ("± 0.2 L/s", 0.0, 0.2, None),
        ("0.2 L/s", 0.0, 0.2, None),
        ("0.5 % of reading + 0.1 L/s", 0.5, 0.1, None),
        ("0.5 % of reading ± 0.1 L/s", 0.5, 0.1, None),
        ("0.5 % of reading + 0.3 % of 50 L/s", 0.5, 0.15, 50.0),
        ("0.1 L/s + 0.3 % of 50 L/s", 0.0, 0.25, 50.0),
        ("0", 0.0, 0.0, None),
        ("± 0 %", 0.0, 0.0, None),
        ("exact", 0.0, 0.0, None),
    ],
)
def test_forms_of_a_meters_accuracy(text, gain_percent, fixed_l_s, span_l_s):
    found = accuracy(text, "flow")
    assert found.gain * ROOT_3 == pytest.approx(gain_percent / 100.0)
    assert found.fixed * ROOT_3 == pytest.approx(fixed_l_s / 1000.0)
    assert found.span == (None if span_l_s is None else pytest.approx(span_l_s / 1000.0))
    assert (found.text, found.shape) == (text, "rectangular")


@pytest.mark.parametrize(
    ("text", "standard"),
    [
        ("1 % of reading (k=2)", 0.005),
        ("1 % of reading (95 %)", 0.01 / 1.959963984540054),
        ("1 % of reading (standard)", 0.01),
    ],
)
def test_coverage_makes_the_error_normal(text, standard):
    found = accuracy(text, "flow")
    assert (found.gain, found.shape) == (pytest.approx(standard), "normal")


def test_range_with_an_en_dash_and_below_zero():
    assert accuracy("ASME B40.100 grade 2A, 0–150 psi", "pressure").fixed * ROOT_3 == pytest.approx(
        0.75 * 6894.757293168361
    )
    compound = accuracy("ASME B40.100 grade B, -1 to 9 bar", "pressure")
    assert compound.standard_at(np.array([4e5])) * ROOT_3 == pytest.approx([30e3])  # thirds only where zero is an end
    assert accuracy("0.25 % of -30 inHg to 100 psi", "pressure").span == pytest.approx(
        30 * 3386.3886 + 689475.7293, rel=1e-6
    )


@pytest.mark.parametrize(
    "text",
    [
        "EN 837-1 class 1.6 of 10 bar",
        "EN837-1 cl. 1.6, 0...10 bar",
        "en 837 1.6 (10 bar)",
        "EN 837-1 class 1.6, range 10 bar",
    ],
)
def test_a_class_may_be_written_in_several_ways(text):
    assert accuracy(text, "pressure").fixed * ROOT_3 == pytest.approx(16e3)


def test_meter_class_without_q2_says_what_was_taken():
    bare = accuracy("ISO 4064 class 1", "flow")
    assert accuracy_remark(bare).startswith("'ISO 4064 class 1' was taken as ±1 % at every flow")
    assert bare.standard_at(np.array([1e-9])) * ROOT_3 == pytest.approx([1e-11])
    assert accuracy_remark(accuracy("ISO 4064 class 1, Q2 = 0.4 L/s", "flow")) == ""


@pytest.mark.parametrize(
    ("text", "dimension", "begins"),
    [
        ("0.5 %", "flow", "'0.5 %' may be of reading or of full scale"),
        ("0.5 % of full scale", "flow", "'full scale' does not say how much full scale is"),
        ("0.5 % FS", "pressure", "'FS' does not say how much full scale is"),
        ("0.5", "flow", "'0.5' has neither a unit nor a percent sign"),
        ("", "flow", "no accuracy is written"),
        ("(k=2)", "flow", "no accuracy is written"),
        ("0.5 of reading", "flow", "'0.5' is no percentage"),
        ("150 % of reading", "flow", "'150 %' is no percentage"),
        ("-0.5 % of reading", "flow", "the limit '-0.5 %' is negative"),
        ("-0.2 L/s", "flow", "the limit '-0.2 L/s' is negative"),
        ("0.5 % of 10 bar", "flow", "unit 'bar' measures pressure, where flow is wanted"),
        ("0.5 % of 0 bar", "pressure", "the range '0 bar' has no width"),
        ("0.5 % of 10-5 bar", "pressure", "the range '10-5 bar' has no width"),
        ("0.5 % of reading or 0.1 L/s", "flow", "'0.5 % of reading or 0.1 L/s' leaves a choice"),
        ("ISO 4064 class 2", "pressure", "'ISO 4064 class 2' is a class of instruments for flow"),
        ("EN 837-1 class 1.5 of 10 bar", "pressure", "'EN 837-1 class 1.5 of 10 bar' names no class of that standard"),
        ("EN 837-1", "pressure", "'EN 837-1' names no class of that standard"),
        ("ASME B40.100 grade 2A", "pressure", "the range is missing"),
        ("ISO 4064 class 2, new", "flow", "'new' behind the meter's class is not understood"),
    ],
)
def test_refused_with_what_was_seen(text, dimension, begins):
    with pytest.raises(InputError) as caught:
        accuracy(text, dimension)
    assert str(caught.value).startswith(begins)


WORDS = [
    "0.5 %",
    "%",
    "of",
    "reading",
    "full scale",
    "50 L/s",
    "10 bar",
    "±",
    "+",
    "(k=2)",
    "ASME B40.100",
    "grade",
    "2A",
    "EN 837-1",
    "class",
    "1.6",
    "ISO 4064",
    "Q2",
    "0-150 psi",
    "-1",
]


@given(
    text=st.text(max_size=30) | st.lists(st.sampled_from(WORDS), max_size=6).map(" ".join),
    dimension=st.sampled_from(["flow", "pressure"]),
)
def test_any_text_is_an_accuracy_or_an_input_error(text, dimension):
    try:
        found = accuracy(text, dimension)
    except InputError:
        return
    standard = found.standard_at(np.array([1e-3, 1.0, 1e5]))
    assert np.all(np.isfinite(standard) & (standard >= 0.0))
