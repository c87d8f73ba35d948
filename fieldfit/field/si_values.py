"""The numbers of a log's columns as SI values, and why a row cannot be used already now."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TypeVar

import numpy as np
from numpy.typing import NDArray

from fieldfit.errors import InputError
from fieldfit.field.clock import repeated_or_backwards
from fieldfit.field.log_columns import Column
from fieldfit.field.log_form import Columns
from fieldfit.field.log_rows import Rows
from fieldfit.field.resolution import written_step
from fieldfit.field.screens import CLOCK, CUT_OFF, MISSING, SIGNAL
from fieldfit.field.section import Section
from fieldfit.field.totaliser import counted_flow
from fieldfit.field.units import shown

Array = NDArray[np.float64]
Kind = TypeVar("Kind", bound=np.generic)


@dataclass(frozen=True, slots=True, kw_only=True)
class SiValues:
    """SI values of a log's columns; N rows."""

    values: dict[str, Array]
    """(N,) of each instrument, by its name in the section file; NaN where missing."""
    steps: dict[str, float]
    """Resolution of each of these."""
    temperature_degc: Array | None
    """(N,) liquid temperature [°C]."""
    barometer_pa: Array | None
    """(N,) pressure of the air [Pa]."""
    faults: NDArray[np.bool_]
    """(N,) rows in which a raw signal is a fault."""


def si_values(
    rows: Rows, columns: Columns, time_s: Array | None, known: tuple[str, Section], said: list[str]
) -> SiValues:
    """Return the SI values of a log's columns.

    Parameters
    ----------
    rows : Rows
        N rows.
    columns : Columns
        The columns that are used.
    time_s : ndarray or None
        (N,) clock [s]; None for a hand sheet.
    known : tuple
        Name of the log, and the section whose it is.
    said : list of str
        Sentences on what was assumed are added here.

    Raises
    ------
    InputError
        When a column has no value, or a count has no clock.
    """
    file, section = known
    values, steps = {}, {}
    faults = np.zeros(rows.line.size, dtype=np.bool_)
    for name, column in columns.instruments.items():
        where = f"{file}, column '{shown(column.heading)}'"
        raw = rows.numbers[column.position]
        if np.all(np.isnan(raw)):
            raise InputError("no row has a value", "Check that the section file names the right column.", where)
        if column.signal is not None:
            faulty = _faulty(column, raw)
            faults |= faulty
            if np.all(faulty | np.isnan(raw)):
                lowest, highest = column.signal.sound
                seen = f"every signal is under {lowest:g} or over {highest:g} {column.signal.quantity}"
                raise InputError(seen, "Check signal and range in the section file, and the wiring.", where)
            raw = np.where(faulty, np.nan, raw)
        try:
            si, steps[name] = _si(column, raw, time_s, section, said)
        except InputError as error:
            raise error.at(where) from None
        values[name] = frozen(si)
    return SiValues(
        values=values,
        steps=steps,
        temperature_degc=_temperature(rows, columns.temperature, said),
        barometer_pa=_of(rows, columns.barometer),
        faults=faults,
    )


def without_last(rows: Rows) -> Rows:
    """Return rows with the numbers of the last one missing, as its line was cut off and any of them may be short."""
    numbers = {place: np.append(values[:-1], np.nan) for place, values in rows.numbers.items()}
    return replace(rows, numbers=numbers)


def row_reasons(time_s: Array, found: SiValues, cut_off: bool) -> NDArray[np.str_]:
    """Return why rows cannot be used already now; empty where they can.

    Parameters
    ----------
    time_s : ndarray
        (N,) clock [s]; NaN where missing.
    found : SiValues
        Values of the rows.
    cut_off : bool
        Whether the last row was cut off while it was written.
    """
    missing = np.any([np.isnan(column) for column in (time_s, *found.values.values())], axis=0)
    reason = np.zeros(len(time_s), dtype=f"<U{max(map(len, (MISSING, CLOCK, SIGNAL, CUT_OFF)))}")
    reason[repeated_or_backwards(time_s)] = CLOCK
    reason[missing] = MISSING
    reason[found.faults] = SIGNAL
    if cut_off:
        reason[-1] = CUT_OFF
    return frozen(reason)


def frozen(values: NDArray[Kind]) -> NDArray[Kind]:
    """Return an array that cannot be written to."""
    values.setflags(write=False)
    return values


def _faulty(column: Column, raw: Array) -> NDArray[np.bool_]:
    """Return the rows in which a raw signal is a fault."""
    if column.signal is None:
        return np.zeros(len(raw), dtype=np.bool_)
    lowest, highest = column.signal.sound
    measured = raw * column.signal_size
    return np.asarray((measured < lowest) | (measured > highest))


def _si(column: Column, raw: Array, time_s: Array | None, section: Section, said: list[str]) -> tuple[Array, float]:
    """Return a column's SI values and their resolution."""
    if not column.counts:
        scaled = raw * column.unit.factor
        return (scaled + column.unit.offset if column.unit.offset else scaled), written_step(raw) * column.unit.factor
    if time_s is None:
        raise InputError("a count of volume has no flow without a clock", "Export the log with its times.")
    flow = counted_flow(raw, time_s, column, section.meter.totaliser, said)
    return flow.flow_m3_s, flow.step_m3_s


def _of(rows: Rows, column: Column | None) -> Array | None:
    """Return the SI values of a column that may be absent, None where no row has one."""
    if column is None:
        return None
    values = rows.numbers[column.position] * column.unit.factor + column.unit.offset
    return None if np.all(np.isnan(values)) else frozen(values)


def _temperature(rows: Rows, column: Column | None, said: list[str]) -> Array | None:
    """Return the liquid's temperature [°C], None where no row has one."""
    values = _of(rows, column)
    if column is not None and values is None:
        said.append(f"The column '{shown(column.heading)}' is empty and was not used.")
    if values is None:
        return None
    absent = int(np.count_nonzero(np.isnan(values)))
    if absent:
        said.append(f"The temperature is missing in {absent} of {values.size} rows; the others stand for them.")
    return values
