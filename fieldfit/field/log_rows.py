"""The rows of a log as numbers and texts: fast where every field is as it should be, with care where one is not."""

from __future__ import annotations

import io
import re
import warnings
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any, TextIO

import numpy as np
from numpy.typing import NDArray

from fieldfit.errors import InputError
from fieldfit.field.heading_parts import fields
from fieldfit.field.log_headings import Headings
from fieldfit.field.log_source import LogSource
from fieldfit.field.number_marks import as_numbers, decimal_mark, no_number
from fieldfit.field.row_kinds import MOST_SAID, as_missing, readings, without_comments
from fieldfit.field.units import shown

if TYPE_CHECKING:
    from pandas import DataFrame, Series

_BLANKS = ("", "nan", "na", "n/a", "n.a.", "-", "--", "---", "----", "*", "**", "***", "****", "*****", "null", "none")
_FAULTS = ("err", "error", "bad", "no data", "fault", "fail", "over", "under", "ol", "ovl", "overrange", "underrange")
_CELLS = ("#n/a", "#div/0!", "#value!", "#ref!", "#num!", "#name?", "#null!")
MISSING_MARKS = (*_BLANKS, *_FAULTS, *_CELLS)
"""What loggers and spreadsheets write for a missing value, without capitals."""
MARKS_AS_WRITTEN = sorted({case(mark) for mark in MISSING_MARKS for case in (str, str.upper, str.capitalize)} | {"NaN"})
"""The same with the capitals they usually come in."""
_WORD = re.compile(r"\s*[^\W\d_]{2}|\s*[*=]{2}")


