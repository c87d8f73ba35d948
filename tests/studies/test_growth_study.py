"""200 simulated histories with known growth: do the bands of change, rate and date hold the truth as they say?

Run it with ``pytest -m slow -s tests/studies/test_growth_study.py``.
"""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass

import numpy as np
import pytest
from history_maker import draw_history

from fieldfit.decisions.ageing import ageing

pytestmark = pytest.mark.slow

HISTORIES = 200
SEED = 1937


@dataclass(frozen=True, slots=True, kw_only=True)
class Case:
    """One history and what came of it."""

    law: str
    stages: int
    campaigns: int
    published: bool
    favoured: str
    change_error: tuple[float, ...]
    """Errors of ln(head loss ratio) over their standard uncertainties, each step and the whole."""
    narrower: float
    """Naive standard uncertainty over the joint one, first to last."""
    rate_held: bool
    rate_width: float
    """High over low end of the band of the rate."""
    date_share: float
    """Probability given to a crossing before the true day."""
    date_width_years: float


def judge(number):
    """Simulate one history, find its ageing, and compare."""
    history = draw_history(np.random.default_rng([SEED, number]))
    found = ageing(history.section, history.visits)
    walls = dict(zip((visit.date for visit in history.visits), history.walls, strict=True))
    losses = [history.truth.head_loss(history.duty, walls[visit.date]) for visit in found.visits]
    errors = [
        (np.log(change.head_loss_ratio[1]) - np.log(losses[change.later] / losses[change.earlier])) / change.standard
        for change in found.changes
    ]
    start, last = found.stages[-1].start, found.visits[-1].date
    years = (last - start).days / 365.25
    true_rate = (history.truth.roughness(years) - history.truth.roughness(0.0)) / years
    low, _, high = found.rate_past_m_year
    curve = np.array(found.crossings[0].curve)
    days = (history.crossing - last).days / 365.25
    favoured = max(found.growth.probabilities, key=lambda pair: pair[1])[0]
    ladder = np.append(curve[:, 0], np.inf * np.ones(200 - len(curve)))
    width = ladder[194] - ladder[5]
    return Case(
        law=history.truth.law,
        stages=len(found.stages),
        campaigns=len(found.visits),
        published=found.published,
        favoured=favoured,
        change_error=tuple(errors),
        narrower=found.changes[-1].naive_standard / found.changes[-1].standard if found.changes else float("nan"),
        rate_held=low <= true_rate <= high,
        rate_width=high / low,
        date_share=float(np.mean(ladder <= days)),
        date_width_years=float(width),
    )


@pytest.fixture(scope="module")
def cases():
    """All histories, each from its own stream of random numbers."""
    found = [judge(number) for number in range(HISTORIES)]
    print_table(found)
    return found


def print_table(cases):
    """Print shares by group."""
    groups = {"all": lambda case: True}
    groups |= {law: lambda case, law=law: case.law == law for law in ("linear", "parabolic", "saturating")}
    groups |= {"one stage": lambda case: case.stages == 1, "cleaned": lambda case: case.stages > 1}
    groups |= {f"{n} campaigns": lambda case, n=n: case.campaigns == n for n in range(1, 7)}
    groups |= {"published rate": lambda case: case.published}
    print(
        f"\n{'group':16}{'n':>5}{'change in band':>16}{'rate in band':>14}{'date in band':>14}{'narrower':>10}"
        f"{'rate, high/low':>16}{'date, years':>13}"
    )
    for name, chosen in groups.items():
        some = [case for case in cases if chosen(case)]
        if some:
            widths = [case.date_width_years for case in some]
            print(
                f"{name:16}{len(some):5d}{changes_held(some):15.1f}%{rates_held(some):13.1f}%{dates_held(some):13.1f}%"
                f"{middle([case.narrower for case in some]):10.1f}"
                f"{np.median([case.rate_width for case in some]):16.2f}{np.median(widths):13.1f}"
            )
    print(Counter((case.law, case.favoured) for case in cases if not case.published))


def middle(values):
    """Median of what is known."""
    known = [value for value in values if not np.isnan(value)]
    return float(np.median(known)) if known else float("nan")


def changes_held(cases):
    errors = [error for case in cases for error in case.change_error]
    return 100.0 * float(np.mean(np.abs(errors) < 1.96)) if errors else float("nan")


def rates_held(cases):
    return 100.0 * np.mean([case.rate_held for case in cases])


def dates_held(cases):
    return 100.0 * np.mean([0.025 <= case.date_share <= 0.975 for case in cases])


def test_band_of_the_change_holds_the_truth_and_is_no_narrower_than_it_should_be(cases):
    assert 92.5 <= changes_held(cases) <= 98.5


def test_band_of_the_rate_holds_the_truth(cases):
    assert 93.0 <= rates_held(cases) <= 99.0


def test_band_of_the_threshold_date_holds_the_truth(cases):
    assert 93.0 <= dates_held(cases) <= 99.0


def test_the_joint_fit_narrows_the_change(cases):
    assert middle([case.narrower for case in cases]) >= 3.0
