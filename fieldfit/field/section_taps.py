"""Meter and taps of a section file."""

from __future__ import annotations

import itertools
import math
import re
from dataclasses import replace
from typing import Literal

from fieldfit.errors import InputError, near_miss
from fieldfit.field.accuracy import accuracy, accuracy_remark
from fieldfit.field.quantities import quantity, remarks, uncertain
from fieldfit.field.section import Meter, Tap
from fieldfit.field.section_log import read_signal
from fieldfit.field.toml_table import TomlTable
from fieldfit.field.uncertain import Accuracy, Uncertain
from fieldfit.field.unit_spellings import Dimension
from fieldfit.field.units import is_unit, shown, unit

LENGTH_LIMIT = 0.005
"""Limit of a distance between taps that nothing is said of, as a share of it."""
ELEVATION_LIMIT = "0.05 m"
"""Limit of a gauge's elevation that nothing is said of."""

RESERVED = ("time", "temperature")
"""Headings that a log uses for itself."""


def read_meter(table: TomlTable, said: list[str]) -> Meter:
    """Return the flow meter from the `[flow]` table.

    Parameters
    ----------
    table : TomlTable
        The table.
    said : list of str
        Sentences on what was assumed are added here.

    Raises
    ------
    InputError
        When a value cannot be read.
    """
    return Meter(
        column=_column(table),
        accuracy=_accuracy(table, "flow", said),
        serial=table.text("meter"),
        senses=_senses(table),
        unit=_flow_unit(table),
        signal=read_signal(table, ("flow", "velocity")),
        totaliser=table.flag("totaliser") if "totaliser" in table.values else None,
        pulse_m3=_pulse(table, said),
    )


def read_taps(tables: tuple[TomlTable, ...], said: list[str]) -> tuple[Tap, ...]:
    """Return the taps in the order of their stations.

    A station without a limit gets one such that the distance to the next tap is good to ±0.5 %: with two or three
    taps the standards of both stations, added as squares, give exactly 0.5 %/√3 of the distance between them. With
    more taps an inner tap takes half of the shorter neighbouring reach's variance, so that no reach gets more than
    that and a long reach between short ones gets less.

    Parameters
    ----------
    tables : tuple of TomlTable
        The `[[tap]]` tables.
    said : list of str
        Sentences on what was assumed are added here.

    Raises
    ------
    InputError
        When there are fewer than two taps, a value cannot be read, or two taps share a column or a station.
    """
    if len(tables) < 2:
        seen = f"{'one tap is' if tables else 'no taps are'} described, where two or more are needed"
        raise InputError(seen, "Write one [[tap]] table, with double brackets, for each gauge.")
    taps = [(table, _tap(table, said)) for table in tables]
    ordered = sorted(taps, key=lambda pair: pair[1].station.value)
    _check_apart([table for table, _ in ordered], [tap for _, tap in ordered])
    if ordered != taps:
        names = ", ".join(tap.column for _, tap in ordered)
        said.append(f"The file names the taps in another order than along the pipe; they were taken as: {names}.")
    return tuple(_with_default_limits([tap for _, tap in ordered], said))


def check_columns(meter: Meter, taps: tuple[Tap, ...]) -> None:
    """Refuse two instruments on one column of the log."""
    columns = [meter.column, *(tap.column for tap in taps)]
    folded = [" ".join(column.casefold().split()) for column in columns]
    for column, name in zip(columns, folded, strict=True):
        if folded.count(name) > 1:
            raise InputError(f"the column '{shown(column)}' is named twice", "Give each instrument its own column.")


def _column(table: TomlTable) -> str:
    """Return the heading an instrument stands under."""
    column = table.needed("column")
    if column.casefold() in RESERVED:
        advice = f"Name the column of the instrument; '{column}' is the log's own."
        raise InputError(f"'{column}' cannot be an instrument", advice).at(table.where("column"))
    return column


def _accuracy(table: TomlTable, dimension: Dimension, said: list[str]) -> Accuracy:
    """Return an instrument's accuracy."""
    text = table.number_or_text("accuracy")
    with table.at("accuracy"):
        given = accuracy(text or "", dimension)
        said += [remark for remark in (*remarks(given.text, dimension), accuracy_remark(given)) if remark]
    return given


def _unit(table: TomlTable, dimension: Dimension) -> str | None:
    """Return the unit that overrules the heading's, checked."""
    text = table.text("unit")
    if text is not None:
        with table.at("unit"):
            unit(text, dimension)
    return text


def _flow_unit(table: TomlTable) -> str | None:
    """Return the unit of the flow's column: of flow, of a volume that is counted, or of a velocity."""
    text = table.text("unit")
    if text is not None and not is_unit(text, "volume") and not is_unit(text, "velocity"):
        return _unit(table, "flow")
    return text


