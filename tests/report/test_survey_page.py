import json

import pytest
from matplotlib.figure import Figure
from survey_maker import TREMBLING, exact_day, old_main, read

from fieldfit import assess
from fieldfit.report.figures.deposit_map import deposit_map
from fieldfit.report.figures.grade_line import grade_line
from fieldfit.report.page import page
from fieldfit.report.record import record_json
from fieldfit.report.summary import summary
from fieldfit.report.survey_words import headline, paragraph, probability_words

LINES = {
    "one wall": {},
    "valve": {"hidden_k": (0.0, 0.0, 25.0, 0.0, 0.0)},
    "bad stretch": {"roughness_m": (0.6e-3, 0.6e-3, 2e-3, 2e-3, 0.6e-3)},
    "two valves": {"hidden_k": (0.0, 25.0, 0.0, 40.0, 0.0)},
}
HEADLINES = {
    "one wall": "One roughness serves the whole length",
    "valve": "Too much is lost between tap 3 and tap 4",
    "bad stretch": "Between tap 3 and tap 5 the pipe is worse than the rest",
    "two valves": "Two local losses",
}


@pytest.fixture(scope="module")
def findings(tmp_path_factory):
    """Each line assessed from its files."""
    found = {}
    for name, changes in LINES.items():
        folder = tmp_path_factory.mktemp("survey")
        read(
            exact_day(old_main(**changes), kit=TREMBLING), folder, lambda s, log: ('material = "cast iron"\n' + s, log)
        )
        found[name] = assess(folder)
    return found


@pytest.mark.parametrize("name", LINES)
def test_the_headline_says_what_it_is(findings, name):
    survey = findings[name].campaigns[0].survey
    assert headline(survey) == HEADLINES[name]
    assert paragraph(survey).endswith(".")


def test_the_paragraph_gives_size_place_and_what_would_part_the_two(findings):
    text = paragraph(findings["valve"].campaigns[0].survey)
    assert "between tap 3 and tap 4" in text
    assert "Not to be told from it" in text
    assert "A tap halfway between tap 3 and tap 4 would part a step from a slope" in text
    assert "out of the question: chance alone makes the taps stray so far less than once in 1000 times" in text


@pytest.mark.parametrize("name", LINES)
def test_page_record_and_terminal_say_the_same(findings, name):
    finding = findings[name]
    survey = finding.campaigns[0].survey
    printed = page(finding).replace("\u00a0", " ").replace("\u2060", "")
    assert headline(survey) in printed
    assert "C on its own" in printed
    assert "smallest local loss seen" in printed
    assert headline(survey) in summary(finding)
    data = json.loads(record_json(finding))["campaigns"][0]["survey"]
    assert data["explanations"]["ranked"][0]["cause"] == survey.likely[0].cause
    assert len(data["reaches"]) == 5
    assert data["reaches"][2]["smallest_local_k"] == survey.reaches[2].smallest_k
    assert sum(one["probability"] for one in data["explanations"]["ranked"]) > 0.85


def test_two_taps_have_no_survey(tmp_path):
    day = exact_day(old_main(station_m=(0.0, 200.0), elevation_m=(3.0, 4.0), roughness_m=2e-3))
    read(day, tmp_path)
    finding = assess(tmp_path)
    assert finding.campaigns[0].survey is None
    data = json.loads(record_json(finding))["campaigns"][0]
    assert data["survey"] is None
    assert data["reaches"][0]["deposit"]["bore_mm"]["interval"][0] < 101.6
    assert "Bore or roughness" in page(finding)


@pytest.mark.parametrize("name", LINES)
def test_the_grade_line_is_a_figure(findings, name):
    figure = grade_line(findings[name].campaigns[0].survey)
    assert isinstance(figure, Figure)
    texts = {text.get_text() for ax in figure.axes for text in ax.texts}
    assert {"tap 1", "tap 6", "pipe", "new pipe", "fit"} <= texts


def test_the_map_is_a_figure(findings):
    found = findings["valve"].campaigns[0].reaches[0].deposit
    figure = deposit_map(found, (1e-4, 4e-4))
    assert isinstance(figure, Figure)
    assert "bore as laid" in {text.get_text() for text in figure.axes[0].texts}


def test_evidence_that_contradicts_is_named_with_its_consequence(tmp_path):
    extra = '\n[[bore_evidence]]\nkind = "coupon"\nbore = "70 mm ± 1 mm"\ndate = 2026-02-01\n[deposit]\ndensity = "1.9 t/m3"\n'
    day = exact_day(old_main(station_m=(0.0, 200.0), elevation_m=(3.0, 4.0), roughness_m=2e-3))
    read(day, tmp_path, lambda section, log: (section + extra, log))
    finding = assess(tmp_path)
    printed = page(finding).replace("\u00a0", " ")
    assert "Coupon of 1 February 2026: 70.0 mm" in printed
    assert "It contradicts the readings" in printed
    assert "It was left out" in printed
    assert "Mass per metre of pipe [kg/m]" in printed
    data = json.loads(record_json(finding))["campaigns"][0]["reaches"][0]["deposit"]
    assert data["evidence"][0]["used"] is False
    assert any("contradicts" in caution.text for caution in finding.campaigns[0].cautions)


def test_a_reach_that_gains_head_is_named_with_its_consequence(tmp_path):
    def lift(section, log):
        rows = [line.split(",") for line in log.splitlines()]
        for row in rows[1:]:
            row[4] = f"{float(row[4]) + 3.0 * float(row[1]):.2f}"
        return section, "\n".join(",".join(row) for row in rows) + "\n"

    read(exact_day(old_main()), tmp_path, lift)
    cautions = [one.text for one in assess(tmp_path).campaigns[0].cautions]
    rising = [text for text in cautions if "the head seems to rise" in text]
    assert len(rising) == 1
    assert rising[0].startswith("From tap 2 to tap 3")
    assert "reads too high by as much" in rising[0]


def test_a_dead_tap_is_named_with_its_consequence(tmp_path):
    def kill(section, log):
        rows = [line.split(",") for line in log.splitlines()]
        for row in rows[90:150]:
            row[4] = ""
        return section, "\n".join(",".join(row) for row in rows) + "\n"

    read(exact_day(old_main()), tmp_path, kill)
    cautions = [one.text for one in assess(tmp_path).campaigns[0].cautions]
    assert any(
        text.startswith("tap 3 gave no usable reading in") and "fitted as one reach" in text for text in cautions
    )


def test_names_that_mean_something_elsewhere_are_only_names(tmp_path):
    def rename(section, log):
        return section.replace('"tap 3"', '"<b>$x$ & tap"'), log.replace("tap 3 [", "<b>$x$ & tap [")

    read(exact_day(old_main(hidden_k=LINES["valve"]["hidden_k"])), tmp_path, rename)
    finding = assess(tmp_path)
    printed = page(finding)
    assert "<b>$x$" not in printed
    assert "&lt;b&gt;$x$ &amp; tap" in printed


def test_odds_in_words():
    assert probability_words(0.5) == "50 times in 100"
    assert probability_words(0.012) == "12 times in 1000"
