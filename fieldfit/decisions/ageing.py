"""How one reach has aged and will age: campaigns fitted jointly, changes, growth, forecast, cleanings."""

from __future__ import annotations

import datetime as dt
import itertools
import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

from fieldfit.decisions.ageing_history import carry, duty_of, history_of, new_roughness
from fieldfit.decisions.ageing_remarks import follows_no_law, remarks_on
from fieldfit.decisions.cleaning import Cleaning, cleaning
from fieldfit.decisions.duty import Duty
from fieldfit.decisions.forecast import AHEAD_YEARS, Crossing, Forecast, crossings, forecast, rate_over
from fieldfit.decisions.growth import Growth, History, weigh_laws
from fieldfit.decisions.growth_prior import YEAR_DAYS, Belief
from fieldfit.decisions.points import Point, points
from fieldfit.decisions.visits import Stage, Visit, stages_of, tests_of, years_between
from fieldfit.field.section import Section
from fieldfit.inference.campaigns import JointFit, fit_jointly
from fieldfit.inference.change import Change, change

Triple = tuple[float, float, float]

BETTER = 2.58
"""Standard uncertainties by which the head loss must have fallen to be called an improvement that nobody marked."""
YEARS_AHEAD = 20
"""Years that a forecast reaches beyond the last test when nothing is said."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Ageing:
    """Everything found of one reach over the years."""

    place: str
    """The reach, as its two taps."""
    visits: tuple[Visit, ...]
    """Campaigns used, by date."""
    points: tuple[Point, ...]
    """The same by the joint fit."""
    reduced_chi_square: float | None
    """Of the joint fit [-]."""
    duty: Duty
    """What the forecast is for, in the present stage."""
    stages: tuple[Stage, ...]
    """Stages of the pipe's life."""
    starts: tuple[Belief, ...]
    """Roughness at the start of each stage, beforehand [m]."""
    rate: Belief
    """Growth rate beforehand [m/year]."""
    published: bool
    """Whether the rate stands on a publication and not on the campaigns."""
    changes: tuple[Change, ...]
    """From each campaign to the next, and last from the first to the last when there are three or more."""
    growth: Growth
    """The laws."""
    rate_past_m_year: Triple | None
    """Mean growth in the present stage up to the last test: 95 % low, median, high [m/year]; None on its first day."""
    rate_ahead_m_year: Triple
    """Mean growth over the next ten years [m/year]."""
    forecast: Forecast
    """Past and future at the duty."""
    crossings: tuple[Crossing, ...]
    """Thresholds."""
    cleanings: tuple[Cleaning, ...]
    """What each cleaning brought."""
    remarks: tuple[str, ...]
    """What to know beside the answer."""


def ageing(section: Section, visits: Sequence[Visit]) -> Ageing:
    """Find out how a reach ages.

    Parameters
    ----------
    section : Section
        The section, as laid.
    visits : sequence of Visit
        Its campaigns by date, one or more with an estimate; the others are left out and named.

    Returns
    -------
    Ageing

    Raises
    ------
    ValueError
        When no campaign has an estimate.
    """
    used = tuple(visit for visit in visits if visit.wall.state != "no estimate")
    if not used:
        raise ValueError("no campaign has an estimate")
    fit = fit_jointly(tests_of(used), section.correlation, section.liquid.viscosity_standard)
    changes = _changes(fit, used, section.outlook.worse_by)
    stages = stages_of(used, section.installed, section.material, _unmarked(changes, used))
    duties = tuple(duty_of(section, fit, used[stage.first]) for stage in stages)
    history, published = history_of(section, fit, used, stages)
    history, growth = _weighed(history)
    carried = carry(fit, history, growth, duties[-1])
    last = used[-1].date
    now = years_between(stages[-1].start, last)
    until = section.outlook.until or last + dt.timedelta(days=round(YEARS_AHEAD * YEAR_DAYS))
    present = len(stages) - 1
    return Ageing(
        place=f"{used[0].readings.upstream.column} to {used[0].readings.downstream.column}",
        visits=used,
        points=points(fit, used, duties[-1]),
        reduced_chi_square=fit.reduced_chi_square,
        duty=duties[-1],
        stages=stages,
        starts=history.starts,
        rate=history.rate,
        published=published,
        changes=changes,
        growth=growth,
        rate_past_m_year=rate_over(carried, present, (0.0, now)) if now > 0.0 else None,
        rate_ahead_m_year=rate_over(carried, present, (now, now + AHEAD_YEARS)),
        forecast=forecast(carried, stages, duties, until, new_roughness(stages[-1].material)),
        crossings=crossings(carried, stages[-1], duties[-1], last, section.outlook.thresholds),
        cleanings=tuple(
            cleaning(fit, used, stages, (number, (duties[number - 1], duties[number])), carried)
            for number in range(1, len(stages))
        ),
        remarks=remarks_on(visits, used, stages, fit, growth),
    )


def _changes(fit: JointFit, used: Sequence[Visit], worse_by: float) -> tuple[Change, ...]:
    """Return the change from each campaign to the next, and from the first to the last of three or more."""
    pairs = list(itertools.pairwise(range(len(used))))
    if len(used) > 2:
        pairs.append((0, len(used) - 1))
    return tuple(
        change(fit, pair, (used[pair[0]].naive_standard, used[pair[1]].naive_standard), worse_by) for pair in pairs
    )


def _unmarked(changes: tuple[Change, ...], used: Sequence[Visit]) -> list[int]:
    """Return the campaigns before which the head loss fell and nobody said why."""
    steps = [step for step in changes if step.later == step.earlier + 1]
    return [
        step.later
        for step in steps
        if math.log(step.head_loss_ratio[1]) < -BETTER * step.standard and used[step.later].event is None
    ]


def _weighed(history: History) -> tuple[History, Growth]:
    """Weigh the laws, with the campaigns' errors widened where they follow none."""
    growth = weigh_laws(history)
    if not follows_no_law(growth):
        return history, growth
    wider = replace(history, covariance=history.covariance * growth.misfit / growth.freedom)
    return wider, replace(weigh_laws(wider), misfit=growth.misfit)
