"""From the rows of a log to plateaus: which rows count, why the others don't, and what the plateaus say."""

from __future__ import annotations

from collections import Counter

import numpy as np
from numpy.typing import NDArray

from fieldfit.errors import InputError
from fieldfit.field.log import Log
from fieldfit.field.readings import Plateaus, Screening
from fieldfit.field.row_noise import noise_of_mean
from fieldfit.field.row_screens import ROW_SCREENS, still_below
from fieldfit.field.screens import OUTLIER, UNSTEADY, limit
from fieldfit.field.section import Section
from fieldfit.field.steady import steady_stretches

Array = NDArray[np.float64]
Rows = NDArray[np.int64]

EXPONENT = 1.9
"""Power of the flow that head loss roughly goes with, where only a correction of second order needs it."""
HAND_ROWS = 100
"""Most rows of a sheet with a clock."""
HAND_SECONDS = 20.0
"""Time between readings from which they may have been written by hand [s]."""
END_ROWS = 5
"""Rows at either end of a plateau that are averaged to see whether and how the flow changes."""


def screen(log: Log, section: Section) -> Screening:
    """Judge every row of a log: part of a plateau, or set aside with its reason.

    Parameters
    ----------
    log : Log
        N rows.
    section : Section
        Gives the limits of the screens.

    Returns
    -------
    Screening
        Statics count as plateaus.

    Raises
    ------
    InputError
        When no row has all its values, or the water runs backwards throughout.
    """
    reason = log.reason.astype(object)
    plateau = np.zeros(len(reason), dtype=np.int64)
    _check_direction(log, section)
    for why, caught in ROW_SCREENS:
        reason[(reason == "") & caught(log, section)] = why
    good = np.flatnonzero(reason == "")
    if log.kind == "logger":
        _number_plateaus(log, section, good, (reason, plateau))
    if log.kind == "sheet" or (not np.any(plateau) and read_by_hand(log)):
        reason[good] = ""
        plateau[good] = np.arange(1, len(good) + 1)
    reason[(reason == "") & (plateau == 0)] = UNSTEADY
    return _screening(reason.astype(np.str_), plateau)


def read_by_hand(log: Log) -> bool:
    """Return whether a log with a clock looks like a sheet all the same: few rows, far apart."""
    rows = len(log.time_s)
    return rows < 2 or (rows <= HAND_ROWS and float(np.nanmedian(np.diff(log.time_s))) >= HAND_SECONDS)


def set_plateaus_aside(screening: Screening, reasons: dict[int, str]) -> Screening:
    """Return the screening with whole plateaus set aside, by number; the others keep theirs."""
    reason = screening.reason.astype(object)
    plateau = screening.plateau.copy()
    for number, why in reasons.items():
        rows = screening.plateau == number
        reason[rows] = why
        plateau[rows] = 0
    return _screening(reason.astype(np.str_), plateau)


def _screening(reason: NDArray[np.str_], plateau: Rows) -> Screening:
    """Freeze the outcome and count the reasons."""
    counts = Counter(reason[plateau == 0].tolist()).most_common()
    reason.setflags(write=False)
    plateau.setflags(write=False)
    return Screening(reason=reason, plateau=plateau, counts=tuple(counts))


def _check_direction(log: Log, section: Section) -> None:
    """Refuse a log without a complete row, or one whose flow is negative throughout."""
    flow = log.flow_m3_s[log.reason == ""]
    if flow.size == 0:
        raise InputError(
            "no row has a value in every column that is needed",
            "See the reasons in the log's columns; every reading needs flow and all pressures.",
            log.file,
        )
    moving = np.abs(flow) > still_below(log, section)
    if np.any(moving) and np.all(flow[moving] < 0.0):
        raise InputError(
            f"the flow is negative in every row that flows (largest {np.min(flow) * 1000.0:.3g} L/s)",
            "If the meter was fitted the other way round, change the sign of the column; if the water ran from the last "
            "tap to the first, count the stations from the other end.",
            f"{log.file}, column '{section.meter.column}'",
        )


def _number_plateaus(log: Log, section: Section, good: Rows, outcome: tuple[NDArray[np.object_], Rows]) -> None:
    """Find a logger's plateaus among the good rows and write numbers and reasons."""
    reason, plateau = outcome
    number = 0
    for first, stop in steady_stretches(log.flow_m3_s[good], limit(section, "flow_step")):
        rows = _settled(log.flow_m3_s, good[first:stop])
        far = _outliers(log, rows, limit(section, "outlier"))
        inside = np.flatnonzero(~far)
        rows, far = rows[inside[0] : inside[-1] + 1], far[inside[0] : inside[-1] + 1]
        kept = rows[~far]
        if len(kept) < limit(section, "plateau_rows") or _drifts(log, section, kept):
            continue
        reason[rows[far]] = OUTLIER
        number += 1
        plateau[kept] = number