def _pulse(table: TomlTable, said: list[str]) -> float | None:
    """Return the volume of one pulse [m³]."""
    text = table.text("pulse")
    if text is None:
        return None
    with table.at("pulse"):
        volume = quantity(re.sub(r"\s*(?:/|per)\s*(?:pulse|imp|p)$", "", text), "volume", "10 L")
        if volume <= 0.0:
            raise InputError(f"the pulse '{shown(text)}' is not positive", 'Write it like "10 L".')
        if "signal" in table.values:
            raise InputError("a raw signal has no pulses", "Take out pulse, or signal and range.")
        said += remarks(text, "volume")
    return volume


def _senses(table: TomlTable) -> Literal["volume", "velocity"]:
    """Return what the meter measures."""
    text = table.text("senses") or "volume"
    if text == "volume":
        return "volume"
    if text == "velocity":
        return "velocity"
    advice = f'{near_miss(text, ("volume", "velocity"))}Write "velocity" for a clamp-on or insertion meter.'
    raise InputError(f"'{shown(text)}' is neither volume nor velocity", advice).at(table.where("senses"))


def _tap(table: TomlTable, said: list[str]) -> Tap:
    """Return one tap, as written."""
    station_text, elevation_text = table.needed("station"), table.text("elevation")
    with table.at("station"):
        station = uncertain(station_text, "length", "38.2 m", "0")
        if station.value < 0.0:
            raise InputError(
                f"the station '{shown(station_text)}' is negative",
                "Count the distance along the pipe from a point at or above the first tap.",
            )
    elevation = None
    if elevation_text is not None:
        with table.at("elevation"):
            elevation = uncertain(elevation_text, "length", "1.20 m", ELEVATION_LIMIT)
    return Tap(
        column=_column(table),
        station=station,
        elevation=elevation,
        accuracy=_accuracy(table, "pressure", said),
        gauge=table.text("gauge"),
        unit=_unit(table, "pressure"),
        signal=read_signal(table, ("pressure",)),
    )


def _check_apart(tables: list[TomlTable], taps: list[Tap]) -> None:
    """Refuse two taps at one station."""
    for table, (before, tap) in zip(tables[1:], itertools.pairwise(taps), strict=True):
        if not tap.station.value > before.station.value:
            seen = f"the taps '{shown(before.column)}' and '{shown(tap.column)}' are both at {tap.station.value:g} m"
            advice = (
                "Write each tap's distance along the pipe. Between two gauges on one tap there is no pipe, so no friction "
                "to measure: leave one of them out."
            )
            raise InputError(seen, advice).at(table.where("station"))


def _with_default_limits(taps: list[Tap], said: list[str]) -> list[Tap]:
    """Return the taps with the default limit where a station has none, and say which defaults were used."""
    standards = default_station_standards([tap.station.value for tap in taps])
    if any(tap.station.assumed for tap in taps):
        said.append(
            f"Distances between taps were taken as good to ±{LENGTH_LIMIT:.1%}".replace("%", " %")
            + ': write station = "38.2 m ± 0.1 m" to change it.'
        )
    if any(tap.elevation is not None and tap.elevation.assumed for tap in taps):
        example = 'write elevation = "1.20 m ± 0.02 m" to change it.'
        said.append(f"Elevations of gauges were taken as good to ±{ELEVATION_LIMIT}: {example}")
    return [
        replace(tap, station=_with_standard(tap.station, standard) if tap.station.assumed else tap.station)
        for tap, standard in zip(taps, standards, strict=True)
    ]


def _with_standard(station: Uncertain, standard: float) -> Uncertain:
    """Return a station with the default limit."""
    return replace(station, standard=standard)


def default_station_standards(stations: list[float]) -> list[float]:
    """Return the standard uncertainty of each station that makes distances good to the default limit.

    Parameters
    ----------
    stations : list of float
        Stations in order [m], two or more.

    Returns
    -------
    list of float
        Standard uncertainties [m].

    Examples
    --------
    >>> first, last = default_station_standards([0.0, 100.0])
    >>> round(math.hypot(first, last) * 3**0.5, 9)
    0.5
    """
    lengths = [below - above for above, below in itertools.pairwise(stations)]
    inner = [min(pair) ** 2 / 2.0 for pair in itertools.pairwise(lengths)]
    first = lengths[0] ** 2 - (inner[0] if inner else lengths[0] ** 2 / 2.0)
    last = lengths[-1] ** 2 - (inner[-1] if inner else lengths[-1] ** 2 / 2.0)
    return [LENGTH_LIMIT / math.sqrt(3.0) * math.sqrt(square) for square in (first, *inner, last)]
