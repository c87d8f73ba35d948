"""The raw signal of a transmitter, such as 4-20 mA: what it stands for, and when it is a fault."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

from fieldfit.errors import InputError, near_miss
from fieldfit.field.spans import span
from fieldfit.field.unit_spellings import ABSOLUTE, Dimension
from fieldfit.field.units import is_unit, shown, unit

Quantity = Literal["mA", "V"]
SIGNALS: Mapping[str, tuple[Quantity, float, float]] = {
    "4-20 mA": ("mA", 4.0, 20.0),
    "0-20 mA": ("mA", 0.0, 20.0),
    "0-10 V": ("V", 0.0, 10.0),
    "2-10 V": ("V", 2.0, 10.0),
    "1-5 V": ("V", 1.0, 5.0),
    "0-5 V": ("V", 0.0, 5.0),
}
"""Signals by name: what is measured, and its value at the lower and upper end of the range."""
ELECTRIC: Mapping[str, tuple[Quantity, float]] = {
    "ma": ("mA", 1.0),
    "a": ("mA", 1000.0),
    "v": ("V", 1.0),
    "volt": ("V", 1.0),
    "volts": ("V", 1.0),
    "vdc": ("V", 1.0),
    "mv": ("V", 0.001),
    "madc": ("mA", 1.0),
}
"""Units of signals, without capitals, with what they measure and their size."""
LOW_SHARE = 0.9
HIGH_SHARE = 1.05
"""A transmitter that fails drives its signal under 3.6 mA or over 21 mA (NAMUR NE 43); other signals in proportion."""
DEAD_ZERO_SHARE = 0.025
"""A signal that begins at 0 may fall this share of its width below it; more is a fault."""

_RANGE_UNIT = re.compile(r"(.*[0-9])\s*([^0-9]+)", re.DOTALL)


@dataclass(frozen=True, slots=True, kw_only=True)
class RawSignal:
    """A channel that was logged as a signal."""

    name: str
    """Name of the signal, such as "4-20 mA"."""
    measures: Dimension
    """What it stands for: pressure, flow or velocity."""
    low: float
    """Value at the signal's lower end [SI]."""
    width: float
    """Value at the upper end less that [SI]."""
    absolute: bool = False
    """Whether the range is one of absolute pressure."""

    @property
    def quantity(self) -> Quantity:
        """What the logger measured."""
        return SIGNALS[self.name][0]

    @property
    def line(self) -> tuple[float, float]:
        """SI value per unit of the signal, and SI value at a signal of zero."""
        _, first, last = SIGNALS[self.name]
        slope = self.width / (last - first)
        return slope, self.low - slope * first

    @property
    def sound(self) -> tuple[float, float]:
        """Least and greatest signal that is no fault."""
        _, first, last = SIGNALS[self.name]
        lowest = LOW_SHARE * first if first > 0.0 else -DEAD_ZERO_SHARE * last
        return lowest, HIGH_SHARE * last


def raw_signal(name: str, its_range: str, dimensions: tuple[Dimension, ...]) -> RawSignal:
    """Return what a signal stands for.

    Parameters
    ----------
    name : str
        The signal, such as "4-20 mA".
    its_range : str
        Range of the transmitter, such as "0 to 10 bar".
    dimensions : tuple of str
        What the range may be of, the usual one first.

    Raises
    ------
    InputError
        When the signal is not known, or the range cannot be read.

    Examples
    --------
    >>> signal = raw_signal("4-20 mA", "0 to 10 bar", ("pressure",))
    >>> signal.line, signal.sound
    ((62500.0, -250000.0), (3.6, 21.0))
    """
    body, absolute = _gauge_range(its_range)
    ends = _RANGE_UNIT.fullmatch(body.strip())
    fits = [dimension for dimension in dimensions if ends and is_unit(ends[2], dimension)]
    measures = fits[0] if fits else dimensions[0]
    example = {"pressure": "0 to 10 bar", "flow": "0 to 50 L/s"}[dimensions[0]]
    if ends is None:
        raise InputError(f"the range '{shown(its_range)}' has no unit", f'Write it like "{example}".')
    ranged = span(body, measures, example)
    return RawSignal(name=signal_name(name), measures=measures, low=ranged.low, width=ranged.width, absolute=absolute)


def signal_name(text: str) -> str:
    """Return the name of a signal as the list has it.

    Raises
    ------
    InputError
        When it is none of the list.

    Examples
    --------
    >>> signal_name("4...20mA"), signal_name("0 to 10 V")
    ('4-20 mA', '0-10 V')
    """
    folded = re.sub(r"\s*(?:-|–|to|\.\.\.?|…|/)\s*", "-", text.casefold())
    folded = re.sub(r"\s|dc", "", folded)
    known = {name.casefold().replace(" ", ""): name for name in SIGNALS}
    if folded in known:
        return known[folded]
    offered = ", ".join(SIGNALS)
    raise InputError(f"'{shown(text)}' is no signal", f"{near_miss(text, SIGNALS)}Signals are {offered}.")


def _gauge_range(text: str) -> tuple[str, bool]:
    """Return a range without the mark of absolute pressure in its unit, and whether there was one."""
    ends = _RANGE_UNIT.fullmatch(text.strip())
    if ends and is_unit(ends[2], "pressure") and unit(ends[2], "pressure").absolute:
        found = ABSOLUTE.fullmatch(ends[2].strip())
        return (f"{ends[1]} {found[1].strip()}" if found else text), True
    return text, False
