"""How a log is written: where its headings stand, which columns are used, and the form of its rows."""

from __future__ import annotations

import itertools
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

from fieldfit.errors import InputError
from fieldfit.field.clock_texts import is_iso
from fieldfit.field.heading_parts import Wanted
from fieldfit.field.log_columns import Column, find_barometer, find_temperature, resolve_column, say_unit
from fieldfit.field.log_headings import Headings, wanted_columns
from fieldfit.field.log_hints import LogHints
from fieldfit.field.log_rows import Form, sample_rows, too_many_fields
from fieldfit.field.log_source import LogSource
from fieldfit.field.number_marks import decimal_mark, is_open
from fieldfit.field.section import Section
from fieldfit.field.time_column import TimeColumn, find_time
from fieldfit.field.units import shown

LONGEST_PREAMBLE = 200
"""Lines that may stand above the headings."""
SEPARATOR_NAMES = {"\t": "tabs", ";": "semicolons", "|": "upright strokes"}
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
    barometer: Column | None = None
    """The pressure of the air."""

    @property
    def of_numbers(self) -> tuple[int, ...]:
        """Places of the columns that hold numbers."""
        others = [column for column in (self.temperature, self.barometer) if column]
        counted = [self.time.position] if self.time and self.time.unit else []
        return tuple(dict.fromkeys([column.position for column in (*self.instruments.values(), *others)] + counted))

    @property
    def plain(self) -> bool:
        """Whether every instrument's column holds readings that only need a factor: no count, raw signal or absolute pressure."""
        return not any(one.counts or one.signal or one.unit.absolute for one in self.instruments.values())


@dataclass(frozen=True, slots=True, kw_only=True)
class LogForm:
    """How a file is written, found from its first lines."""

    columns: Columns
    """The columns that are used."""
    rows: Form
    """How its rows are written."""
    above: tuple[str, ...] = ()
    """Lines above the headings."""
    blockwise: bool = True
    """Whether a part of the rows says the same on its own: plain readings, and a clock in ISO 8601 or from the start."""


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
    file = source.path.name
    headings = _headings(lines[:LONGEST_PREAMBLE], section, find, file)
    columns = _columns(headings, section, lines, said, file)
    rows = _form(headings, columns, lines, section.log_hints, file)
    clocked = columns.time is not None and (columns.time.unit is not None or _is_iso(columns.time, lines, headings))
    return LogForm(
        columns=columns,
        rows=rows,
        above=tuple(lines[: headings.named_in - 1]),
        blockwise=columns.plain and clocked and not rows.decimal_open and source.text is None and source.length is None,
    )


def _headings(
    lines: list[str], section: Section, find: Callable[[Sequence[str], Sequence[Wanted], str], Headings], file: str
) -> Headings:
    """Find the headings, which spreadsheets may break into several lines within quotation marks."""
    wanted = wanted_columns(section)
    try:
        return find(lines, wanted, file)
    except InputError as error:
        unbroken = _unbroken(lines)
        if unbroken == lines:
            raise
        try:
            return find(unbroken, wanted, file)
        except InputError:
            raise error from None


def _unbroken(lines: list[str]) -> list[str]:
    """Return lines of which those that a quotation mark holds together stand as one, in the last one's place."""
    whole: list[str] = []
    for line in lines:
        held = bool(whole) and whole[-1].count('"') % 2 == 1
        whole.append(f"{whole[-1].rstrip()} {line}" if held else line)
        if held:
            whole[-2] = ""
    return whole


def _is_iso(time: TimeColumn, lines: Sequence[str], headings: Headings) -> bool:
    """Return whether a clock shows dates and times in ISO 8601."""
    shown_times = [row[time.position] for _, row in sample_rows(lines, headings) if time.position < len(row)]
    return time.date_position is None and time.zone_s is None and all(map(is_iso, filter(None, shown_times)))


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


def _columns(headings: Headings, section: Section, lines: Sequence[str], said: list[str], file: str) -> Columns:
    """Return the columns that are used, with their units."""
    where = f"{file}:{headings.named_in}"
    below = sample_rows(lines, headings)
    instruments = {}
    for wanted, (place, its_unit) in zip(headings.wanted, headings.found, strict=True):
        column = resolve_column(wanted, headings, place, its_unit, where)
        say_unit(wanted, its_unit, column, said)
        instruments[wanted.column] = column
    absolute = any(column.unit.absolute for column in instruments.values())
    return Columns(
        instruments=instruments,
        temperature=find_temperature(headings, said, where),
        time=find_time(headings, below[0][1] if below else (), said, where),
        barometer=find_barometer(headings, section.log_hints, absolute, said, where),
    )


def _form(headings: Headings, columns: Columns, lines: Sequence[str], hints: LogHints, file: str) -> Form:
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
        if widest == 1:
            advice = "Part the rows by the same mark as the headings."
        raise InputError(
            f"{widest} {'fields stand' if widest > 1 else 'field stands'} under {names} headings",
            advice,
            f"{file}:{samples[0][0]}",
        )
    cells = [row[place] for _, row in samples for place in columns.of_numbers if place < len(row)]
    is_open_mark = hints.decimal is None and is_open(cells, headings.separator)
    return Form(
        headings=headings,
        decimal="." if is_open_mark else decimal_mark(cells, headings.separator, file, hints.decimal),
        width=max(names, widest),
        numbers=columns.of_numbers,
        label=columns.time.position if columns.time else 0,
        decimal_stated=hints.decimal is not None,
        decimal_open=is_open_mark,
    )


def say_form(headings: Headings, decimal: str, said: list[str]) -> None:
    """Say how the file was read, where that is not plain."""
    if headings.named_in > 1:
        said.append(f"The headings were found in line {headings.named_in}; what stands above them was not read.")
    if headings.units:
        said.append(f"Line {headings.line} was read as the units of the headings above it.")
    if headings.separator != ",":
        said.append(f"Fields are parted by {SEPARATOR_NAMES[headings.separator]}.")
    if decimal == ",":
        said.append("Commas in numbers are decimal marks.")
