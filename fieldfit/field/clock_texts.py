"""Texts of a clock as stamps: ISO 8601 at the parser's speed, other writings with care, zones, and times of day."""

from __future__ import annotations

import datetime as dt
import re
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from fieldfit.errors import InputError
from fieldfit.field.date_forms import Known, is_day, read_dates
from fieldfit.field.units import shown

if TYPE_CHECKING:
    from pandas import Series

Stamps = NDArray[np.datetime64]

ADVICE = "Write year, month, day and time like 2026-05-12T08:00:00."
SUMMER_ZONES = {
    "CEST": "CET", "BST": "GMT", "IST": "GMT", "WEST": "WET", "EEST": "EET", "EDT": "EST", "CDT": "CST", "MDT": "MST",
    "PDT": "PST", "AKDT": "AKST", "ADT": "AST", "AEDT": "AEST", "ACDT": "ACST", "NZDT": "NZST",
}  # fmt: skip
"""Zones of summer time and what they are called in winter, one hour later."""
UNIVERSAL = ("UTC", "GMT", "Z", "UT")
"""Zones that are universal time."""

_ISO = re.compile(r"[0-9]{4}-[0-9]{2}-[0-9]{2}[T ][0-9]{2}:[0-9]{2}(?::[0-9]{2}(?:[.,][0-9]+)?)?")
_ISO_ZONE = r"\s?(?:[zZ]|[+-][0-9]{2}(?::?[0-9]{2})?)"
_ZONE = r"(?<=[0-9mM.])\s?(?:UTC|GMT)?\s?([+-][0-9]{1,2}:?[0-9]{2}|[+-][0-9]{1,2})$"
_NAMED_ZONE = r"(?<=[0-9mM. ])\s?\(?([A-Z]{3,5}|[zZ])\)?$"
_TIME_OF_DAY = re.compile(r"[0-9]{1,4}[:.][0-9]{2}(?:[:.][0-9]{2}(?:[.,:][0-9]+)?)?(?:\s*[AaPp]\.?\s?[Mm]\.?)?")
_NO_DAY = "2000-01-01"
_HALF_A_DAY = np.timedelta64(12, "h")


@dataclass(frozen=True, slots=True, kw_only=True)
class ClockPlace:
    """Where a clock stands, and what is known of how it is written."""

    file: str
    """Name of the log."""
    heading: str
    """Heading of the clock."""
    known: Known = Known()  # noqa: RUF009
    """What settles the order of day and month."""
    zone_s: float | None = None
    """Time by which the zone in the heading is ahead of UTC [s]; None where it has none."""

    @property
    def where(self) -> str:
        """File and column, for errors."""
        return f"{self.file}, column '{shown(self.heading)}'"


def first_text(texts: Series[Any]) -> str | None:
    """Return the first text that is there, trimmed; None where there is none."""
    # Most logs have a time in their first row: a look at it spares a look at all of them.
    if len(texts) and isinstance(texts.iloc[0], str):
        return str(texts.iloc[0]).strip()
    given = texts.dropna()
    return str(given.iloc[0]).strip() if len(given) else None


def is_time_of_day(text: str) -> bool:
    """Return whether a text is a time of day, or a time from the start in hours, minutes and seconds.

    Examples
    --------
    >>> is_time_of_day("8:00:01 pm"), is_time_of_day("12.05.2026 08:00"), is_time_of_day("0.5")
    (True, False, False)
    """
    return _TIME_OF_DAY.fullmatch(text.strip()) is not None and (":" in text or text.count(".") == 2)


def is_iso(text: str) -> bool:
    """Return whether a text is a day with a time in ISO 8601, with or without a zone.

    Examples
    --------
    >>> is_iso("2026-05-12T08:00:00Z"), is_iso("12.05.2026 08:00:00")
    (True, False)
    """
    return re.fullmatch(f"{_ISO.pattern}(?:{_ISO_ZONE})?", text.strip()) is not None


