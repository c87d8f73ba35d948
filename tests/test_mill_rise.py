"""Five campaigns up Mill Rise: answered as their truth says, with the cleaning declared and without."""

import csv
import datetime as dt
import json
import shutil
from pathlib import Path

import pytest

from fieldfit.assessment import assess
from fieldfit.cli import main
from fieldfit.errors import InputError
from fieldfit.report.page import page
from fieldfit.report.record import record
from fieldfit.report.trend_page import trend_page
from fieldfit.report.trend_summary import trend_summary
from fieldfit.trend import trend

SAMPLES = Path(__file__).resolve().parents[1] / "sample_data"
MILL_RISE = SAMPLES / "mill_rise"


@pytest.fixture(scope="module")
def truths():
    with (SAMPLES / "truth.csv").open(encoding="utf-8", newline="") as file:
        rows = [row for row in csv.DictReader(file) if row["section"].startswith("mill_rise ")]
    return [{name: float(row[name]) * 1e-3 for name in ("roughness_mm", "equivalent_roughness_mm")} for row in rows]


@pytest.fixture(scope="module")
def finding():
    return trend(MILL_RISE)


@pytest.fixture(scope="module")
def undeclared(tmp_path_factory):
    """The same readings when nobody wrote down that the main was cleaned."""
    folder = tmp_path_factory.mktemp("undeclared")
    for log in MILL_RISE.glob("*.csv"):
        shutil.copy(log, folder)
    text = (MILL_RISE / "section.toml").read_text(encoding="utf-8")
    silent = text.replace("cleaned = 2018-05-22\npromised_c = 108\n", "")
    assert silent != text
    (folder / "section.toml").write_text(silent, encoding="utf-8")
    return trend(folder)


def test_bands_hold_the_equivalent_roughness_of_every_campaign(finding, truths):
    for point, truth in zip(finding.ageing[0].points, truths, strict=True):
        assert point.roughness_m[0] <= truth["equivalent_roughness_mm"] <= point.roughness_m[2]


def test_bands_hold_the_true_growth_and_the_ratios(finding, truths):
    ageing = finding.ageing[0]
    assert ageing.rate_past_m_year[0] <= 0.09e-3 <= ageing.rate_past_m_year[2]
    assert not ageing.published
    for change in ageing.changes:
        true = truths[change.later]["equivalent_roughness_mm"] / truths[change.earlier]["equivalent_roughness_mm"]
        assert change.roughness_ratio[0] <= true <= change.roughness_ratio[2]


def test_the_new_meter_is_not_shared_and_the_joint_fit_says_what_it_bought(finding):
    changes = finding.ageing[0].changes
    same_meter, other_meter = changes[0], changes[1]
    assert same_meter.naive_standard / same_meter.standard > 8.0
    assert 2.0 < other_meter.naive_standard / other_meter.standard < 4.0
    assert "meter MAG-140" in finding.ageing[0].points[2].events


def test_the_cleaning_kept_its_promise_and_the_wall_grows_faster_since(finding):
    (cleaning,) = finding.ageing[0].cleanings
    assert (cleaning.event, cleaning.date) == ("cleaned", dt.date(2018, 5, 22))
    assert cleaning.probability_gain > 0.999
    assert cleaning.promise == "reached"
    assert cleaning.capacity_ratio[0] > 1.0
    assert cleaning.power_saved_w[0] > 0.0
    assert cleaning.regrowth[0] <= 0.09 / 0.055 <= cleaning.regrowth[2]


def test_threshold_dates_are_in_order_and_the_bands_nest(finding):
    ageing = finding.ageing[0]
    assert [crossing.what for crossing in ageing.crossings] == ["c", "capacity"]
    for crossing in ageing.crossings:
        early, middle, late = crossing.dates
        assert dt.date(2026, 5, 7) < crossing.not_before <= early < middle < late
        assert 0.0 <= crossing.probability_by <= 1.0
    for fan in (ageing.forecast.c, ageing.forecast.roughness_m, ageing.forecast.head_loss_m):
        assert (fan.most[0] <= fan.half[0]).all()
        assert (fan.half[1] <= fan.most[1]).all()


def test_an_undeclared_cleaning_is_pointed_out_and_not_averaged_away(finding, undeclared):
    ageing = undeclared.ageing[0]
    assert [stage.event for stage in ageing.stages] == ["laid", "unmarked"]
    assert "nobody said why" in trend_page(undeclared)
    assert any("became better" in remark and "2018-04-11 and 2018-06-05" in remark for remark in ageing.remarks)
    declared = finding.ageing[0]
    assert ageing.rate_past_m_year[1] == pytest.approx(declared.rate_past_m_year[1], rel=0.1)


