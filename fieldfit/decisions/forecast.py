"""What the years ahead bring: fans of roughness, C, head loss and capacity from the hydraulics, and threshold dates."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass, replace
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from fieldfit.decisions.duty import Duty
from fieldfit.decisions.growth import Draws
from fieldfit.decisions.growth_prior import YEAR_DAYS
from fieldfit.decisions.visits import Stage, years_between
from fieldfit.field.outlook import Thresholds

Array = NDArray[np.float64]
Triple = tuple[float, float, float]

LEVELS = (0.025, 0.25, 0.5, 0.75, 0.975)
MOMENTS = 90
"""Moments of a forecast, all stages together."""
HORIZON_YEARS = 100.0
"""Years after the last test beyond which a crossing counts as never."""
AHEAD_YEARS = 10.0
"""Years over which the rate ahead is taken."""
FAN_DRAWS = 2000
DATES = (0.1, 0.5, 0.9)
STEPS = 200
"""Steps of probability in which the time of a crossing is kept."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Fan:
    """A quantity over time; T moments."""

    middle: Array
    """(T,) median [SI]."""
    half: Array
    """(2, T) 50 % band [SI]."""
    most: Array
    """(2, T) 95 % band [SI]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Forecast:
    """The pipe's past and future at the duty; T moments, a moment twice where a cleaning makes a step."""

    dates: tuple[dt.date, ...]
    """(T,) days."""
    stage: NDArray[np.int64]
    """(T,) number of the stage each belongs to."""
    roughness_m: Fan
    """Roughness, with the correlation's limit [m]."""
    equivalent_m: Fan
    """Roughness as these tests read it, without that limit [m]."""
    c: Fan
    """Hazen–Williams C at the duty [-]."""
    head_loss_m: Fan
    """Head loss at the duty [m]."""
    capacity_m3_s: Fan | None
    """Flow at the available head [m³/s]; None without one."""
    deposit_m: Fan
    """Thickness of a deposit that would lose the same head [m]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Crossing:
    """When a threshold is crossed, as a distribution."""

    what: Literal["c", "head_loss", "capacity"]
    """Which quantity."""
    limit: float
    """The threshold [SI]."""
    dates: tuple[dt.date | None, dt.date | None, dt.date | None]
    """Days by which it is crossed with 10, 50 and 90 %; None for not within the horizon."""
    already: float
    """Probability that it was crossed by the last test [-]."""
    never: float
    """Probability that it is not crossed within the horizon [-]."""
    by: dt.date | None
    """Day asked about."""
    probability_by: float | None
    """Probability that it is crossed before that day [-]."""
    curve: tuple[tuple[float, float], ...]
    """Years after the last test and probability that it is crossed by then, at equal steps of probability."""
    not_before: dt.date | None
    """Day before which it is crossed with 2.5 % only; None for not within the horizon."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Carried:
    """Draws of one law with what carries a wall to the duty; N draws."""

    draws: Draws
    """Parameters."""
    to_c: Array
    """(N,) ln of f at the duty over the law's, as C counts it: correlation's level and shape [-]."""
    to_loss: Array
    """(N,) the same as the head loss counts it: true bore and length too [-]."""

    def some(self, most: int) -> Carried:
        """Return every so many-th draw, at most so many."""
        step = max(1, -(-len(self.to_c) // most))
        draws, take = self.draws, slice(None, None, step)
        fewer = replace(
            draws,
            rate_m_year=draws.rate_m_year[take],
            constant_years=draws.constant_years[take],
            start_m=draws.start_m[take],
            level=draws.level[take],
        )
        return Carried(draws=fewer, to_c=self.to_c[take], to_loss=self.to_loss[take])


def forecast(
    carried: tuple[Carried, ...], stages: tuple[Stage, ...], duties: tuple[Duty, ...], until: dt.date, new_m: float
) -> Forecast:
    """Carry every draw through the years and the hydraulics.

    Parameters
    ----------
    carried : tuple of Carried
        Draws by law.
    stages : tuple of Stage
        Stages of the pipe's life.
    duties : tuple of Duty
        The duty in each stage, which differ when a lining changed the bore.
    until : date
        Last day.
    new_m : float
        Roughness of the deposit that a loss of bore would be [m].

    Returns
    -------
    Forecast
    """
    dates, stage = _moments(stages, until)
    years = np.array([years_between(stages[k].start, day) for day, k in zip(dates, stage, strict=True)])
    share = FAN_DRAWS / sum(len(one.to_c) for one in carried)
    few = [one.some(max(1, int(len(one.to_c) * share))) for one in carried]
    roughness = np.vstack([one.draws.roughness_m(years, stage) for one in few])
    to_c = np.concatenate([one.to_c for one in few])[:, None]
    to_loss = np.concatenate([one.to_loss for one in few])[:, None]
    level = np.concatenate([one.draws.level for one in few])[:, None]
    found = {name: np.empty_like(roughness) for name in ("same", "c", "loss", "capacity", "deposit")}
    for number, duty in enumerate(duties):
        at = stage == number
        wall = roughness[:, at]
        ln_f = duty.ln_friction(wall)
        found["same"][:, at] = np.maximum(duty.roughness_at(ln_f + level), 0.0)
        found["c"][:, at] = duty.c(ln_f + to_c)
        found["loss"][:, at] = duty.head_loss_m(ln_f + to_loss)
        found["deposit"][:, at] = duty.deposit_m(wall, new_m)
        if duty.head_m is not None:
            found["capacity"][:, at] = duty.capacity_m3_s(wall, to_loss)
    return Forecast(
        dates=dates,
        stage=stage,
        roughness_m=_fan(roughness),
        equivalent_m=_fan(found["same"]),
        c=_fan(found["c"]),
        head_loss_m=_fan(found["loss"]),
        capacity_m3_s=_fan(found["capacity"]) if duties[-1].head_m is not None else None,
        deposit_m=_fan(found["deposit"]),
    )


def rate_over(carried: tuple[Carried, ...], stage: int, years: tuple[float, float]) -> Triple:
    """Return the mean growth rate of the roughness over a time in a stage: 95 % low, median, 95 % high [m/year]."""
    when, which = np.array(years), np.array([stage, stage])
    walls = np.vstack([one.draws.roughness_m(when, which) for one in carried])
    low, middle, high = np.quantile((walls[:, 1] - walls[:, 0]) / (years[1] - years[0]), (0.025, 0.5, 0.975))
    return float(low), float(middle), float(high)


def crossings(
    carried: tuple[Carried, ...], stage: Stage, duty: Duty, last: dt.date, thresholds: Thresholds
) -> tuple[Crossing, ...]:
    """Find when each threshold is crossed in the present stage.

    Each draw's law is solved for the roughness at which its own hydraulics reach the threshold.

    Parameters
    ----------
    carried : tuple of Carried
        Draws by law.
    stage : Stage
        The present stage.
    duty : Duty
        The duty in it.
    last : date
        Day of the last test.
    thresholds : Thresholds
        What the pipe must not fall short of.

    Returns
    -------
    tuple of Crossing
        In the order C, head loss, capacity.
    """
    found = []
    wanted: tuple[tuple[Literal["c", "head_loss", "capacity"], float | None], ...] = (
        ("c", thresholds.c),
        ("head_loss", thresholds.head_loss_m),
        ("capacity", thresholds.capacity_m3_s),
    )
    for what, limit in wanted:
        if limit is not None:
            years = np.concatenate([_years_until(one, duty, what, limit) for one in carried])
            found.append(_crossing(years, (what, limit), stage.start, last, thresholds.by))
    return tuple(found)


def _years_until(carried: Carried, duty: Duty, what: str, limit: float) -> Array:
    """Return when each draw crosses a threshold [years since the stage began]; 0 when it began beyond it."""
    ln_f, apart = _ln_friction_at(duty, what, limit), carried.to_c if what == "c" else carried.to_loss
    at = duty
    if what == "capacity":
        at = replace(duty, flow_m3_s=limit)
        ln_f = at.ln_friction_of_loss(duty.head_m) if duty.head_m is not None else np.inf
    wall = at.roughness_at(ln_f - apart) if np.isfinite(ln_f) else np.full(len(apart), -1.0)
    draws = carried.draws
    grown = np.maximum(wall - draws.start_m[:, -1], 0.0) / draws.rate_m_year[:, -1]
    return draws.law.until(grown, draws.constant_years)


def _ln_friction_at(duty: Duty, what: str, limit: float) -> float:
    """Return ln f at the threshold [-]."""
    return duty.ln_friction_of_c(limit) if what == "c" else duty.ln_friction_of_loss(limit)


def _crossing(
    years: Array,
    which: tuple[Literal["c", "head_loss", "capacity"], float],
    start: dt.date,
    last: dt.date,
    by: dt.date | None,
) -> Crossing:
    """Turn draws of the time of crossing into a distribution of dates."""
    since = years - years_between(start, last)
    # A date needs a number: what lies beyond the horizon is never, and quantiles count it as such.
    ladder = np.sort(np.where(since > HORIZON_YEARS, np.inf, since))

    def day(share: float) -> dt.date | None:
        at = float(ladder[min(int(share * len(ladder)), len(ladder) - 1)])
        return None if np.isinf(at) else last + dt.timedelta(days=round(max(at, -HORIZON_YEARS) * YEAR_DAYS))

    shares = (np.arange(STEPS) + 0.5) / STEPS
    curve = zip(ladder[(shares * len(ladder)).astype(int)], shares, strict=True)
    return Crossing(
        what=which[0],
        limit=which[1],
        dates=(day(DATES[0]), day(DATES[1]), day(DATES[2])),
        already=float(np.mean(since <= 0.0)),
        never=float(np.mean(np.isinf(ladder))),
        by=by,
        probability_by=None if by is None else float(np.mean(since <= years_between(last, by))),
        curve=tuple((float(year), float(share)) for year, share in curve if np.isfinite(year)),
        not_before=day(0.025),
    )


def _moments(stages: tuple[Stage, ...], until: dt.date) -> tuple[tuple[dt.date, ...], NDArray[np.int64]]:
    """Return days with their stages; the end of one stage and the start of the next are the same day."""
    ends = [*(stage.start for stage in stages[1:]), until]
    whole = max((until - stages[0].start).days, 1)
    dates: list[dt.date] = []
    numbers: list[int] = []
    for number, (stage, end) in enumerate(zip(stages, ends, strict=True)):
        days = max((end - stage.start).days, 0)
        for step in np.linspace(0.0, days, max(2, round(MOMENTS * days / whole))):
            dates.append(stage.start + dt.timedelta(days=round(float(step))))
            numbers.append(number)
    return tuple(dates), np.array(numbers)


def _fan(values: Array) -> Fan:
    """Return median and bands over draws."""
    low, lower, middle, upper, high = np.quantile(values, LEVELS, axis=0)
    return Fan(middle=middle, half=np.array([lower, upper]), most=np.array([low, high]))
