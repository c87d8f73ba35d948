"""Values with their units, and how far they may be off, read from text."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from statistics import NormalDist

from fieldfit.errors import InputError
from fieldfit.field.uncertain import Shape, Uncertain
from fieldfit.field.unit_spellings import LARGEST, Dimension
from fieldfit.field.units import Unit, is_unit, shown, unit

_NUMBER = r"[+-]?(?:(?:[0-9]+[ -])?[0-9]+/[0-9]+|(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?)"
_QUANTITY = re.compile(rf"({_NUMBER})\s*(.*)", re.DOTALL)
_FEET_AND_INCHES = re.compile(rf"({_NUMBER})\s*(?:ft|foot|feet|'|′|’)[\s-]*({_NUMBER})\s*(?:in|inch|inches|\"|″|”)")
_WITH_COMMA = re.compile(r"[+-]?[0-9][0-9.' ]*,[0-9]")
_PLUS_MINUS = re.compile(r"±|\+\s?/\s?-|\+-")
_LEVEL = re.compile(r"\(\s*([^()]*?)\s*\)\s*$")


@dataclass(frozen=True, slots=True, kw_only=True)
class Spread:
    """What a stated limit stands for: the divisor that makes it a standard uncertainty, and the distribution."""

    divisor: float = math.sqrt(3.0)
    """Limit over standard uncertainty [-]."""
    shape: Shape = "rectangular"
    """Distribution of the error."""


def quantity(text: str, dimension: Dimension, example: str) -> float:
    """Return the SI value of a text such as "412 kPa"; temperatures come out in °C.

    Fractions ("8 1/2 in") and feet with inches ("5 ft 3 in") are understood.

    Parameters
    ----------
    text : str
        Number and unit.
    dimension : Dimension
        What it must measure; a "ratio" may go without a unit.
    example : str
        What would be right here, for the error.

    Raises
    ------
    InputError
        When the number or the unit cannot be read, or the value is beyond anything a pipe can have.

    Examples
    --------
    >>> quantity("52.5 mm", "length", "52.5 mm")
    0.0525
    >>> round(quantity("8 1/2 in", "length", "8 in"), 6)
    0.2159
    """
    text = _plain(text)
    feet = _FEET_AND_INCHES.fullmatch(text) if dimension == "length" else None
    if feet:
        return _checked(_number(feet[1]) * 0.3048 + _number(feet[2]) * 0.0254, text, dimension)
    number, its_unit = _parted(text, dimension, example)
    return _checked(number * its_unit.factor + its_unit.offset, text, dimension)


def uncertain(text: str, dimension: Dimension, example: str, default: str) -> Uncertain:
    """Return a value with its standard uncertainty, from a text such as "52.5 mm ± 0.4 mm".

    A limit is rectangular, so its standard uncertainty is limit/√3 [1]_; behind it, "(k=2)", "(95 %)" or "(standard)"
    make the error normal. The limit may be a share of the value ("± 0.5 %"), except for temperatures, where it is a
    difference. "52.5 ± 0.4 mm" is understood too.

    Parameters
    ----------
    text : str
        Value, and perhaps its limit.
    dimension : Dimension
        What it must measure.
    example : str
        What would be right here, for the error.
    default : str
        Limit where the text has none, such as "1 %"; the result is then marked as assumed.

    Raises
    ------
    InputError
        When any part cannot be read, or the limit is negative.

    References
    ----------
    .. [1] JCGM 100:2008 (GUM), 4.3.7.

    Examples
    --------
    >>> uncertain("52.5 mm ± 0.3 mm (k=2)", "length", "52.5 mm", "1 %").standard
    0.00015
    >>> uncertain("100 mm", "length", "52.5 mm", "3 %").standard * 3**0.5
    0.003
    """
    body, spread = part_spread(_plain(text))
    value_text, *limits = (part.strip() for part in _PLUS_MINUS.split(body))
    if len(limits) > 1 or (not limits and body != _plain(text)):
        raise InputError(f"'{shown(text)}' does not say one limit", f'Write it like "{example} ± 0.5 %".')
    if limits and re.fullmatch(_NUMBER, value_text) and dimension != "ratio":
        value_text += f" {_parted(limits[0], dimension, example)[1].spelling}"
    value = quantity(value_text, dimension, example)
    limit = _limit(limits[0] if limits else default, value, dimension, example)
    return Uncertain(value=value, standard=limit / spread.divisor, shape=spread.shape, assumed=not limits)


def part_spread(text: str) -> tuple[str, Spread]:
    """Return a text without the "(k=2)", "(95 %)" or "(standard)" at its end, and what that means.

    Any other remark in parentheses is left where it stands.

    Raises
    ------
    InputError
        When k or the level is not one that means something.

    Examples
    --------
    >>> part_spread("0.2 L/s (k=2)")
    ('0.2 L/s', Spread(divisor=2.0, shape='normal'))
    >>> round(part_spread("0.2 L/s (95 %)")[1].divisor, 3)
    1.96
    """
    found = _LEVEL.search(text)
    divisor = _divisor(found[1]) if found else None
    if not found or divisor is None:
        return text, Spread()
    shape: Shape = "rectangular" if divisor == Spread().divisor else "normal"
    return text[: found.start()].strip(), Spread(divisor=divisor, shape=shape)


def measures(text: str, dimension: Dimension) -> bool:
    """Return whether the value in a text has a unit of a dimension.

    Examples
    --------
    >>> measures("32 cSt ± 2 %", "kinematic viscosity"), measures("28 cP", "kinematic viscosity")
    (True, False)
    """
    found = _QUANTITY.fullmatch(_PLUS_MINUS.split(part_spread(_plain(text))[0])[0].strip())
    return found is not None and is_unit(found[2], dimension)


def remarks(text: str, dimension: Dimension) -> tuple[str, ...]:
    """Return sentences on what the units in a text leave open, such as which gallon.

    Examples
    --------
    >>> len(remarks("0.3 % of 50 gpm", "flow")), remarks("3 L/s", "flow")
    (1, ())
    """
    spelled = (found[1].strip() for found in re.finditer(rf"{_NUMBER}\s*([^0-9±+,;()]+)", _plain(text)))
    said = (unit(its, dimension).remark for its in spelled if is_unit(its, dimension))
    return tuple(dict.fromkeys(sentence for sentence in said if sentence))


def _plain(text: str) -> str:
    """Return a text with plain signs and single spaces."""
    if len(text) > 200:
        raise InputError(f"'{shown(text)}' is too long for a value with its unit", "Write a number and its unit.")
    return " ".join(text.replace("−", "-").replace("–", "-").split())


def _parted(text: str, dimension: Dimension, example: str) -> tuple[float, Unit]:
    """Return number and unit of a text."""
    found = _QUANTITY.fullmatch(text)
    if _WITH_COMMA.match(text):
        advice = f'Write a decimal point and no thousands separators, such as "{example}".'
        raise InputError(f"'{shown(text)}' has a comma in its number", advice)
    if found is None:
        seen = "nothing is written" if not text else f"'{shown(text)}' does not begin with a number"
        raise InputError(seen, f'Write a number and its unit, such as "{example}".')
    if re.match(r"[0-9]", found[2]):
        raise InputError(f"'{shown(text)}' has a gap in its number", f'Write it in one piece, such as "{example}".')
    if not found[2] and dimension == "ratio":
        return _number(found[1]), unit("-", "ratio")
    if not found[2]:
        raise InputError(f"'{shown(text)}' has no unit", f'Write it with its unit, such as "{example}".')
    number = _number(found[1])
    try:
        its_unit = unit(found[2], dimension)
    except InputError as error:
        raise InputError(error.seen, f'{error.do} Write it like "{example}".') from None
    if its_unit.absolute:
        seen = f"'{shown(text)}' is an absolute pressure, where one over the air's or a difference is wanted"
        raise InputError(seen, f'Write it like "{example}".')
    return number, its_unit


def _number(text: str) -> float:
    """Return the value of a number or of a fraction such as 8 1/2."""
    if "/" not in text:
        return float(text)
    whole, _, fraction = text.lstrip("+-").replace("-", " ").rpartition(" ")
    above, below = (float(part) for part in fraction.split("/"))
    if below == 0.0:
        raise InputError(f"'{shown(text)}' divides by zero", "Write a number.")
    return (-1.0 if text.startswith("-") else 1.0) * (float(whole or 0.0) + above / below)


def _checked(value: float, text: str, dimension: Dimension) -> float:
    """Return a value that a pipe may have."""
    if dimension == "temperature" and value < -273.15:
        raise InputError(f"'{shown(text)}' is below absolute zero", "Check the number and its unit.")
    if not abs(value) <= LARGEST[dimension]:
        raise InputError(f"'{shown(text)}' is beyond any pipe", "Check the number and its unit.")
    return value


def _limit(text: str, value: float, dimension: Dimension, example: str) -> float:
    """Return a limit in SI units, from a share of the value or an amount of its own."""
    share = text.endswith("%")
    if share and dimension == "temperature":
        raise InputError(f"'{shown(text)}' of a temperature means nothing", f'Write "{example} ± 1 degC".')
    if re.fullmatch(r"[+-]?0*\.?0*", text) and re.search("0", text):
        return 0.0
    if share:
        limit = quantity(text, "ratio", "0.5 %") * abs(value)
    else:
        number, its_unit = _parted(text, dimension, example)
        limit = _checked(number * its_unit.factor, text, dimension)
    if limit < 0.0:
        raise InputError(f"the limit '{shown(text)}' is negative", f'Write "{example} ± 0.5 %".')
    return limit


def _divisor(text: str) -> float | None:
    """Return limit over standard uncertainty for a remark such as "k=2" or "95 %"; None for any other remark."""
    folded = "".join(text.casefold().split())
    named = {"standard": 1.0, "limit": math.sqrt(3.0), "rectangular": math.sqrt(3.0)}
    if folded in named:
        return named[folded]
    coverage = re.fullmatch(r"k=([0-9]*\.?[0-9]+)", folded)
    level = re.fullmatch(r"([0-9]*\.?[0-9]+)%", folded)
    if coverage and 0.1 <= float(coverage[1]) <= 10.0:
        return float(coverage[1])
    if level and 50.0 <= float(level[1]) <= 99.99:
        return NormalDist().inv_cdf(0.5 + float(level[1]) / 200.0)
    if coverage or level:
        raise InputError(f"'({shown(text)})' is no usable coverage", 'Write "(k=2)", "(95 %)" or "(standard)".')
    return None
