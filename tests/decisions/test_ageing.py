"""How a reach ages, when what is known of it is odd."""

import datetime as dt
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from history_maker import draw_history

from fieldfit.decisions.ageing import ageing
from fieldfit.decisions.visits import check_dates
from fieldfit.errors import InputError
from fieldfit.field.outlook import Changes, Outlook
from fieldfit.field.section import Campaign
from fieldfit.report.figures.crossings import crossings
from fieldfit.report.figures.forecast import forecast
from fieldfit.report.figures.timeline import timeline
from fieldfit.report.trend_tables import campaigns, certainty, changes, cleanings, growth, outlook, thresholds
from fieldfit.report.trend_words import answer, cleaning_words, headline


def history(seed=1, **known):
    return draw_history(np.random.default_rng(seed), **{"campaigns": 3, "cleaned": False, "law": "linear"} | known)


def printed(found):
    """Everything that is printed of an ageing, which must not fail."""
    tables = [table(found) for table in (campaigns, certainty, changes, cleanings, growth, outlook, thresholds)]
    figures = [timeline(found), forecast(found), *([crossings(found)] if found.crossings else [])]
    told = [headline(found), answer(found), *(cleaning_words(one, found) for one in found.cleanings)]
    assert tables[0].rows
    assert all(figures)
    assert not any("nan" in text for text in told)
    return " ".join(told)


def test_an_ordinary_main():
    made = history()
    found = ageing(made.section, made.visits)
    assert [stage.event for stage in found.stages] == ["laid"]
    assert len(found.changes) == 3
    assert "a year" in printed(found)


def test_one_test_alone_stands_on_a_published_rate():
    made = history()
    section = replace(made.section, outlook=Outlook(langelier=-1.3))
    found = ageing(section, made.visits[:1])
    assert found.published
    assert found.changes == ()
    assert "Lamont" in printed(found)
    # A test says how rough the wall is, and with that how fast it must have grown since it was laid.
    assert found.rate_past_m_year[2] / found.rate_past_m_year[0] < found.rate.span[1] / found.rate.span[0]


@pytest.mark.parametrize(
    "known", [{"installed": None}, {"material": None}, {"material": "PVC"}, {"outlook": Outlook()}]
)
def test_less_is_known(known):
    made = history()
    found = ageing(replace(made.section, **known), made.visits)
    printed(found)
    if "installed" in known:
        assert found.stages[0].event == "first test"
        assert found.stages[0].start == made.visits[0].date


def test_a_lining_narrows_the_bore_and_starts_anew():
    made = history(campaigns=4, cleaned=True)
    visits = list(made.visits)
    wash = next(k for k, visit in enumerate(visits) if visit.campaign.cleaned)
    lined = Changes(relined=True, lining="epoxy-lined steel")
    visits[wash] = replace(visits[wash], campaign=replace(visits[wash].campaign, cleaned=False, changes=lined))
    for k in range(wash, len(visits)):
        readings = visits[k].readings
        visits[k] = replace(
            visits[k], readings=replace(readings, bore=replace(readings.bore, value=0.98 * readings.bore.value))
        )
    found = ageing(made.section, visits)
    assert [stage.event for stage in found.stages] == ["laid", "lined"]
    assert found.stages[1].material == "epoxy-lined steel"
    assert found.duty.bore_m == pytest.approx(0.98 * made.visits[0].readings.bore.value)
    printed(found)


def test_campaigns_without_an_estimate_are_left_out_and_named():
    made = history()
    visits = list(made.visits)
    lost = replace(visits[1].wall, state="no estimate", because="Every reading is laminar.")
    visits[1] = replace(visits[1], wall=lost)
    found = ageing(made.section, visits)
    assert len(found.points) == 2
    assert any(str(visits[1].date) in remark and "laminar" in remark for remark in found.remarks)
    with pytest.raises(ValueError, match="no campaign has an estimate"):
        ageing(made.section, visits[1:2])


def test_instruments_without_a_serial_are_remarked_and_not_shared():
    named, bare = history(seed=3), history(seed=3, serials=False)
    with_serial, without = (ageing(one.section, one.visits) for one in (named, bare))
    assert any("No instrument has a serial" in remark for remark in without.remarks)
    assert not any("No instrument has a serial" in remark for remark in with_serial.remarks)
    assert without.changes[0].standard > 2.0 * with_serial.changes[0].standard


def test_a_step_that_is_declared_is_no_remark():
    made = history(seed=2, campaigns=5, cleaned=True)
    declared = ageing(made.section, made.visits)
    silent = [replace(visit, campaign=Campaign(date=visit.date, log=Path(visit.file))) for visit in made.visits]
    hidden = ageing(made.section, silent)
    assert [stage.event for stage in declared.stages] == ["laid", "cleaned"]
    assert not any("became better" in remark for remark in declared.remarks)
    assert declared.cleanings[0].head_loss_ratio[2] < 0.7
    assert [stage.event for stage in hidden.stages] == ["laid", "unmarked"]
    assert any("became better" in remark for remark in hidden.remarks)
    printed(declared)
    printed(hidden)


def test_the_same_campaigns_give_the_same_answer():
    made = history()
    once, twice = ageing(made.section, made.visits), ageing(made.section, made.visits)
    assert once.rate_ahead_m_year == twice.rate_ahead_m_year
    assert once.crossings == twice.crossings


@pytest.mark.parametrize(
    ("dates", "said"),
    [
        ([(dt.date(2010, 1, 1), "a.csv", False), (None, "b.csv", False)], "'b.csv' has no date"),
        ([(dt.date(1980, 1, 1), "a.csv", False)], "older than the pipe, installed 1990-01-01"),
        (
            [(dt.date(2010, 1, 1), "a.csv", False), (dt.date(2010, 1, 1), "b.csv", False)],
            "two campaigns are of 2010-01-01",
        ),
    ],
)
def test_dates_that_give_no_order_are_refused(dates, said):
    with pytest.raises(InputError, match=said):
        check_dates(dates, dt.date(1990, 1, 1), "section.toml")


def test_before_and_after_a_cleaning_may_be_one_day():
    day = dt.date(2010, 1, 1)
    check_dates([(day, "a.csv", False), (day, "b.csv", True)], None, "section.toml")
