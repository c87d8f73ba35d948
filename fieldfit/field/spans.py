"""The range of an instrument, read from a text such as "0-150 psi" or "10 bar"."""

from __future__ import annotations

import re
from dataclasses import dataclass

from fieldfit.errors import InputError
from fieldfit.field.quantities import quantity
from fieldfit.field.unit_spellings import Dimension
from fieldfit.field.units import shown

_WORDS = re.compile(r"\b(?:full[\s-]?scale|f\.?s\.?o?|span|range|u\.?r\.?l\.?|max(?:imum)?)(?=\W|$)", re.IGNORECASE)

_NUMBER = r"[+-]?[0-9]*\.?[0-9]+"
_FROM_TO = re.compile(rf"({_NUMBER})\s*([^\d\s.+-].*?)?\s*(?:-|to|\.\.\.?|…|/)\s*({_NUMBER})\s*(.+)")


@dataclass(frozen=True, slots=True, kw_only=True)
class Span:
    """Range of an instrument."""

    low: float
    """Lower end [SI]."""
    width: float
    """Upper end less the lower one [SI]."""


def span(text: str, dimension: Dimension, example: str) -> Span:
    """Return the range of an instrument; a single value is a range from zero.

    Parameters
    ----------
    text : str
        Range, such as "0-150 psi", "-1 to 9 bar" or "full scale 10 bar".
    dimension : Dimension
        What the instrument measures.
    example : str
        What would be right, for the error.

    Raises
    ------
    InputError
        When there is no range in the text, or it has no width.

    Examples
    --------
    >>> span("-1 to 9 bar", "pressure", "0-10 bar")
    Span(low=-100000.0, width=1000000.0)
    >>> span("full scale (50 L/s)", "flow", "50 L/s")
    Span(low=0.0, width=0.05)
    """
    bare = _WORDS.sub("", text.strip()).strip(" ,;:=")
    bare = re.sub(r"^(?:of|is)\b\s*", "", bare, flags=re.IGNORECASE)
    bare = bare[1:-1] if bare.startswith("(") and bare.endswith(")") else bare
    if not bare:
        seen = f"'{shown(text)}' does not say how much full scale is" if text.strip() else "the range is missing"
        raise InputError(seen, f'Write "{example}".')
    ends = _FROM_TO.fullmatch(bare)
    if ends is None:
        low, high = 0.0, quantity(bare, dimension, example)
    else:
        low = quantity(f"{ends[1]} {ends[2] or ends[4]}", dimension, example)
        high = quantity(f"{ends[3]} {ends[4]}", dimension, example)
    if not high > low:
        raise InputError(f"the range '{shown(text)}' has no width", f'Write "{example}".')
    return Span(low=low, width=high - low)
