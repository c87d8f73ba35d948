"""How the numbers of a log are written: decimal mark and thousands separators."""

from __future__ import annotations

import re
from collections.abc import Iterable, Sequence
from typing import TYPE_CHECKING, Any

import numpy as np

from fieldfit.errors import InputError
from fieldfit.field.units import shown

if TYPE_CHECKING:
    from pandas import Series

ADVICE = (
    'Write decimal = "comma" or decimal = "point" under [log] in the section file, or export the log with one decimal '
    "mark throughout and no thousands separators."
)

_EXPONENT = r"(?:[eE][+-]?[0-9]+)?"
_NUMBER = rf"[+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+){_EXPONENT}"
_GAPS = " \u00a0\u202f\u2009'’"
_GROUPS = {
    ".": rf"[+-]?[1-9][0-9]{{0,2}}(?:([,{_GAPS}])[0-9]{{3}})(?:\1[0-9]{{3}})*(?:\.[0-9]*)?{_EXPONENT}",
    ",": rf"[+-]?[1-9][0-9]{{0,2}}(?:([.{_GAPS}])[0-9]{{3}})(?:\1[0-9]{{3}})*(?:,[0-9]*)?{_EXPONENT}",
}
_PLAIN = {".": _NUMBER, ",": _NUMBER.replace(r"\.", ",")}
_ONE_GROUP = re.compile(r"[+-]?[1-9][0-9]{0,2}[,.][0-9]{3}")
_HAS_COMMA = re.compile(r"[+-]?[0-9.,'’\s]*,[0-9.,'’\s]*")


def decimal_mark(cells: Sequence[str], separator: str, file: str, stated: str | None = None) -> str:
    """Return the decimal mark that numbers are written with.

    A cell such as "412,1" or "1.234,5" can be read with a decimal comma only, "1,234.5" with a decimal point only;
    "1,234" and "1.234" either way.

    Parameters
    ----------
    cells : sequence of str
        Fields of the columns of numbers.
    separator : str
        What stands between fields.
    file : str
        Name of the log, for errors.
    stated : str, optional
        The mark that the section file states.

    Raises
    ------
    InputError
        When some cells need one mark and some the other, or every mark may part thousands.

    Examples
    --------
    >>> decimal_mark(["412,1", "400"], ";", "log.csv"), decimal_mark(["1,412.5", "400"], ";", "log.csv")
    (',', '.')
    """
    if stated is not None:
        return stated
    marked = list(dict.fromkeys(cell.strip() for cell in cells if "," in cell or "." in cell))
    commas = [cell for cell in marked if _fits(cell, ",") and not _fits(cell, ".")]
    points = [cell for cell in marked if _fits(cell, ".") and not _fits(cell, ",")]
    if commas and points:
        seen = f"it is not clear which mark is the decimal one in '{shown(commas[0])}' and '{shown(points[0])}'"
        raise InputError(seen, ADVICE, file)
    if commas or points:
        return "," if commas else "."
    if is_open(cells, separator):
        cell = next(cell for cell in marked if _ONE_GROUP.fullmatch(cell))
        mark = "comma" if "," in cell else "point"
        seen = f"it is not clear whether the {mark} in '{shown(cell)}' is a decimal mark or parts thousands"
        raise InputError(seen, ADVICE, file)
    return "."


def is_open(cells: Sequence[str], separator: str) -> bool:
    """Return whether every mark in some numbers may be a decimal mark and may part thousands.

    Between commas a point is a decimal mark.

    Parameters
    ----------
    cells : sequence of str
        Fields of the columns of numbers.
    separator : str
        What stands between fields.

    Examples
    --------
    >>> is_open(["1.412", "398"], ";"), is_open(["1.412", "0.398"], ";"), is_open(["1.412"], ",")
    (True, False, False)
    """
    marked = [cell.strip() for cell in cells if "," in cell or "." in cell]
    numbers = [cell for cell in marked if _fits(cell, ",") or _fits(cell, ".")]
    plain = separator == ","
    return bool(numbers) and all(_ONE_GROUP.fullmatch(cell) and not (plain and "." in cell) for cell in numbers)


def _fits(cell: str, mark: str) -> bool:
    """Return whether a cell is a number with that decimal mark."""
    return re.fullmatch(f"{_PLAIN[mark]}|{_GROUPS[mark]}", cell) is not None


def as_numbers(texts: Series[Any], mark: str) -> tuple[Series[Any], int | None]:
    """Return texts as numbers, and the place of the first that is none.

    Parameters
    ----------
    texts : Series
        (N,) trimmed texts; missing where there is no value.
    mark : str
        Decimal mark.

    Returns
    -------
    tuple
        The numbers, and None or a place from 0.
    """
    plain = texts.str.fullmatch(_PLAIN[mark]).fillna(False).astype(bool) | texts.isna()
    grouped = ~plain
    if grouped.any():
        grouped &= texts.str.fullmatch(_GROUPS[mark]).fillna(False).astype(bool)
        texts = texts.mask(grouped, texts.str.replace(rf"[{'.' if mark == ',' else ','}{_GAPS}]", "", regex=True))
    bad = np.flatnonzero(~(plain | grouped).to_numpy())
    if bad.size:
        return texts, int(bad[0])
    if mark == ",":
        texts = texts.str.replace(",", ".", regex=False)
    return texts.astype("float64"), None


def no_number(text: str, where: str, marks: Iterable[str]) -> InputError:
    """Return the error for a field that should be a number.

    Parameters
    ----------
    text : str
        The field.
    where : str
        Its place.
    marks : iterable of str
        Some of what may stand for a missing value.
    """
    if _HAS_COMMA.fullmatch(text.strip()) or _fits(text.strip(), ".") or _fits(text.strip(), ","):
        seen = f"'{shown(text)}' does not fit the decimal mark of the other numbers"
        return InputError(seen, ADVICE, where)
    listed = ", ".join(f"'{mark}'" for mark in marks)
    return InputError(
        f"'{shown(text)}' is not a number", f"Leave a missing value empty, or write one of {listed}.", where
    )
