"""Dates and times in every usual writing but ISO 8601: 12.05.2026, 05/12/26 8:00 pm, 12-May-2026, and the like."""

from __future__ import annotations

import datetime as dt
import re
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from fieldfit.errors import InputError
from fieldfit.field.fixed_dates import fixed_dates
from fieldfit.field.log_hints import DateOrder
from fieldfit.field.units import shown

if TYPE_CHECKING:
    from pandas import Series

Stamps = NDArray[np.datetime64]

MONTHS = ("jan", "feb", "mar", "apr", "may", "jun", "jul", "aug", "sep", "oct", "nov", "dec")
"""How months begin."""
_WEEKDAYS = ("mon", "tue", "wed", "thu", "fri", "sat", "sun")
_WORD = re.compile(r"[A-Za-z]{3,9}\.?")
_AFTERNOON = r"(?i)\s*([ap])\.?\s?m\.?$"
_DATE = r"([0-9]{1,4})\s?([/.\- ])\s?([0-9]{1,2})(\2|,? )\s?([0-9]{2,4})"
_TIME = r"([0-9]{1,2})([:.])([0-9]{2})(?:\7([0-9]{2})([.,:][0-9]{1,9})?)?"
_STAMP = re.compile(rf"{_DATE}(?:[T ]+{_TIME})?")
_PARTS: dict[DateOrder, str] = {"day first": "dmy", "month first": "mdy", "year first": "ymd"}


@dataclass(frozen=True, slots=True, kw_only=True)
class Known:
    """What is known of the order of day and month from elsewhere."""

    order: DateOrder | None = None
    """Stated order."""
    day: dt.date | None = None
    """Day of the test."""


def is_stamp(text: str) -> bool:
    """Return whether a text is a day with a time of day, in any writing.

    Examples
    --------
    >>> is_stamp("12.05.2026 08:00"), is_stamp("May 12, 2026 8:00:00 pm"), is_stamp("12.05.2026"), is_stamp("0.5")
    (True, True, False, False)
    """
    found = _STAMP.fullmatch(re.sub(_AFTERNOON, "", _figures(_spaced(text))))
    return found is not None and found[6] is not None


def is_day(text: str) -> bool:
    """Return whether a text is a day without a time of day.

    Examples
    --------
    >>> is_day("12-May-2026"), is_day("2026-05-12"), is_day("12:30")
    (True, True, False)
    """
    found = _STAMP.fullmatch(_figures(_spaced(text)))
    return found is not None and found[6] is None


def read_dates(texts: Series[Any], known: Known, where: str, said: list[str]) -> Stamps:
    """Return days, with or without times of day, as stamps; NaT where a text cannot be read.

    Parameters
    ----------
    texts : Series
        (N,) texts; missing where there is none.
    known : Known
        What settles the order of day and month.
    where : str
        File and column, for errors.
    said : list of str
        Sentences on what was assumed are added here.

    Raises
    ------
    InputError
        When day and month may change places, and order or duration of the rows depends on it.
    """
    first = str(texts.dropna().iloc[0])
    if first != _spaced(first):
        texts = texts.str.replace(r"\s+", " ", regex=True)
    texts, first = texts.str.strip(), _spaced(first)
    order_of_names = _order_of_names(first)
    if _WORD.search(re.sub(_AFTERNOON, "", first)):
        texts = texts.str.replace(_WORD.pattern, lambda found: _figure(found[0]), regex=True).str.strip(" ,")
    hours = np.zeros(len(texts), dtype="timedelta64[h]")
    if re.search(_AFTERNOON, first):
        texts, hours = _to_24_hours(texts)
    model = _STAMP.fullmatch(_figures(re.sub(_AFTERNOON, "", first)).replace("T", " "))
    if model is None:
        return np.full(len(texts), np.datetime64("NaT"), dtype="datetime64[ns]")
    if model[10] and model[10][0] == ",":
        texts = texts.str.replace(r",([0-9]+)$", r".\1", regex=True)
    orders = _orders(model, order_of_names or known.order)
    if len(orders) == 1:
        order = orders[0]
        if order == "day first" and known.order is None and order_of_names is None:
            said.append(f"Dates such as '{shown(first)}' were read day first.")
    else:
        order = _settled(texts, model, orders, (known, first, where), said)
    return _parsed(texts, model, order) + hours


def _spaced(text: str) -> str:
    """Return a text with single spaces."""
    return " ".join(text.split())


def _figures(text: str) -> str:
    """Return a text with months as figures, and without the day of the week."""
    return _WORD.sub(lambda found: _figure(found[0]), text).strip(" ,")


def _figure(word: str) -> str:
    """Return the figure of a month, nothing for a day of the week, and any other word as it stands."""
    start = word[:3].casefold()
    if start in MONTHS:
        return f"{MONTHS.index(start) + 1:02d}"
    return "" if start in _WEEKDAYS else word


def _order_of_names(text: str) -> DateOrder | None:
    """Return the order of day and month where the month has a name."""
    for found in _WORD.finditer(text):
        if found[0][:3].casefold() in MONTHS:
            return "day first" if re.search(r"[0-9]", text[: found.start()]) else "month first"
    return None


