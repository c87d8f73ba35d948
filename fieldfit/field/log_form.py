"""How a log is written: where its headings stand, which columns are used, and the form of its rows."""

from __future__ import annotations

import itertools
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

from fieldfit.errors import InputError
from fieldfit.field.log_headings import Column, Headings, Wanted, find_temperature, resolve_unit, wanted_columns
from fieldfit.field.log_rows import Form, decimal_mark, sample_rows, too_many_fields
from fieldfit.field.log_source import LogSource
from fieldfit.field.section import Section
from fieldfit.field.time_column import TimeColumn, find_time
from fieldfit.field.units import shown

LONGEST_PREAMBLE = 200
"""Lines that may stand above the headings."""
TAB = "\t"
_SAMPLE_ROWS = 50
_LONGEST_LINE = 20_000


@dataclass(frozen=True, slots=True, kw_only=True)
class Columns:
    """The columns of a log that are used."""

    instruments: Mapping[str, Column]
    """Each instrument's, by its name in the section file."""
    temperature: Column | None
    """The liquid's temperature."""
    time: TimeColumn | None
    """The clock."""

    @property
    def of_numbers(self) -> tuple[int, ...]:
        """Places of the columns that hold numbers."""
        others = [self.temperature] if self.temperature else []
        counted = [self.time.position] if self.time and self.time.unit else []
        return (*(column.position for column in (*self.instruments.values(), *others)), *counted)


@dataclass(frozen=True, slots=True, kw_only=True)
class LogForm:
    """How a file is written, found from its first lines."""

    columns: Columns
    """The columns that are used."""
    rows: Form
    """How its rows are written."""


def log_form(
    source: LogSource,
    section: Section,
    find: Callable[[Sequence[str], Sequence[Wanted], str], Headings],
    said: list[str],
) -> LogForm:
    """Find a file's headings and see how its rows are written.

    Parameters
    ----------
    source : LogSource
        The file.
    section : Section
        Names the columns.
    find : callable
        `find_headings` for all columns, `find_any_headings` for some.
    said : list of str
        Sentences on what was assumed are added here.

    Raises
    ------
    InputError
        When the headings cannot be found, or the first rows do not fit them.
    """
    try:
        lines = _first_lines(source)
    except UnicodeError:
        raise source.undecodable() from None
    headings = find(lines[:LONGEST_PREAMBLE], wanted_columns(section), source.path.name)
    columns = _columns(headings, lines, said, source.path.name)
    return LogForm(columns=columns, rows=_form(headings, columns, lines, source.path.name))


def _first_lines(source: LogSource) -> list[str]:
    """Return the beginning of the file, enough to find the headings and see some rows."""
    with source.open() as file:
        wanted = LONGEST_PREAMBLE + _SAMPLE_ROWS
        lines = list(itertools.islice(iter(lambda: file.readline(_LONGEST_LINE), ""), wanted))
    for number, line in enumerate(lines, start=1):
        if len(line) >= _LONGEST_LINE:
            seen, advice = f"the line has more than {_LONGEST_LINE} characters", "Export one row of readings in a line."
            raise InputError(seen, advice, f"{source.path.name}:{number}")
    return lines


def _columns(headings: Headings, lines: Sequence[str], said: list[str], file: str) -> Columns:
    """Return the columns that are used, with their units."""
    where = f"{file}:{headings.line}"
    below = sample_rows(lines, headings)
    instruments = {
        wanted.column: Column(
            heading=headings.texts[place],
            position=place,
            unit=resolve_unit(wanted, headings.texts[place], its_unit, said, where),
        )
        for wanted, (place, its_unit) in zip(headings.wanted, headings.found, strict=True)
    }
    return Columns(
        instruments=instruments,
        temperature=find_temperature(headings, said, where),
        time=find_time(headings, below[0][1] if below else (), said, where),
    )


def _form(headings: Headings, columns: Columns, lines: Sequence[str], file: str) -> Form:
    """Return how the rows are written, from a look at the first ones."""
    names = len(headings.texts)
    samples = sample_rows(lines, headings)
    for number, row in samples:
        if any(row[names:]):
            raise too_many_fields(len(row), names, headings.separator, f"{file}:{number}")
        for place in columns.of_numbers:
            # A column of nothing but these would pass for ones and zeros.
            if place < len(row) and row[place].casefold() in {"true", "false"}:
                where = f"{file}:{number}, column '{shown(headings.texts[place])}'"
                raise InputError(f"'{row[place]}' is not a number", "Name the right column in the section file.", where)
    widest = max((len(row) for _, row in samples), default=names)
    if widest <= max(column.position for column in columns.instruments.values()):
        advice = "Headings that hold a comma must stand in quotation marks."
        raise InputError(f"{widest} fields stand under {names} headings", advice, f"{file}:{samples[0][0]}")
    cells = [row[place] for _, row in samples for place in columns.of_numbers if place < len(row)]
    return Form(
        headings=headings,
        decimal=decimal_mark(cells, headings.separator, file),
        width=max(names, widest),
        numbers=columns.of_numbers,
        label=columns.time.position if columns.time else 0,
    )


def say_form(headings: Headings, decimal: str, said: list[str]) -> None:
    """Say how the file was read, where that is not plain."""
    if headings.line > 1:
        said.append(f"The headings were found in line {headings.line}; what stands above them was not read.")
    if headings.separator != ",":
        said.append(f"Fields are parted by {'tabs' if headings.separator == TAB else 'semicolons'}.")
    if decimal == ",":
        said.append("Commas in numbers are decimal marks.")
