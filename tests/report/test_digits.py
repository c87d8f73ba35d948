"""Numbers carry no more digits than they deserve."""

import math
import re

import pytest
from hypothesis import given
from hypothesis import strategies as st

from fieldfit.report import digits

VALUES = st.floats(min_value=1e-5, max_value=1e6)


@given(value=VALUES, share=st.floats(min_value=1e-3, max_value=0.9))
def test_rounding_moves_a_value_by_at_most_a_fifth_of_its_half_width(value, share):
    half_width = share * value
    rounded = float(digits.fixed(value, digits.decimals(half_width)).replace(" ", ""))
    assert abs(rounded - value) <= 0.2 * half_width * (1 + 1e-6) + 1e-12 * value


@given(half_width=VALUES)
def test_a_half_width_keeps_one_or_two_digits(half_width):
    text = digits.fixed(half_width, digits.decimals(half_width)).replace(" ", "")
    kept = text.replace(".", "").strip("0") if "." in text else text.rstrip("0")
    assert 1 <= len(kept.lstrip("0")) <= 2


@given(value=VALUES)
def test_a_limit_is_never_rounded_below_itself(value):
    assert float(digits.limit(value).replace(" ", "")) >= value * (1 - 1e-8)


@pytest.mark.parametrize("probability", [0.0, 1e-9, 0.3, 0.5, 0.994, 0.9999, 1.0])
def test_certainty_is_never_claimed(probability):
    text = digits.percent(probability)
    assert text not in ("0 %", "100 %")
    assert re.fullmatch(r"(over 99|under 1|\d{1,2}) %", text)


def test_a_range_far_wider_on_one_side_gets_the_digits_of_each_side():
    assert digits.value_with_band(0.0201, (0.0021, 0.1533), "mm") == "0.020 mm (0.002 to 0.15 mm)"


def test_a_range_without_width_does_not_divide_by_it():
    assert digits.value_with_band(0.31, (0.31, 0.31), "mm") == "0.310 mm (0.3100 mm)"


def test_a_minus_is_a_minus_and_never_stands_before_zero():
    assert digits.fixed(-0.0004, 2) == "0.00"
    assert digits.fixed(-12.3, 1) == "−12.3"


def test_what_is_not_a_number_is_called_unknown():
    assert digits.significant(math.nan) == "unknown"
    assert digits.plus_minus(math.nan, math.nan) == "unknown"
