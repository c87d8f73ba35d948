"""Readings of all taps at once: head losses between neighbours alive, with the noise they share at each tap."""

from __future__ import annotations

import itertools
from dataclasses import dataclass, replace
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.log import Log
from fieldfit.field.reach_pipe import flow_at, section_of_reach, segments
from fieldfit.field.reaches import viscosity_standard
from fieldfit.field.readings import Plateaus, Screening
from fieldfit.field.screens import limit
from fieldfit.field.section import Section
from fieldfit.field.survey_noise import head_covariance, tremble
from fieldfit.hydraulics.friction import STANDARD_GRAVITY

Array = NDArray[np.float64]
Numbers = NDArray[np.int64]
Mask = NDArray[np.bool_]


@dataclass(frozen=True, slots=True, kw_only=True)
class SurveyReadings:
    """What all taps of a section say at once; T taps, K flowing plateaus, J head losses between neighbours alive."""

    section: Section
    """The test section."""
    number: Numbers
    """(K,) plateau numbers."""
    flow_m3_s: Array
    """(K,) flow [m³/s], as metered."""
    temperature_degc: Array
    """(K,) temperature of the liquid [°C]."""
    viscosity_m2_s: Array
    """(K,) its kinematic viscosity [m²/s]."""
    viscosity_standard: float
    """Relative standard uncertainty of the viscosity, temperature included [-]."""
    weight_pa_m: Array
    """(K,) weight of the liquid ρg [Pa/m]."""
    pressure_pa: Array
    """(T, K) gauge pressure [Pa]; NaN where a tap was dead."""
    base_pa: Array | None
    """(T,) gauge pressure while static [Pa]; None without a static."""
    level_m2: Array | None
    """(T, T) covariance of what levelling left at each tap, up to what all taps share [m²]; None without a static."""
    plateau: Numbers
    """(J,) index of each head loss's plateau, from 0."""
    upper: Numbers
    """(J,) index of its upper tap."""
    lower: Numbers
    """(J,) index of its lower tap: the next one alive."""
    head_m: Array
    """(J,) fall of the piezometric head, levelled, inertia taken off; velocity heads are still in it [m]."""
    noise_m2: Array
    """(J, J) covariance of its noise [m²]."""

    @property
    def between(self) -> Array:
        """(J, T) what each head loss is of the heads at the taps: 1 at the upper, −1 at the lower."""
        table = np.zeros((len(self.head_m), len(self.section.taps)))
        rows = np.arange(len(self.head_m))
        table[rows, self.upper] = 1.0
        table[rows, self.lower] = -1.0
        return table


class _Level(NamedTuple):
    """What the statics say of each tap."""

    base_pa: Array
    covariance_m2: Array


def survey_readings(
    plateaus: Plateaus, section: Section, rows: tuple[Log, Screening] | None = None
) -> SurveyReadings | None:
    """Put the readings of all taps together.

    Every flowing plateau that is turbulent throughout and loses more head than it can be wrong by is used, whatever
    a single reach shows there: to leave out a reach that seems to gain head would bias its neighbours. Neighbouring
    head losses share a tap, so its noise enters both with opposite signs. A tap that was dead is stepped over.

    Parameters
    ----------
    plateaus : Plateaus
        Plateaus of the campaign, statics included; pressures are NaN where a tap was dead.
    section : Section
        The test section.
    rows : (Log, Screening), optional
        The rows behind the plateaus, which tell what trembles with what.

    Returns
    -------
    SurveyReadings or None
        None when no plateau is left.
    """
    weight = section.liquid.density_kg_m3(plateaus.temperature_degc) * STANDARD_GRAVITY
    heads = _tap_heads(plateaus, section, weight)
    kept = np.flatnonzero(_turbulent(plateaus, section) & ~plateaus.static)
    found = tremble(plateaus, section, float(np.mean(weight)), rows)
    noise = [_scaled(head_covariance(plateaus, found, index), weight[index]) for index in range(len(weight))]
    triples = [row for order, index in enumerate(kept) for row in _of_plateau(heads, order, int(index))]
    if not triples:
        return None
    level = _level(plateaus, heads, noise)
    plateau, upper, lower = (np.array(part) for part in zip(*triples, strict=True))
    readings = SurveyReadings(
        section=section,
        number=plateaus.number[kept],
        flow_m3_s=plateaus.flow_m3_s[kept],
        temperature_degc=plateaus.temperature_degc[kept],
        viscosity_m2_s=section.liquid.viscosity_m2_s(plateaus.temperature_degc[kept]),
        viscosity_standard=viscosity_standard(section, plateaus.temperature_degc[kept]),
        weight_pa_m=weight[kept],
        pressure_pa=plateaus.pressure_pa[:, kept],
        base_pa=level.base_pa if level else None,
        level_m2=level.covariance_m2 if level else None,
        plateau=plateau,
        upper=upper,
        lower=lower,
        head_m=_losses(plateaus, section, kept, (plateau, upper, lower), (heads, weight)),
        noise_m2=np.zeros((len(triples), len(triples))),
    )
    return _without_unresolved(_with_noise(readings, plateaus, kept, noise))