def test_the_page_shows_timeline_forecast_dates_and_changes(finding):
    text = trend_page(finding)
    assert text.count("<svg aria-hidden") == 3
    for words in ("Roughening by", "The years ahead", "± subtracted", "cleaned on 2018-05-22", "Promised"):
        assert words in text
    assert "https:" not in text


def test_record_and_summary_say_the_same(finding):
    ageing = json.loads(json.dumps(record(finding), allow_nan=False))["ageing"]["reaches"][0]
    assert ageing["thresholds"][0]["date_50"] == finding.ageing[0].crossings[0].dates[1].isoformat()
    assert ageing["cleanings"][0]["promise"] == "reached"
    assert [test["date"] for test in ageing["tests"]][-1] == "2026-05-07"
    told = trend_summary(finding)
    assert max(map(len, told.splitlines())) <= 88
    assert "subtracted" in told


def test_an_assessment_of_several_campaigns_includes_it(tmp_path):
    found = assess(MILL_RISE)
    assert len(found.ageing) == 1
    assert "The years ahead" in page(found)


def test_one_campaign_looks_ahead_on_a_published_rate_and_says_so():
    found = trend(MILL_RISE, MILL_RISE / "2008-05-14.csv")
    ageing = found.ageing[0]
    assert ageing.published
    assert "Lamont" in trend_page(found)
    low, _, high = ageing.rate_ahead_m_year
    assert high / low > 2.5


def test_the_command_writes_page_and_record(tmp_path, capsys):
    assert main(["trend", str(MILL_RISE), "--out", str(tmp_path)]) == 0
    assert sorted(path.name for path in tmp_path.iterdir()) == [
        "mill-rise-main-trend.html",
        "mill-rise-main-trend.json",
    ]
    assert "how it ages" in capsys.readouterr().out


BAD = {
    "date = 2013-09-24": ("date = 2008-05-14", "two campaigns are of 2008-05-14"),
    "date = 2008-05-14": ("date = 1979-05-14", "older than the pipe"),
    'meter = "MAG-140"\nmeter_accuracy = "0.5 % of reading"\ncleaned': (
        'bore = "151 mm"\ncleaned',
        "nothing says that the pipe was lined",
    ),
    "[water]": ("[growth]\nuntil = 2020-01-01\n\n[water]", "before the last test of 2026-05-07"),
    "cleaned = 2018-05-22": ("cleaned = 2019-05-22", "later than the test"),
    'head = "6 m"\n': ("", "a capacity is named without the head"),
}


@pytest.mark.parametrize("old", BAD)
def test_bad_campaigns_are_refused_with_advice(tmp_path, capsys, old):
    new, expected = BAD[old]
    for log in MILL_RISE.glob("*.csv"):
        shutil.copy(log, tmp_path)
    text = (MILL_RISE / "section.toml").read_text(encoding="utf-8")
    assert old in text
    (tmp_path / "section.toml").write_text(text.replace(old, new, 1), encoding="utf-8")
    assert main(["trend", str(tmp_path), "--out", str(tmp_path / "out")]) == 2
    assert expected in capsys.readouterr().err


def test_sheets_without_a_date_cannot_be_put_in_order(tmp_path):
    text = (MILL_RISE / "section.toml").read_text(encoding="utf-8").replace("date = 2013-09-24\n", "", 1)
    (tmp_path / "section.toml").write_text(text, encoding="utf-8")
    for log in MILL_RISE.glob("*.csv"):
        rows = [line.split(",", 1)[1] for line in log.read_text(encoding="utf-8").splitlines()[::4]]
        (tmp_path / log.name).write_text("\n".join(rows) + "\n", encoding="utf-8")
    with pytest.raises(InputError, match=r"the campaign with the log '2013-09-24.csv' has no date"):
        trend(tmp_path)
    found = assess(tmp_path)
    assert found.ageing == ()
    assert "has no date" in found.no_ageing


def test_a_folder_of_dated_logs_needs_no_campaign_tables(tmp_path):
    for log in MILL_RISE.glob("20*.csv"):
        if log.name < "2018-05":
            shutil.copy(log, tmp_path)
    text = (MILL_RISE / "section.toml").read_text(encoding="utf-8")
    bare = text[: text.index("[[campaign]]")] + text[text.index("[water]") :]
    (tmp_path / "section.toml").write_text(bare, encoding="utf-8")
    found = trend(tmp_path).ageing[0]
    assert [visit.date.year for visit in found.visits] == [2008, 2013, 2018]


def test_a_log_named_on_the_command_line_keeps_what_its_campaign_says():
    found = assess(MILL_RISE, MILL_RISE / "2018-06-05.csv").campaigns[0]
    assert (found.date, found.campaign.cleaned) == (dt.date(2018, 6, 5), True)
    assert found.reaches[0].readings.meter.serial == "MAG-140"
