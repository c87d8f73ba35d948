"""What the rows of each plateau, or of each group of a service log, say on average."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from fieldfit.errors import InputError
from fieldfit.field.group_noise import noise_of_groups
from fieldfit.field.log import Log
from fieldfit.field.readings import Plateaus, Screening
from fieldfit.field.row_noise import MeanNoise, autocorrelation_time, noise_of_mean
from fieldfit.field.row_screens import still_below
from fieldfit.field.section import Section
from fieldfit.field.stretches import end_rows, mean_change

Array = NDArray[np.float64]
Rows = NDArray[np.int64]

EXPONENT = 1.9
"""Power of the flow that head loss roughly goes with, where only a correction of second order needs it."""


def summarise(log: Log, screening: Screening, section: Section, weight_pa_m: float) -> Plateaus:
    """Average every plateau, with the noise of its mean pressure differences.

    Parameters
    ----------
    log : Log
        N rows.
    screening : Screening
        Which rows belong to which plateau, or to which group of a service log.
    section : Section
        Gives elevations, for the pressure difference at rest where there is no static.
    weight_pa_m : float
        Weight of the liquid, ρg [Pa/m].

    Returns
    -------
    Plateaus
        K plateaus, statics included.
    """
    numbers = np.unique(screening.plateau[screening.plateau > 0])
    members = [np.flatnonzero(screening.plateau == number) for number in numbers]
    flow = np.array([np.mean(log.flow_m3_s[rows]) for rows in members])
    pressure = np.array([np.mean(log.pressure_pa[:, rows], axis=1) for rows in members])
    pressure = pressure.reshape(len(members), len(section.taps)).T
    static = np.abs(flow) < still_below(log, section)
    slopes = [
        difference_slopes(flow, pressure, static, rest_difference(section, reach, weight_pa_m), reach)
        for reach in range(len(section.taps) - 1)
    ]
    noise = [_noise(log, screening, members, reach, slope) for reach, slope in enumerate(slopes)]
    changing, doubt = _changing(log, screening, members)
    return Plateaus(
        number=numbers,
        static=static,
        start_s=np.array([log.time_s[rows[0]] for rows in members]),
        end_s=np.array([log.time_s[rows[-1]] for rows in members]),
        rows=np.array([len(rows) for rows in members]),
        flow_m3_s=flow,
        flow_slope_m3_s2=changing,
        pressure_pa=pressure,
        temperature_degc=np.array([_temperature(log, rows, section) for rows in members]),
        random_pa=np.array([part.standard_pa for part in noise]),
        independent_rows=np.array([part.independent_rows for part in noise]),
        curvature_pa=np.array([part.curvature_pa for part in noise]),
        flow_slope_standard_m3_s2=doubt,
        middle_s=None if screening.block is None else np.array([np.mean(log.time_s[rows]) for rows in members]),
    )


def _noise(log: Log, screening: Screening, members: list[Rows], reach: int, slopes: Array) -> MeanNoise:
    """Return the noise of each mean difference: of statics and plateaus from rows, of groups from time blocks."""
    by_rows = slopes == 0.0 if screening.block is not None else np.ones(len(members), dtype=np.bool_)
    found = np.zeros((3, len(members)))
    for kind in (by_rows, ~by_rows):
        some = [rows for rows, mine in zip(members, kind, strict=True) if mine]
        if some and kind is by_rows:
            found[:, kind] = noise_of_mean(log, some, reach, slopes[kind])
        elif some and screening.block is not None:
            found[:, kind] = noise_of_groups(log, screening.block, some, reach, slopes[kind])
    return MeanNoise(*found)


def rest_difference(section: Section, reach: int, weight_pa_m: float) -> float | None:
    """Return the pressure difference of a reach at rest by the survey [Pa]; None when not surveyed."""
    upper, lower = section.taps[reach].elevation, section.taps[reach + 1].elevation
    return None if upper is None or lower is None else -(upper.value - lower.value) * weight_pa_m


def difference_slopes(flow: Array, pressure: Array, static: NDArray[np.bool_], rest: float | None, reach: int) -> Array:
    """Return how the pressure difference of a reach changes with flow at each plateau [Pa s/m³]."""
    difference = pressure[reach] - pressure[reach + 1]
    at_rest = float(np.mean(difference[static])) if np.any(static) else rest
    if at_rest is None:
        at_rest = 0.0
    return np.where(static, 0.0, EXPONENT * (difference - at_rest) / np.where(flow == 0.0, 1.0, flow))


def _changing(log: Log, screening: Screening, members: list[Rows]) -> tuple[Array, Array]:
    """Return each plateau's mean rate of change of the flow, and its standard error [m³/s²]; zero for a sheet.

    A group's is the mean over its time blocks.
    """
    if log.kind == "sheet":
        return np.zeros(len(members)), np.zeros(len(members))
    block = screening.block
    parts = [[rows] if block is None else np.split(rows, np.flatnonzero(np.diff(block[rows])) + 1) for rows in members]
    scatter = [log.flow_m3_s[rows] - np.mean(log.flow_m3_s[rows]) for pieces in parts for rows in pieces]
    memory = autocorrelation_time([values for values in scatter if np.any(values)]) if block is None else 1.0
    rates, doubts = [], []
    for pieces in parts:
        weight = np.array([len(rows) for rows in pieces], dtype=np.float64)
        weight /= np.sum(weight)
        each = [_rate(log.time_s[rows], log.flow_m3_s[rows], memory) for rows in pieces]
        rates.append(float(weight @ [rate for rate, _ in each]))
        doubts.append(float(np.linalg.norm(weight * [doubt for _, doubt in each])))
    return np.array(rates), np.array(doubts)


def _rate(time: Array, flow: Array, memory: float) -> tuple[float, float]:
    """Return the mean rate of change over a stretch and the standard error that the flow's scatter gives it."""
    few = end_rows(len(time))
    rate = mean_change(time, flow)
    span = float(np.mean(time[-few:]) - np.mean(time[:few]))
    if span <= 0.0 or len(time) < 3:
        return rate, 0.0
    # What stands out of the straight line from end to end is noise, or wander that the ends catch by chance.
    left = flow - np.mean(flow) - rate * (time - np.mean(time))
    spread = float(left @ left) / (len(time) - 2.0)
    return rate, float(np.sqrt(2.0 * spread / max(few / memory, 1.0))) / span


def _temperature(log: Log, rows: Rows, section: Section) -> float:
    """Return a plateau's temperature [°C]: its column's mean, else the section's."""
    if log.temperature_degc is not None and np.any(np.isfinite(log.temperature_degc[rows])):
        return float(np.nanmean(log.temperature_degc[rows]))
    if section.temperature is None:
        raise InputError(
            "the liquid's temperature is not known",
            'Add a temperature column to the log or write temperature = "14 degC" in the section file.',
            log.file,
        )
    return section.temperature.value
