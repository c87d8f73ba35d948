"""A workbook as a log: one sheet of it, as text with tabs between the cells."""

from __future__ import annotations

import datetime as dt
import hashlib
from collections.abc import Callable, Iterable
from pathlib import Path
from typing import TYPE_CHECKING, Any
from zipfile import BadZipFile

from fieldfit.errors import InputError, near_miss
from fieldfit.field.log_source import LARGEST_LOG_BYTES, LogSource
from fieldfit.field.units import shown

if TYPE_CHECKING:
    from openpyxl.workbook.workbook import Workbook

WORKBOOKS = (".xlsx", ".xlsm")
"""Endings of workbooks that are read."""
OTHER_WORKBOOKS = (".xls", ".xlsb", ".ods", ".numbers")
"""Endings of workbooks that are not."""


def is_workbook(path: Path) -> bool:
    """Return whether a file is a workbook by its name.

    Raises
    ------
    InputError
        When it is one of a kind that is not read.

    Examples
    --------
    >>> is_workbook(Path("2026-05-12.xlsx")), is_workbook(Path("2026-05-12.csv"))
    (True, False)
    """
    ending = path.suffix.casefold()
    if ending in OTHER_WORKBOOKS and path.is_file():
        raise InputError(f"workbooks of the kind '{shown(ending)}' are not read", "Save it as .xlsx or CSV.", path.name)
    return ending in WORKBOOKS


def workbook_source(path: Path, sheet: str | None, fits: Callable[[list[str]], bool], said: list[str]) -> LogSource:
    """Return one sheet of a workbook as a log.

    Values count, not formulas. A cell's line is its row in the sheet.

    Parameters
    ----------
    path : Path
        The workbook.
    sheet : str or None
        Name of the sheet; None for the first that fits, else the first one.
    fits : callable
        Whether the lines of a sheet hold the wanted headings.
    said : list of str
        Sentences on what was assumed are added here.

    Raises
    ------
    InputError
        When the program that reads workbooks is not installed, the file is no workbook, or it lacks the sheet.
    """
    if not path.is_file():
        raise InputError("there is no such log", "Check its name and place.", str(path))
    if path.stat().st_size > LARGEST_LOG_BYTES // 20:
        raise InputError("the workbook is too large", "Save the sheet as CSV.", path.name)
    book = _opened(path)
    try:
        name, lines = _chosen(book, sheet, fits, path.name)
    finally:
        book.close()
    said.append(f"The sheet '{shown(name)}' of the workbook was read.")
    digest = hashlib.sha256(path.read_bytes()).hexdigest()
    return LogSource(path=path, sha256=digest, encoding="utf-8", text="".join(f"{line}\n" for line in lines))


def _opened(path: Path) -> Workbook:
    """Open a workbook for reading its values."""
    try:
        from openpyxl import load_workbook
        from openpyxl.utils.exceptions import InvalidFileException
    except ImportError:
        advice = 'Install it with: pip install "fieldfit[excel]". Or save the sheet as CSV.'
        raise InputError("reading workbooks needs openpyxl, which is not installed", advice, path.name) from None
    try:
        return load_workbook(path, read_only=True, data_only=True)
    except (BadZipFile, InvalidFileException, OSError, KeyError, ValueError, TypeError, EOFError, SyntaxError):
        advice = "Open it in a spreadsheet and save it as .xlsx or CSV."
        raise InputError("the file is no workbook that can be read", advice, path.name) from None


def _chosen(book: Workbook, sheet: str | None, fits: Callable[[list[str]], bool], file: str) -> tuple[str, list[str]]:
    """Return name and lines of the sheet to be read."""
    names = [worksheet.title for worksheet in book.worksheets]
    if sheet is not None and sheet not in names:
        listed = ", ".join(f"'{shown(name)}'" for name in names[:12])
        raise InputError(f"there is no sheet '{shown(sheet)}'", f"{near_miss(sheet, names)}Sheets are {listed}.", file)
    first: tuple[str, list[str]] | None = None
    for worksheet in book.worksheets:
        if sheet is None or worksheet.title == sheet:
            lines = [_line(row) for row in worksheet.iter_rows()]
            found = worksheet.title, lines
            if sheet is not None or fits(lines):
                return found
            first = first or found
    if first is None or not any(line.strip() for line in first[1]):
        raise InputError("the workbook is empty", "Save the sheet with the readings.", file)
    return first


def _line(row: Iterable[Any]) -> str:
    """Return the cells of one row with tabs between them."""
    return "\t".join(_text(cell) for cell in row).rstrip("\t")


def _text(cell: Any) -> str:
    """Return what a cell holds as a log would write it."""
    value = cell.value
    if value is None:
        return ""
    if isinstance(value, dt.datetime):
        time_shown = "h" in str(cell.number_format).casefold()
        days_only = value.time() == dt.time() and not time_shown
        return value.date().isoformat() if days_only else _rounded(value).isoformat()
    if isinstance(value, dt.timedelta):
        return _clock(value.total_seconds())
    if isinstance(value, dt.date | dt.time):
        return value.isoformat()
    if isinstance(value, str):
        text = " ".join(value.split())
        return '"' + text.replace('"', '""') + '"' if '"' in text else text
    return repr(value)


def _rounded(value: dt.datetime) -> dt.datetime:
    """Return a time to the millisecond: a workbook keeps times as days, good to some microseconds."""
    whole = value.replace(microsecond=0)
    return whole + dt.timedelta(milliseconds=round(value.microsecond / 1000.0))


def _clock(seconds: float) -> str:
    """Return a duration as hours, minutes and seconds."""
    minutes, rest = divmod(round(seconds, 3), 60.0)
    return f"{int(minutes // 60)}:{int(minutes % 60):02d}:{rest:06.3f}"
