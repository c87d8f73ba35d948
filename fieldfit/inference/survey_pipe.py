"""What lies between the taps of a survey, as arrays: reaches, stretches of one flow, side flows and fittings."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.reach_pipe import leaves_above, section_of_reach, segments, tap_bore
from fieldfit.field.section import Section
from fieldfit.field.survey_readings import SurveyReadings
from fieldfit.hydraulics.friction import STANDARD_GRAVITY, smooth

Array = NDArray[np.float64]
Numbers = NDArray[np.int64]


@dataclass(frozen=True, slots=True, kw_only=True)
class SurveyPipe:
    """R reaches in S stretches of one flow each; B side flows, F fittings, T taps, K plateaus."""

    bore_m: Array
    """(R,) as-new bore [m]."""
    length_m: Array
    """(R,) length [m]."""
    bore_number: Numbers
    """(R,) which stated bore a reach has: reaches of one stated bore share its error."""
    bore_relative: Array
    """(number of stated bores,) relative standard uncertainty [-]."""
    bore_names: tuple[str, ...]
    """Name of each stated bore."""
    group: Numbers
    """(R,) which material a reach is of: one roughness may serve one group."""
    stretch_reach: Numbers
    """(S,) reach of each stretch."""
    stretch_share: Array
    """(S,) share of its reach's length [-]."""
    stretch_takes: Array
    """(S, B) what each side flow takes from the metered flow there: 1, 0 or −1."""
    tap_takes: Array
    """(T, B) the same at each tap."""
    tap_bore_m: Array
    """(T,) bore of the pipe each tap sits in [m]."""
    tap_reach: Numbers
    """(T,) reach whose pipe that is."""
    branch_m3_s: Array
    """(B,) stated side flows [m³/s]; 0 for the unknown one."""
    branch_standard: Array
    """(B,) their standard uncertainties [m³/s]."""
    unknown_branch: int | None
    """Index of the side flow to be inferred."""
    fitting_k: Array
    """(F,) ΣK of each kind of fitting at its place [-]."""
    fitting_standard: Array
    """(F,) its standard uncertainty [-]."""
    fitting_stretch: Numbers
    """(F,) stretch it lies in."""
    reference_flow_m3_s: float
    """Flow at the meter that the results are for [m³/s]."""
    reference_temperature_degc: float
    """Temperature there [°C]."""
    reference_viscosity_m2_s: float
    """Viscosity there [m²/s]."""
    reference_reynolds: Array
    """(R,) Reynolds number of each reach there [-]."""
    middle_reynolds: Array
    """(R, K) Reynolds number of each reach at each plateau [-]."""


def survey_pipe(readings: SurveyReadings) -> SurveyPipe:
    """Lay out what lies between the taps, and find the flow that the results are for.

    The reference is the mean of ln Q, each plateau weighted by what it says of f when nothing but noise and the
    errors of head are counted; for two taps it is that of a single reach.

    Parameters
    ----------
    readings : SurveyReadings
        What all taps say.

    Returns
    -------
    SurveyPipe
    """
    section = readings.section
    reaches = [section_of_reach(section, reach) for reach in range(len(section.taps) - 1)]
    bore = np.array([one.bore.value for one in reaches])
    station = np.array([tap.station.value for tap in section.taps])
    parts = [(reach, first, last) for reach in range(len(reaches)) for first, last in segments(section, reach)]
    takes = np.array(
        [[leaves_above(b, (first + last) / 2.0, section) for b in section.branches] for _, first, last in parts]
    )
    takes = takes.reshape(len(parts), len(section.branches))
    known = [branch.flow for branch in section.branches]
    branch = np.array([flow.value if flow else 0.0 for flow in known])
    middle = takes[[min(s for s, part in enumerate(parts) if part[0] == reach) for reach in range(len(reaches))]]
    flow = np.maximum(readings.flow_m3_s - (middle @ branch)[:, None], 1e-9)
    weight = _weight(readings, bore, np.diff(station), flow)
    reference = float(np.exp(weight @ np.log(readings.flow_m3_s)))
    ln_viscosity = float(weight @ np.log(readings.viscosity_m2_s))
    at_reference = np.maximum(reference - middle @ branch, 1e-9)
    return SurveyPipe(
        bore_m=bore,
        length_m=np.diff(station),
        **_bores(section, reaches),
        group=_groups(reaches),
        stretch_reach=np.array([reach for reach, _, _ in parts]),
        stretch_share=np.array(
            [(last - first) / (station[reach + 1] - station[reach]) for reach, first, last in parts]
        ),
        stretch_takes=takes,
        tap_takes=np.array([[leaves_above(b, at, section) for b in section.branches] for at in station]).reshape(
            len(station), len(section.branches)
        ),
        tap_bore_m=np.array([tap_bore(section, tap) for tap in range(len(station))]),
        tap_reach=np.maximum(np.arange(len(station)) - 1, 0),
        branch_m3_s=branch,
        branch_standard=np.array([flow_.standard if flow_ else 0.0 for flow_ in known]),
        unknown_branch=next((index for index, flow_ in enumerate(known) if flow_ is None), None),
        **_fittings(section, parts),
        reference_flow_m3_s=reference,
        reference_temperature_degc=float(weight @ readings.temperature_degc),
        reference_viscosity_m2_s=float(np.exp(ln_viscosity)),
        reference_reynolds=4.0 * at_reference / (np.pi * bore * np.exp(ln_viscosity)),
        middle_reynolds=4.0 * flow / (np.pi * bore[:, None] * readings.viscosity_m2_s),
    )


