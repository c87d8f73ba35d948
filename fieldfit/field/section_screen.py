"""The `[screen]` table of a section file: how logs are read, and the limits of the screens."""

from __future__ import annotations

from typing import Literal

from fieldfit.errors import InputError, near_miss
from fieldfit.field.quantities import quantity
from fieldfit.field.toml_table import TomlTable
from fieldfit.field.units import shown

MODES = ("auto", "plateaus", "service")
"""Ways to read a log."""
LARGEST = 1e7
"""Largest limit that makes sense."""


def read_screen_mode(table: TomlTable | None) -> Literal["plateaus", "service"] | None:
    """Return how logs are to be read; None for by rule.

    Raises
    ------
    InputError
        For any other word.
    """
    text = (table.text("mode") if table else None) or "auto"
    mode = text.casefold()
    if table and mode not in MODES:
        advice = (
            f'{near_miss(mode, MODES)}Write mode = "plateaus" for a test in steps, "service" for a long log of ordinary '
            'service, or "auto" to leave it to the log.'
        )
        raise InputError(f"'{shown(text)}' is no way to read a log", advice).at(table.where("mode"))
    if mode == "plateaus":
        return "plateaus"
    return "service" if mode == "service" else None


def read_screen_limits(table: TomlTable | None) -> tuple[tuple[str, float], ...]:
    """Return the limits of screens that the file changes, by name.

    Raises
    ------
    InputError
        For a limit that is no number, negative or absurd.
    """
    if table is None:
        return ()
    return tuple((name, _number(table, name)) for name in table.values if name != "mode")


def _number(table: TomlTable, key: str) -> float:
    """Return a number or a percentage."""
    with table.at(key):
        value = quantity(table.number_or_text(key) or "0", "ratio", "5 %")
        if not 0.0 <= value <= LARGEST:
            raise InputError(f"'{value:g}' is out of range", f"Keep between 0 and {LARGEST:g}.")
    return value
