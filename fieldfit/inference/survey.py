"""A gradient survey: what all taps together say of the walls, of local losses, and of what could have been seen."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.section import Correlation
from fieldfit.field.survey_readings import SurveyReadings
from fieldfit.inference.fit import NORMAL_95
from fieldfit.inference.grade import grade_line
from fieldfit.inference.survey_explanations import Explanation, bad_wall, explanations, probabilities
from fieldfit.inference.survey_finding import Likely, SameWall, SideFlow, Survey, SurveyReach
from fieldfit.inference.survey_fit import (
    SurveyFit,
    common_walls,
    fit_survey,
    free_walls,
    reach_friction,
    widened_noise,
)
from fieldfit.inference.survey_model import PER_K, SurveyModel, survey_model
from fieldfit.inference.survey_suspect import suspect
from fieldfit.inference.survey_wall import Place, SurveyWall, survey_wall
from fieldfit.inference.wall import Band

Array = NDArray[np.float64]

SEEN = 3.29
"""Standard uncertainties a local loss must reach to be seen 19 times in 20 with one false alarm in 20, one-sided."""
DISAGREE = 3.0
"""Reduced χ² from which a single tap that is off is looked for."""
CLOSE = 10.0
"""Ratio of probabilities within which two explanations cannot be told apart."""
LIKELY = 0.03
"""Probability under which an explanation is not listed."""


def survey(readings: SurveyReadings, limit: Correlation) -> Survey:
    """Find out what all taps together say.

    Parameters
    ----------
    readings : SurveyReadings
        What all taps say.
    limit : Correlation
        How far friction correlations can be trusted.

    Returns
    -------
    Survey
    """
    model = survey_model(readings, limit)
    noise, reduced = widened_noise(model)
    free = fit_survey(model, free_walls(model), noise)
    found = explanations(model, noise)
    one, chance = found[0].fit, probabilities(found)
    best = found[int(np.argmax(chance))]
    likely = tuple(_likely(found[i], float(chance[i]), limit) for i in np.argsort(-chance) if chance[i] >= LIKELY)
    alike = tuple(
        i
        for i in range(1, len(likely))
        if likely[i].probability * CLOSE > likely[0].probability and not _holds(likely[i], likely[0])
    )
    smallest = _smallest(one)
    rival = _rival(found, chance, alike)
    return Survey(
        readings=readings,
        reaches=tuple(_reach(free, best.fit, (reach, smallest, rival), limit) for reach in range(len(smallest))),
        pooled=tuple(_wall(one, one.layout.walls.index(wall), limit) for wall in range(len(one.ln_friction))),
        same_wall=_same_wall(free, one),
        likely=likely,
        alike=alike,
        apart=_halfway(best, likely, alike),
        side_flow=_side_flow(one, free),
        reduced_chi_square=reduced,
        pulls=tuple(sorted(zip(model.errors.names, best.fit.u.tolist(), strict=False), key=lambda pull: -abs(pull[1]))),
        suspect=suspect(model) if reduced is not None and reduced > DISAGREE else None,
        grade=grade_line(best.fit, one),
    )


def _holds(other: Likely, first: Likely) -> bool:
    """Return whether an explanation is the first one with a second local loss added: a refinement, not a rival."""
    return first.cause == "local loss" and other.cause == "two local losses" and first.reaches[0] in other.reaches


def _place(model: SurveyModel, reach: int) -> Place:
    """Return the reference of one reach."""
    pipe = model.pipe
    flow = pipe.reference_reynolds[reach] * np.pi * pipe.bore_m[reach] * pipe.reference_viscosity_m2_s / 4.0
    return Place(
        flow_m3_s=float(flow), reynolds=float(pipe.reference_reynolds[reach]), bore_m=float(pipe.bore_m[reach])
    )


def _wall(fit: SurveyFit, reach: int, limit: Correlation) -> SurveyWall:
    """Return the wall of one reach under a fit."""
    ln_friction, standard = fit.of_reach(reach)
    if "uneven wall" in fit.model.errors.names:
        ln_friction, standard = _uneven(fit, reach)
    return survey_wall(ln_friction, standard, _place(fit.model, reach), limit.standard)


def _uneven(fit: SurveyFit, reach: int) -> tuple[float, float]:
    """Return ln f of one reach of an uneven wall, its own deviation counted in, with its standard uncertainty."""
    errors, walls = fit.model.errors, fit.layout.walls
    offset = len(fit.information) - len(errors.names)
    own = offset + errors.names.index("uneven wall") + reach
    size = float(np.max(errors.ln_friction[own - offset]))
    value, slope = reach_friction(fit.model, fit.layout, fit.ln_friction)
    direction = np.zeros(len(fit.information))
    direction[walls[reach]], direction[own] = slope[reach], size
    variance = float(direction @ np.linalg.solve(fit.information, direction))
    return float(value[reach] + size * fit.u[own - offset]), float(np.sqrt(variance))


def _rival(found: list[Explanation], chance: Array, alike: tuple[int, ...]) -> Explanation | None:
    """Return the likeliest explanation that cannot be told from the first and blames the same place."""
    order = np.argsort(-chance)
    first = found[int(order[0])]
    for index in alike:
        other = found[int(order[index])]
        if other.cause != first.cause and other.reaches == first.reaches:
            return other
    return None


def _reach(
    free: SurveyFit, best: SurveyFit, known: tuple[int, Array, Explanation | None], limit: Correlation
) -> SurveyReach:
    """Return what the survey says of one reach."""
    reach, smallest, rival = known
    taps = free.model.readings.section.taps
    alone = free.layout.walls.count(free.layout.walls[reach]) == 1
    k = float(smallest[reach])
    return SurveyReach(
        upper=taps[reach].column,
        lower=taps[reach + 1].column,
        wall=_wall(free, reach, limit) if alone else None,
        explained=_wall(best, reach, limit),
        rival=_wall(rival.fit, reach, limit) if rival is not None and reach in rival.reaches else None,
        smallest_k=k if np.isfinite(k) else None,
        smallest_m=k * _velocity_head(free.model, reach) if np.isfinite(k) else None,
    )


def _velocity_head(model: SurveyModel, reach: int) -> float:
    """Return V²/2g in one reach at the largest flow [m]."""
    pipe = model.pipe
    largest = int(np.argmax(model.readings.flow_m3_s))
    share = pipe.middle_reynolds[reach, largest] * model.readings.viscosity_m2_s[largest]
    return float(PER_K * (share * np.pi * pipe.bore_m[reach] / 4.0) ** 2 / pipe.bore_m[reach] ** 4)


def _smallest(one: SurveyFit) -> Array:
    """Return the smallest local loss in each reach that would have been seen, (R,) [-]; infinite where none."""
    model, walls = one.model, one.layout.walls
    reach_walls, _ = reach_friction(model, one.layout, one.ln_friction)
    predicted = model.predict(reach_walls, one.u, np.zeros(len(walls)), one.branch_m3_s)
    whiten = np.linalg.inv(np.linalg.cholesky(one.noise_m2))
    belongs = np.array(walls) == np.arange(len(one.ln_friction))[:, None]
    rest = [belongs.astype(np.float64) @ predicted.by_wall]
    if model.pipe.unknown_branch is not None:
        rest.append(predicted.by_branch[None, :])
    slopes = np.concatenate([*rest, predicted.by_error]) @ whiten.T
    found = np.full(len(walls), np.inf)
    for reach in range(len(walls)):
        if walls.count(walls[reach]) == 1:
            continue
        own = whiten @ predicted.by_local[reach]
        left = own @ own - (slopes @ own) @ np.linalg.solve(one.information, slopes @ own)
        if left > 1e-9 * (own @ own):
            found[reach] = SEEN / np.sqrt(left)
    return found


def _same_wall(free: SurveyFit, one: SurveyFit) -> SameWall | None:
    """Return the likelihood-ratio test of one wall for each material against one for each reach."""
    from scipy.special import chdtrc

    freedom = len(free.ln_friction) - len(one.ln_friction)
    if freedom < 1:
        return None
    rise = max(one.chi_square - free.chi_square, 0.0)
    return SameWall(chi_square=rise, degrees_of_freedom=freedom, probability=float(chdtrc(freedom, rise)))


def _likely(one: Explanation, probability: float, limit: Correlation) -> Likely:
    """Return an explanation as it is reported."""
    fit = one.fit
    if one.cause == "bad reach":
        reach, rest = one.reaches[0], _neighbour(one)
        wall = _wall(fit, reach, limit)
        ratio = float(np.exp(fit.of_reach(reach)[0] - fit.of_reach(rest)[0]))
        return Likely(cause=one.cause, reaches=one.reaches, probability=probability, wall=wall, friction_ratio=ratio)
    walls = len(fit.ln_friction)
    standard = np.sqrt(np.diag(fit.covariance))[walls : walls + len(fit.local_k)]
    bands = []
    for k, spread in zip(fit.local_k.tolist(), standard.tolist(), strict=True):
        ends = (max(k - NORMAL_95 * spread, 0.0), max(k + NORMAL_95 * spread, 0.0))
        bands.append(Band(best=max(k, 0.0), measurement=ends, with_correlation=ends))
    heads = [_velocity_head(fit.model, reach) for reach in one.reaches[: len(bands)]]
    return Likely(
        cause=one.cause,
        reaches=one.reaches,
        probability=probability,
        local_k=tuple(bands),
        head_m=tuple(max(float(k), 0.0) * head for k, head in zip(fit.local_k, heads, strict=True)),
    )


def _neighbour(one: Explanation) -> int:
    """Return a reach of the same material that a bad reach is held against."""
    group = common_walls(one.fit.model).walls
    own = bad_wall(one.fit.layout)
    candidates = range(len(group))
    return next(r for r in candidates if group[r] == group[one.reaches[0]] and one.fit.layout.walls[r] != own)


def _halfway(best: Explanation, likely: tuple[Likely, ...], alike: tuple[int, ...]) -> float | None:
    """Return how far apart a tap in the middle would part a local loss from a bad reach, in standard uncertainties.

    A local loss lies on one side of the new tap or the other, a bad reach evenly on both: the new reading would differ
    by half of what is lost too much.
    """
    rivals = [likely[0], *(likely[index] for index in alike)]
    if len(rivals) < 2 or {rivals[0].cause, rivals[1].cause} != {"local loss", "bad reach"}:
        return None
    head = next(one.head_m[0] for one in rivals if one.cause == "local loss")
    model, fit = best.fit.model, best.fit
    reach, largest = best.reaches[0], int(np.argmax(model.readings.flow_m3_s))
    rows = (model.readings.plateau == largest) & (model.readings.upper == reach)
    variance = np.diag(fit.noise_m2) + np.sum(model.errors.head_m**2, axis=0)
    return float(head / 2.0 / np.sqrt(variance[rows][0])) if np.any(rows) else None


def _side_flow(one: SurveyFit, free: SurveyFit) -> SideFlow | None:
    """Return the side flow that was inferred."""
    model = one.model
    if model.pipe.unknown_branch is None:
        return None
    spans = []
    for fit in (one, free):
        standard = float(np.sqrt(fit.covariance[-1, -1]))
        spans.append((fit.branch_m3_s - NORMAL_95 * standard, fit.branch_m3_s + NORMAL_95 * standard))
    name = model.readings.section.branches[model.pipe.unknown_branch].name
    return SideFlow(name=name, flow_m3_s=one.branch_m3_s, interval_m3_s=spans[0], free_interval_m3_s=spans[1])
