"""The rows of a log as numbers and texts: fast where every field is as it should be, with care where one is not."""

from __future__ import annotations

import re
import warnings
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from fieldfit.errors import InputError
from fieldfit.field.log_headings import Headings, fields
from fieldfit.field.log_source import LogSource
from fieldfit.field.units import shown

if TYPE_CHECKING:
    from pandas import DataFrame, Series

MISSING_MARKS = ("", "nan", "na", "n/a", "#n/a", "-", "--", "---", "err", "error", "null", "none", "bad", "no data")
"""What loggers write for a missing value, without capitals."""
_MEANS = ("average", "avg", "mean", "median", "sum", "total", "count", "summary", "statistics")
_ENDS = ("min", "minimum", "max", "maximum", "range", "std", "stdev", "std dev", "sd", "end", "end of file", "eof")
SUMMARY_WORDS = (*_MEANS, *_ENDS)
"""What stands at the beginning of a row that is no reading, without capitals."""

MARKS_AS_WRITTEN = sorted(
    {case(mark) for mark in MISSING_MARKS for case in (str, str.upper, str.capitalize)} | {"NaN"}
)
"""The same with the capitals they usually come in."""
_NUMBER = r"[+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?"
_COMMA_NUMBER = re.compile(r"[+-]?[0-9]+,[0-9]+")
_ANY_COMMA = re.compile(r"[+-]?[0-9.' ]*,[0-9.,]*")


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
        table = _table(source, form, "float64")
        careful = False
    except InputError:
        raise
    except UnicodeDecodeError:
        raise source.undecodable() from None
    except (ValueError, OverflowError):
        table = _table_as_text(source, form)
        careful = True
    line = np.arange(1, len(table) + 1, dtype=np.int64) + form.headings.line
    kept = _readings(table, line, form, said)
    table, line = table[kept], line[kept]
    columns = {place: table[place] for place in form.numbers}
    if careful:
        form = replace(form, decimal=_mark_throughout(columns, form, source.path.name))
        columns = {place: _careful_numbers(column, line, form, source) for place, column in columns.items()}
    numbers = {place: np.asarray(column.to_numpy(dtype=np.float64)) for place, column in columns.items()}
    for place, values in numbers.items():
        _check_finite(values, line, f"column '{shown(form.headings.texts[place])}'", source)
    return Rows(line=line, numbers=numbers, texts=table.drop(columns=list(numbers))), form.decimal


def _table(source: LogSource, form: Form, numbers_as: str) -> DataFrame:
    """Read the rows with the columns of numbers as one type, and everything else as text."""
    import pandas as pd

    kinds: dict[int, Any] = {place: numbers_as if place in form.numbers else "str" for place in range(form.width)}
    with source.open() as file, warnings.catch_warnings():
        warnings.simplefilter("error", pd.errors.ParserWarning)
        for _ in range(form.headings.line):
            file.readline()
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
    except pd.errors.ParserError as error:
        raise _uneven(str(error), form, source.path.name) from None


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


def _readings(table: DataFrame, line: NDArray[np.int64], form: Form, said: list[str]) -> NDArray[np.bool_]:
    """Return which rows are readings: not blank, not a summary, not the headings over again."""
    kept: NDArray[np.bool_] = ~np.all(table.isna().to_numpy(), axis=1)
    column = table[form.label]
    if column.dtype.kind == "f":
        return kept
    # Looking at first letters spares a long log the work on every text.
    lettered = np.flatnonzero(column.fillna("").to_numpy(dtype=object).astype("U1") >= "A")
    labels = column.iloc[lettered].str.strip().str.rstrip(":").str.casefold()
    words = (*SUMMARY_WORDS, form.headings.texts[form.label].casefold())
    for number, row in enumerate(lettered[labels.isin(words).to_numpy(dtype=bool) & kept[lettered]]):
        kept[row] = False
        if number < 5:
            said.append(
                f"Line {line[row]} ('{shown(str(table[form.label].iloc[row]))}') is no reading and was left out."
            )
        elif number == 5:
            said.append("More such lines were left out.")
    return kept


