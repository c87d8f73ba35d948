"""Whether a log is good enough: every bad day is told from a good one, with what to do about it."""

from __future__ import annotations

import pytest
from bad_logs import LOGS, brought

from fieldfit.field.screens import REASONS
from fieldfit.report.screening import words
from fieldfit.screening import screen_logs

MISSING = {
    "sound": set(),
    "service": set(),
    "half backwards": set(),
    "all static": {"Flows that carry roughness", "Largest Reynolds number"},
    "too short": {"Flows that carry roughness", "Largest Reynolds number"},
    "stuck gauge": {"Flows that carry roughness"},
    "noise": {"Flows that carry roughness", "Largest head loss over its standard uncertainty"},
    "swapped": {"Flows that carry roughness", "Largest head loss over its standard uncertainty"},
    "laminar": {"Flows that carry roughness", "Largest Reynolds number"},
    "one flow": {"Flows that carry roughness"},
    "unsurveyed": {"Largest head loss over its standard uncertainty"},
}
ADVICE = {
    "all static": "Let water flow",
    "too short": "Hold each of three flows or more for at least 8 rows",
    "stuck gauge": "Look at the gauge that repeats itself",
    "half backwards": "Find out why water ran backwards",
    "noise": "use finer gauges",
    "swapped": "columns of the taps are swapped",
    "laminar": "Test at larger flows",
    "one flow": "Take at least three flows",
    "service": "Stop the flow for a few minutes",
    "unsurveyed": "survey both and write their elevations",
}


@pytest.fixture(scope="module")
def findings(tmp_path_factory):
    folder = tmp_path_factory.mktemp("logs")
    return {name: screen_logs(brought(name, folder / name.replace(" ", "-"))) for name in LOGS}


@pytest.mark.parametrize("name", LOGS)
def test_what_is_missing_is_named(findings, name):
    campaign = findings[name].campaigns[0]
    missing = {check.what for check in words.failed(campaign, needed=True)}
    assert missing >= MISSING[name]
    assert bool(missing) == bool(MISSING[name])
    assert findings[name].good == (not missing)


@pytest.mark.parametrize("name", ADVICE)
def test_what_to_do_is_said(findings, name):
    assert any(ADVICE[name] in text for text in words.again(findings[name].campaigns[0]))


def test_a_sound_log_needs_nothing(findings):
    campaign = findings["sound"].campaigns[0]
    assert words.again(campaign) == []
    assert words.headline(campaign) == "Good enough to assess"


@pytest.mark.parametrize("name", LOGS)
def test_the_audit_adds_up(findings, name):
    campaign = findings[name].campaigns[0]
    screening = campaign.screening
    assert screening.used + sum(number for _, number in screening.counts) == campaign.log.rows
    assert {reason for reason, _ in screening.counts} <= set(REASONS)


@pytest.mark.parametrize("name", LOGS)
def test_a_check_is_whole(findings, name):
    for check in findings[name].campaigns[0].all_checks:
        assert check.because.endswith(".")
        assert not check.passed or check.do == ""
        assert check.value is None or check.value == check.value


def test_a_weak_point_does_not_stop_an_assessment(findings):
    campaign = findings["half backwards"].campaigns[0]
    assert campaign.good
    assert words.headline(campaign) == "Good enough to assess, with 1 weak point"


def test_a_section_that_was_not_surveyed_keeps_its_rows(findings):
    """Nothing levels the gauges, so no row can be set aside for its head loss."""
    campaign = findings["unsurveyed"].campaigns[0]
    assert {reason for reason, _ in campaign.screening.counts} == {"unsteady"}


@pytest.mark.parametrize("name", LOGS)
def test_limits_are_held_the_way_they_are_said(findings, name):
    for check in findings[name].campaigns[0].all_checks:
        if check.value is not None and not check.passed:
            assert check.value >= check.limit if check.at_most else check.value < check.limit


def test_a_column_that_never_changes_is_doubted(tmp_path):
    folder = brought("sound", tmp_path)
    log = folder / "log.csv"
    head, *rows = log.read_text(encoding="utf-8").splitlines()
    frozen = [",".join([time, flow, "60", *rest]) for time, flow, _, *rest in (row.split(",") for row in rows)]
    log.write_text("\n".join([head, *frozen]) + "\n", encoding="utf-8")
    campaign = screen_logs(folder).campaigns[0]
    assert any("'upstream' holds one value throughout" in check.because for check in campaign.checks)
    upstream = campaign.steps[1]
    assert upstream.constant
    # A display that stands still may be off by half a step, however many rows repeat it.
    assert upstream.standard == pytest.approx(1000.0 / 12.0**0.5)
