"""What may lie behind the readings of a survey, weighed by marginal likelihood with stated priors.

A local loss is a step in the grade line, a bad reach a steeper slope: with a tap on either side and none between, the
two look nearly alike, and the weights say so.
"""

from __future__ import annotations

import itertools
from dataclasses import dataclass, replace
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from fieldfit.hydraulics.friction import relative_roughness
from fieldfit.inference.survey_errors import with_more
from fieldfit.inference.survey_fit import Layout, SurveyFit, common_walls, fit_survey, reach_friction, wall_of_roughness
from fieldfit.inference.survey_model import SurveyModel

Array = NDArray[np.float64]
Cause = Literal["one wall", "uneven wall", "local loss", "two local losses", "bad reach"]

PRIOR: dict[Cause, float] = {
    "one wall": 0.5,
    "uneven wall": 0.15,
    "local loss": 0.15,
    "two local losses": 0.05,
    "bad reach": 0.15,
}
"""Probability of each cause before any reading; within one it is shared evenly by the places it may be at."""
SMALLEST_K, LARGEST_K = 0.2, 2000.0
"""Local losses thought possible, evenly by their logarithm: a partly closed valve to one nearly shut."""
SMOOTHEST, ROUGHEST = 1e-6, 0.05
"""Relative roughness thought possible in a bad reach, evenly by its logarithm."""
UNEVEN = 0.08
"""Standard deviation of ln f from reach to reach of an uneven wall: roughness differing by a third or so."""
LONGEST_STRETCH = 6
"""Reaches a bad stretch may run over."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Explanation:
    """One cause at one place, fitted."""

    cause: Cause
    """What it is."""
    reaches: tuple[int, ...]
    """Reaches it is in; all for a wall."""
    fit: SurveyFit
    """Its best fit."""
    log_evidence: float
    """Logarithm of its marginal likelihood, up to a constant that all share."""
    prior: float
    """Its probability before any reading."""


def explanations(model: SurveyModel, noise_m2: Array) -> list[Explanation]:
    """Fit every explanation and weigh it.

    The marginal likelihood is Laplace's in walls and shared errors; over the size of a local loss and the roughness
    of a bad reach, whose priors are not flat, it is integrated numerically.

    Parameters
    ----------
    model : SurveyModel
        The equations.
    noise_m2 : (J, J) array
        Covariance of the readings' noise [m²].

    Returns
    -------
    list of Explanation
        One wall first, then the others as they are tried.
    """
    base = common_walls(model)
    one = fit_survey(model, base, noise_m2)
    everywhere = tuple(range(len(base.walls)))
    uneven = fit_survey(_with_uneven_walls(model), base, noise_m2, one)
    found = [
        _weighed("one wall", everywhere, one, PRIOR["one wall"]),
        _weighed("uneven wall", everywhere, uneven, PRIOR["uneven wall"]),
    ]
    gaps = _gaps(model, base)
    places = [gap[0] for gap in gaps]
    single = [
        _weighed("local loss", gap, fit_survey(model, Layout(base.walls, gap[:1]), noise_m2, one), 1.0) for gap in gaps
    ]
    found += _shared_prior(single, "local loss")
    if single:
        top = max(single, key=lambda one_of: one_of.log_evidence).reaches[0]
        pairs = [(min(top, reach), max(top, reach)) for reach in places if reach != top]
        double = [
            _weighed("two local losses", pair, fit_survey(model, Layout(base.walls, pair), noise_m2, one), 1.0)
            for pair in pairs
        ]
        # Only pairs with the best single place are tried; the others share the prior without being looked at.
        tried = len(pairs) / max(len(places) * (len(places) - 1) / 2.0, 1.0)
        found += [replace(each, prior=each.prior * tried) for each in _shared_prior(double, "two local losses")]
    stretches = [
        _weighed("bad reach", stretch, fit_survey(model, _apart(base, stretch), noise_m2, one), 1.0)
        for stretch in _stretches(model, base)
    ]
    return found + _shared_prior(stretches, "bad reach")


def probabilities(found: list[Explanation]) -> Array:
    """Return the probability of each explanation given the readings, (N,), adding up to one."""
    logs = np.array([one.log_evidence + np.log(one.prior) for one in found])
    weight = np.exp(logs - np.max(logs))
    return np.asarray(weight / np.sum(weight))


def bad_wall(layout: Layout) -> int:
    """Return the number of the wall that a bad reach adds to a layout: the last one."""
    return max(layout.walls)


def _shared_prior(found: list[Explanation], cause: Cause) -> list[Explanation]:
    """Return explanations with the cause's prior shared evenly."""
    return [replace(one, prior=PRIOR[cause] / len(found)) for one in found]


def _gaps(model: SurveyModel, base: Layout) -> list[tuple[int, ...]]:
    """Return where a local loss may be: what lies between taps that gave readings, where more pipe of its kind does."""
    seen = _seen(model)
    gaps = [tuple(range(upper, lower)) for upper, lower in itertools.pairwise(seen)]
    alike = [gap for gap in gaps if len({base.walls[reach] for reach in gap}) == 1]
    return [gap for gap in alike if base.walls.count(base.walls[gap[0]]) > len(gap)]


def _seen(model: SurveyModel) -> list[int]:
    """Return the taps that gave readings, in order."""
    return sorted({int(tap) for tap in (*model.readings.upper, *model.readings.lower)})


