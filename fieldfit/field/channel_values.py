"""What a log's columns mean: flow from whatever the meter logged, pressures by tap from whatever gauges did."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.constrictions import constriction_flow
from fieldfit.field.differential import log_pressures, log_steps
from fieldfit.field.flow_devices import pitot_flow
from fieldfit.field.section import Section

Array = NDArray[np.float64]


def flow_columns(section: Section) -> tuple[str, ...]:
    """Return the columns that the flow comes from."""
    return tuple(one.column for one in section.meter.outlets) or (section.meter.column,)


def pressure_columns(section: Section) -> tuple[str, ...]:
    """Return the columns that the pressures come from: one per tap, or the transmitter's."""
    return (section.differential.column,) if section.differential else tuple(tap.column for tap in section.taps)


def flow_of(section: Section, values: Mapping[str, Array]) -> Array:
    """Return the flow from its columns.

    Parameters
    ----------
    section : Section
        The test section.
    values : mapping of str to (N,) array
        Columns by name [m³/s or Pa].

    Returns
    -------
    (N,) array
        Flow [m³/s]; NaN where anything it needs is missing.
    """
    meter, density = section.meter, device_density(section)
    if meter.outlets:
        return np.asarray(sum(pitot_flow(values[one.column], one, density) for one in meter.outlets))
    if meter.throat:
        viscosity = float(section.liquid.viscosity_m2_s(np.array([_degrees(section)]))[0]) * density
        return constriction_flow(values[meter.column], meter.throat, density, viscosity)
    return values[meter.column]


def flow_step(section: Section, values: Mapping[str, Array], steps: Mapping[str, float]) -> float:
    """Return the resolution of the flow [m³/s]; of a device, what one step of its pressure means at a middling flow."""
    meter = section.meter
    if not meter.outlets and not meter.throat:
        return steps[meter.column]
    columns = flow_columns(section)
    middle = {column: np.array([_middling(values[column])]) for column in columns}
    above = {column: middle[column] + steps[column] for column in columns}
    return float(abs(flow_of(section, above)[0] - flow_of(section, middle)[0]))


def _middling(values: Array) -> float:
    """Return a pressure in the upper half of those seen."""
    seen = values[np.isfinite(values)]
    return float(np.percentile(seen, 75.0)) if seen.size else 0.0


def pressures_of(section: Section, values: Mapping[str, Array], temperature_degc: Array | None) -> Array:
    """Return the (T, N) gauge pressures by tap [Pa]."""
    return log_pressures(section, np.array([values[column] for column in pressure_columns(section)]), temperature_degc)


def pressure_steps(section: Section, steps: Mapping[str, float]) -> Array:
    """Return the (T,) resolution of the pressures by tap [Pa]."""
    return log_steps(section, np.array([steps[column] for column in pressure_columns(section)]))


def device_density(section: Section) -> float:
    """Return the density that devices work with [kg/m³]."""
    return float(section.liquid.density_kg_m3(np.array([_degrees(section)]))[0])


def _degrees(section: Section) -> float:
    """Return a temperature of the liquid [°C]; a few degrees hardly move what a device reads."""
    return section.temperature.value if section.temperature else 15.0
