"""From the joint fit to what the growth laws need, and from their draws back to the duty."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from fieldfit.decisions.duty import Duty
from fieldfit.decisions.forecast import Carried
from fieldfit.decisions.growth import Growth, History
from fieldfit.decisions.growth_prior import Belief, as_new, open_rate, published_rate
from fieldfit.decisions.visits import Stage, Visit, years_between
from fieldfit.field.section import Section
from fieldfit.hydraulics.friction import colebrook_white, relative_roughness
from fieldfit.hydraulics.materials import material
from fieldfit.inference.campaigns import JointFit
from fieldfit.inference.friction_curve import ROUGHEST

Array = NDArray[np.float64]

TESTED_NEW_YEARS = 1.0
"""Years after laying within which a test says more of the new wall than a table."""
CLEANED_SPREAD = 1.2
"""Standard deviation of ln roughness that a cleaning leaves [-]."""
SEED = 19390301


def new_roughness(name: str | None) -> float:
    """Return the roughness of a deposit that lies as smooth as new pipe [m]."""
    return material(name).roughness_m[1] if name else as_new(None, False).median


def duty_of(section: Section, fit: JointFit, visit: Visit) -> Duty:
    """Return the flow that a forecast is for: the user's, or the one at which the tests know the wall best."""
    reference, readings = fit.references[0], visit.readings
    density = float(section.liquid.density_kg_m3(np.array([reference.temperature_degc]))[0])
    return Duty(
        flow_m3_s=section.duty_flow_m3_s or reference.flow_m3_s,
        given=section.duty_flow_m3_s is not None,
        temperature_degc=reference.temperature_degc,
        viscosity_m2_s=reference.viscosity_m2_s,
        density_kg_m3=density,
        bore_m=readings.bore.value,
        length_m=readings.length.value,
        fitting_k=readings.fitting_k.value,
        head_m=section.outlook.available_head_m,
    )


def history_of(
    section: Section, fit: JointFit, visits: Sequence[Visit], stages: tuple[Stage, ...]
) -> tuple[History, bool]:
    """Return the campaigns in their stages with what is believed beforehand, and whether the rate is a published one.

    Two campaigns in one stage let the campaigns decide the rate; else a publication must.
    """
    stage = np.array([max(k for k, one in enumerate(stages) if one.first <= n) for n in range(len(visits))])
    years = [years_between(stages[k].start, visit.date) for k, visit in zip(stage, visits, strict=True)]
    decided = bool(np.any(np.bincount(stage) > 1))
    bores = np.array([visit.readings.bore.value for visit in visits])
    reynolds = np.array([reference.reynolds for reference in fit.references])
    walls = np.maximum(relative_roughness(np.exp(fit.ln_friction), reynolds), 1e-6) * bores
    starts = tuple(_start(one, number, visits, walls) for number, one in enumerate(stages))
    name = stages[-1].material
    return History(
        years=np.array(years),
        stage=stage,
        ln_friction=fit.ln_friction,
        covariance=fit.walls,
        reynolds=reynolds,
        bore_m=bores,
        starts=starts,
        rate=open_rate(name) if decided else published_rate(section.outlook, name),
        correlation_standard=max(section.correlation.standard, 1e-6),
    ), not decided


def _start(stage: Stage, number: int, visits: Sequence[Visit], walls: Array) -> Belief:
    """Return what is believed of the roughness at the start of a stage."""
    if stage.event == "laid":
        tested_new = years_between(stage.start, visits[stage.first].date) <= TESTED_NEW_YEARS
        return as_new(stage.material, tested_new)
    if stage.event == "lined" and stage.material is not None:
        return as_new(stage.material, True)
    if stage.event == "first test" or number == 0:
        return Belief(
            median=max(float(walls[stage.first]), 1e-5),
            ln_standard=2.0,
            source="its first test, for the day of laying is not known",
        )
    before = float(walls[stage.first - 1])
    middle = math.sqrt(max(before, 1e-5) * new_roughness(stage.material))
    return Belief(
        median=middle, ln_standard=CLEANED_SPREAD, source="a wide guess between new and the wall before the cleaning"
    )


def carry(fit: JointFit, history: History, growth: Growth, duty: Duty) -> tuple[Carried, ...]:
    """Give every draw the shape of the correlation, the bore and the length that go with its walls.

    Given the walls, the other errors of the joint fit are normal with a mean that follows the walls; so a bore that
    is truly wide, which makes every wall look smooth, makes the head loss at the duty no smaller.
    """
    count = len(fit.tests)
    rows = np.array([fit.shape_at(duty.reynolds), fit.ln_length[-1] - 5.0 * fit.ln_bore[-1]])
    to_walls = np.linalg.solve(fit.walls, fit.covariance[:count, count:] @ rows.T).T
    left = rows @ fit.covariance[count:, count:] @ rows.T - to_walls @ fit.covariance[:count, count:] @ rows.T
    values, vectors = np.linalg.eigh((left + left.T) / 2.0)
    root = vectors * np.sqrt(np.maximum(values, 0.0))
    rng = np.random.default_rng(SEED)
    found = []
    for draws in growth.draws:
        relative = np.minimum(draws.roughness_m(history.years, history.stage) / history.bore_m, ROUGHEST)
        apart = np.log(colebrook_white(history.reynolds, relative)) + draws.level[:, None] - history.ln_friction
        shape, geometry = (rows @ fit.u)[:, None] + to_walls @ apart.T + root @ rng.standard_normal((2, len(apart)))
        to_c = draws.level + shape
        found.append(Carried(draws=draws, to_c=to_c, to_loss=to_c + geometry))
    return tuple(found)
