"""All reaches of a survey fitted at once: walls, local losses, a side flow, and every shared error."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from fieldfit.hydraulics.friction import colebrook_white, colebrook_white_with_slopes, relative_roughness, smooth
from fieldfit.inference.fit import ALL_SCATTER, ENOUGH, WIDENINGS
from fieldfit.inference.friction_curve import ROUGHEST, highest_ln_friction
from fieldfit.inference.survey_model import SurveyModel, first_guess

Array = NDArray[np.float64]

STEPS = 40
TOLERANCE = 1e-4
"""Step under which the search has arrived [standard deviations]."""
SMOOTHEST = 4.0
"""How far under the smooth pipe's ln f a wall is followed where a reach seems to gain head [-]."""
LARGEST_STEP = 0.5
"""Largest change of ln f in one step [-]."""


class Layout(NamedTuple):
    """What is left free: which reaches have one wall in common, and which hide a local loss."""

    walls: tuple[int, ...]
    """Number of the wall of each reach, from 0 on without gaps."""
    local: tuple[int, ...] = ()
    """Reaches with a local loss of unknown size."""


@dataclass(frozen=True, slots=True, kw_only=True)
class SurveyFit:
    """The best walls, local losses and shared errors of a survey under one layout; P free parameters, M errors."""

    model: SurveyModel
    """The equations fitted."""
    layout: Layout
    """What was left free."""
    noise_m2: Array
    """(J, J) covariance of the noise used [m²]."""
    ln_friction: Array
    """(W,) ln f of each wall, at the reference of its first reach [-]."""
    local_k: Array
    """(L,) loss coefficient of each local loss [-]."""
    branch_m3_s: float
    """The unknown side flow [m³/s]; 0 when there is none."""
    u: Array
    """(M,) shared errors in standard deviations [-]."""
    chi_square: float
    """Misfit of readings and shared errors together [-]."""
    information: Array
    """(P + M, P + M) second derivatives of half the misfit: walls, local losses, side flow, shared errors."""

    @property
    def covariance(self) -> Array:
        """(P, P) covariance of walls, local losses and side flow, shared errors counted in."""
        count = len(self.information) - len(self.u)
        return np.asarray(np.linalg.inv(self.information)[:count, :count])

    def of_reach(self, reach: int) -> tuple[float, float]:
        """Return ln f of one reach at its reference and its standard uncertainty [-]."""
        value, slope = reach_friction(self.model, self.layout, self.ln_friction)
        wall = self.layout.walls[reach]
        return float(value[reach]), float(slope[reach] * np.sqrt(self.covariance[wall, wall]))


def fit_survey(model: SurveyModel, layout: Layout, noise_m2: Array, start: SurveyFit | None = None) -> SurveyFit:
    """Fit a survey by least squares, readings weighted with the noise they share at the taps.

    Every shared error adds one residual, as for one reach. A wall that several reaches have in common is one
    roughness: its friction factor in each reach follows from that reach's bore and flow.

    Parameters
    ----------
    model : SurveyModel
        The equations.
    layout : Layout
        What is left free.
    noise_m2 : (J, J) array
        Covariance of the readings' noise [m²].
    start : SurveyFit, optional
        A fit of the same model to start from.

    Returns
    -------
    SurveyFit
    """
    whiten = np.linalg.inv(np.linalg.cholesky(noise_m2))
    at = _start(model, layout, start)
    for _ in range(STEPS):
        information, downhill, _ = _linear(model, layout, whiten, at)
        step = np.linalg.solve(information, downhill)
        walls = len(at.ln_friction)
        step = step * min(1.0, LARGEST_STEP / max(float(np.max(np.abs(step[:walls]))), 1e-12))
        at = _moved(model, layout, at, np.asarray(step))
        if np.max(np.abs(step) * np.sqrt(np.diag(information))) < TOLERANCE:
            break
    information, _, chi_square = _linear(model, layout, whiten, at)
    return SurveyFit(
        model=model,
        layout=layout,
        noise_m2=noise_m2,
        **at._asdict(),
        chi_square=chi_square,
        information=information,
    )


def free_walls(model: SurveyModel) -> Layout:
    """Return the layout in which every reach that can be told from its neighbours has a wall of its own."""
    seen = {int(tap) for tap in (*model.readings.upper, *model.readings.lower)}
    numbers = np.cumsum([0, *(int(tap in seen) for tap in range(1, len(model.pipe.bore_m)))])
    return Layout(tuple(int(number) for number in numbers))


def common_walls(model: SurveyModel) -> Layout:
    """Return the layout with one wall for all reaches of one material."""
    return Layout(tuple(int(group) for group in model.pipe.group))


def widened_noise(model: SurveyModel) -> tuple[Array, float | None]:
    """Return the noise, widened until a fit with free walls is content, and that fit's reduced χ².

    As for one reach, the widening comes down from above; see `fit.fit_reach`.
    """
    noise, layout = model.readings.noise_m2, free_walls(model)
    freedom = len(noise) - len(set(layout.walls)) - (model.pipe.unknown_branch is not None)
    if freedom <= 0:
        return noise, None
    reduced: float = fit_survey(model, layout, noise).chi_square / freedom
    if reduced <= 1.0:
        return noise, reduced
    loose = fit_survey(model, layout, ALL_SCATTER**2 * noise)
    of_readings = float(loose.chi_square - loose.u @ loose.u)
    scale = ALL_SCATTER * math.sqrt(max(of_readings / freedom, 1e-30))
    for _ in range(WIDENINGS):
        at_scale = fit_survey(model, layout, scale**2 * noise, loose).chi_square / freedom
        if at_scale > ENOUGH or scale <= 1.0:
            break
        scale = max(scale * math.sqrt(at_scale), 1.0)
    scale = max(scale, 1.0)
    return np.asarray(scale**2 * noise), scale**2


