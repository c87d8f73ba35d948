"""The columns of a log that are used: in what unit each is written, and what its numbers stand for."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from typing import Literal

from fieldfit.errors import InputError
from fieldfit.field.heading_parts import PULSE_WORDS, Wanted, bare_unit, heading_places, only_place
from fieldfit.field.log_headings import Headings
from fieldfit.field.log_hints import LogHints
from fieldfit.field.raw_signal import ELECTRIC, RawSignal
from fieldfit.field.units import Unit, is_unit, shown, unit

TEMPERATURE_NAMES = (
    "water temperature",
    "liquid temperature",
    "fluid temperature",
    "temperature",
    "water temp",
    "temp",
)
"""Headings of the liquid's temperature, the surest first."""
BAROMETER_NAMES = (
    "barometer",
    "barometric pressure",
    "atmospheric pressure",
    "ambient pressure",
    "air pressure",
    "baro",
)
"""Headings of the pressure of the air, the surest first."""
AS_NEW = "Flow was worked out from the velocity with the as-new bore."

Counts = Literal["", "volume", "pulses"]
_ABSOLUTE_WORD = re.compile(r"(?i)(?:^|[\W_])abs(?:olute)?(?:$|[\W_])")


@dataclass(frozen=True, slots=True, kw_only=True)
class Column:
    """A column of the log that is used."""

    heading: str
    """As it stands in the log."""
    position: int
    """Its place in a row, from 0."""
    unit: Unit
    """Its unit: SI value = factor × number + offset."""
    counts: Counts = ""
    """What it counts, for a totaliser or pulses."""
    signal: RawSignal | None = None
    """Raw signal that it holds; None for readings."""
    signal_size: float = 1.0
    """The signal's own unit [mA or V] in one of the column's, such as 0.001 for mV."""


def resolve_column(wanted: Wanted, headings: Headings, place: int, its_unit: str | None, where: str) -> Column:
    """Return a column with its unit: the section file's, else the heading's.

    Parameters
    ----------
    wanted : Wanted
        The column as the section file names it.
    headings : Headings
        The line of headings.
    place : int
        Its place among them.
    its_unit : str or None
        The unit that the heading says.
    where : str
        Place of the headings, for errors.

    Raises
    ------
    InputError
        When there is no unit, or none that such an instrument has.
    """
    heading = headings.texts[place]
    try:
        if wanted.signal is not None:
            return _signal_column(wanted.signal, wanted, heading, place, its_unit)
        if wanted.meter is not None and wanted.meter.pulse_m3 is not None:
            return _pulse_column(wanted.meter.pulse_m3, heading, place, its_unit)
        text = wanted.unit or its_unit
        if text is None:
            example = {"flow": "L/s", "pressure": "kPa"}.get(wanted.dimension, "degC")
            cure = f'unit = "{example}" in the section file'
            advice = f'Write it in the heading, "{shown(wanted.column)} [{example}]", or as {cure}.'
            raise InputError("the column has no unit", advice)
        _refuse_signal(text, wanted)
        used, counts = _flow_unit(text, wanted) if wanted.meter is not None else (unit(text, wanted.dimension), "")
        return Column(heading=heading, position=place, unit=_absolute_by_name(used, heading), counts=counts)
    except InputError as error:
        raise error.at(f"{where}, column '{shown(heading)}'") from None


def say_unit(wanted: Wanted, its_unit: str | None, column: Column, said: list[str]) -> None:
    """Say what was taken for granted about a column's unit, and where the section file's stands against the heading's.

    Parameters
    ----------
    wanted : Wanted
        The column as the section file names it.
    its_unit : str or None
        The unit that the heading says.
    column : Column
        The column.
    said : list of str
        Sentences are added here.
    """
    used = column.unit
    if column.signal is not None:
        name = wanted.column
        said.append(f"Column '{name}' was read as a raw signal of {column.signal.name} over the range given for it.")
    elif wanted.unit is not None and its_unit is not None and not _same_size(its_unit, wanted, used):
        says = f"as the section file says; its heading says {shown(its_unit)}."
        said.append(f"Column '{wanted.column}' was read in {used.spelling}, {says}")
    if used.remark:
        said.append(used.remark)


def find_temperature(headings: Headings, said: list[str], where: str) -> Column | None:
    """Return the column of the liquid's temperature, if the log has one.

    Raises
    ------
    InputError
        When its heading has no unit of temperature.
    """
    return _by_name(headings, TEMPERATURE_NAMES, "temperature", said, where)


def find_barometer(headings: Headings, hints: LogHints, needed: bool, said: list[str], where: str) -> Column | None:
    """Return the column of the pressure of the air, if the log has one that can be read, or that is needed.

    Raises
    ------
    InputError
        When its heading has no unit of pressure.
    """
    if hints.barometer_column is not None:
        return _by_name(headings, (hints.barometer_column,), "pressure", said, where)
    try:
        return _by_name(headings, BAROMETER_NAMES, "pressure", said, where)
    except InputError:
        if needed:
            raise
        return None