def _to_24_hours(texts: Series[Any]) -> tuple[Series[Any], NDArray[np.timedelta64]]:
    """Return texts without am and pm, and the hours to add."""
    added = np.zeros(len(texts), dtype="timedelta64[h]")
    halves = texts.str.extract(_AFTERNOON, expand=False)
    plain = texts.str.replace(_AFTERNOON, "", regex=True)
    hour = plain.str.extract(r"(?:^|[T ])([0-9]{1,2})[:.][0-9]{2}[^ ]*$", expand=False).astype("float64").to_numpy()
    half = halves.str.casefold().fillna("").to_numpy(dtype=object)
    added[(half == "p") & (hour < 12.0)] = 12
    added[(half == "a") & (hour == 12.0)] = -12
    return plain, added


def _orders(model: re.Match[str], stated: DateOrder | None) -> tuple[DateOrder, ...]:
    """Return the orders that a date may be written in, the usual one first."""
    if len(model[1]) > 2:
        return ("year first",)
    if stated is not None and not (stated == "year first" and len(model[5]) == 4):
        return (stated,)
    if model[2] == ".":
        return ("day first",)
    return ("day first", "month first") if len(model[5]) == 4 else ("day first", "month first", "year first")


def _parsed(texts: Series[Any], model: re.Match[str], order: DateOrder) -> Stamps:
    """Return the stamps in one order; seconds and their fractions may be missing here and there."""
    import pandas as pd

    alike = fixed_dates(texts, model, _PARTS[order])
    if alike is not None:
        return alike
    year = {"d": "%d", "m": "%m", "y": "%Y" if 4 in {len(model[1]), len(model[5])} else "%y"}
    one, two, three = (year[part] for part in _PARTS[order])
    day = f"{one}{model[2]}{two}{model[4]}{three}"
    mark = model[7] or ":"
    fraction = ":" if model[10] and model[10][0] == ":" else "."
    times = [f" %H{mark}%M{mark}%S", f" %H{mark}%M", f" %H{mark}%M{mark}%S{fraction}%f", ""]
    if model[6] is None:
        times = times[::-1]
    elif model[10]:
        times = [times[2], times[0], times[1], ""]
    plain = texts.str.replace("T", " ", regex=False) if texts.iloc[:100].str.contains("T").any() else texts
    stamps = pd.Series(pd.NaT, index=texts.index, dtype="datetime64[ns]")
    left = texts.notna()
    for time in times:
        if left.any():
            tried = pd.to_datetime(plain[left], format=day + time, errors="coerce").astype("datetime64[ns]")
            stamps[left] = tried
            left = texts.notna() & stamps.isna()
    return np.asarray(stamps.to_numpy())


def _settled(
    texts: Series[Any],
    model: re.Match[str],
    orders: Sequence[DateOrder],
    place: tuple[Known, str, str],
    said: list[str],
) -> DateOrder:
    """Return the order that the dates are written in, and say which and why."""
    known, first, where = place
    each = texts.dropna().str.replace(r"[T ]+[0-9]{1,2}[:.][0-9]{2}[^ ]*$", "", regex=True).drop_duplicates()
    days = {order: _parsed(each, _only_day(model), order) for order in orders}
    fits = [order for order in orders if not np.isnat(days[order]).any()]
    if len(fits) < 2:
        order = fits[0] if fits else min(orders, key=lambda one: int(np.isnat(days[one]).sum()))
        said.append(f"Dates such as '{shown(first)}' were read {order}: no other order fits all rows.")
        return order
    usual = days[fits[0]]
    if all(np.array_equal(days[order], usual) for order in fits):
        return fits[0]
    on_day = [
        order for order in fits if known.day is not None and days[order][0].astype("datetime64[D]").item() == known.day
    ]
    if len(on_day) == 1:
        said.append(
            f"Dates such as '{shown(first)}' were read {on_day[0]}, so that the log begins on the day of the test."
        )
        return on_day[0]
    cure = 'rite dates = "day first" or "month first" under [log] in the section file'
    if all(np.array_equal(days[order] - days[order][0], usual - usual[0]) for order in fits):
        day = usual[0].astype("datetime64[D]")
        said.append(f"'{shown(first)}' was taken as {day}, the day first; w{cure} to settle it.")
        return fits[0]
    row = int(np.flatnonzero([len({str(days[order][row]) for order in fits}) > 1 for row in range(len(each))])[0])
    ways = " or of ".join(str(days[order][row].astype("datetime64[D]")) for order in fits)
    seen = (
        f"dates such as '{shown(first)}' may be read in more than one order: one row is of {ways}, and the order or "
        "duration of the rows depends on it"
    )
    raise InputError(seen, f"W{cure}.", where)


def _only_day(model: re.Match[str]) -> re.Match[str]:
    """Return the match of a date without its time."""
    found = _STAMP.fullmatch(model[0][: model.end(5)])
    return found or model