def read_stamps(times: Series[Any], place: ClockPlace, said: list[str]) -> tuple[Stamps, bool]:
    """Return dates with times as stamps, and whether they are in UTC; NaT where a text cannot be read.

    Times without zones are kept as they stand.

    Parameters
    ----------
    times : Series
        (N,) texts; missing where there is none, but not all of them.
    place : ClockPlace
        Where they stand.
    said : list of str
        Sentences on what was assumed are added here.

    Raises
    ------
    InputError
        When only some times have a zone, or day and month may change places and it matters.
    """
    first = first_text(times) or ""
    if is_iso(first):
        stamps = _iso_stamps(times, place, said)
        if not np.isnat(stamps).any() or not (np.isnat(stamps) & times.notna().to_numpy()).any():
            return stamps, _has_zone(first)
    plain, ahead = _without_zones(times.str.strip(), place, said)
    stamps = read_dates(plain, place.known, place.where, said)
    return (stamps if ahead is None else stamps - ahead), ahead is not None


def _has_zone(text: str) -> bool:
    """Return whether an ISO time has a zone."""
    return re.search(rf"[0-9]{_ISO_ZONE}$", text[10:]) is not None


def _iso_stamps(times: Series[Any], place: ClockPlace, said: list[str]) -> Stamps:
    """Return ISO times without zones as they stand, and times with zones in UTC."""
    import pandas as pd

    # A look at some rows is enough: a logger that writes zones writes them all the way.
    few = times.iloc[:: max(1, len(times) // 200)].dropna()
    zoned = {_has_zone(str(text).strip()) for text in few}
    if len(zoned) > 1:
        raise InputError("only some times have a time zone", "Write all times in one zone.", place.where)
    if zoned == {True}:
        said.append("Times with a zone were turned into UTC.")
    stamps = pd.to_datetime(times, format="ISO8601", errors="coerce", utc=True)
    if stamps.isna().any() and stamps.isna().sum() > times.isna().sum():
        plain = times.str.strip().str.replace(",", ".", regex=False)
        stamps = pd.to_datetime(plain, format="ISO8601", errors="coerce", utc=True)
    return np.asarray(stamps.dt.tz_localize(None).to_numpy())


def _without_zones(
    times: Series[Any], place: ClockPlace, said: list[str]
) -> tuple[Series[Any], NDArray[np.timedelta64] | None]:
    """Return times without their zones, and by how much each is ahead of UTC; None where there are none."""
    first = first_text(times) or ""
    named = re.search(_NAMED_ZONE, first)
    if re.search(_ZONE, first) is None and (named is None or re.search(r"(?i)[0-9]\s?[ap]m$", first)):
        return times, None
    pattern = _NAMED_ZONE if named else _ZONE
    zones = times.str.extract(pattern, expand=False)
    if (zones.isna() & times.notna()).any():
        raise InputError("only some times have a time zone", "Write all times in one zone.", place.where)
    ahead = {str(zone): _ahead_s(str(zone)) for zone in zones.dropna().unique()}
    plain = times.str.replace(pattern, "", regex=True).str.strip()
    if named:
        ahead = _named_ahead(ahead, place, said)
    else:
        said.append("Times with a zone were turned into UTC.")
    seconds = zones.map(ahead).fillna(0.0).to_numpy(dtype=np.float64)
    return plain, (seconds * 1e3).astype("timedelta64[ms]")


def _named_ahead(zones: dict[str, float], place: ClockPlace, said: list[str]) -> dict[str, float]:
    """Return by how much each named zone is ahead of the winter's."""
    winters = {SUMMER_ZONES.get(zone.upper(), zone.upper()) for zone in zones}
    if len(winters) > 1:
        listed = " and ".join(f"'{shown(zone)}'" for zone in sorted(zones)[:2])
        raise InputError(f"times are in different zones, {listed}", "Write all times in one zone.", place.where)
    if len(zones) > 1:
        said.append(f"Summer time ends or begins in the log; all times were turned into {winters.pop()}.")
    elif next(iter(zones)).upper() not in UNIVERSAL:
        said.append(f"All times are in one zone, {shown(next(iter(zones)))}, and were kept as they stand.")
        return dict.fromkeys(zones, 0.0)
    return {zone: 3600.0 if zone.upper() in SUMMER_ZONES and len(zones) > 1 else 0.0 for zone in zones}


def _ahead_s(zone: str) -> float:
    """Return by how much an offset such as +02:00 is ahead of UTC [s]; 0 for a name."""
    found = re.fullmatch(r"([+-])([0-9]{1,2}):?([0-9]{2})?", zone)
    if found is None:
        return 0.0
    return (-60.0 if found[1] == "-" else 60.0) * (60 * int(found[2]) + int(found[3] or 0))


def with_days(times: Series[Any], dates: Series[Any], said: list[str]) -> Series[Any]:
    """Return times of day behind the days beside them.

    A day that a spreadsheet wrote with midnight, or a time with the day that spreadsheets count from, is understood;
    a day that stands in the first of its rows only holds for the rows below.

    Parameters
    ----------
    times, dates : Series
        (N,) texts.
    said : list of str
        Sentences on what was assumed are added here.
    """
    days = dates.str.strip().str.replace(r"[T ]0?0:00(?::00(?:\.0+)?)?$", "", regex=True)
    clock = times.str.strip().str.replace(r"^(?:1899-12-3[01]|1900-01-0[01])[T ]", "", regex=True)
    if str(days.dropna().iloc[0] if days.notna().any() else "").isdigit():
        days = days.str.replace(r"^([0-9]{4})([0-9]{2})([0-9]{2})$", r"\1-\2-\3", regex=True)
        clock = clock.str.replace(r"^([0-9]{1,2})([0-9]{2})([0-9]{2})$", r"\1:\2:\3", regex=True)
    if (days.isna() & clock.notna()).any() and days.notna().any() and not days.isna().iloc[0]:
        said.append("A date that stands in the first of its rows was taken to hold for the rows below.")
        days = days.ffill()
    return days + " " + clock


def read_times_of_day(times: Series[Any], place: ClockPlace, day: dt.date | None, said: list[str]) -> Stamps:
    """Return times of day on their own as stamps, of one day or on past midnight; NaT where a text cannot be read.

    Hours beyond 23 make it a time from the start.

    Parameters
    ----------
    times : Series
        (N,) texts; missing where there is none.
    place : ClockPlace
        Where they stand.
    day : date or None
        Day of the first row, where it is known.
    said : list of str
        Sentences on what was assumed are added here.

    Raises
    ------
    InputError
        When they may be minutes and seconds.
    """
    texts = times.str.strip()
    if _from_start(texts, place):
        return _durations(texts, place)
    first_day = day.isoformat() if day else _NO_DAY
    stamps, _ = read_stamps(first_day + " " + texts, place, said)
    stamps, there = stamps.copy(), np.flatnonzero(~np.isnat(stamps))
    past = np.diff(stamps[there]) < -_HALF_A_DAY
    if past.any():
        stamps[there[1:]] += np.cumsum(past).astype("timedelta64[D]")
        said.append("The clock runs on past midnight: rows below belong to the next day.")
    elif day is None:
        said.append("The clock has no dates: all rows were taken to be of one day.")
    return stamps


def _from_start(texts: Series[Any], place: ClockPlace) -> bool:
    """Return whether times in hours, minutes and seconds count from the start."""
    given = texts.dropna()
    if re.search(r"(?i)elapsed|duration|(?<![h:m])m+:s+", place.heading) and not re.search(
        r"(?i)[ap]m$", str(given.iloc[0])
    ):
        return True
    return bool((given.str.extract(r"^([0-9]{1,4}):", expand=False).astype("float64") > 24.0).any())


def _durations(texts: Series[Any], place: ClockPlace) -> Stamps:
    """Return times from the start as stamps."""
    import pandas as pd

    given = str(texts.dropna().iloc[0])
    if given.count(":") == 1:
        form = re.search(r"(?i)(h+:m+)|(m+:s+)", place.heading)
        if form is None:
            advice = "Write [hh:mm] or [mm:ss] behind it in the heading."
            raise InputError(f"'{shown(given)}' may be hours and minutes, or minutes and seconds", advice, place.where)
        texts = texts + ":00" if form[1] else "0:" + texts
    spans = pd.to_timedelta(texts.str.replace(",", ".", regex=False), errors="coerce")
    return np.asarray(np.datetime64(_NO_DAY, "ns") + spans.to_numpy())


def is_day_only(text: str) -> bool:
    """Return whether a text is a day, perhaps with the midnight a spreadsheet adds.

    Examples
    --------
    >>> is_day_only("12.05.2026"), is_day_only("20260512"), is_day_only("12.05.2026 08:00")
    (True, True, False)
    """
    return is_day(text) or re.fullmatch(r"20[0-9]{6}", text.strip()) is not None
