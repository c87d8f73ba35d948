"""Rows of a long log that are written all alike, read at the speed of the parser alone."""

from __future__ import annotations

import io
import re
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.line_blocks import LineBlock
from fieldfit.field.log_rows import MARKS_AS_WRITTEN, Form

if TYPE_CHECKING:
    from pandas import DataFrame

_ISO = re.compile(rb'("?)([0-9]{4}-[0-9]{2}-[0-9]{2}[T ][0-9]{2}:[0-9]{2}(?::[0-9]{2}(?:\.[0-9]{1,6})?)?)(Z?)\1')
_END = ord("\n")


@dataclass(frozen=True, slots=True, kw_only=True)
class PlainRows:
    """The rows of one block; N rows."""

    stamp: NDArray[np.datetime64] | None
    """(N,) times of a clock with dates [µs]; None for a clock that counts from the start."""
    universal: bool
    """Whether they are in UTC, by their mark."""
    numbers: dict[int, NDArray[np.float64]]
    """(N,) values of each column of numbers, by its place; NaN where missing."""
    gaps: bool
    """Whether any value is missing."""


def plain_rows(block: LineBlock, form: Form, clock: int | None, gaps: bool) -> PlainRows | None:
    """Read a block whose rows are all alike: as many fields in each, and times of one form at the line's beginning.

    Nothing is said of a block that is not so, even if it holds a mistake: it is for slower hands.

    Parameters
    ----------
    block : LineBlock
        The lines.
    form : Form
        How rows are written.
    clock : int or None
        Place of a clock with dates; None for one that is a column of numbers.
    gaps : bool
        Whether missing values are likely; it changes nothing but the speed.

    Returns
    -------
    PlainRows or None
        None when any row is written otherwise.
    """
    text, separator = block.text, form.headings.separator.encode()
    ends = np.flatnonzero(np.frombuffer(text, dtype=np.uint8) == _END)
    if text.count(separator) != len(ends) * (form.width - 1) or (
        b"\r" in text and text.count(b"\r\n") != text.count(b"\r")
    ):
        return None
    stamp, universal = None, False
    if clock is not None:
        field = _ISO.fullmatch(text[: text.find(separator)]) if clock == 0 else None
        stamp = _stamps(text, ends, field, separator) if field else None
        if field is None or stamp is None:
            return None
        universal = bool(field[3])
    numbers = _numbers(text, form, gaps)
    if numbers is None or not _sound(list(numbers.values()), len(ends), stamp is None):
        return None
    missing = any(bool(np.isnan(column).any()) for column in numbers.values())
    return PlainRows(stamp=stamp, universal=universal, numbers=numbers, gaps=missing)


def _sound(columns: list[NDArray[np.float64]], rows: int, counted: bool) -> bool:
    """Return whether the columns have a value or a gap in each row, and no row is blank."""
    if any(len(column) != rows for column in columns):
        return False
    finite = [bool(np.isfinite(column).all()) for column in columns]
    if any(np.isinf(column).any() for column, sound in zip(columns, finite, strict=True) if not sound):
        return False
    return not (counted and not any(finite) and np.any(np.all(np.isnan(columns), axis=0)))


def _stamps(
    text: bytes, ends: NDArray[np.int64], field: re.Match[bytes], separator: bytes
) -> NDArray[np.datetime64] | None:
    """Return the times at the beginning of each line; None unless they are all of one form.

    What parts the figures is compared with the first line; the figures themselves the conversion refuses.
    """
    characters = np.frombuffer(text, dtype=np.uint8)
    starts = np.append(0, ends[:-1] + 1)
    width = len(field[0]) + 1
    if int(np.min(ends - starts)) < width:
        return None
    table = np.lib.stride_tricks.sliding_window_view(characters, width)[starts]
    for place, sign in enumerate(field[0] + separator):
        if not chr(sign).isdigit() and not np.all(table[:, place] == sign):
            return None
    begin, stop = field.span(2)
    if np.any(table[:, begin] - ord("0") > np.uint8(9)):
        return None
    texts = np.ascontiguousarray(table[:, begin:stop]).view(f"S{stop - begin}")[:, 0]
    try:
        return texts.astype("datetime64[us]")
    except ValueError:
        return None


def _numbers(text: bytes, form: Form, gaps: bool) -> dict[int, NDArray[np.float64]] | None:
    """Return the columns of numbers; None where a field is none."""
    for looked_for in (True,) if gaps else (False, True):
        try:
            table = _parsed(text, form, looked_for)
        except (ValueError, OverflowError):
            continue
        return {place: np.asarray(table[place].to_numpy(dtype=np.float64)) for place in form.numbers}
    return None


def _parsed(text: bytes, form: Form, gaps: bool) -> DataFrame:
    """Return the columns of numbers, parsed faster where no gaps are looked for."""
    import pandas as pd

    kinds: dict[int, Any] = dict.fromkeys(form.numbers, "float64")
    table: DataFrame = pd.read_csv(
        io.BytesIO(text),
        engine="c",
        sep=form.headings.separator,
        decimal=form.decimal,
        header=None,
        names=range(form.width),
        usecols=sorted(form.numbers),
        index_col=False,
        dtype=kinds,
        keep_default_na=False,
        na_values=MARKS_AS_WRITTEN,
        na_filter=gaps,
        skip_blank_lines=False,
        skipinitialspace=True,
    )
    return table