def _by_name(
    headings: Headings,
    names: tuple[str, ...],
    dimension: Literal["temperature", "pressure"],
    said: list[str],
    where: str,
) -> Column | None:
    """Return the column that has one of several names."""
    taken = {place for place, _ in headings.found}
    texts = ["" if place in taken else text.replace("_", " ") for place, text in enumerate(headings.texts)]
    for name in names:
        wanted = Wanted(column=name.replace("_", " "), dimension=dimension, unit=None)
        places = heading_places(texts, wanted)
        if places:
            place, its_unit = only_place(places, headings.texts, where, named=False)
            below = bare_unit(headings.units[place]) if place < len(headings.units) else ""
            column = resolve_column(wanted, headings, place, its_unit or below or None, where)
            say_unit(wanted, its_unit, column, said)
            return column
    return None


def _signal_column(signal: RawSignal, wanted: Wanted, heading: str, place: int, its_unit: str | None) -> Column:
    """Return a column of raw signals."""
    measured, size = ELECTRIC.get((its_unit or "").casefold(), (signal.quantity, 1.0))
    if its_unit is not None and (its_unit.casefold() not in ELECTRIC or measured != signal.quantity):
        seen = f"the heading says {shown(its_unit)}, and the section file a signal of {signal.name}"
        raise InputError(seen, "Take signal and range out of the section file, or name the right column.")
    slope, zero = signal.line
    per_bore = _bore_area(wanted) if signal.measures == "velocity" else 1.0
    linear = Unit(
        spelling=signal.name,
        factor=slope * size * per_bore,
        offset=zero * per_bore,
        absolute=signal.absolute,
        remark=AS_NEW if signal.measures == "velocity" else "",
    )
    return Column(heading=heading, position=place, unit=linear, signal=signal, signal_size=size)


def _pulse_column(pulse_m3: float, heading: str, place: int, its_unit: str | None) -> Column:
    """Return a column of pulses."""
    if its_unit is not None and its_unit.casefold().replace(" ", "") not in PULSE_WORDS:
        seen = f"the heading says {shown(its_unit)}, and the section file counts pulses"
        raise InputError(seen, "Take pulse out of the section file, or name the right column.")
    return Column(
        heading=heading, position=place, unit=Unit(spelling="pulses", factor=pulse_m3, offset=0.0), counts="pulses"
    )


def _refuse_signal(text: str, wanted: Wanted) -> None:
    """Refuse a raw signal whose range nobody knows, and pulses of unknown volume."""
    if text.casefold() in ELECTRIC:
        measured = ELECTRIC[text.casefold()][0]
        example = "4-20 mA" if measured == "mA" else "0-10 V"
        its_range = "0 to 50 L/s" if wanted.dimension == "flow" else "0 to 10 bar"
        advice = f'Write signal = "{example}" and range = "{its_range}" for it in the section file.'
        raise InputError(f"'{shown(text)}' is a raw signal", advice)
    if wanted.meter is not None and text.casefold().replace(" ", "") in PULSE_WORDS:
        raise InputError(f"'{shown(text)}' are pulses of unknown volume", 'Write pulse = "10 L" under [flow].')


def _flow_unit(text: str, wanted: Wanted) -> tuple[Unit, Counts]:
    """Return the unit of the meter's column, and whether it counts a volume."""
    totaliser = wanted.meter.totaliser if wanted.meter is not None else None
    if is_unit(text, "flow"):
        if totaliser:
            seen = f"'{shown(text)}' is a unit of flow, and the section file says the column counts a volume"
            raise InputError(seen, "Take totaliser out, or name the column of the volume.")
        return unit(text, "flow"), ""
    if is_unit(text, "volume"):
        return unit(text, "volume"), "volume"
    if is_unit(text, "velocity"):
        used = unit(text, "velocity")
        scale = used.factor * _bore_area(wanted)
        return Unit(spelling=used.spelling, factor=scale, offset=0.0, remark=AS_NEW), ""
    return unit(text, "flow"), ""


def _bore_area(wanted: Wanted) -> float:
    """Return the area of the as-new bore [m²], for a meter that is said to sense velocity."""
    if wanted.meter is None or wanted.meter.senses != "velocity":
        advice = 'Write senses = "velocity" under [flow]: a wrong bore then acts otherwise.'
        raise InputError("the column is a velocity, and the section file says the meter senses volume", advice)
    return math.pi / 4.0 * wanted.bore_m**2


def _absolute_by_name(used: Unit, heading: str) -> Unit:
    """Return a unit of pressure as absolute where the heading's name says so."""
    if used.absolute or not _ABSOLUTE_WORD.search(heading) or not is_unit(used.spelling, "pressure"):
        return used
    return Unit(spelling=f"{used.spelling} abs", factor=used.factor, offset=used.offset, absolute=True)


def _same_size(its_unit: str, wanted: Wanted, used: Unit) -> bool:
    """Return whether a heading's unit is of the size of the one used."""
    try:
        heads = unit(its_unit, wanted.dimension)
    except InputError:
        return its_unit.casefold() == used.spelling.casefold()
    return (heads.factor, heads.absolute) == (used.factor, used.absolute)
