"""How far an instrument may be off, read from what its data sheet or its dial says."""

from __future__ import annotations

import re
from dataclasses import dataclass, replace

from fieldfit.errors import InputError
from fieldfit.field.instrument_classes import named_class
from fieldfit.field.quantities import Spread, part_spread, quantity
from fieldfit.field.spans import span
from fieldfit.field.uncertain import Accuracy
from fieldfit.field.unit_spellings import Dimension
from fieldfit.field.units import shown

_OF_READING = re.compile(
    r"(.+?)\s*(?:of\s+|o\.?\s?)(?:the\s+)?(?:reading|rate|(?:actual|measured|indicated)\s+(?:value|flow)|r\.?)"
    r"|(.+?%)\s*(?:reading|rate|rd|mv)",
    re.IGNORECASE,
)
_SIGN = re.compile(r"^(?:±|\+\s?/\s?-|\+-)\s*")
_JOINTS = re.compile(r"\s*(?:±|\+\s?/\s?-|\+-|\s\+|\+\s)\s*")
_EITHER = re.compile(r"\b(?:or|whichever|max|greater|larger)\b", re.IGNORECASE)
_OF_RANGE = re.compile(r"(.+?%)\s*(?:of\s+)?(?:the\s+)?(.+)", re.DOTALL)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Part:
    """One summand of an accuracy, as limits."""

    gain: float = 0.0
    fixed: float = 0.0
    span: float | None = None


def accuracy(text: str, dimension: Dimension) -> Accuracy:
    """Return how far an instrument may be off.

    Understood are shares of the reading ("0.5 % of reading"), of a range ("0.25 % of 10 bar"), amounts ("± 0.2 L/s"),
    their sums ("0.5 % of reading + 0.1 L/s"), "0" for exactly known, and instrument classes by name ("ASME B40.100
    grade 2A, 0-150 psi", "EN 837-1 class 1.6 of 10 bar", "ISO 4064 class 2, Q2 0.4 L/s"). What is stated is a limit, so
    rectangular [1]_, unless "(k=2)", "(95 %)" or "(standard)" follows. Summands of one kind add up as limits; the share
    of the reading and the fixed part are separate errors.

    Parameters
    ----------
    text : str
        The accuracy.
    dimension : Dimension
        What the instrument measures: "pressure" or "flow".

    Raises
    ------
    InputError
        When it cannot be read, or does not say what a percentage is of.

    References
    ----------
    .. [1] JCGM 100:2008 (GUM), 4.3.7.

    Examples
    --------
    >>> round(accuracy("0.3 % of 50 L/s (k=2)", "flow").fixed, 9)
    7.5e-05
    >>> accuracy("0.5 % of reading (standard)", "flow").gain
    0.005
    """
    plain = " ".join(text.replace("−", "-").replace("–", "-").split())
    if len(plain) > 200:
        raise InputError(f"'{shown(text)}' is too long for an accuracy", _advice(dimension))
    body, spread = part_spread(plain)
    if body.casefold() in {"exact", "exactly known"} or re.fullmatch(r"(?:±\s?)?0+\.?0*(?:\s?%)?", body):
        return Accuracy(text=text.strip())
    by_class = named_class(body, dimension)
    if by_class is not None:
        return replace(by_class, text=text.strip())
    if _EITHER.search(body):
        raise InputError(
            f"'{shown(text)}' leaves a choice", "Write the sum of both with a +, or the one that holds here."
        )
    first, *others = _JOINTS.split(_SIGN.sub("", body))
    return _summed(text, [_part(part, dimension) for part in (first, *others)], spread)


def accuracy_remark(given: Accuracy) -> str:
    """Return a sentence on what an accuracy leaves open; empty where it leaves nothing.

    Examples
    --------
    >>> accuracy_remark(accuracy("ISO 4064 class 2", "flow"))
    "'ISO 4064 class 2' was taken as ±2 % at every flow; write its Q2 behind it to have ±5 % below."
    >>> accuracy_remark(accuracy("0.5 % of reading", "flow"))
    ''
    """
    if "4064" not in given.text or given.low_below > 0.0:
        return ""
    high, low = (1, 3) if given.gain * 3.0**0.5 < 0.015 else (2, 5)
    return f"'{given.text}' was taken as ±{high} % at every flow; write its Q2 behind it to have ±{low} % below."


def _summed(text: str, parts: list[_Part], spread: Spread) -> Accuracy:
    """Return the accuracy that summands make together."""
    spans = {part.span for part in parts if part.span is not None}
    return Accuracy(
        text=text.strip(),
        gain=sum(part.gain for part in parts) / spread.divisor,
        fixed=sum(part.fixed for part in parts) / spread.divisor,
        span=spans.pop() if len(spans) == 1 else None,
        shape=spread.shape,
    )


def _part(text: str, dimension: Dimension) -> _Part:
    """Return one summand of an accuracy."""
    of_reading = _OF_READING.fullmatch(text)
    of_range = _OF_RANGE.fullmatch(text)
    if of_reading:
        return _Part(gain=_share(of_reading[1] or of_reading[2], dimension))
    if of_range:
        width = span(of_range[2], dimension, f"{of_range[1]} of {_RANGE[dimension]}").width
        return _Part(fixed=_share(of_range[1], dimension) * width, span=width)
    if text.endswith("%") or re.fullmatch(r".*%\s*(?:of)?", text):
        choice = f'Write "{shown(text)} of reading" or "{shown(text)} of {_RANGE[dimension]}".'
        raise InputError(f"'{shown(text)}' may be of reading or of full scale", choice)
    if re.fullmatch(r"[+-]?[0-9.]*", text):
        seen = f"'{shown(text)}' has neither a unit nor a percent sign" if text else "no accuracy is written"
        raise InputError(seen, _advice(dimension))
    return _Part(fixed=_not_negative(quantity(text, dimension, _AMOUNT[dimension]), text, dimension))


def _share(text: str, dimension: Dimension) -> float:
    """Return a percentage as a share."""
    share = quantity(text, "ratio", "0.5 %")
    if "%" not in text or share > 1.0:
        raise InputError(f"'{shown(text)}' is no percentage of a reading or a range", _advice(dimension))
    return _not_negative(share, text, dimension)


def _not_negative(limit: float, text: str, dimension: Dimension) -> float:
    """Return a limit that is not negative."""
    if limit < 0.0:
        raise InputError(f"the limit '{shown(text)}' is negative", _advice(dimension))
    return limit


def _advice(dimension: Dimension) -> str:
    """Return how an accuracy is written."""
    return f'Write it like "0.5 % of reading", "0.25 % of {_RANGE[dimension]}" or "± {_AMOUNT[dimension]}".'


_RANGE = {"pressure": "10 bar", "flow": "50 L/s"}
_AMOUNT = {"pressure": "2 kPa", "flow": "0.2 L/s"}
