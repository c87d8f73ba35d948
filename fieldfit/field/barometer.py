"""Absolute pressures as gauge pressures."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from fieldfit.errors import InputError
from fieldfit.field.log_hints import LogHints
from fieldfit.field.section import Section
from fieldfit.field.section_log import AIR_PA
from fieldfit.field.units import shown

Array = NDArray[np.float64]

STANDARD_AIR_PA = 101_325.0
"""Pressure of the air where nothing is known of it [Pa]."""


def gauge_pressures(
    pressures: Mapping[str, Array], absolute: frozenset[str], air_pa: Array | None, hints: LogHints, said: list[str]
) -> dict[str, Array]:
    """Return pressures of which some are absolute as gauge pressures.

    The air's pressure is taken from a column of the log, else from the section file. Where neither has it, and all
    gauges read absolute pressure, that of the standard atmosphere is taken off and said: differences between gauges do
    not depend on it.

    Parameters
    ----------
    pressures : mapping of str to ndarray
        (N,) pressure of every tap [Pa], by its column.
    absolute : frozenset of str
        Columns that are absolute.
    air_pa : ndarray or None
        (N,) pressure of the air [Pa]; NaN where missing.
    hints : LogHints
        What the section file says.
    said : list of str
        Sentences on what was taken off are added here.

    Raises
    ------
    InputError
        When some gauges are absolute and some not, and the air's pressure is not known; or it is none the air has.

    Examples
    --------
    >>> taps = {"P1": np.array([501325.0]), "P2": np.array([401325.0])}
    >>> gauge_pressures(taps, frozenset(taps), None, LogHints(), [])["P1"]
    array([400000.])
    """
    concerned = [column for column in pressures if column in absolute]
    if not concerned:
        return dict(pressures)
    names = ", ".join(f"'{shown(column)}'" for column in concerned)
    air = _air(pressures, len(concerned) == len(pressures), air_pa, hints, (names, said))
    return {column: values - air if column in absolute else values for column, values in pressures.items()}


def gauge_values(
    values: Mapping[str, Array], air: tuple[frozenset[str], Array | None], section: Section, file: str, said: list[str]
) -> dict[str, Array]:
    """Return the values of all of a section's columns, the absolute pressures at its taps as gauge pressures.

    Parameters
    ----------
    values : mapping of str to ndarray
        (N,) values by column.
    air : tuple
        Columns that are absolute, and (N,) the pressure of the air [Pa] where a file has it.
    section : Section
        Names the taps.
    file : str
        Name of the log, for errors.
    said : list of str
        Sentences on what was taken off are added here.

    Raises
    ------
    InputError
        When some gauges are absolute and some not, and the air's pressure is not known.
    """
    taps = {} if section.differential else {tap.column: values[tap.column] for tap in section.taps}
    try:
        gauges = gauge_pressures(taps, air[0], air[1], section.log_hints, said)
    except InputError as error:
        raise error.at(file) from None
    return {**values, **gauges}


def _air(
    pressures: Mapping[str, Array],
    all_absolute: bool,
    air_pa: Array | None,
    hints: LogHints,
    to_say: tuple[str, list[str]],
) -> Array | float:
    """Return the pressure of the air [Pa], and say where it is from."""
    names, said = to_say
    if air_pa is not None and np.isfinite(air_pa).any():
        said.append(f"Absolute pressures ({names}) were turned into gauge pressures by the barometer in the log.")
        return _filled(air_pa)
    if hints.barometer_pa is not None:
        kilopascals = f"{hints.barometer_pa / 1000.0:.5g} kPa"
        said.append(f"Absolute pressures ({names}) were turned into gauge pressures with {kilopascals} of air.")
        return hints.barometer_pa
    if not all_absolute:
        others = ", ".join(f"'{shown(column)}'" for column in pressures if f"'{shown(column)}'" not in names)
        seen = f"{names} is absolute and {others} is not, and the pressure of the air is not known"
        raise InputError(seen, 'Write barometer = "1013 hPa" under [log] in the section file, as it was at the pipe.')
    said.append(
        f"Absolute pressures ({names}) were turned into gauge pressures with the standard 101.3 kPa of air; "
        "differences between gauges do not depend on it."
    )
    return STANDARD_AIR_PA


def _filled(air_pa: Array) -> Array:
    """Return the pressure of the air with gaps bridged; it changes slowly."""
    known = np.isfinite(air_pa)
    low, high = float(air_pa[known].min()), float(air_pa[known].max())
    if low < AIR_PA[0] or high > AIR_PA[1]:
        odd = low if low < AIR_PA[0] else high
        raise InputError(
            f"the barometer shows {odd / 1000.0:.4g} kPa, which is no pressure of the air",
            "Check the barometer's unit, and that its column is the right one.",
        )
    places = np.arange(len(air_pa))
    return np.interp(places, places[known], air_pa[known])