def _settled(flow: Array, rows: Rows) -> Rows:
    """Return a stretch without the rows at its ends in which the flow was still on its way.

    Single rows far off the middle go first; then, as the last of a ramp hides in the noise of single rows, ends
    whose running mean is off the middle.
    """
    middle = float(np.median(flow[rows]))
    distance = np.abs(flow[rows] - middle)
    spread = 1.4826 * float(np.median(distance))
    inside = np.flatnonzero(distance <= max(4.0 * spread, 0.005 * abs(middle)))
    first, stop = int(inside[0]), int(inside[-1]) + 1
    near = max(1.8 * spread, 0.003 * abs(middle))
    while stop - first > 2 * END_ROWS and abs(float(np.mean(flow[rows[first : first + END_ROWS]])) - middle) > near:
        first += 1
    while stop - first > 2 * END_ROWS and abs(float(np.mean(flow[rows[stop - END_ROWS : stop]])) - middle) > near:
        stop -= 1
    return rows[first:stop]


def _outliers(log: Log, rows: Rows, limit_sd: float) -> NDArray[np.bool_]:
    """Return which rows of a stretch lie far off its middle, in flow or in any pressure difference."""
    far = np.zeros(len(rows), dtype=np.bool_)
    steps = np.append(log.pressure_step_pa[:-1] + log.pressure_step_pa[1:], log.flow_step_m3_s)
    differences = log.pressure_pa[:-1, rows] - log.pressure_pa[1:, rows]
    for values, step in zip([*differences, log.flow_m3_s[rows]], steps, strict=True):
        distance = np.abs(values - np.median(values))
        # The middle absolute distance is blind below a resolution step; a step is never an outlier.
        spread = max(1.4826 * float(np.median(distance)), float(step) / 2.0, 1e-12)
        far |= distance > limit_sd * spread
    return far


def _drifts(log: Log, section: Section, rows: Rows) -> bool:
    """Return whether the flow changes too much from end to end of a stretch."""
    flow = log.flow_m3_s[rows]
    mean = float(np.mean(flow))
    if abs(mean) < still_below(log, section):
        return False
    span = float(log.time_s[rows[-1]] - log.time_s[rows[0]])
    return abs(_mean_change(log.time_s[rows], flow)) * span > limit(section, "drift") * abs(mean)


def _mean_change(time: Array, values: Array) -> float:
    """Return the mean rate of change: last less first over the time between, each a mean of a few rows.

    Inertia asks for the mean of dQ/dt, and that is this ratio whatever the path; a line of least squares would
    miss the hook that a valve move leaves at one end. Zero where time stands still.
    """
    few = max(min(END_ROWS, len(time) // 2), len(time) // 10, 1)
    span = float(np.mean(time[-few:]) - np.mean(time[:few]))
    return float(np.mean(values[-few:]) - np.mean(values[:few])) / span if span > 0.0 else 0.0


def summarise(log: Log, screening: Screening, section: Section, weight_pa_m: float) -> Plateaus:
    """Average every plateau, with the noise of its mean pressure differences.

    Parameters
    ----------
    log : Log
        N rows.
    screening : Screening
        Which rows belong to which plateau.
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
    noise = [
        noise_of_mean(log, members, reach, _slopes(flow, pressure, static, _rest(section, reach, weight_pa_m), reach))
        for reach in range(len(section.taps) - 1)
    ]
    return Plateaus(
        number=numbers,
        static=static,
        start_s=np.array([log.time_s[rows[0]] for rows in members]),
        end_s=np.array([log.time_s[rows[-1]] for rows in members]),
        rows=np.array([len(rows) for rows in members]),
        flow_m3_s=flow,
        flow_slope_m3_s2=np.array([_mean_change(log.time_s[rows], log.flow_m3_s[rows]) for rows in members])
        * (log.kind == "logger"),
        pressure_pa=pressure,
        temperature_degc=np.array([_temperature(log, rows, section) for rows in members]),
        random_pa=np.array([part.standard_pa for part in noise]),
        independent_rows=np.array([part.independent_rows for part in noise]),
        curvature_pa=np.array([part.curvature_pa for part in noise]),
    )


def _rest(section: Section, reach: int, weight_pa_m: float) -> float | None:
    """Return the pressure difference of a reach at rest by the survey [Pa]; None when not surveyed."""
    upper, lower = section.taps[reach].elevation, section.taps[reach + 1].elevation
    return None if upper is None or lower is None else -(upper.value - lower.value) * weight_pa_m


def _slopes(flow: Array, pressure: Array, static: NDArray[np.bool_], rest: float | None, reach: int) -> Array:
    """Return how the pressure difference of a reach changes with flow at each plateau [Pa s/m³]."""
    difference = pressure[reach] - pressure[reach + 1]
    at_rest = float(np.mean(difference[static])) if np.any(static) else rest
    if at_rest is None:
        at_rest = 0.0
    return np.where(static, 0.0, EXPONENT * (difference - at_rest) / np.where(flow == 0.0, 1.0, flow))


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
