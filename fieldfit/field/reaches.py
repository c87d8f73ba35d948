"""From plateaus to the readings of each reach: levelled head losses and what goes with them."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from fieldfit.errors import InputError
from fieldfit.field.dead_taps import alive_at, take_plateaus
from fieldfit.field.reach_pipe import reach_flow, section_of_reach, velocity_head_drop
from fieldfit.field.readings import Levelling, Plateaus, ReachReadings
from fieldfit.field.screens import CRITICAL, DEAD_TAP, LAMINAR, NEGATIVE, UNRESOLVED, UNSTEADY, limit
from fieldfit.field.section import Fitting, Section, Tap
from fieldfit.field.uncertain import Uncertain
from fieldfit.hydraulics.friction import STANDARD_GRAVITY

Array = NDArray[np.float64]


def reach_readings(plateaus: Plateaus, section: Section, reach: int, *, every_turbulent: bool = False) -> ReachReadings:
    """Work out the head losses of one reach and set aside the plateaus that carry no roughness.

    With a static in the log the gauges are levelled on it, drift between statics shared out over time; without
    one the survey stands. The inertia of a slowly changing flow is taken off.

    Parameters
    ----------
    plateaus : Plateaus
        Plateaus of the campaign, statics included.
    section : Section
        The test section.
    reach : int
        The reach from tap `reach` to the next.
    every_turbulent : bool
        Keep plateaus of negative or unresolved head loss as well: they carry no roughness, but they show a fault.

    Returns
    -------
    ReachReadings

    Raises
    ------
    InputError
        When there is neither a static nor a surveyed elevation, or a fitting's place is needed and missing.
    """
    upstream, downstream = section.taps[reach], section.taps[reach + 1]
    heads = reach_heads(plateaus, section, reach)
    if heads.levelling is None and heads.elevation_drop is None:
        raise InputError(
            f"the gauges at '{upstream.column}' and '{downstream.column}' have no surveyed elevation and the log has no "
            "static",
            'Write elevation = "1.20 m" for both taps, or take readings with the flow stopped.',
            section.path.name,
        )
    section = section_of_reach(section, reach)
    plateaus, head, random, reasons = heads.plateaus, heads.head_loss_m, heads.random_m, heads.reason
    kept = ("", NEGATIVE, UNRESOLVED) if every_turbulent else ("",)
    keep = ~plateaus.static & np.isin(reasons, kept)
    temperature = plateaus.temperature_degc[keep]
    return ReachReadings(
        upstream=upstream,
        downstream=downstream,
        meter=section.meter,
        length=tap_distance(upstream, downstream),
        bore=section.bore,
        fitting_k=_fitting_k(section, reach),
        elevation_drop=heads.elevation_drop,
        levelling=heads.levelling,
        number=plateaus.number[keep],
        flow_m3_s=plateaus.flow_m3_s[keep],
        head_loss_m=head[keep],
        random_m=random[keep],
        pressure_pa=plateaus.pressure_pa[reach : reach + 2, keep],
        temperature_degc=temperature,
        density_kg_m3=section.liquid.density_kg_m3(temperature),
        viscosity_m2_s=section.liquid.viscosity_m2_s(temperature),
        viscosity_standard=viscosity_standard(section, temperature),
        turbulent_from_m3_s=limit(section, "turbulent")
        * np.pi
        / 4.0
        * section.bore.value
        * float(np.max(section.liquid.viscosity_m2_s(plateaus.temperature_degc), initial=0.0)),
        set_aside=tuple((int(number), str(why)) for number, why in zip(plateaus.number, reasons, strict=True) if why)
        + heads.dead,
    )


class ReachHeads(NamedTuple):
    """Head losses of one reach before any plateau is set aside; K plateaus with both taps alive, statics included."""

    plateaus: Plateaus
    """The plateaus, with the reach's own flow."""
    head_loss_m: Array
    """(K,) head loss, levelled and without inertia [m]; by the gauges alone where nothing levels them."""
    unlevelled_m: Array
    """(K,) the same by survey and gauges alone [m]: of a static, what the gauges differ by at rest."""
    random_m: Array
    """(K,) standard error, independent between plateaus [m]."""
    standard_m: Array
    """(K,) standard uncertainty, levelling included [m]; infinite where nothing levels the gauges."""
    reason: NDArray[np.str_]
    """(K,) why a flowing plateau carries no roughness, empty where it does."""
    levelling: Levelling | None
    """What the statics gave; None without a static."""
    elevation_drop: Uncertain | None
    """Upper gauge's elevation less the lower one's [m]; None when not surveyed."""
    dead: tuple[tuple[int, str], ...]
    """Plateaus at which a tap was dead: number and reason."""


