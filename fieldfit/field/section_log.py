"""How the logs of a section are written: the `[log]` table, and the raw signals of its instruments."""

from __future__ import annotations

import datetime as dt
from typing import Literal

from fieldfit.errors import InputError, near_miss
from fieldfit.field.log_hints import DATE_ORDERS, DateOrder, LogHints
from fieldfit.field.quantities import measures, quantity
from fieldfit.field.raw_signal import RawSignal, raw_signal, signal_name
from fieldfit.field.toml_table import TomlTable
from fieldfit.field.unit_spellings import Dimension
from fieldfit.field.units import shown

AIR_PA = (50_000.0, 110_000.0)
"""Pressures that the air has where pipes are laid [Pa]."""
LONGEST_INTERVAL_S = 86_400.0
"""Time from row to row beyond which a log is none [s]."""
_MARKS: dict[str, Literal[".", ","]] = {"comma": ",", ",": ",", "point": ".", ".": "."}


def read_log_hints(table: TomlTable | None) -> LogHints:
    """Return what the section file says of its logs.

    Parameters
    ----------
    table : TomlTable or None
        The `[log]` table.

    Raises
    ------
    InputError
        When a value cannot be read.
    """
    if table is None:
        return LogHints()
    air = table.text("barometer")
    given = air is not None and measures(air, "pressure")
    return LogHints(
        dates=_order(table),
        decimal=_decimal(table),
        start=_start(table),
        interval_s=_interval(table),
        sheet=table.text("sheet"),
        barometer_pa=_air(table, air) if air is not None and given else None,
        barometer_column=None if given else air,
    )


def read_signal(table: TomlTable, dimensions: tuple[Dimension, ...]) -> RawSignal | None:
    """Return the raw signal of an instrument, None where its column holds readings.

    Parameters
    ----------
    table : TomlTable
        The instrument's table.
    dimensions : tuple of str
        What it may measure, the usual one first.

    Raises
    ------
    InputError
        When only one of range and signal is given, or one cannot be read.
    """
    name, its_range = table.text("signal"), table.text("range")
    if name is None and its_range is None:
        return None
    if name is None or its_range is None:
        absent, there = ("signal", "range") if name is None else ("range", "signal")
        seen = f"'{there}' is given without '{absent}'"
        example = {"signal": 'signal = "4-20 mA"', "range": 'range = "0 to 10 bar"'}[absent]
        raise InputError(seen, f"Write {example} as well.").at(table.where(there))
    if table.values.get("unit") is not None:
        advice = "A raw signal has the unit of its range: take unit out."
        raise InputError("both unit and range are given", advice).at(table.where("unit"))
    with table.at("signal"):
        known = signal_name(name)
    with table.at("range"):
        return raw_signal(known, its_range, dimensions)


def _order(table: TomlTable) -> DateOrder | None:
    """Return the order of day, month and year."""
    text = table.text("dates")
    for order in DATE_ORDERS:
        if text == order:
            return order
    if text is None:
        return None
    advice = f'{near_miss(text, DATE_ORDERS)}Write dates = "day first" for 12/05/2026 in May, else "month first".'
    raise InputError(f"'{shown(text)}' is no order of day and month", advice).at(table.where("dates"))


def _decimal(table: TomlTable) -> Literal[".", ","] | None:
    """Return the decimal mark."""
    text = table.text("decimal")
    if text is None or text in _MARKS:
        return _MARKS[text] if text else None
    raise InputError(f"'{shown(text)}' is no decimal mark", 'Write decimal = "comma" or "point".').at(
        table.where("decimal")
    )


def _start(table: TomlTable) -> dt.datetime | None:
    """Return the time of the first row."""
    value = table.values.get("start")
    if value is None:
        return None
    if isinstance(value, str):
        try:
            value = dt.datetime.fromisoformat(value.strip())
        except ValueError:
            value = None
    if not isinstance(value, dt.datetime):
        advice = "Write day and time like start = 2026-05-12T08:00:00."
        raise InputError("the start is no day with a time", advice).at(table.where("start"))
    return value if value.tzinfo is None else value.astimezone(dt.UTC).replace(tzinfo=None)


def _interval(table: TomlTable) -> float | None:
    """Return the time from row to row [s]."""
    text = table.text("interval")
    if text is None:
        return None
    with table.at("interval"):
        seconds = quantity(text, "duration", "10 s")
        if not 0.0 < seconds <= LONGEST_INTERVAL_S:
            raise InputError(f"the interval '{shown(text)}' is no logger's", 'Write it like "10 s".')
    return seconds


def _air(table: TomlTable, text: str) -> float:
    """Return the pressure of the air [Pa]."""
    with table.at("barometer"):
        pressure = quantity(text, "pressure", "1013 hPa")
        if not AIR_PA[0] <= pressure <= AIR_PA[1]:
            raise InputError(
                f"'{shown(text)}' is no pressure of the air", "Write what a barometer at the pipe shows, as 1013 hPa."
            )
    return pressure