def reach_friction(model: SurveyModel, layout: Layout, ln_friction: Array) -> tuple[Array, Array]:
    """Return ln f of each reach at its reference, and its slope with the ln f of its wall, (R,) each [-]."""
    pipe, walls = model.pipe, np.array(layout.walls)
    first = np.array([layout.walls.index(wall) for wall in layout.walls])
    value = ln_friction[walls]
    same = (pipe.bore_m == pipe.bore_m[first]) & (pipe.reference_reynolds == pipe.reference_reynolds[first])
    if np.all(same):
        return value, np.ones(len(walls))
    at_smooth = np.log(smooth(pipe.reference_reynolds))
    rough = value > at_smooth[first]
    wall = relative_roughness(np.exp(np.maximum(value, at_smooth[first])), pipe.reference_reynolds[first])
    wall = np.clip(wall, 0.0, ROUGHEST)
    here = wall * pipe.bore_m[first] / pipe.bore_m
    f, _, by_here = colebrook_white_with_slopes(pipe.reference_reynolds, here)
    f_first, _, by_first = colebrook_white_with_slopes(pipe.reference_reynolds[first], wall)
    slope = (by_here / f) / (by_first / f_first) * pipe.bore_m[first] / pipe.bore_m
    found = np.where(rough, np.log(f), value - at_smooth[first] + at_smooth)
    return np.where(same, value, found), np.where(same | ~rough, 1.0, slope)


def wall_of_roughness(model: SurveyModel, reach: int, roughness_m: Array) -> Array:
    """Return ln f of one reach at its reference for walls of a given roughness [-]."""
    pipe = model.pipe
    return np.log(colebrook_white(pipe.reference_reynolds[reach], roughness_m / pipe.bore_m[reach]))


class _Point(NamedTuple):
    """One point of the search."""

    ln_friction: Array
    local_k: Array
    branch_m3_s: float
    u: Array


def _start(model: SurveyModel, layout: Layout, start: SurveyFit | None) -> _Point:
    """Return where the search begins: at another fit, or at one wall and no error."""
    firsts = [layout.walls.index(wall) for wall in range(max(layout.walls) + 1)]
    if start is None:
        guess = np.minimum(first_guess(model), highest_ln_friction(model.pipe.reference_reynolds))
        u = np.zeros(len(model.errors.names))
        return _Point(guess[firsts], np.zeros(len(layout.local)), 0.0, u)
    value, _ = reach_friction(start.model, start.layout, start.ln_friction)
    u = np.zeros(len(model.errors.names))
    u[: len(start.u)] = start.u
    return _Point(value[firsts], np.zeros(len(layout.local)), start.branch_m3_s, u)


def _linear(model: SurveyModel, layout: Layout, whiten: Array, at: _Point) -> tuple[Array, Array, float]:
    """Return second derivatives (P + M, P + M) and the way down (P + M,) of half the misfit at a point, and the misfit."""
    value, slope = reach_friction(model, layout, at.ln_friction)
    local = np.zeros(len(model.pipe.bore_m))
    local[list(layout.local)] = at.local_k
    found = model.predict(value, at.u, local, at.branch_m3_s)
    belongs = np.array(layout.walls) == np.arange(len(at.ln_friction))[:, None]
    rows = [(belongs * slope) @ found.by_wall, found.by_local[list(layout.local)]]
    if model.pipe.unknown_branch is not None:
        rows.append(found.by_branch[None, :])
    by_head = np.concatenate([*rows, found.by_error])
    free = len(by_head) - len(at.u)
    # Plain loops: for matrices of this size threads cost more than they bring, on a busy machine ten times more.
    slopes, misfit = np.einsum("ij,kj->ik", by_head, whiten), whiten @ (model.readings.head_m - found.head_m)
    information, downhill = np.einsum("ij,kj->ik", slopes, slopes), slopes @ misfit
    # Every shared error's own residual is its value in standard deviations.
    own = np.arange(free, len(by_head))
    information[own, own] += 1.0
    downhill[free:] -= at.u
    return information, downhill, float(misfit @ misfit + at.u @ at.u)


def _moved(model: SurveyModel, layout: Layout, at: _Point, step: Array) -> _Point:
    """Return the point after a step, walls kept where the curve is followed and side flow under the metered one."""
    walls, local = len(at.ln_friction), len(layout.local)
    firsts = [layout.walls.index(wall) for wall in range(walls)]
    highest = highest_ln_friction(model.pipe.reference_reynolds[firsts])
    branch, rest = at.branch_m3_s, walls + local
    if model.pipe.unknown_branch is not None:
        largest = 0.95 * float(np.min(model.readings.flow_m3_s))
        branch, rest = float(np.clip(branch + step[rest], -largest, largest)), rest + 1
    lowest = np.log(smooth(model.pipe.reference_reynolds[firsts])) - SMOOTHEST
    return _Point(
        np.clip(at.ln_friction + step[:walls], lowest, highest),
        at.local_k + step[walls : walls + local],
        branch,
        at.u + step[rest:],
    )
