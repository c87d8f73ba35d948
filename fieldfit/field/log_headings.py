"""The headings of a log: which line they stand in, which column is which instrument, and in what unit."""

from __future__ import annotations

import csv
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from fieldfit.errors import InputError, near_miss
from fieldfit.field.section import Section
from fieldfit.field.unit_spellings import Dimension
from fieldfit.field.units import Unit, is_unit, shown, unit

SEPARATORS = ("\t", ";", ",")
"""What may stand between fields, in the order they are tried."""
TEMPERATURE_NAMES = (
    "water temperature",
    "liquid temperature",
    "fluid temperature",
    "temperature",
    "water temp",
    "temp",
)
"""Headings of the liquid's temperature, the surest first."""
CLOCK_WORDS = ("time", "date", "clock", "elapsed", "timestamp")
"""What the heading of a clock begins with."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Wanted:
    """A column that the section file names."""

    column: str
    """Its heading, without the unit."""
    dimension: Dimension
    """What it measures."""
    unit: str | None
    """Unit that overrules the heading's."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Column:
    """A column of the log that is used."""

    heading: str
    """As it stands in the log."""
    position: int
    """Its place in a row, from 0."""
    unit: Unit
    """Its unit."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Headings:
    """The line of headings."""

    line: int
    """Where it stands, from 1."""
    separator: str
    """What stands between fields."""
    texts: tuple[str, ...]
    """Every heading."""
    found: tuple[tuple[int, str | None], ...]
    """Place and unit, as the heading says, of each column found."""
    wanted: tuple[Wanted, ...] = ()
    """The columns found, in the same order."""


def wanted_columns(section: Section) -> tuple[Wanted, ...]:
    """Return the columns a section's log must have: flow first, then the taps in their order."""
    meter = Wanted(column=section.meter.column, dimension="flow", unit=section.meter.unit)
    return (meter, *(Wanted(column=tap.column, dimension="pressure", unit=tap.unit) for tap in section.taps))


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
        for separator in SEPARATORS:
            texts = fields(line, separator)
            places = [_places(texts, column) for column in wanted]
            if all(places):
                found = [_only(place, texts, f"{file}:{number}") for place in places]
                return Headings(line=number, separator=separator, texts=texts, found=tuple(found), wanted=tuple(wanted))
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
        for separator in SEPARATORS:
            texts = fields(line, separator)
            places = {column: _places(texts, column) for column in wanted}
            named = {column: its_places for column, its_places in places.items() if its_places}
            clocked = any(_fold(text).startswith(CLOCK_WORDS) for text in texts)
            score = (len(named), clocked, sum(its_places[0][1] is not None for its_places in named.values()))
            if named and (best is None or score > best[0]):
                found = tuple(_only(its_places, texts, f"{file}:{number}") for its_places in named.values())
                best = score, Headings(line=number, separator=separator, texts=texts, found=found, wanted=tuple(named))
    if best is None:
        raise _not_found((0, 0, ()), lines, wanted, file)
    return best[1]


def fields(line: str, separator: str) -> tuple[str, ...]:
    """Return the fields of one line, trimmed; none where its quotation marks do not close."""
    try:
        rows = list(csv.reader([line.rstrip("\r\n")], delimiter=separator, skipinitialspace=True, strict=True))
    except csv.Error:
        return ()
    return tuple(field.strip() for field in rows[0]) if rows else ()


def _places(texts: Sequence[str], wanted: Wanted) -> list[tuple[int, str | None]]:
    """Return place and unit of the headings that fit a column, the whole heading before one with a unit cut off."""
    column = _fold(wanted.column)
    units = {place: _unit_within(text, wanted.dimension) for place, text in enumerate(texts)}
    whole = [(place, units[place]) for place, text in enumerate(texts) if _fold(text) == column]
    if whole:
        return whole
    return [
        (place, its_unit)
        for place, text in enumerate(texts)
        for name, its_unit, sure in _partings(text)
        if _fold(name) == column and (sure or is_unit(its_unit, wanted.dimension))
    ]


def _only(places: list[tuple[int, str | None]], texts: Sequence[str], where: str) -> tuple[int, str | None]:
    """Return the one place of a column."""
    if len({place for place, _ in places}) > 1:
        names = ", ".join(f"'{shown(texts[place])}'" for place, _ in places)
        advice = "Write the whole heading, unit and all, as its column in the section file."
        raise InputError(f"several headings fit one column: {names}", advice, where)
    return places[0]


