"""Which column of a log is its clock."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass

from fieldfit.errors import InputError
from fieldfit.field.log_headings import Headings
from fieldfit.field.units import Unit, is_unit, shown, unit

TIME_NAMES = ("time", "timestamp", "time stamp", "datetime", "date time", "date/time", "date and time", "clock")
"""Headings of a clock."""
ELAPSED_NAMES = ("elapsed time", "elapsed")
"""Headings of a clock that counts from the start."""

_WITH_UNIT = re.compile(r"(.+?)\s*[\[(,_]\s*([^\])]+?)\s*[\])]?")
_DAY = re.compile(r"[0-9]{4}-[0-9]{2}-[0-9]{2}")
_DAY_AND_TIME = re.compile(r"[0-9]{4}-[0-9]{2}-[0-9]{2}[T ][0-9]{1,2}:[0-9]{2}.*")


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
    names = [_name_and_unit(text) for text in headings.texts]
    dates = [place for place, (name, _) in enumerate(names) if name == "date"]
    for wanted in (*TIME_NAMES, *ELAPSED_NAMES):
        places = [place for place, (name, _) in enumerate(names) if name == wanted]
        if places:
            return _clock_at(_only(places, headings, where), headings, first_row, dates)
    stamped = [place for place, field in enumerate(first_row[: len(names)]) if _DAY_AND_TIME.fullmatch(field)]
    if not stamped:
        return None
    place = _only(stamped, headings, where)
    if place not in dates:
        said.append(f"The column '{shown(headings.texts[place])}' was taken as the clock.")
    return TimeColumn(heading=headings.texts[place], position=place)


def _clock_at(place: int, headings: Headings, first_row: Sequence[str], dates: list[int]) -> TimeColumn | None:
    """Return the clock in a column that is called so; None where it holds days only."""
    text, its_unit = headings.texts[place], _name_and_unit(headings.texts[place])[1]
    field = first_row[place] if place < len(first_row) else ""
    if _DAY.fullmatch(field):
        return None
    beside = dates[0] if dates and not _DAY_AND_TIME.fullmatch(field) else None
    return TimeColumn(heading=text, position=place, unit=its_unit, date_position=None if its_unit else beside)


def _name_and_unit(heading: str) -> tuple[str, Unit | None]:
    """Return a heading without capitals and underscores, parted from a unit of time if it has one."""
    parted = _WITH_UNIT.fullmatch(heading)
    if parted and is_unit(parted[2], "duration"):
        return _fold(parted[1]), unit(parted[2], "duration")
    return _fold(heading), None


def _fold(text: str) -> str:
    """Return a name without capitals, underscores, and what stands in brackets behind it."""
    return " ".join(re.sub(r"[\[(][^\])]*[\])]$", "", text).replace("_", " ").casefold().split())


def _only(places: list[int], headings: Headings, where: str) -> int:
    """Return the one place there is."""
    if len(places) > 1:
        names = " and ".join(f"'{shown(headings.texts[place])}'" for place in places[:2])
        raise InputError(
            f"{names} may both be the clock", "Name the right one 'time' and the other one otherwise.", where
        )
    return places[0]