def _weight(readings: SurveyReadings, bore: Array, length: Array, flow: Array) -> Array:
    """Return what each plateau says of f, (K,), adding up to one."""
    reynolds = 4.0 * flow / (np.pi * bore[:, None] * readings.viscosity_m2_s)
    loss = smooth(reynolds) * (length / bore**5)[:, None] * flow**2 * 8.0 / (np.pi**2 * STANDARD_GRAVITY)
    variance = np.diag(readings.noise_m2) + _level_variance(readings)
    found = np.zeros(readings.flow_m3_s.size)
    for row, (plateau, upper, lower) in enumerate(zip(readings.plateau, readings.upper, readings.lower, strict=True)):
        found[plateau] += float(np.sum(loss[upper:lower, plateau])) ** 2 / variance[row]
    return found / np.sum(found)


def _level_variance(readings: SurveyReadings) -> Array:
    """Return the variance that gauges, heights and levelling leave in each head loss [m²], (J,)."""
    from fieldfit.inference.shared_errors import gauge_parts

    section, between = readings.section, readings.between
    variance = np.zeros(len(between))
    for index, tap in enumerate(section.taps):
        pressure = np.nan_to_num(readings.pressure_pa[index], nan=float(np.nanmean(readings.pressure_pa)))
        base = None if readings.base_pa is None else np.full_like(pressure, readings.base_pa[index])
        for effect in gauge_parts(tap.accuracy, pressure, base).values():
            variance += ((effect / readings.weight_pa_m)[readings.plateau] * between[:, index]) ** 2
        if readings.level_m2 is None and tap.elevation is not None:
            variance += (between[:, index] * tap.elevation.standard) ** 2
    if readings.level_m2 is not None:
        variance += np.sum((between @ readings.level_m2) * between, axis=1)
    return variance


def _bores(section: Section, reaches: list[Section]) -> dict[str, Any]:
    """Return which stated bore each reach has; the section's own comes first."""
    stated = [section.bore, *(pipe.bore for pipe in section.reach_pipes)]
    names = ["the section", *(f"{pipe.upper} to {pipe.lower}" for pipe in section.reach_pipes)]
    number = [next(index for index, bore in enumerate(stated) if bore is one.bore) for one in reaches]
    return {
        "bore_number": np.array(number),
        "bore_relative": np.array([bore.relative for bore in stated]),
        "bore_names": tuple(names),
    }


def _groups(reaches: list[Section]) -> Numbers:
    """Return which reaches are of one material, numbered from 0 in the order of flow."""
    names = list(dict.fromkeys(one.material for one in reaches))
    return np.array([names.index(one.material) for one in reaches])


def _fittings(section: Section, parts: list[tuple[int, float, float]]) -> dict[str, Any]:
    """Return the fittings with the stretch each lies in; without a place they are in the only reach."""
    inside = []
    for fitting in section.fittings:
        at = fitting.station if fitting.station is not None else parts[0][1]
        inside += [(index, fitting) for index, (_, first, last) in enumerate(parts) if first <= at < last]
    return {
        "fitting_k": np.array([fitting.count * fitting.k.value for _, fitting in inside]),
        "fitting_standard": np.array([fitting.count * fitting.k.standard for _, fitting in inside]),
        "fitting_stretch": np.array([index for index, _ in inside], dtype=np.int64),
    }
