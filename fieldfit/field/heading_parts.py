"""The parts of a heading: name and unit, and which heading fits a wanted column."""

from __future__ import annotations

import csv
import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from fieldfit.errors import InputError
from fieldfit.field.raw_signal import ELECTRIC, RawSignal
from fieldfit.field.section import Meter
from fieldfit.field.unit_spellings import Dimension
from fieldfit.field.units import is_unit, shown

SEPARATORS = ("\t", ";", "|", ",")
"""What may stand between fields, in the order they are tried."""
COMMENT_SIGNS = ("#", "//")
"""What a line that is a comment begins with."""
PULSE_WORDS = ("pulse", "pulses", "pulsecount", "counts", "count", "imp", "impulses", "p", "ticks")
"""Units of a column that counts pulses, without capitals and spaces."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Wanted:
    """A column that the section file names."""

    column: str
    """Its heading, without the unit."""
    dimension: Dimension
    """What it measures."""
    unit: str | None
    """Unit that overrules the heading's."""
    signal: RawSignal | None = None
    """Raw signal that it holds; None for readings."""
    meter: Meter | None = None
    """The flow meter, where it is the meter's column."""
    bore_m: float = 0.0
    """As-new bore, for the flow of a velocity meter [m]."""

    def spells(self, text: str) -> bool:
        """Return whether a text is a unit that the column may have."""
        if is_unit(text, self.dimension) or (self.signal is not None and text.casefold() in ELECTRIC):
            return True
        if self.meter is None:
            return False
        counted = self.meter.pulse_m3 is not None and text.casefold().replace(" ", "") in PULSE_WORDS
        return counted or is_unit(text, "volume") or is_unit(text, "velocity")


def separators(line: str) -> list[str]:
    """Return the separators that may part a line."""
    return [separator for separator in SEPARATORS if separator in line] or [","]


def heading_texts(line: str, separator: str) -> tuple[str, ...]:
    """Return the fields of a line that may be headings, without the sign of a comment before them.

    Examples
    --------
    >>> heading_texts("# time;flow [L/s]", ";")
    ('time', 'flow [L/s]')
    """
    return fields(re.sub(r"^\s*(?:#|//)\s*", "", line), separator)


def bare_unit(text: str) -> str:
    """Return a unit without the brackets around it."""
    text = text.strip()
    return text[1:-1].strip() if text[:1] + text[-1:] in {"[]", "()", "<>"} else text


def fields(line: str, separator: str) -> tuple[str, ...]:
    """Return the fields of one line, trimmed; none where its quotation marks do not close."""
    try:
        rows = list(csv.reader([line.rstrip("\r\n")], delimiter=separator, skipinitialspace=True, strict=True))
    except csv.Error:
        return ()
    return tuple(field.strip() for field in rows[0]) if rows else ()


def heading_places(texts: Sequence[str], wanted: Wanted) -> list[tuple[int, str | None]]:
    """Return place and unit of the headings that fit a column, the whole heading before one with a unit cut off."""
    column = fold_heading(wanted.column)
    units = {place: _unit_within(text, wanted) for place, text in enumerate(texts)}
    whole = [(place, units[place]) for place, text in enumerate(texts) if fold_heading(text) == column]
    if whole:
        return whole
    return [
        (place, its_unit)
        for place, text in enumerate(texts)
        for name, its_unit, sure in heading_partings(text)
        if fold_heading(name) == column and (sure or wanted.spells(its_unit))
    ]


def only_place(
    places: list[tuple[int, str | None]], texts: Sequence[str], where: str, named: bool = True
) -> tuple[int, str | None]:
    """Return the one place of a column."""
    if len({place for place, _ in places}) > 1:
        names = ", ".join(f"'{shown(texts[place])}'" for place, _ in places)
        advice = "Write the whole heading, unit and all, as its column in the section file."
        advice = advice if named else "Give the one that is not meant another name."
        raise InputError(f"several headings fit one column: {names}", advice, where)
    return places[0]


def heading_partings(heading: str) -> Iterator[tuple[str, str, bool]]:
    """Yield name, unit and whether that is surely a unit, for every way a heading may be parted."""
    if len(heading) > 200:
        return
    if heading.endswith(("]", ")")):
        depth = 0
        for place in range(len(heading) - 1, -1, -1):
            depth += (heading[place] in "])") - (heading[place] in "[(")
            if depth == 0:
                # Behind the unit may stand a remark in brackets.
                before = ((name, its_unit) for name, its_unit, _ in heading_partings(heading[:place].strip()))
                yield from ((name, its_unit, False) for name, its_unit in before)
                yield heading[:place].strip(), heading[place + 1 : -1].strip(), True
                break
    for mark, sure in ((",", True), ("_", False), (" ", False)):
        for place in (place for place, sign in enumerate(heading) if sign == mark):
            yield heading[:place].strip(), heading[place + 1 :].strip(), sure


def _unit_within(heading: str, wanted: Wanted) -> str | None:
    """Return the unit a heading ends in, if it does."""
    return next((its_unit for _, its_unit, _ in heading_partings(heading) if wanted.spells(its_unit)), None)


def fold_heading(text: str) -> str:
    """Return a heading without capitals and with single spaces."""
    return " ".join(text.casefold().split())