@dataclass(frozen=True, slots=True, kw_only=True)
class Form:
    """How the rows of a log are written."""

    headings: Headings
    """The line of headings; rows begin below it."""
    decimal: str
    """Decimal mark."""
    width: int
    """Fields in a row."""
    numbers: tuple[int, ...]
    """Places of the columns that hold numbers."""
    label: int
    """Place of the column in which a summary row would say so."""
    decimal_stated: bool = False
    """Whether the section file states the decimal mark."""
    decimal_open: bool = False
    """Whether only further rows can tell the decimal mark."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Rows:
    """The rows of a log that are readings; N rows."""

    line: NDArray[np.int64]
    """(N,) line of the file, from 1."""
    numbers: Mapping[int, NDArray[np.float64]]
    """(N,) values of each column of numbers, by its place; NaN where missing."""
    texts: DataFrame
    """(N,) the other columns, by their places; missing where empty."""


def read_rows(source: LogSource, form: Form, said: list[str]) -> tuple[Rows, str]:
    """Read every row below the headings.

    Parameters
    ----------
    source : LogSource
        The file.
    form : Form
        How its rows are written.
    said : list of str
        Sentences on rows that were left out are added here.

    Returns
    -------
    tuple
        The rows, and the decimal mark they were read with.

    Raises
    ------
    InputError
        At the line and column where a number cannot be read, or a row has too many fields.
    """
    try:
        careful = form.decimal_open
        table = _table_as_text(source, form) if careful else _table(source, form, "float64")
    except InputError:
        raise
    except UnicodeDecodeError:
        raise source.undecodable() from None
    except (ValueError, OverflowError):
        table = _table_as_text(source, form)
        careful = True
    line = np.arange(1, len(table) + 1, dtype=np.int64) + form.headings.line
    words: dict[int, str] = {}
    if careful:
        table, words = _with_missing(table, form)
    kept = readings(table, line, form, said)
    _say_words(words, line, kept, said)
    table, line = table[kept], line[kept]
    columns = {place: table[place] for place in form.numbers}
    if careful:
        form = replace(form, decimal=_mark_throughout(columns, form, source.path.name))
        columns = {place: _careful_numbers(column, line, form, source) for place, column in columns.items()}
    numbers = {place: np.asarray(column.to_numpy(dtype=np.float64)) for place, column in columns.items()}
    for place, values in numbers.items():
        _check_finite(values, line, f"column '{shown(form.headings.texts[place])}'", source)
    return Rows(line=line, numbers=numbers, texts=table.drop(columns=list(numbers))), form.decimal


def _table(source: LogSource, form: Form, numbers_as: str, clean: bool = False) -> DataFrame:
    """Read the rows with the columns of numbers as one type, and everything else as text."""
    import pandas as pd

    kinds: dict[int, Any] = {place: numbers_as if place in form.numbers else "str" for place in range(form.width)}
    with source.open() as opened, warnings.catch_warnings():
        warnings.simplefilter("error", pd.errors.ParserWarning)
        for _ in range(form.headings.line):
            opened.readline()
        file = _cleaned(opened, form) if clean else opened
        try:
            table: DataFrame = pd.read_csv(
                file,
                engine="c",
                sep=form.headings.separator,
                decimal=form.decimal,
                header=None,
                names=range(form.width),
                index_col=False,
                dtype=kinds,
                keep_default_na=False,
                na_values=MARKS_AS_WRITTEN,
                skip_blank_lines=False,
                skipinitialspace=True,
            )
        except pd.errors.ParserWarning:
            seen, where = "the first row has a field that runs over several lines", source.path.name
            raise InputError(seen, "Export one row of readings in a line.", where) from None
    return table


def _table_as_text(source: LogSource, form: Form) -> DataFrame:
    """Read every field as text, and say where the file cannot even be cut into fields."""
    import pandas as pd

    try:
        return _table(source, form, "str")
    except UnicodeDecodeError:
        raise source.undecodable() from None
    except pd.errors.ParserError:
        pass
    try:
        return _table(source, form, "str", clean=True)
    except pd.errors.ParserError as error:
        raise _uneven(str(error), form, source.path.name) from None


def _cleaned(file: TextIO, form: Form) -> TextIO:
    """Return the lines with comments and notes, which may hold any number of separators, shut in quotation marks."""
    return io.StringIO(
        "".join(line for line, _ in without_comments(file.readlines(), form.width, form.headings.separator)), newline=""
    )


def _with_missing(table: DataFrame, form: Form) -> tuple[DataFrame, dict[int, str]]:
    """Return rows of texts with marks of missing values made missing, and the word of each row that has no number."""
    places = [place for place in form.numbers if place != form.label] or list(form.numbers)
    texts = {place: as_missing(column, MISSING_MARKS) for place, column in table.items()}
    texts |= {place: texts[place].str.replace("\u2212", "-", regex=False) for place in form.numbers}
    wordy = np.array([texts[place].str.match(_WORD).fillna(False).to_numpy(dtype=bool) for place in places])
    absent = np.array([texts[place].isna().to_numpy() for place in places])
    without = np.all(wordy | absent, axis=0) & np.any(wordy, axis=0)
    words = {}
    for row in np.flatnonzero(without):
        words[int(row)] = next(
            str(texts[place].iloc[row]) for place in places if isinstance(texts[place].iloc[row], str)
        )
    for place in places:
        texts[place] = texts[place].mask(without)
    return type(table)(texts), words


def _say_words(words: Mapping[int, str], line: NDArray[np.int64], kept: NDArray[np.bool_], said: list[str]) -> None:
    """Say which rows have a word in place of numbers."""
    rows = [row for row in words if kept[row]]
    for row in rows[:MOST_SAID]:
        said.append(f"Line {line[row]} has no numbers, only '{shown(words[row])}'; they were taken as missing.")
    if len(rows) > MOST_SAID:
        said.append(f"So were those of {len(rows) - MOST_SAID} more such lines.")


def _uneven(reason: str, form: Form, file: str) -> InputError:
    """Return the error for a row that cannot be cut into fields."""
    found = re.search(r"line (\d+), saw (\d+)", reason)
    if found is None:
        opened = re.search(r"row (\d+)", reason)
        where = f"{file}:{int(opened[1]) + form.headings.line + 1}" if opened else file
        return InputError("a quotation mark is never closed", "Close the quotation mark, or take it out.", where)
    return too_many_fields(
        int(found[2]), form.width, form.headings.separator, f"{file}:{int(found[1]) + form.headings.line}"
    )


def too_many_fields(seen: int, headings: int, separator: str, where: str) -> InputError:
    """Return the error for a row with more fields than headings."""
    if separator == ",":
        advice = (
            "If commas are decimal marks here, export the log with semicolons between fields or with decimal points. "
            "Else take out the surplus comma."
        )
    else:
        advice = "Take out the surplus separator."
    return InputError(f"{seen} fields stand under {headings} headings", advice, where)


def _careful_numbers(column: Series[Any], line: NDArray[np.int64], form: Form, source: LogSource) -> Series[Any]:
    """Turn texts into numbers one rule at a time, so that the first bad field can be named."""
    numbers, bad = as_numbers(column, form.decimal)
    if bad is not None:
        place = f"{source.path.name}:{line[bad]}, column '{shown(form.headings.texts[int(str(column.name))])}'"
        raise no_number(str(column.iloc[bad]), place, ("NaN", "NA", "--", "ERR", "Bad"))
    return numbers


def _check_finite(values: NDArray[np.float64], line: NDArray[np.int64], column: str, source: LogSource) -> None:
    """Refuse infinite numbers, and a column that has none at all."""
    infinite = np.flatnonzero(np.isinf(values))
    if infinite.size:
        where = f"{source.path.name}:{line[infinite[0]]}, {column}"
        raise InputError("the number is infinite", "Leave a missing value empty.", where)


def _mark_throughout(columns: Mapping[int, Series[Any]], form: Form, file: str) -> str:
    """Return the decimal mark that every row is written with."""
    if form.decimal_stated:
        return form.decimal
    marked = [column[column.str.contains(r"[.,]", regex=True, na=False)] for column in columns.values()]
    return decimal_mark([str(cell) for column in marked for cell in column], form.headings.separator, file)


def sample_rows(lines: Sequence[str], headings: Headings) -> list[tuple[int, tuple[str, ...]]]:
    """Return line and fields of the rows below the headings, among a log's first lines.

    Blank lines, comments and notes of another width are left out.
    """
    separator = headings.separator
    below = without_comments(lines[headings.line :], len(headings.texts), separator)
    numbered = enumerate(below, start=headings.line + 1)
    return [(number, fields(line, separator)) for number, (line, _) in numbered if line.strip()]
