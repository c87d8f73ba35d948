"""Which rows of a log are readings, and which are blank, comments, headings over again, averages or notes."""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.heading_parts import COMMENT_SIGNS
from fieldfit.field.units import shown

if TYPE_CHECKING:
    from pandas import DataFrame

    from fieldfit.field.log_rows import Form

_MEANS = ("average", "averages", "avg", "mean", "median", "sum", "total", "totals", "count", "summary", "statistics")
_SPREADS = ("min", "minimum", "max", "maximum", "range", "std", "stdev", "std dev", "sd", "variance")
_ENDS = ("end", "end of file", "end of log", "end of data", "end of record", "eof", "records", "rows", "samples")
SUMMARY_WORDS = (*_MEANS, *_SPREADS, *_ENDS)
"""What stands at the beginning of a row that is no reading, without capitals."""
MOST_SAID = 5
"""Lines that were left out and are named one by one."""

_DIGITS = re.compile(r"(?:[^0-9]*[0-9]){3}")
Mask = NDArray[np.bool_]


def readings(table: DataFrame, line: NDArray[np.int64], form: Form, said: list[str]) -> Mask:
    """Return the (N,) rows that are readings: neither blank, nor a comment, a summary, a note, or headings over again.

    Parameters
    ----------
    table : DataFrame
        (N,) rows; the columns of numbers may still be text.
    line : ndarray
        (N,) line of each row.
    form : Form
        How rows are written.
    said : list of str
        Sentences on rows that were left out are added here; blank rows need none.
    """
    kept: Mask = ~np.all(table.isna().to_numpy(), axis=1)
    left_out: dict[int, str] = {}
    for label in dict.fromkeys((form.label, 0)):
        if table[label].dtype.kind != "f":
            left_out |= _no_readings(table, label, form, kept)
    for number, row in enumerate(sorted(left_out)):
        kept[row] = False
        if number < MOST_SAID:
            said.append(f"Line {line[row]} ('{shown(left_out[row])}') is no reading and was left out.")
    if len(left_out) > MOST_SAID:
        said.append(f"{len(left_out) - MOST_SAID} more such lines were left out.")
    return kept


def _no_readings(table: DataFrame, label: int, form: Form, kept: Mask) -> dict[int, str]:
    """Return the rows that are no readings by what stands in one column, with that text."""
    column = table[label]
    # Looking at first letters spares a long log the work on every text.
    first = column.fillna("").to_numpy(dtype=object).astype("U1")
    lettered = np.flatnonzero(((first >= "A") | np.isin(first, ["#", "/", "*", "=", "["])) & kept)
    if lettered.size == 0:
        return {}
    texts = column.iloc[lettered].str.strip()
    folded = texts.str.strip("*=-:. ").str.casefold()
    headings = (form.headings.texts[label].casefold(), *(unit.casefold() for unit in _units_at(form, label)))
    summary = folded.str.split(":").str[0].isin(SUMMARY_WORDS) | texts.str.casefold().isin(headings)
    comment = texts.str.startswith(COMMENT_SIGNS)
    others = [place for place in form.numbers if place != label]
    empty = np.all(table[others].iloc[lettered].isna().to_numpy(), axis=1)
    unlabelled = table[form.label].iloc[lettered].isna().to_numpy() if label != form.label else None
    if unlabelled is None:
        note = empty & ~texts.str.contains(_DIGITS).to_numpy(dtype=bool)
        wrong = lettered[(summary | comment).to_numpy(dtype=bool) | note]
    else:
        # Beside a clock such a word may be a remark on a good row.
        wrong = lettered[comment.to_numpy(dtype=bool) | (summary.to_numpy(dtype=bool) & unlabelled)]
    return {int(row): str(column.iloc[row]) for row in wrong}


def _units_at(form: Form, label: int) -> Sequence[str]:
    """Return the text that stands below a heading in a row of units."""
    return form.headings.units[label : label + 1]


def without_comments(lines: Sequence[str], width: int, separator: str) -> Iterator[tuple[str, bool]]:
    """Yield each line, blank in place of a comment or a note of another width, and whether that was done.

    Parameters
    ----------
    lines : sequence of str
        Lines below the headings.
    width : int
        Fields in a row.
    separator : str
        What stands between them.
    """
    for line in lines:
        text = line.lstrip(' "')
        comment = text.startswith(COMMENT_SIGNS) and not text.upper().startswith("#N/A")
        parts = line.count(separator) + 1
        note = parts > width and text[:1].isalpha() and not _DIGITS.search(text.split(separator)[0])
        yield ("\n", True) if comment or note else (line, False)


def as_missing(column: Any, marks: Sequence[str]) -> Any:
    """Return trimmed texts, missing where they are marks of a missing value."""
    texts = column.str.strip()
    return texts.mask(texts.str.casefold().isin(marks))
