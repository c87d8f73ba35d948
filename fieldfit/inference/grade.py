"""The hydraulic grade line of a survey at its largest flow: readings, fit, and one wall for all."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from fieldfit.hydraulics.friction import colebrook_white
from fieldfit.hydraulics.materials import material
from fieldfit.inference.fit import NORMAL_95
from fieldfit.inference.survey_fit import SurveyFit, reach_friction
from fieldfit.inference.survey_model import SurveyModel

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class GradeLine:
    """Heads along the pipe at one flow; T taps, A of them alive, N points of a line."""

    flow_m3_s: float
    """Flow at the meter [m³/s]."""
    station_m: Array
    """(A,) stations of the taps alive [m]."""
    head_m: Array
    """(A,) piezometric heads as read, levelled [m]."""
    bar_m: Array
    """(A,) 95 % half-width of each against the first [m]."""
    line_station_m: Array
    """(N,) stations of the lines' corners [m]; a local loss is drawn in the middle of its reach."""
    fitted_m: Array
    """(N,) head of the likeliest explanation [m]."""
    one_wall_m: Array
    """(N,) head if one wall served all [m]."""
    new_pipe_m: Array | None
    """(N,) head of new pipe from the same first head on [m]; None where a material is not known."""
    profile_m: Array | None
    """(T,) heights of the taps [m]; None where one was not surveyed."""
    tap_station_m: Array
    """(T,) stations of all taps [m]."""


def grade_line(best: SurveyFit, one: SurveyFit) -> GradeLine:
    """Work out the grade line at the largest flow with most taps alive.

    Parameters
    ----------
    best : SurveyFit
        Fit of the likeliest explanation.
    one : SurveyFit
        Fit of one wall for each material.

    Returns
    -------
    GradeLine
    """
    readings = best.model.readings
    alive = np.bincount(readings.plateau, minlength=len(readings.number))
    plateau = max(range(len(alive)), key=lambda k: (alive[k], readings.flow_m3_s[k]))
    rows = np.flatnonzero(readings.plateau == plateau)
    taps = np.append(readings.upper[rows], readings.lower[rows[-1]])
    section = readings.section
    heights = [tap.elevation.value if tap.elevation else None for tap in section.taps]
    first = float(readings.pressure_pa[taps[0], plateau] / readings.weight_pa_m[plateau]) + (heights[taps[0]] or 0.0)
    read = first - np.append(0.0, np.cumsum(readings.head_m[rows]))
    station = np.array([tap.station.value for tap in section.taps])
    corners = _corners(station)
    lines = [_line(fit, plateau, _local(fit)) for fit in (best, one)]
    shifts = [float(np.mean(read - np.interp(station[taps], corners, line))) for line in lines]
    new = _new_walls(best.model)
    start = float(np.interp(station[taps[0]], corners, lines[0]) + shifts[0])
    new_line = None if new is None else _line(best, plateau, np.zeros(len(new)), new)
    return GradeLine(
        flow_m3_s=float(readings.flow_m3_s[plateau]),
        station_m=station[taps],
        head_m=read,
        bar_m=_bars(best, rows),
        line_station_m=corners,
        fitted_m=lines[0] + shifts[0],
        one_wall_m=lines[1] + shifts[1],
        new_pipe_m=None
        if new_line is None
        else new_line + start - float(np.interp(station[taps[0]], corners, new_line)),
        profile_m=None if any(height is None for height in heights) else np.array(heights, dtype=np.float64),
        tap_station_m=station,
    )


def _corners(station: Array) -> Array:
    """Return the stations of a line's corners: upper end, both sides of the middle, lower end of each reach."""
    middle = (station[:-1] + station[1:]) / 2.0
    return np.array([station[:-1], middle, middle, station[1:]]).T.ravel()


def _local(fit: SurveyFit) -> Array:
    """Return the local loss of each reach [-]."""
    local = np.zeros(len(fit.model.pipe.bore_m))
    local[list(fit.layout.local)] = fit.local_k
    return local


def _line(fit: SurveyFit, plateau: int, local_k: Array, walls: Array | None = None) -> Array:
    """Return the head at each corner, from zero on [m]; the gauges' own errors are left out."""
    model, reaches = fit.model, len(fit.model.pipe.bore_m)
    readings = replace(
        model.readings,
        plateau=np.full(reaches, plateau),
        upper=np.arange(reaches),
        lower=np.arange(1, reaches + 1),
        head_m=np.zeros(reaches),
    )
    bare = replace(model.errors, head_m=np.zeros((len(fit.u), reaches)))
    along = SurveyModel(readings=readings, pipe=model.pipe, errors=bare)
    own = reach_friction(model, fit.layout, fit.ln_friction)[0] if walls is None else walls
    smooth_fall = along.predict(own, fit.u, np.zeros(reaches), fit.branch_m3_s).head_m
    fall = along.predict(own, fit.u, local_k, fit.branch_m3_s).head_m
    ends = -np.append(0.0, np.cumsum(fall))
    return np.array([ends[:-1], ends[:-1] - smooth_fall / 2.0, ends[1:] + smooth_fall / 2.0, ends[1:]]).T.ravel()


def _bars(fit: SurveyFit, rows: NDArray[np.int64]) -> Array:
    """Return the 95 % half-width of each head against the first, (A,) [m]: noise, gauges and heights."""
    heads = fit.model.errors.head_m[:, rows]
    covariance = fit.noise_m2[np.ix_(rows, rows)] + heads.T @ heads
    adding = np.tril(np.ones((len(rows), len(rows))))
    return np.append(0.0, NORMAL_95 * np.sqrt(np.diag(adding @ covariance @ adding.T)))


def _new_walls(model: SurveyModel) -> Array | None:
    """Return ln f of new pipe in each reach, (R,) [-]; None where a material is not known."""
    from fieldfit.field.reach_pipe import section_of_reach

    pipe, names = model.pipe, []
    for reach in range(len(pipe.bore_m)):
        name = section_of_reach(model.readings.section, reach).material
        if name is None:
            return None
        names.append(material(name).roughness_m[1])
    return np.log(colebrook_white(pipe.reference_reynolds, np.array(names) / pipe.bore_m))
