"""The headings of a log: which line they stand in, which column is which instrument, and in what unit."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

from fieldfit.errors import InputError, near_miss
from fieldfit.field.heading_parts import (
    SEPARATORS,
    Wanted,
    bare_unit,
    fields,
    fold_heading,
    heading_partings,
    heading_places,
    heading_texts,
    only_place,
    separators,
)
from fieldfit.field.section import Section
from fieldfit.field.units import shown

CLOCK_WORDS = ("time", "date", "clock", "elapsed", "timestamp")
"""What the heading of a clock begins with."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Headings:
    """The line of headings."""

    line: int
    """Last line of them, from 1: the rows begin below it."""
    separator: str
    """What stands between fields."""
    texts: tuple[str, ...]
    """Every heading."""
    found: tuple[tuple[int, str | None], ...]
    """Place and unit, as the heading says, of each column found."""
    wanted: tuple[Wanted, ...] = ()
    """The columns found, in the same order."""
    units: tuple[str, ...] = ()
    """A row of units below them; empty where there is none."""

    units_below: int = 0
    """Lines from the names to the row of units."""

    @property
    def named_in(self) -> int:
        """Line of the names; a row of units stands below it."""
        return self.line - self.units_below

    def with_unit(self, place: int) -> str:
        """Return a heading, with the unit below it in brackets."""
        below = self.units[place] if place < len(self.units) else ""
        return f"{self.texts[place]} [{bare_unit(below)}]" if below else self.texts[place]


def wanted_columns(section: Section) -> tuple[Wanted, ...]:
    """Return the columns a section's log must have: flow first, then the taps in their order."""
    gauges = (section.differential,) if section.differential else section.taps
    taps = (Wanted(column=tap.column, dimension="pressure", unit=tap.unit, signal=tap.signal) for tap in gauges)
    return (*_of_meter(section), *taps)


def _of_meter(section: Section) -> tuple[Wanted, ...]:
    """Return the column of the flow, or those of the pressures that it is worked out from."""
    meter = section.meter
    if meter.outlets:
        return tuple(Wanted(column=one.column, dimension="pressure", unit=one.unit) for one in meter.outlets)
    if meter.throat:
        return (Wanted(column=meter.column, dimension="pressure", unit=meter.unit, signal=meter.throat.signal),)
    return (
        Wanted(
            column=meter.column,
            dimension="flow",
            unit=meter.unit,
            signal=meter.signal,
            meter=meter,
            bore_m=section.bore.value,
        ),
    )


def find_headings(lines: Sequence[str], wanted: Sequence[Wanted], file: str) -> Headings:
    """Return the first line that names every wanted column, with the separator that shows them.

    A heading may carry its unit in brackets or parentheses, or after a comma, an underscore or a space. Capitals do
    not matter.

    Parameters
    ----------
    lines : sequence of str
        The log's first lines.
    wanted : sequence of Wanted
        Columns to find.
    file : str
        Name of the log, for errors.

    Raises
    ------
    InputError
        When no line names them all, or two headings fit one column.

    Examples
    --------
    >>> flow = Wanted(column="Q", dimension="flow", unit=None)
    >>> find_headings(["Pump test", "time;Q_gpm"], [flow], "log.csv").found
    ((1, 'gpm'),)
    """
    closest: tuple[int, int, tuple[str, ...]] = (0, 0, ())
    for number, line in enumerate(lines, start=1):
        for separator in separators(line):
            texts = heading_texts(line, separator)
            places = [heading_places(texts, column) for column in wanted]
            if all(places):
                found = [only_place(place, texts, f"{file}:{number}") for place in places]
                names = Headings(
                    line=number, separator=separator, texts=texts, found=tuple(found), wanted=tuple(wanted)
                )
                return _with_units(names, lines, file)
            named = sum(1 for place in places if place)
            if named > closest[0]:
                closest = (named, number, texts)
    raise _not_found(closest, lines, wanted, file)


