"""Accuracy classes of gauges and water meters, by the names their standards give them."""

from __future__ import annotations

import math
import re
from collections.abc import Mapping

from fieldfit.errors import InputError
from fieldfit.field.quantities import quantity
from fieldfit.field.spans import span
from fieldfit.field.uncertain import Accuracy
from fieldfit.field.unit_spellings import Dimension
from fieldfit.field.units import shown

ASME_GRADES: Mapping[str, tuple[float, float]] = {
    "4A": (0.001, 0.001),
    "3A": (0.0025, 0.0025),
    "2A": (0.005, 0.005),
    "1A": (0.01, 0.01),
    "A": (0.02, 0.01),
    "B": (0.03, 0.02),
    "C": (0.04, 0.03),
    "D": (0.05, 0.05),
}
"""ASME B40.100: limit as a share of the span in the outer thirds of the scale, and in the middle third."""

EN_CLASSES: Mapping[str, float] = {text: float(text) / 100.0 for text in ("0.1", "0.25", "0.6", "1", "1.6", "2.5", "4")}
"""EN 837-1: limit as a share of full scale."""

METER_CLASSES: Mapping[str, tuple[float, float]] = {"1": (0.01, 0.03), "2": (0.02, 0.05)}
"""ISO 4064 up to 30 °C: limit as a share of the reading from the flow Q2 up, and below it."""

_ASME = re.compile(r"(?:ASME\s*)?B\s?40\.1(?:00)?\b[\s,:]*(?:(?:accuracy\s+)?(?:grade|class)\s*)?(\w+)?(.*)", re.I)
_EN = re.compile(r"EN\s?837(?:-[123])?\b[\s,:]*(?:(?:accuracy\s+)?(?:class|cl\.?|kl\.?)\s*)?([\d.]+)?(.*)", re.I)
_ISO = re.compile(
    r"(?:ISO|OIML\s?R\s?49|EN\s?ISO)\s?(?:4064)?(?:-1)?\b[\s,:]*(?:(?:accuracy\s+)?class\s*)?(\w+)?(.*)", re.I
)

_ROOT_3 = math.sqrt(3.0)


def named_class(text: str, dimension: Dimension) -> Accuracy | None:
    """Return the accuracy of an instrument class, or None where the text names no standard.

    Gauges by ASME B40.100 [1]_ grade (4A 3A 2A 1A A B C D; A, B and C promise less error in the middle third of the
    scale) or by EN 837-1 [2]_ class, each with its range; water meters by ISO 4064-1 [3]_ class for water up to 30 °C,
    with the flow Q2 below which the wider limit holds. Classes are limits, so rectangular. On a scale that does not
    begin at zero the outer thirds' limit is used all over.

    Parameters
    ----------
    text : str
        Standard, class and range, such as "EN 837-1 class 1.6 of 10 bar".
    dimension : Dimension
        What the instrument measures.

    Raises
    ------
    InputError
        When the standard has no such class, measures something else, or the range is missing.

    References
    ----------
    .. [1] ASME B40.100, Pressure Gauges and Gauge Attachments, accuracy grades.
    .. [2] EN 837-1, Bourdon tube pressure gauges, accuracy classes.
    .. [3] ISO 4064-1, Water meters for cold potable water and hot water, maximum permissible errors.

    Examples
    --------
    >>> round(named_class("EN 837-1 class 1.6 of 10 bar", "pressure").fixed * 3**0.5, 6)
    16000.0
    >>> named_class("0.5 % of reading", "flow") is None
    True
    """
    for pattern, measures, build in ((_ASME, "pressure", _asme), (_EN, "pressure", _en), (_ISO, "flow", _iso)):
        found = pattern.fullmatch(text)
        if found and dimension != measures:
            seen = f"'{shown(text)}' is a class of instruments for {measures}, where {dimension} is wanted"
            raise InputError(seen, 'Write the accuracy out, such as "0.5 % of reading".')
        if found:
            return build(text, found[1] or "", found[2])
    return None


def _asme(text: str, grade: str, rest: str) -> Accuracy:
    """Return the accuracy of a gauge by ASME grade."""
    outer, middle = ASME_GRADES[_known(text, grade.upper(), ASME_GRADES, "ASME B40.100 grade 2A, 0-150 psi")]
    scale = span(_after(rest), "pressure", f"ASME B40.100 grade {grade.upper()}, 0-150 psi")
    return Accuracy(
        text=text,
        fixed=outer * scale.width / _ROOT_3,
        span=scale.width,
        middle_fixed=middle * scale.width / _ROOT_3 if middle < outer and scale.low == 0.0 else None,
    )


def _en(text: str, name: str, rest: str) -> Accuracy:
    """Return the accuracy of a gauge by EN class."""
    share = EN_CLASSES[_known(text, name.removesuffix(".0"), EN_CLASSES, "EN 837-1 class 1.6 of 10 bar")]
    scale = span(_after(rest), "pressure", f"EN 837-1 class {name} of 10 bar")
    return Accuracy(text=text, fixed=share * scale.width / _ROOT_3, span=scale.width)


def _iso(text: str, name: str, rest: str) -> Accuracy:
    """Return the accuracy of a water meter by ISO class."""
    upper, lower = METER_CLASSES[_known(text, name, METER_CLASSES, "ISO 4064 class 2, Q2 0.4 L/s")]
    after = _after(rest)
    threshold = re.fullmatch(r"Q\s?_?(?:2|₂)\s*[=:]?\s*(.+)", after, re.IGNORECASE)
    if after and threshold is None:
        raise InputError(f"'{shown(after)}' behind the meter's class is not understood", 'Write "Q2 0.4 L/s" there.')
    return Accuracy(
        text=text,
        gain=upper / _ROOT_3,
        low_below=quantity(threshold[1], "flow", "0.4 L/s") if threshold else 0.0,
        low_gain=lower / _ROOT_3,
    )


def _known(text: str, name: str, classes: Mapping[str, object], example: str) -> str:
    """Return the name of a class that the standard has."""
    if name in classes:
        return name
    advice = f'Classes are {", ".join(classes)}: write it like "{example}".'
    raise InputError(f"'{shown(text)}' names no class of that standard", advice)


def _after(rest: str) -> str:
    """Return what stands behind a class, without the joining words."""
    return re.sub(r"^(?:of|on|with|range|scale|at)\b\s*", "", rest.strip(" ,;:"), flags=re.IGNORECASE)
