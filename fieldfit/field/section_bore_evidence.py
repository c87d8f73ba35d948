"""Evidence of the bore, and what is known of a deposit, in a section file."""

from __future__ import annotations

import math
from typing import Literal

from fieldfit.errors import InputError, near_miss
from fieldfit.field.quantities import quantity, uncertain
from fieldfit.field.section import BoreEvidence, Deposit, Tap
from fieldfit.field.section_pipe import check_bore
from fieldfit.field.section_survey import tap_named
from fieldfit.field.toml_table import TomlTable
from fieldfit.field.uncertain import Uncertain
from fieldfit.field.unit_spellings import Dimension
from fieldfit.field.units import shown

Kind = Literal["coupon", "calliper", "gauge plate", "tracer"]
KINDS: tuple[Kind, ...] = ("coupon", "calliper", "gauge plate", "tracer")
"""Kinds that a file may name."""
EVIDENCE_LIMIT = "2 %"
"""Limit of a measured bore that nothing is said of."""
TRANSIT_LIMIT = "2 %"
"""Limit of a transit time and of its flow and length that nothing is said of."""
DENSITY_LIMIT = "20 %"
"""Limit of a deposit's density that nothing is said of."""
TRANSIT = ("time", "flow", "length")


def read_bore_evidence(tables: tuple[TomlTable, ...], taps: tuple[Tap, ...]) -> tuple[BoreEvidence, ...]:
    """Return what the file knows of the bore from other sources than friction.

    A tracer's transit time t over a length L at a flow Q gives the bore of the same volume, √(4 Q t / (π L)).

    Parameters
    ----------
    tables : tuple of TomlTable
        The `[[bore_evidence]]` tables.
    taps : tuple of Tap
        Taps in order of their stations.

    Raises
    ------
    InputError
        When a kind is not known or a value is missing or cannot be read.
    """
    return tuple(_evidence(table, taps) for table in tables)


def read_deposit(table: TomlTable | None) -> Deposit:
    """Return what is known of a deposit.

    Parameters
    ----------
    table : TomlTable or None
        The `[deposit]` table.

    Raises
    ------
    InputError
        When a value cannot be read or no deposit has it.
    """
    if table is None:
        return Deposit()
    density_text, variation_text = table.text("density"), table.number_or_text("variation")
    density = None
    if density_text is not None:
        with table.at("density"):
            density = uncertain(density_text, "density", "1900 kg/m3", DENSITY_LIMIT)
            if not 200.0 <= density.value <= 6000.0:
                seen = f"'{shown(density_text)}' is no deposit's density"
                raise InputError(seen, "Write it as it sits in the pipe, water included, 200 to 6000 kg/m3.")
    variation = Deposit().variation
    if variation_text is not None:
        with table.at("variation"):
            variation = quantity(variation_text, "ratio", "30 %")
            if not 0.0 <= variation <= 1.0:
                raise InputError(f"'{shown(variation_text)}' is out of range", "Keep between 0 and 100 %.")
    return Deposit(density_kg_m3=density, variation=variation)


def _evidence(table: TomlTable, taps: tuple[Tap, ...]) -> BoreEvidence:
    """Return one piece of evidence."""
    kind = _kind(table)
    by_time = kind == "tracer" and "bore" not in table.values
    return BoreEvidence(
        kind=kind,
        bore=_transit_bore(table) if by_time else _measured_bore(table, kind),
        date=table.date("date"),
        between=_between(table, taps),
    )


def _kind(table: TomlTable) -> Kind:
    """Return the kind of evidence."""
    text = table.needed("kind")
    for kind in KINDS:
        if text.casefold() == kind:
            return kind
    advice = f"{near_miss(text, KINDS)}Write one of: {', '.join(KINDS)}."
    raise InputError(f"'{shown(text)}' is no kind of bore evidence", advice).at(table.where("kind"))


def _measured_bore(table: TomlTable, kind: str) -> Uncertain:
    """Return a bore that was measured as such."""
    for key in TRANSIT:
        if key in table.values:
            seen = f"a {kind} gives a bore and has no {key}" if kind != "tracer" else f"both bore and {key} are given"
            advice = f"Leave out {key}." if kind != "tracer" else "Give either the bore or time, flow and length."
            raise InputError(seen, advice).at(table.where(key))
    text = table.needed("bore")
    with table.at("bore"):
        bore = uncertain(text, "length", "48 mm", EVIDENCE_LIMIT)
        check_bore(bore, text)
    return bore


def _transit_bore(table: TomlTable) -> Uncertain:
    """Return the bore whose volume the flow fills in a tracer's transit time."""
    dimensions: tuple[Dimension, ...] = ("duration", "flow", "length")
    values = []
    for key, dimension in zip(TRANSIT, dimensions, strict=True):
        text = table.text(key)
        if text is None:
            seen = f"a tracer needs time, flow and length, and '{key}' is missing"
            example = 'time = "95 s ± 1 s", flow = "2.4 L/s ± 1 %" and length = "120 m ± 0.5 m"'
            raise InputError(seen, f"Write {example}.").at(table.where(key))
        with table.at(key):
            value = uncertain(text, dimension, "95 s", TRANSIT_LIMIT)
            if value.value <= 0.0:
                raise InputError(f"'{shown(text)}' is not positive", f"Write the {key} of the tracer's run.")
        values.append(value)
    time, flow, length = values
    bore = math.sqrt(4.0 * flow.value * time.value / (math.pi * length.value))
    relative = 0.5 * math.sqrt(time.relative**2 + flow.relative**2 + length.relative**2)
    found = Uncertain(value=bore, standard=bore * relative, shape="normal")
    with table.at("time"):
        check_bore(found, f"{bore * 1000.0:.1f} mm")
    return found


def _between(table: TomlTable, taps: tuple[Tap, ...]) -> tuple[str, str] | None:
    """Return the taps that the evidence holds between."""
    if "from" not in table.values and "to" not in table.values:
        return None
    upper, lower = tap_named(table, "from", taps), tap_named(table, "to", taps)
    columns = [tap.column for tap in taps]
    if columns.index(upper) >= columns.index(lower):
        raise InputError(f"'{shown(upper)}' is not above '{shown(lower)}'", "Name the upper tap in from.").at(
            table.where("from")
        )
    return upper, lower