def find_any_headings(lines: Sequence[str], wanted: Sequence[Wanted], file: str) -> Headings:
    """Return the line that names most of the wanted columns, one or more; the surest and then the first of several.

    A line is surer when it has a clock, and when units stand with the names.

    Parameters
    ----------
    lines : sequence of str
        The log's first lines.
    wanted : sequence of Wanted
        Columns to look for.
    file : str
        Name of the log, for errors.

    Raises
    ------
    InputError
        When no line names any of them, or two headings fit one column.

    Examples
    --------
    >>> columns = [Wanted(column=name, dimension="pressure", unit=None) for name in ("P1", "P2")]
    >>> find_any_headings(["P2, north end", "time,P2 [kPa]"], columns, "log.csv").found
    ((1, 'kPa'),)
    """
    best: tuple[tuple[int, bool, int], Headings] | None = None
    for number, line in enumerate(lines, start=1):
        for separator in separators(line):
            texts = heading_texts(line, separator)
            places = {column: heading_places(texts, column) for column in wanted}
            named = {column: its_places for column, its_places in places.items() if its_places}
            clocked = any(fold_heading(text).startswith(CLOCK_WORDS) for text in texts)
            score = (len(named), clocked, sum(its_places[0][1] is not None for its_places in named.values()))
            if named and (best is None or score > best[0]):
                found = tuple(only_place(its_places, texts, f"{file}:{number}") for its_places in named.values())
                best = score, Headings(line=number, separator=separator, texts=texts, found=found, wanted=tuple(named))
    if best is None:
        raise _not_found((0, 0, ()), lines, wanted, file)
    return _with_units(best[1], lines, file)


def _with_units(names: Headings, lines: Sequence[str], file: str) -> Headings:
    """Return headings together with a row of units below them, if there is one."""
    below_names = enumerate(lines[names.line : names.line + 3], start=names.line + 1)
    filled = ((number, heading_texts(line, names.separator)) for number, line in below_names)
    number, texts = next(((number, texts) for number, texts in filled if any(texts)), (0, ()))
    below = [bare_unit(texts[place]) if place < len(texts) else "" for place, _ in names.found]
    spelt = [column.spells(its_unit) for column, its_unit in zip(names.wanted, below, strict=True)]
    if not any(spelt) or not all(fits or not its_unit for fits, its_unit in zip(spelt, below, strict=True)):
        return names
    found = []
    for (place, above), its_unit in zip(names.found, below, strict=True):
        if above and its_unit and above.casefold() != its_unit.casefold():
            seen = f"the heading '{shown(names.texts[place])}' has another unit below it, '{shown(its_unit)}'"
            advice = 'Write the right one as unit = "..." in the section file, or take one out.'
            raise InputError(seen, advice, f"{file}:{number}")
        found.append((place, its_unit or above))
    return replace(names, line=number, found=tuple(found), units=texts, units_below=number - names.line)


def _not_found(
    closest: tuple[int, int, tuple[str, ...]], lines: Sequence[str], wanted: Sequence[Wanted], file: str
) -> InputError:
    """Return the error for a log whose headings lack a column."""
    _, number, texts = closest
    if not texts:
        guesses = [fields(line, separator) for line in lines for separator in SEPARATORS]
        texts = next((guess for guess in guesses if len(guess) > 2), ())
    missing = next((column.column for column in wanted if not heading_places(texts, column)), wanted[0].column)
    taken = {place for column in wanted for place, _ in heading_places(texts, column)}
    free = [text for place, text in enumerate(texts) if place not in taken]
    names = [*free, *(name for text in free for name, _, _ in heading_partings(text))]
    listed = ", ".join(f"'{shown(text)}'" for text in texts[:12]) or "none"
    advice = f"{near_miss(missing, names)}Headings here: {listed}. Name the one to use as column in the section file."
    return InputError(f"no heading '{shown(missing)}'", advice, f"{file}:{number}" if number else file)