def _stretches(model: SurveyModel, base: Layout) -> list[tuple[int, ...]]:
    """Return the stretches of one material that may be bad: shorter than the rest of it."""
    length, walls, ends = model.pipe.length_m, base.walls, set(_seen(model))
    found = []
    for first, stop in itertools.combinations(range(len(walls) + 1), 2):
        stretch = tuple(range(first, stop))
        whole = [reach for reach in range(len(walls)) if walls[reach] == walls[first]]
        rest = [reach for reach in whole if reach not in stretch]
        alike = all(walls[reach] == walls[first] for reach in stretch)
        seen = {first, stop} <= ends
        if alike and seen and rest and len(stretch) <= LONGEST_STRETCH and _shorter(length, stretch, rest):
            found.append(stretch)
    return found


def _shorter(length: Array, stretch: tuple[int, ...], rest: list[int]) -> bool:
    """Return whether a stretch is shorter than the rest; of two equal halves the first counts."""
    own, other = float(np.sum(length[list(stretch)])), float(np.sum(length[rest]))
    return own < other * (1.0 - 1e-9) or (own < other * (1.0 + 1e-9) and stretch[0] < rest[0])


def _apart(base: Layout, stretch: tuple[int, ...]) -> Layout:
    """Return the layout in which a stretch has a wall of its own."""
    own = max(base.walls) + 1
    return Layout(tuple(own if reach in stretch else wall for reach, wall in enumerate(base.walls)))


def _with_uneven_walls(model: SurveyModel) -> SurveyModel:
    """Return the model in which every reach may differ a little from the common wall."""
    reaches = len(model.pipe.bore_m)
    plateaus = model.errors.ln_friction.shape[1] // reaches
    apart = np.asarray(UNEVEN * np.kron(np.eye(reaches), np.ones(plateaus)), dtype=np.float64)
    return replace(model, errors=with_more(model.errors, "uneven wall", ln_friction=apart))


def _weighed(cause: Cause, reaches: tuple[int, ...], fit: SurveyFit, prior: float) -> Explanation:
    """Return an explanation with its evidence."""
    size = _size_places(cause, fit)
    rest = [index for index in range(len(fit.information)) if index not in size]
    inner = fit.information[np.ix_(rest, rest)]
    free = len(rest) - len(fit.u)
    log = -0.5 * fit.chi_square - 0.5 * float(np.linalg.slogdet(inner)[1]) + 0.5 * free * np.log(2.0 * np.pi)
    if size:
        cross = fit.information[np.ix_(size, rest)]
        schur = fit.information[np.ix_(size, size)] - cross @ np.linalg.solve(inner, cross.T)
        log += _over_size(cause, fit, reaches, schur)
    return Explanation(cause=cause, reaches=reaches, fit=fit, log_evidence=float(log), prior=prior)


def _size_places(cause: Cause, fit: SurveyFit) -> list[int]:
    """Return which parameters are the size of the fault."""
    walls = len(fit.ln_friction)
    if cause == "bad reach":
        return [bad_wall(fit.layout)]
    return list(range(walls, walls + len(fit.local_k)))


def _over_size(cause: Cause, fit: SurveyFit, reaches: tuple[int, ...], schur: Array) -> float:
    """Return the logarithm of the likelihood's mean over the prior of the fault's size, against its value at the best."""
    if cause == "bad reach":
        return _over_roughness(fit, reaches[0], float(schur[0, 0]))
    grids = [_log_grid(float(k), 1.0 / np.sqrt(schur[index, index])) for index, k in enumerate(fit.local_k)]
    steps = [np.gradient(np.log(grid)) for grid in grids]
    mesh = np.meshgrid(*grids, indexing="ij")
    weight = np.prod(np.meshgrid(*steps, indexing="ij"), axis=0)
    away = np.array([part.ravel() for part in mesh]) - fit.local_k[:, None]
    misfit = np.einsum("in,ij,jn->n", away, schur, away)
    return _log_sum(misfit, weight.ravel()) - len(grids) * float(np.log(np.log(LARGEST_K / SMALLEST_K)))


def _log_grid(centre: float, spread: float) -> Array:
    """Return sizes to integrate over: evenly by logarithm, and closely about the best."""
    near = centre + spread * np.linspace(-6.0, 6.0, 49)
    both = np.concatenate([np.geomspace(SMALLEST_K, LARGEST_K, 49), near])
    return np.unique(both[(both >= SMALLEST_K) & (both <= LARGEST_K)])


def _log_sum(misfit: Array, weight: Array) -> float:
    """Return ln Σ weight · exp(−misfit/2) without losing the small ones."""
    low = float(np.min(misfit))
    return -0.5 * low + float(np.log(np.sum(weight * np.exp(-0.5 * (misfit - low)))))


def _over_roughness(fit: SurveyFit, reach: int, precision: float) -> float:
    """Return the same for the roughness of a bad reach."""
    pipe = fit.model.pipe
    best = float(reach_friction(fit.model, fit.layout, fit.ln_friction)[0][reach])
    near = best + np.linspace(-6.0, 6.0, 49) / np.sqrt(precision)
    walls = relative_roughness(np.exp(near), pipe.reference_reynolds[reach])
    both = np.concatenate([np.geomspace(SMOOTHEST, ROUGHEST, 97), walls])
    both = np.unique(both[(both >= SMOOTHEST) & (both <= ROUGHEST)])
    at = wall_of_roughness(fit.model, reach, both * pipe.bore_m[reach])
    return _log_sum(precision * (at - best) ** 2, np.gradient(np.log(both))) - float(
        np.log(np.log(ROUGHEST / SMOOTHEST))
    )