def _careful_numbers(column: Series[Any], line: NDArray[np.int64], form: Form, source: LogSource) -> Series[Any]:
    """Turn texts into numbers one rule at a time, so that the first bad field can be named."""
    texts = column.str.strip()
    texts = texts.mask(texts.str.casefold().isin(MISSING_MARKS))
    if form.decimal == ",":
        texts = texts.str.replace(",", ".", regex=False)
    bad = texts.notna() & ~texts.str.fullmatch(_NUMBER).fillna(True).astype(bool)
    if bad.any():
        row = int(np.flatnonzero(bad.to_numpy())[0])
        place = f"{source.path.name}:{line[row]}, column '{shown(form.headings.texts[int(str(column.name))])}'"
        raise _no_number(str(column.iloc[row]), form, place)
    return texts.astype("float64")


def _no_number(text: str, form: Form, where: str) -> InputError:
    """Return the error for a field that should be a number."""
    if _ANY_COMMA.fullmatch(text.strip()):
        return InputError(
            f"'{shown(text)}' has a comma in its number",
            "Export the log with semicolons between fields and decimal commas throughout, or with decimal points and "
            "no thousands separators.",
            where,
        )
    marks = ", ".join(f"'{mark}'" for mark in ("NaN", "NA", "--", "ERR", "Bad"))
    return InputError(
        f"'{shown(text)}' is not a number", f"Leave a missing value empty, or write one of {marks}.", where
    )


def _check_finite(values: NDArray[np.float64], line: NDArray[np.int64], column: str, source: LogSource) -> None:
    """Refuse infinite numbers, and a column that has none at all."""
    infinite = np.flatnonzero(np.isinf(values))
    if infinite.size:
        where = f"{source.path.name}:{line[infinite[0]]}, {column}"
        raise InputError("the number is infinite", "Leave a missing value empty.", where)


def _mark_throughout(columns: Mapping[int, Series[Any]], form: Form, file: str) -> str:
    """Return the decimal mark that every row is written with."""
    marked = [column[column.str.contains(r"[.,]", regex=True, na=False)] for column in columns.values()]
    return decimal_mark([str(cell) for column in marked for cell in column], form.headings.separator, file)


def decimal_mark(cells: Sequence[str], separator: str, file: str) -> str:
    """Return the decimal mark that numbers are written with.

    Parameters
    ----------
    cells : sequence of str
        Fields of the columns of numbers.
    separator : str
        What stands between fields; where it is a comma, points are the only decimal marks.
    file : str
        Name of the log, for errors.

    Raises
    ------
    InputError
        When commas and points both stand in numbers, or commas may part thousands.

    Examples
    --------
    >>> decimal_mark(["412,1", "400"], ";", "log.csv")
    ','
    """
    commas = [cell for cell in cells if _COMMA_NUMBER.fullmatch(cell.strip())]
    if not commas or separator == ",":
        return "."
    points = [cell for cell in cells if re.fullmatch(r"[+-]?[0-9]*\.[0-9]+", cell.strip())]
    thousands = separator == "\t" and all(len(cell.partition(",")[2]) == 3 for cell in commas)
    if points or thousands:
        example = f"'{shown(commas[0])}'" + (f" and '{shown(points[0])}'" if points else "")
        advice = "Export the log with one decimal mark throughout and no thousands separators."
        raise InputError(f"it is not clear which mark is the decimal one in {example}", advice, file)
    return ","


def sample_rows(lines: Sequence[str], headings: Headings) -> list[tuple[int, tuple[str, ...]]]:
    """Return line and fields of the rows below the headings that are not blank, among a log's first lines."""
    below = enumerate(lines[headings.line :], start=headings.line + 1)
    return [(number, fields(line, headings.separator)) for number, line in below if line.strip()]