def _tap_heads(plateaus: Plateaus, section: Section, weight: Array) -> Array:
    """Return the piezometric head at each tap [m], (T, K); from any datum where heights were not surveyed.

    Where there are statics, a tap that was dead in the one with most taps alive is left out: nothing levels it.
    """
    height = np.array([tap.elevation.value if tap.elevation else 0.0 for tap in section.taps])
    heads = np.asarray(plateaus.pressure_pa / weight + height[:, None])
    if np.any(plateaus.static):
        alive = np.isfinite(heads[:, plateaus.static])
        heads[~alive[:, int(np.argmax(np.count_nonzero(alive, axis=0)))]] = np.nan
    return heads


def _turbulent(plateaus: Plateaus, section: Section) -> Mask:
    """Return the (K,) plateaus whose flow is turbulent in every reach."""
    viscosity = section.liquid.viscosity_m2_s(plateaus.temperature_degc)
    turbulent = np.ones(len(viscosity), dtype=np.bool_)
    for reach in range(len(section.taps) - 1):
        bore = section_of_reach(section, reach).bore.value
        for first, last in segments(section, reach):
            flow = flow_at(plateaus.flow_m3_s, (first + last) / 2.0, section)
            turbulent &= 4.0 * flow / (np.pi * bore * viscosity) >= limit(section, "turbulent")
    return turbulent


def _scaled(known: tuple[Array, Array], weight_pa_m: float) -> tuple[Array, Array]:
    """Return a plateau's covariance in metres of head, with its factors."""
    return known[0] / weight_pa_m**2, known[1]


def _block(noise: tuple[Array, Array], between: Array) -> Array:
    """Return the covariance of some differences between taps [m²], each brought to its own rows' standard error."""
    taps, factor = noise
    covered = np.cumsum(between, axis=1)[:, :-1] > 0.5
    own = np.array([float(np.mean(factor[row])) for row in covered])
    return np.asarray((between @ taps @ between.T) * np.outer(own, own))


def _of_plateau(heads: Array, order: int, index: int) -> list[tuple[int, int, int]]:
    """Return plateau, upper and lower tap of each pair of neighbours alive."""
    alive = np.flatnonzero(np.isfinite(heads[:, index]))
    return [(order, int(upper), int(lower)) for upper, lower in itertools.pairwise(alive)]


def _level(plateaus: Plateaus, heads: Array, noise: list[tuple[Array, Array]]) -> _Level | None:
    """Return what the statics say of the taps; None without a static.

    A tap's level counts against the mean of all taps; half the drift from the first static to the last, spread over
    time, stays as a doubt.
    """
    static = np.flatnonzero(plateaus.static)
    if static.size == 0:
        return None
    rest = heads[:, static] - np.nanmean(heads[:, static], axis=0)
    seen = [row[np.isfinite(row)] for row in rest]
    drift = np.array([row[-1] - row[0] if row.size else 0.0 for row in seen])
    own = [taps * np.mean(factor) ** 2 for taps, factor in (noise[index] for index in static)]
    covariance = np.mean(own, axis=0) + np.outer(drift, drift) / 12.0
    with np.errstate(invalid="ignore"):
        alive = np.isfinite(plateaus.pressure_pa[:, static])
        total = np.sum(np.where(alive, plateaus.pressure_pa[:, static], 0.0), axis=1)
    return _Level(total / np.maximum(np.count_nonzero(alive, axis=1), 1), covariance)


