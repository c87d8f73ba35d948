"""Which column of a log is its clock."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass

from fieldfit.errors import InputError
from fieldfit.field.clock_texts import is_day_only
from fieldfit.field.date_forms import is_stamp
from fieldfit.field.heading_parts import bare_unit
from fieldfit.field.log_headings import Headings
from fieldfit.field.log_hints import DateOrder
from fieldfit.field.units import Unit, is_unit, shown, unit

TIME_NAMES = (
    *("time", "timestamp", "time stamp", "datetime", "date time", "date/time", "date and time", "date & time", "clock"),
    *(
        "local time",
        "time of day",
        "log time",
        "sample time",
        "unix time",
        "epoch",
        "unix timestamp",
        "uhrzeit",
        "zeit",
    ),
    *("zeitstempel", "heure", "hora", "fecha y hora", "datum/uhrzeit", "datum zeit"),
)
"""Headings of a clock."""
ELAPSED_NAMES = ("elapsed time", "elapsed", "run time", "test time")
"""Headings of a clock that counts from the start."""
DATE_NAMES = ("date", "day", "log date", "sample date", "datum", "fecha")
"""Headings of days."""
COUNTED_NAMES = {
    name + rest: its_unit
    for its_unit, names in {"s": ("seconds", "sec", "secs"), "min": ("minutes",), "h": ("hours",)}.items()
    for name in (*names, *(f"elapsed {each}" for each in names))
    for rest in ("", " from start", " since start", " elapsed")
}
"""Headings that name the unit of a clock that counts from the start."""
SHORT_NAMES = ("t",)
"""Headings of a clock only where a unit of time stands with them: without it t may be a temperature."""

_WITH_UNIT = re.compile(r"(.+?)\s*[\[(,_]\s*([^\])]+?)\s*[\])]?")
_DAY_FIRST = re.compile(r"(?i)\bd{1,2}[./ -]m{1,3}[./ -]y")
_MONTH_FIRST = re.compile(r"(?i)\bm{1,2}[./ -]d{1,2}[./ -]y")
_ZONE = re.compile(r"(?i)\b(?:utc|gmt)\s*(?:([+-])\s*([0-9]{1,2})(?::?([0-9]{2}))?)?(?![a-z0-9])")


@dataclass(frozen=True, slots=True, kw_only=True)
class TimeColumn:
    """The clock of a log."""

    heading: str
    """As it stands in the log."""
    position: int
    """Its place in a row, from 0."""
    unit: Unit | None = None
    """Unit of a clock that counts from the start; None for dates and times."""
    date_position: int | None = None
    """Place of a column of dates, where the clock has times of day only."""
    order: DateOrder | None = None
    """Order of day and month, as the headings show it."""
    zone_s: float | None = None
    """Time by which the zone in the heading is ahead of UTC [s]; None where it has none."""


def find_time(headings: Headings, first_row: Sequence[str], said: list[str], where: str) -> TimeColumn | None:
    """Return the clock's column, None for a hand sheet.

    Parameters
    ----------
    headings : Headings
        The line of headings.
    first_row : sequence of str
        Fields of the first row.
    said : list of str
        Sentences on what was assumed are added here.
    where : str
        Place of the headings, for errors.

    Raises
    ------
    InputError
        When two columns may be the clock.
    """
    taken = {place for place, _ in headings.found}
    texts = ["" if place in taken else headings.with_unit(place) for place in range(len(headings.texts))]
    names = [_name_and_unit(text) for text in texts]
    dates = [place for place, (name, _) in enumerate(names) if name == "date" or _holds_days(name, first_row, place)]
    for wanted in (*TIME_NAMES, *ELAPSED_NAMES, *SHORT_NAMES):
        places = [
            place for place, (name, its) in enumerate(names) if name == wanted and (its or name not in SHORT_NAMES)
        ]
        if places:
            return _clock_at(_only(places, headings, where), headings, first_row, dates, where)
    fields = enumerate(first_row[: len(names)])
    stamped = [place for place, field in fields if place not in taken and is_stamp(field)]
    if not stamped:
        counted = [
            place for place, (name, _) in enumerate(names) if name in COUNTED_NAMES and _is_number(first_row, place)
        ]
        return _clock_at(_only(counted, headings, where), headings, first_row, dates, where) if counted else None
    place = _only(stamped, headings, where)
    if place not in dates:
        said.append(f"The column '{shown(headings.texts[place])}' was taken as the clock.")
    return _column(place, headings, None, None)


def _holds_days(name: str, row: Sequence[str], place: int) -> bool:
    """Return whether a column that may be called after days holds some."""
    return name in DATE_NAMES and place < len(row) and is_day_only(row[place])


def _is_number(row: Sequence[str], place: int) -> bool:
    """Return whether a field is a number."""
    return place < len(row) and re.fullmatch(r"[0-9]*[.,]?[0-9]+", row[place]) is not None


def _clock_at(
    place: int, headings: Headings, first_row: Sequence[str], dates: list[int], where: str
) -> TimeColumn | None:
    """Return the clock in a column that is called so; None where it holds days only."""
    name, its_unit = _name_and_unit(headings.with_unit(place))
    if its_unit is None and name in COUNTED_NAMES:
        its_unit = unit(COUNTED_NAMES[name], "duration")
    field = first_row[place] if place < len(first_row) else ""
    if is_day_only(field):
        return None
    beside = _only(dates, headings, where, "dates") if dates and not is_stamp(field) and not its_unit else None
    return _column(place, headings, its_unit, beside)


def _column(place: int, headings: Headings, its_unit: Unit | None, date_position: int | None) -> TimeColumn:
    """Return a clock with what its headings show of order and zone."""
    text = headings.with_unit(place)
    days = headings.with_unit(date_position) if date_position is not None else text
    order: DateOrder | None = "day first" if _DAY_FIRST.search(days) else None
    if _MONTH_FIRST.search(days):
        order = "month first"
    return TimeColumn(
        heading=headings.texts[place] if its_unit else text,
        position=place,
        unit=its_unit,
        date_position=date_position,
        order=order,
        zone_s=_zone(text),
    )


def _zone(heading: str) -> float | None:
    """Return by how much the zone in a heading is ahead of UTC [s]."""
    found = _ZONE.search(heading)
    if found is None:
        return None
    minutes = 60 * int(found[2] or 0) + int(found[3] or 0)
    return 60.0 * (-minutes if found[1] == "-" else minutes)


def _name_and_unit(heading: str) -> tuple[str, Unit | None]:
    """Return a heading without capitals and underscores, parted from a unit of time if it has one."""
    parted = _WITH_UNIT.fullmatch(heading)
    if parted and is_unit(bare_unit(parted[2]), "duration"):
        return _fold(parted[1]), unit(bare_unit(parted[2]), "duration")
    return _fold(heading), None


def _fold(text: str) -> str:
    """Return a name without capitals, underscores, and what stands in brackets or behind a comma."""
    bare = re.sub(r"\s*(?:[\[(][^\])]*[\])]|,.*)$", "", text)
    bare = re.sub(r"(?i)[ _](?:utc|gmt|local)$", "", bare)
    return " ".join(bare.replace("_", " ").casefold().split())


def _only(places: list[int], headings: Headings, where: str, what: str = "the clock") -> int:
    """Return the one place there is."""
    if len(places) > 1:
        names = " and ".join(f"'{shown(headings.texts[place])}'" for place in places[:2])
        raise InputError(
            f"{names} may both be {what}",
            f"Name the right one '{'date' if what == 'dates' else 'time'}' and the other one otherwise.",
            where,
        )
    return places[0]
