"""Loggers and the wave speed of a section file."""

from __future__ import annotations

import re

from fieldfit.errors import InputError, near_miss
from fieldfit.field.logger_clock import Logger
from fieldfit.field.quantities import quantity
from fieldfit.field.toml_table import TomlTable
from fieldfit.field.units import shown

_GAIN = re.compile(r"([+-]?[0-9.]+)\s*(ppm|s/(?:d|day)|s/(?:w|week))")
_GAINS = {"ppm": 1e-6, "d": 1.0 / 86400.0, "day": 1.0 / 86400.0, "w": 1.0 / 604800.0, "week": 1.0 / 604800.0}


def read_loggers(tables: tuple[TomlTable, ...], columns: tuple[str, ...]) -> tuple[Logger, ...]:
    """Return what is said of each logger's clock.

    Parameters
    ----------
    tables : tuple of TomlTable
        The `[[logger]]` tables.
    columns : tuple of str
        Columns of the section.

    Raises
    ------
    InputError
        When a table names neither file nor columns, or a column that no instrument has.
    """
    return tuple(_logger(table, columns) for table in tables)


def _logger(table: TomlTable, columns: tuple[str, ...]) -> Logger:
    """Return one logger."""
    file, own = table.text("file"), texts(table, "columns")
    if file is None and not own:
        advice = 'Write file = "up.csv" or columns = ["upstream"].'
        raise InputError("the logger has neither a file nor columns", advice).at(table.where("file"))
    for column in own:
        if column not in columns:
            advice = f"{near_miss(column, columns)}Columns here are: {', '.join(columns)}."
            raise InputError(f"no instrument has the column '{shown(column)}'", advice).at(table.where("columns"))
    text, gains = table.text("offset"), table.text("drift")
    offset = None
    if text is not None:
        with table.at("offset"):
            offset = quantity(text, "duration", "+3600 s")
    return Logger(file=file, columns=own, offset_s=offset, drift=None if gains is None else _gain(table, gains))


def _gain(table: TomlTable, text: str) -> float:
    """Return how fast a clock gains [s/s]."""
    found = _GAIN.fullmatch(text.replace("−", "-"))
    if not found:
        raise InputError(f"'{shown(text)}' is no drift of a clock", 'Write "20 ppm" or "1.7 s/day".').at(
            table.where("drift")
        )
    return float(found[1]) * _GAINS[found[2].removeprefix("s/")]


def texts(table: TomlTable, key: str) -> tuple[str, ...]:
    """Return a list of texts, or a single one; none where the key is absent."""
    value = table.values.get(key)
    if value is None or isinstance(value, str):
        one = table.text(key)
        return () if one is None else (one,)
    if isinstance(value, list) and value and all(isinstance(one, str) and one.strip() for one in value):
        return tuple(" ".join(one.split()) for one in value)
    raise InputError(f"'{key}' is no list of texts", f'Write {key} = ["one", "another"].').at(table.where(key))


def read_wave_speed(top: TomlTable) -> float | None:
    """Return the speed of a pressure wave [m/s], where the file says it."""
    text = top.text("wave_speed")
    if text is None:
        return None
    with top.at("wave_speed"):
        speed = quantity(text, "velocity", "1200 m/s")
        if not 20.0 <= speed <= 2500.0:
            raise InputError(f"'{shown(text)}' is no speed of a pressure wave", "It lies between 20 and 2500 m/s.")
    return speed
