"""What a survey finds of the wall of one reach, or of all reaches of one material, with both bands."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from fieldfit.hydraulics.friction import relative_roughness, smooth
from fieldfit.hydraulics.hazen_williams import c_from_friction_factor
from fieldfit.inference.estimate import ONE_SIDED_95
from fieldfit.inference.fit import NORMAL_95
from fieldfit.inference.verdict import ROUGHEST_WALL, SMOOTHEST_SHARE
from fieldfit.inference.wall import Band, Span, State

NOTHING = Band(best=None, measurement=None, with_correlation=None)


@dataclass(frozen=True, slots=True, kw_only=True)
class SurveyWall:
    """A wall as a survey sees it."""

    state: State
    """Measured, upper limit, or no estimate."""
    roughness_m: Band
    """Equivalent sand-grain roughness by Colebrook–White [m]."""
    hazen_williams_c: Band
    """Hazen–Williams C at `flow_m3_s` [-]."""
    friction_factor: Band
    """Darcy friction factor at `reynolds` [-]."""
    flow_m3_s: float
    """Flow it holds at [m³/s]."""
    reynolds: float
    """Reynolds number there [-]."""
    bore_m: float
    """As-new bore it holds for [m]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Place:
    """Where a friction factor holds."""

    flow_m3_s: float
    """Flow [m³/s]."""
    reynolds: float
    """Reynolds number [-]."""
    bore_m: float
    """As-new bore [m]."""


def survey_wall(ln_friction: float, standard: float, place: Place, correlation_standard: float) -> SurveyWall:
    """Say what a friction factor and its uncertainty mean, by the rules that hold for one reach.

    Parameters
    ----------
    ln_friction, standard : float
        ln f and its standard uncertainty, correlation left out [-].
    place : Place
        Where it holds.
    correlation_standard : float
        Standard uncertainty of the correlation's level [-].

    Returns
    -------
    SurveyWall
    """
    wide = float(np.hypot(standard, correlation_standard))
    ends = {u: (ln_friction - NORMAL_95 * u, ln_friction + NORMAL_95 * u) for u in (standard, wide)}
    state = _state(ln_friction, ends[standard], ends[wide], place)
    return SurveyWall(
        state=state,
        roughness_m=_roughness(state, ln_friction, (standard, wide), place),
        hazen_williams_c=Band(
            best=_c(ln_friction, place),
            measurement=(_c(ends[standard][1], place), _c(ends[standard][0], place)),
            with_correlation=(_c(ends[wide][1], place), _c(ends[wide][0], place)),
        ),
        friction_factor=Band(
            best=float(np.exp(ln_friction)),
            measurement=(float(np.exp(ends[standard][0])), float(np.exp(ends[standard][1]))),
            with_correlation=(float(np.exp(ends[wide][0])), float(np.exp(ends[wide][1]))),
        ),
        flow_m3_s=place.flow_m3_s,
        reynolds=place.reynolds,
        bore_m=place.bore_m,
    )


def _state(best: float, measurement: Span, with_correlation: Span, place: Place) -> State:
    """Decide the state as `verdict.judge` does."""
    at_smooth = float(np.log(smooth(place.reynolds)))
    if (
        measurement[1] < at_smooth + np.log(SMOOTHEST_SHARE)
        or _roughness_at(best, place) > ROUGHEST_WALL * place.bore_m
    ):
        return "no estimate"
    return "upper limit" if with_correlation[0] <= at_smooth else "measured"


def _roughness(state: State, best: float, standards: tuple[float, float], place: Place) -> Band:
    """Turn ln f into roughness, by state."""
    if state == "no estimate":
        return NOTHING
    spans = []
    for standard in standards:
        low, high = (_roughness_at(best + sign * NORMAL_95 * standard, place) for sign in (-1.0, 1.0))
        spans.append((0.0, _upper_limit(best, standard, place)) if state == "upper limit" else (low, high))
    return Band(
        best=None if state == "upper limit" else _roughness_at(best, place),
        measurement=spans[0],
        with_correlation=spans[1],
    )


def _upper_limit(best: float, standard: float, place: Place) -> float:
    """Return the 95 % upper limit of roughness [m], as `estimate` gives it for one reach."""
    from scipy.special import ndtr, ndtri

    above = float(ndtr((best - float(np.log(smooth(place.reynolds)))) / max(standard, 1e-12)))
    return _roughness_at(best - standard * float(ndtri(ONE_SIDED_95 * max(above, 1e-12))), place)


def _roughness_at(ln_friction: float, place: Place) -> float:
    """Return the roughness that ln f means [m], zero when smoother than smooth."""
    return max(float(relative_roughness(np.exp(ln_friction), place.reynolds)), 0.0) * place.bore_m


def _c(ln_friction: float, place: Place) -> float:
    """Return the Hazen–Williams C that ln f means [-]."""
    return float(c_from_friction_factor(np.exp(ln_friction), place.flow_m3_s, place.bore_m))
