"""The errors that all readings of a survey share, each with what it does to the pipe and to the head losses.

As in `shared_errors`, every error is a number of zero mean and unit standard deviation. A tap's station, height and
gauge enter the reaches on either side with opposite signs, which is why neighbouring reaches read apart together.
"""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.section import Correlation
from fieldfit.field.survey_readings import SurveyReadings
from fieldfit.inference.shared_errors import SHAPE, SHAPE_ORDERS, gauge_parts
from fieldfit.inference.survey_pipe import SurveyPipe

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class SurveyErrors:
    """M shared errors of a survey; K plateaus, R reaches, B side flows, F fittings, J head losses."""

    names: tuple[str, ...]
    """In trade words."""
    flow_m3_s: Array
    """(M, K) change of the true flow at the meter [m³/s]."""
    branch_m3_s: Array
    """(M, B) change of each side flow [m³/s]."""
    ln_bore: Array
    """(M, R) change of ln bore [-]."""
    ln_length: Array
    """(M, R) change of ln length [-]."""
    ln_viscosity: Array
    """(M, 1) change of ln viscosity [-]."""
    fitting_k: Array
    """(M, F) change of each fitting's ΣK [-]."""
    head_m: Array
    """(M, J) change of the head loss as read [m]."""
    ln_friction: Array
    """(M, R·K) change of ln f against the correlation's shape [-], reaches one after another."""


@dataclass(slots=True)
class _Collector:
    """Rows of the tables while they are being gathered."""

    sizes: dict[str, int]
    names: list[str] = field(default_factory=list)
    rows: list[dict[str, Array]] = field(default_factory=list)

    def add(self, name: str, **effect: Array) -> None:
        """Add one error unless it has no effect."""
        if any(np.any(part != 0.0) for part in effect.values()):
            self.names.append(name)
            self.rows.append(effect)

    def table(self, key: str) -> Array:
        """Stack one kind of effect, zero where an error has none."""
        size = self.sizes[key]
        return np.array([row.get(key, np.zeros(size)) for row in self.rows]).reshape(len(self.rows), size)


def survey_errors(readings: SurveyReadings, pipe: SurveyPipe, limit: Correlation, tilt: Array) -> SurveyErrors:
    """List the shared errors of a survey.

    Parameters
    ----------
    readings : SurveyReadings
        What all taps say.
    pipe : SurveyPipe
        What lies between them.
    limit : Correlation
        How far friction correlations can be trusted.
    tilt : (R, K) array
        d ln f / d ln f at the reference, less one, along the curve near the wall's [-].

    Returns
    -------
    SurveyErrors
        Errors without effect are left out.
    """
    reaches, plateaus = pipe.reference_reynolds.size, readings.flow_m3_s.size
    found = _Collector(
        {
            "flow_m3_s": plateaus,
            "branch_m3_s": pipe.branch_m3_s.size,
            "ln_bore": reaches,
            "ln_length": reaches,
            "ln_viscosity": 1,
            "fitting_k": pipe.fitting_k.size,
            "head_m": readings.head_m.size,
            "ln_friction": reaches * plateaus,
        }
    )
    _add_meter(found, readings)
    _add_taps(found, readings)
    _add_pipe(found, readings, pipe)
    _add_shape(found, pipe, limit, tilt)
    return SurveyErrors(names=tuple(found.names), **{key: found.table(key) for key in found.sizes})


def with_more(errors: SurveyErrors, name: str, **effects: Array) -> SurveyErrors:
    """Return the errors with more of one name behind them.

    Parameters
    ----------
    errors : SurveyErrors
        Those there are.
    name : str
        Name of all the new ones.
    **effects : (N, …) arrays
        What one standard deviation of each does, by the names of the tables; nothing elsewhere.

    Returns
    -------
    SurveyErrors
    """
    count = len(next(iter(effects.values())))
    tables = {
        key: np.vstack([table, effects.get(key, np.zeros((count, table.shape[1])))])
        for key in SurveyErrors.__slots__
        if key != "names"
        for table in (getattr(errors, key),)
    }
    return SurveyErrors(names=errors.names + (name,) * count, **tables)


