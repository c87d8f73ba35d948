"""What one reach of several is made of: its own pipe, and the flow that side flows leave in it."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.section import Branch, Section
from fieldfit.hydraulics.friction import STANDARD_GRAVITY

Array = NDArray[np.float64]


def section_of_reach(section: Section, reach: int) -> Section:
    """Return the section with the bore and material of one reach.

    Parameters
    ----------
    section : Section
        The test section.
    reach : int
        The reach from tap `reach` to the next.

    Returns
    -------
    Section
        The same one where no `[[reach]]` table says otherwise.
    """
    upper, lower = section.taps[reach].column, section.taps[reach + 1].column
    for pipe in section.reach_pipes:
        if (pipe.upper, pipe.lower) == (upper, lower):
            return replace(section, bore=pipe.bore, bore_source=pipe.bore_source, material=pipe.material)
    return section


def leaves_above(branch: Branch, station_m: float, section: Section) -> float:
    """Return what a branch does to the flow at a station: 1 taken off the metered flow, −1 added to it, 0 nothing."""
    meter = section.meter_station_m if section.meter_station_m is not None else -np.inf
    if meter <= branch.station < station_m:
        return 1.0
    return -1.0 if station_m <= branch.station < meter else 0.0


def flow_at(flow_m3_s: Array, station_m: float, section: Section) -> Array:
    """Return the flow at a station [m³/s], same shape as the metered one; unknown side flows count as none."""
    taken = sum(
        leaves_above(branch, station_m, section) * branch.flow.value
        for branch in section.branches
        if branch.flow is not None
    )
    return flow_m3_s - taken


def segments(section: Section, reach: int) -> list[tuple[float, float]]:
    """Return the stretches between two taps over which the flow is the same: first and last station [m]."""
    first, last = section.taps[reach].station.value, section.taps[reach + 1].station.value
    cuts = sorted({branch.station for branch in section.branches if first < branch.station < last})
    return list(zip([first, *cuts], [*cuts, last], strict=True))


def reach_flow(flow_m3_s: Array, section: Section, reach: int) -> Array:
    """Return the flow of a reach that loses as much as its stretches do [m³/s], same shape as the metered one.

    With side flows between its taps it is the root of the mean of Q|Q| over the length.
    """
    if not section.branches:
        return flow_m3_s
    parts = segments(section, reach)
    length = parts[-1][1] - parts[0][0]
    flows = [flow_at(flow_m3_s, (first + last) / 2.0, section) for first, last in parts]
    square = sum(
        (last - first) / length * flow * np.abs(flow) for flow, (first, last) in zip(flows, parts, strict=True)
    )
    return np.asarray(np.sign(square) * np.sqrt(np.abs(square)))


def tap_bore(section: Section, tap: int) -> float:
    """Return the bore of the pipe that a tap sits in: the one above a joint [m]."""
    return section_of_reach(section, max(tap - 1, 0)).bore.value


def velocity_head_drop(flow_m3_s: Array, section: Section, reach: int) -> Array:
    """Return the velocity head at the upper tap less that at the lower one [m], same shape as the metered flow."""
    if not section.reach_pipes and not section.branches:
        return np.zeros_like(flow_m3_s)
    heads = []
    for tap in (reach, reach + 1):
        flow = flow_at(flow_m3_s, section.taps[tap].station.value, section)
        heads.append(8.0 * flow**2 / (np.pi**2 * STANDARD_GRAVITY * tap_bore(section, tap) ** 4))
    return np.asarray(heads[0] - heads[1])