def _partings(heading: str) -> Iterator[tuple[str, str, bool]]:
    """Yield name, unit and whether that is surely a unit, for every way a heading may be parted."""
    if len(heading) > 200:
        return
    if heading.endswith(("]", ")")):
        depth = 0
        for place in range(len(heading) - 1, -1, -1):
            depth += (heading[place] in "])") - (heading[place] in "[(")
            if depth == 0:
                yield heading[:place].strip(), heading[place + 1 : -1].strip(), True
                break
    for mark, sure in ((",", True), ("_", False), (" ", False)):
        for place in (place for place, sign in enumerate(heading) if sign == mark):
            yield heading[:place].strip(), heading[place + 1 :].strip(), sure


def _unit_within(heading: str, dimension: Dimension) -> str | None:
    """Return the unit a heading ends in, if it does."""
    return next((its_unit for _, its_unit, _ in _partings(heading) if is_unit(its_unit, dimension)), None)


def _fold(text: str) -> str:
    """Return a heading without capitals and with single spaces."""
    return " ".join(text.casefold().split())


def _not_found(
    closest: tuple[int, int, tuple[str, ...]], lines: Sequence[str], wanted: Sequence[Wanted], file: str
) -> InputError:
    """Return the error for a log whose headings lack a column."""
    _, number, texts = closest
    if not texts:
        guesses = [fields(line, separator) for line in lines for separator in SEPARATORS]
        texts = next((guess for guess in guesses if len(guess) > 2), ())
    missing = next((column.column for column in wanted if not _places(texts, column)), wanted[0].column)
    taken = {place for column in wanted for place, _ in _places(texts, column)}
    free = [text for place, text in enumerate(texts) if place not in taken]
    names = [*free, *(name for text in free for name, _, _ in _partings(text))]
    listed = ", ".join(f"'{shown(text)}'" for text in texts[:12]) or "none"
    advice = f"{near_miss(missing, names)}Headings here: {listed}. Name the one to use as column in the section file."
    return InputError(f"no heading '{shown(missing)}'", advice, f"{file}:{number}" if number else file)


def resolve_unit(wanted: Wanted, heading: str, its_unit: str | None, said: list[str], where: str) -> Unit:
    """Return a column's unit: the section file's, else the heading's.

    Parameters
    ----------
    wanted : Wanted
        The column as the section file names it.
    heading, its_unit : str
        The heading, and the unit in it.
    said : list of str
        Sentences on what was assumed are added here.
    where : str
        Place of the headings, for errors.

    Raises
    ------
    InputError
        When there is no unit, or none of that dimension.
    """
    example = {"flow": "L/s", "pressure": "kPa"}.get(wanted.dimension, "degC")
    place = f"{where}, column '{shown(heading)}'"
    if wanted.unit is None and its_unit is None:
        advice = f'Write it in the heading, "{shown(wanted.column)} [{example}]", or as unit = "{example}" in the section file.'
        raise InputError("the column has no unit", advice, place)
    try:
        used = unit(wanted.unit or its_unit or "", wanted.dimension)
        if wanted.unit is not None and its_unit is not None:
            _say_if_overruled(wanted, its_unit, used, said)
    except InputError as error:
        raise error.at(place) from None
    if used.absolute:
        seen = f"unit '{shown(used.spelling)}' is an absolute pressure, and fieldfit reads gauges"
        raise InputError(seen, "Take the air pressure off and write a gauge pressure.", place)
    if used.remark:
        said.append(used.remark)
    return used


def _say_if_overruled(wanted: Wanted, its_unit: str, used: Unit, said: list[str]) -> None:
    """Say that the section file's unit stands against the heading's."""
    if is_unit(its_unit, wanted.dimension) and unit(its_unit, wanted.dimension).factor == used.factor:
        return
    said.append(
        f"Column '{wanted.column}' was read in {used.spelling}, as the section file says; its heading says "
        f"{shown(its_unit)}."
    )


def find_temperature(headings: Headings, said: list[str], where: str) -> Column | None:
    """Return the column of the liquid's temperature, if the log has one.

    Raises
    ------
    InputError
        When its heading has no unit of temperature.
    """
    for name in TEMPERATURE_NAMES:
        wanted = Wanted(column=name, dimension="temperature", unit=None)
        places = _places([text.replace("_", " ") for text in headings.texts], wanted)
        if places:
            place, its_unit = _only(places, headings.texts, where)
            used = resolve_unit(wanted, headings.texts[place], its_unit, said, where)
            return Column(heading=headings.texts[place], position=place, unit=used)
    return None