def _add_meter(found: _Collector, readings: SurveyReadings) -> None:
    """Add the meter's gain, zero and span, as for one reach."""
    accuracy, flow = readings.section.meter.accuracy, readings.flow_m3_s
    fixed = accuracy.fixed_at(flow)
    span = accuracy.span or float(np.max(np.abs(flow)))
    found.add("meter gain", flow_m3_s=accuracy.gain_at(flow) * flow)
    found.add("meter zero", flow_m3_s=fixed)
    found.add("meter span", flow_m3_s=fixed * (flow - np.mean(flow)) / span)


def _add_taps(found: _Collector, readings: SurveyReadings) -> None:
    """Add what each gauge and each tap's place does; gauges of one serial are one gauge."""
    taps, between = readings.section.taps, readings.between
    effects: dict[tuple[str, str], Array] = {}
    for index, tap in enumerate(taps):
        name = tap.gauge or tap.column
        pressure = np.nan_to_num(readings.pressure_pa[index], nan=float(np.nanmean(readings.pressure_pa)))
        base = None if readings.base_pa is None else np.full_like(pressure, readings.base_pa[index])
        for part, effect in gauge_parts(tap.accuracy, pressure, base).items():
            metres = (effect / readings.weight_pa_m)[readings.plateau] * between[:, index]
            effects[name, part] = effects.get((name, part), np.zeros(len(between))) + metres
    for (name, part), metres in effects.items():
        found.add(f"{part} of gauge {name}", head_m=metres)
    if readings.level_m2 is not None:
        values, vectors = np.linalg.eigh(readings.level_m2)
        for value, vector in zip(values, vectors.T, strict=True):
            found.add("static levelling", head_m=between @ vector * np.sqrt(max(float(value), 0.0)))
        return
    for index, tap in enumerate(taps):
        if tap.elevation is not None:
            found.add(f"elevation of {tap.column}", head_m=between[:, index] * tap.elevation.standard)


def _add_pipe(found: _Collector, readings: SurveyReadings, pipe: SurveyPipe) -> None:
    """Add bores, stations, side flows, fittings and viscosity; a velocity meter's flow follows the section's bore."""
    section = readings.section
    through_meter = 2.0 if section.meter.senses == "velocity" else 0.0
    for number, relative in enumerate(pipe.bore_relative):
        of_meter = through_meter * relative * readings.flow_m3_s if number == 0 else np.zeros_like(readings.flow_m3_s)
        found.add(
            "bore" if pipe.bore_relative.size == 1 else f"bore of {pipe.bore_names[number]}",
            ln_bore=np.where(pipe.bore_number == number, relative, 0.0),
            flow_m3_s=of_meter,
        )
    reaches = np.arange(pipe.length_m.size)
    for index, tap in enumerate(section.taps):
        moved = (reaches == index - 1).astype(np.float64) - (reaches == index)
        found.add(f"station of {tap.column}", ln_length=moved * tap.station.standard / pipe.length_m)
    for index, standard in enumerate(pipe.branch_standard):
        found.add(
            f"flow of {section.branches[index].name}", branch_m3_s=standard * np.eye(len(section.branches))[index]
        )
    for index, standard in enumerate(pipe.fitting_standard):
        found.add("fittings", fitting_k=standard * np.eye(pipe.fitting_k.size)[index])
    found.add("viscosity and temperature", ln_viscosity=np.array([readings.viscosity_standard]))


def _add_shape(found: _Collector, pipe: SurveyPipe, limit: Correlation, tilt: Array) -> None:
    """Add how the correlation may be wrong in shape about the reference: slope, bend, and a neighbour's curve."""
    position = np.log10(pipe.middle_reynolds / pipe.reference_reynolds[:, None]) / limit.decades
    decay = limit.standard * np.exp(-0.5 * position**2)
    for order in SHAPE_ORDERS:
        found.add(SHAPE, ln_friction=(decay * position**order / np.sqrt(float(order))).ravel())
    found.add(SHAPE, ln_friction=(limit.standard * tilt).ravel())