def _losses(
    plateaus: Plateaus,
    section: Section,
    kept: Numbers,
    rows: tuple[Numbers, Numbers, Numbers],
    known: tuple[Array, Array],
) -> Array:
    """Return the fall of head of each row [m], levelled, curvature and inertia taken off."""
    heads, weight = known
    middle = (plateaus.start_s + plateaus.end_s) / 2.0 if plateaus.middle_s is None else plateaus.middle_s
    found = np.empty(len(rows[0]))
    for row, (order, upper, lower) in enumerate(zip(*rows, strict=True)):
        index = kept[order]
        fall = heads[upper] - heads[lower]
        at_rest = np.flatnonzero(plateaus.static & np.isfinite(fall))
        found[row] = fall[index] - float(np.sum(plateaus.curvature_pa[upper:lower, index])) / weight[index]
        if at_rest.size:
            found[row] -= float(np.interp(middle[index], middle[at_rest], fall[at_rest]))
        found[row] -= _inertia(section, int(upper), int(lower)) * plateaus.flow_slope_m3_s2[index]
    return found


def _inertia(section: Section, upper: int, lower: int) -> float:
    """Return Σ L/(gA) between two taps [s²/m²]."""
    total = 0.0
    for reach in range(upper, lower):
        length = section.taps[reach + 1].station.value - section.taps[reach].station.value
        total += length / (STANDARD_GRAVITY * np.pi * section_of_reach(section, reach).bore.value ** 2 / 4.0)
    return total


def _with_noise(
    found: SurveyReadings, plateaus: Plateaus, kept: Numbers, noise: list[tuple[Array, Array]]
) -> SurveyReadings:
    """Return the readings with the covariance of their noise, doubt of the inertia included."""
    between = found.between
    covariance = np.zeros_like(found.noise_m2)
    known = plateaus.flow_slope_standard_m3_s2
    for order, index in enumerate(kept):
        rows = np.flatnonzero(found.plateau == order)
        block = _block(noise[index], between[rows])
        if known is not None:
            ends = zip(found.upper[rows], found.lower[rows], strict=True)
            doubt = np.array([_inertia(found.section, int(a), int(b)) for a, b in ends]) * known[index]
            block += np.outer(doubt, doubt)
        covariance[np.ix_(rows, rows)] = block + 1e-14 * np.eye(len(rows))
    return replace(found, noise_m2=covariance)


def _without_unresolved(found: SurveyReadings) -> SurveyReadings | None:
    """Return the readings without plateaus whose whole head loss does not stand clear of its uncertainty."""
    section, keep = found.section, np.zeros(len(found.number), dtype=np.bool_)
    for order in range(len(found.number)):
        rows = np.flatnonzero(found.plateau == order)
        variance = float(np.sum(found.noise_m2[np.ix_(rows, rows)])) + _level_variance(found, order, rows)
        keep[order] = np.sum(found.head_m[rows]) >= limit(section, "resolution") * np.sqrt(variance)
    if not np.any(keep):
        return None
    rows = np.flatnonzero(keep[found.plateau])
    return replace(
        found,
        number=found.number[keep],
        flow_m3_s=found.flow_m3_s[keep],
        temperature_degc=found.temperature_degc[keep],
        viscosity_m2_s=found.viscosity_m2_s[keep],
        weight_pa_m=found.weight_pa_m[keep],
        pressure_pa=found.pressure_pa[:, keep],
        plateau=(np.cumsum(keep) - 1)[found.plateau[rows]],
        upper=found.upper[rows],
        lower=found.lower[rows],
        head_m=found.head_m[rows],
        noise_m2=found.noise_m2[np.ix_(rows, rows)],
    )


def _level_variance(found: SurveyReadings, order: int, rows: Numbers) -> float:
    """Return the variance of the zero of the whole head loss at one plateau [m²]."""
    first, last = int(found.upper[rows[0]]), int(found.lower[rows[-1]])
    if found.level_m2 is not None:
        part = found.level_m2
        return float(part[first, first] + part[last, last] - 2.0 * part[first, last])
    total = 0.0
    for tap in (first, last):
        one = found.section.taps[tap]
        gauge = float(one.accuracy.standard_at(found.pressure_pa[tap, order : order + 1])[0]) / found.weight_pa_m[order]
        total += gauge**2 + (one.elevation.standard**2 if one.elevation else 0.0)
    return total
