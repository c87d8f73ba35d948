"""The `[plan]` table of a section file."""

from __future__ import annotations

from fieldfit.errors import InputError
from fieldfit.field.accuracy import accuracy
from fieldfit.field.quantities import quantity
from fieldfit.field.toml_table import TomlTable
from fieldfit.field.uncertain import Accuracy
from fieldfit.field.unit_spellings import Dimension
from fieldfit.field.units import shown
from fieldfit.field.wishes import Wishes

RESIDUAL_PA = 140_000.0
"""Pressure to be kept in a main unless the file says otherwise: 20 psi, the trade's figure [Pa]."""
FLOWS = 6
HOLD_S = 300.0
MOST_FLOWS = 30


def read_wishes(table: TomlTable | None) -> Wishes | None:
    """Return what is wanted of a test, or None where the file has no such table.

    Parameters
    ----------
    table : TomlTable or None
        The `[plan]` table.

    Raises
    ------
    InputError
        When a value cannot be read or makes no plan.
    """
    if table is None:
        return None
    residual, hold = table.text("residual"), table.text("hold")
    return Wishes(
        c=_share(table, "c"),
        roughness=_share(table, "roughness"),
        flow_m3_s=_positive(table, "flow", table.needed("flow"), "flow"),
        static_pa=_positive(table, "static", table.needed("static"), "pressure"),
        supply_loss_pa=_pressure(table, "supply_loss") or 0.0,
        residual_pa=RESIDUAL_PA if residual is None else _pressure(table, "residual") or 0.0,
        flows=_flows(table),
        hold_s=HOLD_S if hold is None else _positive(table, "hold", hold, "duration"),
        scatter_pa=_pressure(table, "scatter"),
        gauges=_accuracies(table, "gauges", "pressure"),
        meters=_accuracies(table, "meters", "flow"),
    )


def _share(table: TomlTable, key: str) -> float | None:
    """Return a wanted half-width, as a share."""
    text = table.number_or_text(key)
    if text is None:
        return None
    with table.at(key):
        value = quantity(text, "ratio", "3 %")
        if not 0.0 < value <= 1.0:
            raise InputError(f"'{shown(text)}' cannot be wanted", 'Write a half-width such as "3 %", up to 100 %.')
        return value


def _positive(table: TomlTable, key: str, text: str, dimension: Dimension) -> float:
    """Return a value above zero."""
    examples = {"flow": "30 L/s", "pressure": "4.5 bar", "duration": "5 min"}
    with table.at(key):
        value = quantity(text, dimension, examples[dimension])
        if value <= 0.0:
            raise InputError(f"'{shown(text)}' is not positive", f'Write {key} = "{examples[dimension]}".')
        return value


def _pressure(table: TomlTable, key: str) -> float | None:
    """Return a pressure of zero or more, or None where the key is absent."""
    text = table.text(key)
    if text is None:
        return None
    with table.at(key):
        value = quantity(text, "pressure", "50 kPa")
        if value < 0.0:
            raise InputError(f"'{shown(text)}' is negative", f'Write {key} = "50 kPa".')
        return value


def _flows(table: TomlTable) -> int:
    """Return the number of flows."""
    if "flows" not in table.values:
        return FLOWS
    count = table.count("flows")
    if count > MOST_FLOWS:
        raise InputError(f"{count} flows are more than a day holds", f"Keep to {MOST_FLOWS}.").at(table.where("flows"))
    return count


def _accuracies(table: TomlTable, key: str, dimension: Dimension) -> tuple[Accuracy, ...]:
    """Return instruments that could be taken, parted by semicolons."""
    text = table.text(key, longest=1000)
    if text is None:
        return ()
    with table.at(key):
        return tuple(accuracy(part.strip(), dimension) for part in text.split(";") if part.strip())