def reach_heads(plateaus: Plateaus, section: Section, reach: int) -> ReachHeads:
    """Work out the head loss of one reach at every plateau, and which of them carry no roughness.

    Parameters
    ----------
    plateaus : Plateaus
        Plateaus of the campaign, statics included.
    section : Section
        The test section.
    reach : int
        The reach from tap `reach` to the next.

    Returns
    -------
    ReachHeads
    """
    upstream, downstream = section.taps[reach], section.taps[reach + 1]
    plateaus, velocity_m, dead = _of_reach(plateaus, section, reach)
    section = section_of_reach(section, reach)
    weight = section.liquid.density_kg_m3(plateaus.temperature_degc) * STANDARD_GRAVITY
    random = np.maximum(plateaus.random_pa[reach] / weight, 1e-6)
    levelling = _levelling(plateaus, section, reach, weight, random)
    drop = elevation_drop(upstream, downstream)
    unlevelled = _head_loss(plateaus, reach, weight, drop) + velocity_m
    head = unlevelled - _offsets(plateaus, unlevelled) if levelling else unlevelled
    inertia = tap_distance(upstream, downstream).value / (STANDARD_GRAVITY * np.pi * section.bore.value**2 / 4.0)
    head = head - inertia * plateaus.flow_slope_m3_s2
    doubt = inertia * _slope_standard(plateaus)
    random = np.hypot(random, doubt)
    standard = np.hypot(random, _level_standard(plateaus, section, reach, weight, levelling))
    return ReachHeads(
        plateaus=plateaus,
        head_loss_m=head,
        unlevelled_m=unlevelled,
        random_m=random,
        standard_m=standard,
        reason=_reasons(plateaus, section, head, (standard, doubt)),
        levelling=levelling,
        elevation_drop=drop,
        dead=dead,
    )


def _of_reach(plateaus: Plateaus, section: Section, reach: int) -> tuple[Plateaus, Array, tuple[tuple[int, str], ...]]:
    """Return the plateaus with both taps alive and the reach's own flow, velocity heads lost [m], and the others."""
    alive = alive_at(plateaus, (reach, reach + 1))
    dead = tuple((int(number), DEAD_TAP) for number in plateaus.number[~alive])
    kept = take_plateaus(plateaus, alive)
    velocity_m = np.where(kept.static, 0.0, velocity_head_drop(kept.flow_m3_s, section, reach))
    return replace(kept, flow_m3_s=reach_flow(kept.flow_m3_s, section, reach)), velocity_m, dead


def tap_distance(upstream: Tap, downstream: Tap) -> Uncertain:
    """Return the distance between two taps [m]."""
    return Uncertain(
        value=downstream.station.value - upstream.station.value,
        standard=float(np.hypot(upstream.station.standard, downstream.station.standard)),
        shape=downstream.station.shape,
        assumed=upstream.station.assumed or downstream.station.assumed,
    )


def elevation_drop(upstream: Tap, downstream: Tap) -> Uncertain | None:
    """Return the upper gauge's elevation less the lower one's [m]."""
    if upstream.elevation is None or downstream.elevation is None:
        return None
    return Uncertain(
        value=upstream.elevation.value - downstream.elevation.value,
        standard=float(np.hypot(upstream.elevation.standard, downstream.elevation.standard)),
        shape=downstream.elevation.shape,
        assumed=upstream.elevation.assumed or downstream.elevation.assumed,
    )


def _head_loss(plateaus: Plateaus, reach: int, weight: Array, drop: Uncertain | None) -> Array:
    """Return the head loss of each plateau by the survey [m], at its mean flow."""
    difference = plateaus.pressure_pa[reach] - plateaus.pressure_pa[reach + 1] - plateaus.curvature_pa[reach]
    return np.asarray(difference / weight + (drop.value if drop else 0.0))


def _slope_standard(plateaus: Plateaus) -> Array:
    """Return the standard error of each plateau's rate of change of flow [m³/s²]; zero where it is not known."""
    known = plateaus.flow_slope_standard_m3_s2
    return np.zeros(len(plateaus.number)) if known is None else known


def _offsets(plateaus: Plateaus, head: Array) -> Array:
    """Return the apparent loss at rest at the time of each plateau [m], in a line between the statics."""
    middle = (plateaus.start_s + plateaus.end_s) / 2.0 if plateaus.middle_s is None else plateaus.middle_s
    return np.interp(middle, middle[plateaus.static], head[plateaus.static])


