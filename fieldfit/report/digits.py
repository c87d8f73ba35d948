"""Numbers with no more digits than their uncertainty deserves."""

from __future__ import annotations

import math

from fieldfit.field.uncertain import Uncertain

COVERAGE = 1.96
"""Standard uncertainties in half a 95 % interval."""


def decimals(half_width: float) -> int:
    """Return how many decimals a value deserves when its 95 % half-width is known.

    Rounding then moves a value by no more than a fifth of its half-width.
    Negative means tens, hundreds and so on.

    Examples
    --------
    >>> decimals(0.07), decimals(0.13), decimals(2.3), decimals(230.0)
    (2, 2, 1, -1)
    """
    power = math.floor(math.log10(half_width))
    leading = round(half_width / 10.0**power, 1)
    if leading >= 9.5:
        power, leading = power + 1, 1.0
    return (1 if leading < 2.5 else 0) - power


def fixed(value: float, places: int) -> str:
    """Return a number with so many decimals, a true minus, and never a minus zero.

    Examples
    --------
    >>> fixed(0.3149, 2), fixed(-0.001, 2), fixed(76214.0, -2), fixed(-1.5, 1)
    ('0.31', '0.00', '76 200', '−1.5')
    """
    rounded = round(value, places) + 0.0
    text = f"{abs(rounded):,.{max(places, 0)}f}".replace(",", " ")
    text = text.replace(" ", "", 1) if abs(rounded) < 9999.5 else text
    return f"−{text}" if rounded < 0.0 else text


def significant(value: float, digits: int = 3) -> str:
    """Return a number to so many significant digits, without an exponent.

    Examples
    --------
    >>> significant(0.0030642), significant(412.3), significant(195489.0), significant(0.0)
    ('0.00306', '412', '195 000', '0')
    """
    if value == 0.0 or not math.isfinite(value):
        return "0" if value == 0.0 else "unknown"
    places = digits - 1 - math.floor(math.log10(abs(value)))
    return fixed(value, places)


def with_unit(text: str, unit: str) -> str:
    """Return text and unit with a space between, or the text alone when there is no unit."""
    return f"{text} {unit}" if unit else text


def span(low: float, high: float, unit: str = "", half_width: float | None = None) -> str:
    """Return a range in words, to the digits its own width deserves or those of a narrower one.

    Examples
    --------
    >>> span(0.2391, 0.3912, "mm"), span(110.14, 114.76), span(0.0, 0.0214, "mm")
    ('0.24 to 0.39 mm', '110.1 to 114.8', '0 to 0.021 mm')
    """
    width = half_width or (high - low) / 2.0
    if width <= 0.0:
        return with_unit(significant(high, 4), unit)
    places = decimals(width)
    if low == 0.0:
        return with_unit(f"0 to {significant(high, 2)}", unit)
    return with_unit(f"{fixed(low, places)} to {fixed(high, places)}", unit)


def value_with_band(best: float, band: tuple[float, float], unit: str = "") -> str:
    """Return a value with its 95 % band in brackets.

    A band far wider on one side gets the digits of each side apart.

    Examples
    --------
    >>> value_with_band(0.3132, (0.2391, 0.3912), "mm")
    '0.31 mm (0.24 to 0.39 mm)'
    >>> value_with_band(112.4, (110.1, 114.8))
    '112.4 (110.1 to 114.8)'
    >>> value_with_band(0.0201, (0.0021, 0.1533), "mm")
    '0.020 mm (0.002 to 0.15 mm)'
    """
    low, high = band
    below, above = best - low, high - best
    if min(below, above) <= 0.0:
        return f"{with_unit(significant(best), unit)} ({span(low, high, unit)})"
    near, far = decimals(below), decimals(above)
    if max(below, above) < 3.0 * min(below, above):
        near = far = max(near, far)
    lower = "0" if low == 0.0 else fixed(low, near)
    value = fixed(best, max(near, far))
    return f"{with_unit(value, unit)} ({lower} to {with_unit(fixed(high, far), unit)})"


def plus_minus(value: float, standard: float) -> str:
    """Return a value with its 95 % half-width, both to the digits it deserves.

    Examples
    --------
    >>> plus_minus(12.3141, 0.0612), plus_minus(0.02961, 0.00031), plus_minus(5.0, 0.0)
    ('12.31 ± 0.12', '0.0296 ± 0.0006', '5')
    """
    if standard <= 0.0 or not math.isfinite(standard):
        return significant(value, 5).rstrip("0").rstrip(".") if math.isfinite(value) else "unknown"
    half_width = COVERAGE * standard
    places = decimals(half_width)
    return f"{fixed(value, places)} ± {fixed(half_width, places)}"


def known(quantity: Uncertain, scale: float = 1.0) -> str:
    """Return a stated quantity with its limit as the user gave it, in a unit `scale` times smaller than SI.

    A rectangular error is given by its limit, a normal one by its 95 % half-width.

    Examples
    --------
    >>> known(Uncertain(value=0.0525, standard=0.0002625 / 3**0.5), 1e3)
    '52.50 ± 0.26'
    >>> known(Uncertain(value=38.2, standard=0.02 / 3**0.5)), known(Uncertain(value=3.0, standard=0.0))
    ('38.20 ± 0.02', '3')
    """
    if quantity.standard <= 0.0:
        return plus_minus(quantity.value * scale, 0.0)
    half_width = quantity.standard * scale * (math.sqrt(3.0) if quantity.shape == "rectangular" else COVERAGE)
    places = -math.floor(math.log10(half_width))
    if abs(round(half_width, places) / half_width - 1.0) > 0.05:
        places += 1
    return f"{fixed(quantity.value * scale, places)} ± {fixed(half_width, places)}"


def limit(value: float) -> str:
    """Return an upper limit to two digits, rounded up so that it stays one.

    Examples
    --------
    >>> limit(0.04121), limit(0.2), limit(1.301)
    ('0.042', '0.20', '1.4')
    """
    places = 1 - math.floor(math.log10(value))
    return fixed(math.ceil(value * 10.0**places - 1e-9) / 10.0**places, places)


def stated(value: float) -> str:
    """Return a tabulated value as tables print it, to two digits without idle zeros.

    Examples
    --------
    >>> stated(0.1), stated(0.0015), stated(140.0)
    ('0.1', '0.0015', '140')
    """
    text = significant(value, 2)
    return text.rstrip("0").rstrip(".") if "." in text else text


def percent(probability: float) -> str:
    """Return a probability or share in words; certainty is never claimed.

    Examples
    --------
    >>> percent(0.413), percent(0.9991), percent(0.001)
    ('41 %', 'over 99 %', 'under 1 %')
    """
    if probability > 0.99:
        return "over 99 %"
    return "under 1 %" if probability < 0.01 else f"{100.0 * probability:.0f} %"


def litres(flow_m3_s: float) -> str:
    """Return a flow to three digits, in L/s or, for a very small one, in mL/s.

    Examples
    --------
    >>> litres(0.0030642), litres(0.000004)
    ('3.06 L/s', '4.00 mL/s')
    """
    if abs(flow_m3_s) < 5e-5:
        return f"{significant(flow_m3_s * 1e6)} mL/s"
    return f"{significant(flow_m3_s * 1e3)} L/s"