def _levelling(plateaus: Plateaus, section: Section, reach: int, weight: Array, random: Array) -> Levelling | None:
    """Return what the statics say of a reach; None without a static."""
    static = plateaus.static
    if not np.any(static):
        return None
    drop = elevation_drop(section.taps[reach], section.taps[reach + 1])
    at_rest = _head_loss(plateaus, reach, weight, drop)[static]
    drift = float(at_rest[-1] - at_rest[0]) if len(at_rest) > 1 else None
    pressure = np.mean(plateaus.pressure_pa[reach : reach + 2, static], axis=1)
    gauges = _gauge_standard(section, reach, pressure[:, None]) / weight[0]
    survey = drop.standard if drop else float("inf")
    return Levelling(
        offset_m=float(np.mean(at_rest)),
        standard_m=float(np.sqrt(np.mean(random[static] ** 2) + (drift or 0.0) ** 2 / 12.0)),
        drift_m=drift,
        plateaus=int(np.count_nonzero(static)),
        pressure_pa=(float(pressure[0]), float(pressure[1])),
        expected_m=float(np.hypot(gauges[0], survey)),
    )


def _gauge_standard(section: Section, reach: int, pressure: Array) -> Array:
    """Return the standard uncertainty of the difference of two gauges [Pa] at (2, K) pressures."""
    upper = section.taps[reach].accuracy.standard_at(pressure[0])
    lower = section.taps[reach + 1].accuracy.standard_at(pressure[1])
    return np.asarray(np.hypot(upper, lower))


def _level_standard(
    plateaus: Plateaus, section: Section, reach: int, weight: Array, levelling: Levelling | None
) -> Array:
    """Return how well the zero of the head loss is known at each plateau [m]."""
    if levelling:
        return np.full(len(weight), levelling.standard_m)
    drop = elevation_drop(section.taps[reach], section.taps[reach + 1])
    gauges = _gauge_standard(section, reach, plateaus.pressure_pa[reach : reach + 2]) / weight
    return np.asarray(np.hypot(gauges, drop.standard if drop else np.inf))


def _reasons(plateaus: Plateaus, section: Section, head: Array, doubts: tuple[Array, Array]) -> NDArray[np.str_]:
    """Return why a flowing plateau carries no roughness, empty where it does; the first reason counts.

    The doubts are the standard uncertainties of the head loss and of its correction for inertia [m].
    """
    standard, inertia = doubts
    # Where nothing levels the gauges the head loss is not known well enough to judge it by.
    known = np.isfinite(standard)
    viscosity = section.liquid.viscosity_m2_s(plateaus.temperature_degc)
    reynolds = 4.0 * plateaus.flow_m3_s / (np.pi * section.bore.value * viscosity)
    clear = limit(section, "resolution") * np.where(known, standard, 0.0)
    tests = (
        (plateaus.static, ""),
        (reynolds < limit(section, "laminar"), LAMINAR),
        (reynolds < limit(section, "turbulent"), CRITICAL),
        (known & (head < -clear), NEGATIVE),
        (known & (head < clear), UNRESOLVED),
        (known & (inertia > limit(section, "inertia") * head), UNSTEADY),
    )
    return np.select([test for test, _ in tests], [why for _, why in tests], default="").astype(np.str_)


def _fitting_k(section: Section, reach: int) -> Uncertain:
    """Return the sum of loss coefficients between two taps; like fittings share their error."""
    within = [fitting for fitting in section.fittings if _between(fitting, section, reach)]
    return sum_of_k(within)


def sum_of_k(fittings: Sequence[Fitting]) -> Uncertain:
    """Return the sum of loss coefficients of some fittings [-]; like fittings share their error."""
    standards = [fitting.count * fitting.k.standard for fitting in fittings]
    return Uncertain(
        value=float(sum(fitting.count * fitting.k.value for fitting in fittings)),
        standard=float(np.sqrt(np.sum(np.square(standards)))),
        assumed=any(fitting.k.assumed for fitting in fittings),
    )


def _between(fitting: Fitting, section: Section, reach: int) -> bool:
    """Return whether a fitting lies in the reach."""
    if fitting.station is None:
        if len(section.taps) > 2:
            raise InputError(
                f"the fitting '{fitting.name}' has no station, and there are {len(section.taps)} taps",
                'Write station = "12 m" so that it is counted in the right reach.',
                section.path.name,
            )
        return True
    return section.taps[reach].station.value <= fitting.station < section.taps[reach + 1].station.value


def viscosity_standard(section: Section, temperature: Array) -> float:
    """Return the relative standard uncertainty of the viscosity, temperature included [-]."""
    if len(temperature) == 0:
        return section.liquid.viscosity_standard
    middle = np.array([float(np.mean(temperature))])
    above, below = section.liquid.viscosity_m2_s(middle + 0.5), section.liquid.viscosity_m2_s(middle - 0.5)
    per_kelvin = float(np.log(above / below)[0])
    return float(np.hypot(section.liquid.viscosity_standard, per_kelvin * section.temperature_standard))
