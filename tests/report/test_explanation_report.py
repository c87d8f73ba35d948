"""Rival explanations and the stress test in page, record and terminal."""

import json
from dataclasses import replace

import numpy as np
import pytest
from fault_maker import NOTHING, PLACES, Fault, draw, take_readings
from invented import plant_line, street_main
from readings_maker import make_readings

from fieldfit.assessment import assess
from fieldfit.decisions.stress_test import Stress
from fieldfit.field.section import Correlation
from fieldfit.inference.explanations import explain
from fieldfit.inference.weighing import Size
from fieldfit.report.explanation_tables import ranking, stress_lines
from fieldfit.report.explanation_words import natural, next_step, paragraph
from fieldfit.report.figures.explanations import drawn, explanations
from fieldfit.report.page import page
from fieldfit.report.record import record, record_json
from fieldfit.report.summary import summary

PLANT = PLACES["plant line"]
CAUSES = {
    "rough wall",
    "reduced bore",
    "local loss",
    "gauge offset",
    "leak or open branch",
    "trapped air",
    "meter error",
    "wrong unit or swapped channel",
}


def found_for(fault, levelled=True):
    readings = take_readings(PLANT, fault, draw(np.random.default_rng(6), PLANT), levelled)
    return explain(readings, Correlation(), PLANT.new_m)


@pytest.fixture(scope="module")
def several():
    """Explanations of a sound pipe, a rough one, a fault, and two faults at once."""
    return {
        "sound": found_for(NOTHING),
        "rough": found_for(Fault(roughness_m=3e-4)),
        "air": found_for(Fault(air_m=0.8)),
        "two": found_for(Fault(roughness_m=1e-3, air_m=1.5)),
    }


def with_explanations(found, stress=()):
    """An invented finding with explanations in it."""
    finding = plant_line()
    campaign = finding.campaigns[0]
    reach = replace(campaign.reaches[0], explanations=found, stress=stress)
    return replace(finding, campaigns=(replace(campaign, reaches=(reach,)),))


def test_the_record_holds_causes_groups_and_the_next_step(several):
    for name, found in several.items():
        entry = record(with_explanations(found))["campaigns"][0]["reaches"][0]["explanations"]
        assert list(entry)[:3] == ["ranked", "cannot_be_told_apart", "next_step"]
        assert {one["cause"] for one in entry["ranked"]} <= CAUSES
        assert list(entry["ranked"][0])[:2] == ["cause", "probability"]
        each = [one["probability"] for one in entry["ranked"]]
        assert each == sorted(each, reverse=True)
        # Pairs of causes under 1 % are not listed.
        assert sum(each) == pytest.approx(1.0, abs=0.05 if name == "two" else 1e-9)
        assert all(len(group) > 1 for group in entry["cannot_be_told_apart"])
        assert entry["next_step"]
        assert entry["no_single_cause_fits"] is (name == "two")
        json.loads(record_json(with_explanations(found)))


def test_a_new_wall_counts_as_a_rough_wall_in_the_ranking(several):
    found = several["sound"]
    entry = record(with_explanations(found))["campaigns"][0]["reaches"][0]["explanations"]
    assert entry["ranked"][0]["cause"] == "rough wall"
    assert entry["ranked"][0]["probability"] == pytest.approx(found.probability("rough wall"))
    assert entry["nothing_unusual"] == pytest.approx(found.ranked[0].probability)


def test_two_causes_stand_in_one_entry(several):
    entry = record(with_explanations(several["two"]))["campaigns"][0]["reaches"][0]["explanations"]
    assert (entry["ranked"][0]["cause"], entry["ranked"][0]["with"]) == ("rough wall", "trapped air")
    assert set(entry["ranked"][0]["sizes"]) == {"roughness_mm", "head_step_m"}


def test_the_paragraph_says_what_comes_first_and_what_to_do(several):
    assert paragraph(several["sound"]).startswith("Nothing unusual: a wall as new")
    rough = paragraph(several["rough"])
    assert "a rough wall is the most probable" in rough
    assert next_step(several["rough"]) in rough
    assert "trapped air is the most probable" in paragraph(several["air"])
    assert "No single cause passes through the readings; two together do: a rough wall with trapped air" in paragraph(
        several["two"]
    )


def test_page_and_terminal_show_them(several):
    for found in several.values():
        finding = with_explanations(found)
        text = page(finding)
        assert "What else could explain it" in text
        assert ("Rival explanations." in text) is bool(found.alike or not found.nothing_unusual)
        assert "explained by" in summary(finding)
    assert "What else could explain it" not in page(street_main())
    assert "nothing unusual" in summary(with_explanations(several["sound"]))


def test_the_table_ends_with_the_improbable_ones_together(several):
    table = ranking(several["air"], PLANT.bore_m)
    assert table.rows[0][0] == "trapped air"
    assert table.rows[0][2].startswith("head step 0.8")
    assert all(len(row) == len(table.head) for row in table.rows)
    assert table.rows[-1][3] == "together"


def test_the_figure_draws_readings_and_every_leading_curve(several):
    found = several["rough"]
    figure = explanations(found)
    left, right = figure.axes
    shown = drawn(found)
    curves = [line for line in left.lines if len(line.get_xdata()) > 20]
    assert len(curves) == len(shown) > 1
    first = found.ranked[0].fitted.predict(found.conditions)[0]
    at = np.interp(1e3 * found.conditions.flow_m3_s, curves[-1].get_xdata(), curves[-1].get_ydata())
    assert at == pytest.approx(first, rel=0.01)
    differences = [line for line in right.lines if len(line.get_xdata()) > 20]
    assert len(differences) == len(shown) - 1
    tested = 1e3 * found.conditions.flow_m3_s
    low, high = right.get_xlim()
    assert low <= 0.5 * tested.min()
    assert high >= 1.5 * tested.max()


@pytest.mark.parametrize(
    ("size", "key", "values"),
    [
        (Size("bore", 0.1, 0.05, 0.2), "bore_mm", [90.48, 81.87, 95.12]),
        (Size("wall", 3e-4, 2e-4, 4e-4), "roughness_mm", [0.3, 0.2, 0.4]),
        (Size("gain", np.log(0.9), np.log(0.8), np.log(1.0)), "meter_gain", [-0.1, -0.2, 0.0]),
        (Size("leak", 1e-3, 5e-4, 2e-3), "leak_m3_s", [1e-3, 5e-4, 2e-3]),
    ],
)
def test_sizes_come_in_the_reader_s_terms(size, key, values):
    found = natural(size, 0.1)
    assert found[0] == key
    assert list(found[1:]) == pytest.approx(values, rel=1e-3)


def test_the_stress_test_is_one_line_for_each_input():
    def stress(name, finding, becomes, error, **known):
        return Stress(
            input=name,
            finding=finding,
            becomes=becomes,
            error=error,
            unit=known.get("unit", "relative"),
            limit=known.get("limit", 0.005),
        )

    lines = stress_lines(
        (
            stress("meter", "worse than new", "not worse than new", 0.24),
            stress("meter", "measured", None, None),
            stress("bore", "worse than new", "not worse than new", -0.0312, limit=0.0),
            stress("gauges", "worse than new", None, None, unit="m"),
        )
    )
    assert lines == (
        "The meter would have to read 24 % too high (48 times its limit) to turn ‘worse than new’ into ‘not worse than "
        "new’; no error up to 60 % changes ‘measured’.",
        "The bore would have to be stated 3.1 % too small to turn ‘worse than new’ into ‘not worse than new’.",
        "The difference of the gauges: no error up to three times the largest head loss changes ‘worse than new’.",
    )


SECTION = """
name = "Swapped"
material = "carbon steel"
bore = "52.5 mm ± 0.5 %"
temperature = "14 degC"
[flow]
column = "flow"
accuracy = "0.5 % of reading"
[[tap]]
column = "up"
station = "0 m"
elevation = "1.0 m"
accuracy = "0.25 % of 6 bar"
[[tap]]
column = "down"
station = "38.2 m"
elevation = "1.0 m"
accuracy = "0.25 % of 6 bar"
"""


def sheet(tmp_path, losses_kpa):
    """A hand sheet with a static and four flows, and its section file."""
    (tmp_path / "section.toml").write_text(SECTION, encoding="utf-8")
    rows = [f"{flow},{400.0},{400.0 - loss:.2f}" for flow, loss in losses_kpa]
    (tmp_path / "sheet.csv").write_text("\n".join(["flow [L/s],up [kPa],down [kPa]", *rows]) + "\n", encoding="utf-8")
    return assess(tmp_path)


CLEAN_KPA = ((0.0, 0.0), (1.5, 4.1), (2.5, 10.6), (3.5, 20.1), (4.5, 32.3))


def test_a_reach_of_negative_loss_is_explained_by_swapped_taps(tmp_path):
    finding = sheet(tmp_path, [(flow, -loss) for flow, loss in CLEAN_KPA])
    reach = finding.campaigns[0].reaches[0]
    assert reach.wall.state == "no estimate"
    assert reach.explanations.ranked[0].option == "the two taps swapped"
    assert any(caution.about == "explanation" for caution in finding.campaigns[0].cautions)
    assert reach.stress == ()
    text = page(finding)
    assert "the two taps swapped" in text
    assert "the two taps swapped" in record_json(finding)


def test_a_sound_sheet_raises_no_caution_of_explanation(tmp_path):
    finding = sheet(tmp_path, CLEAN_KPA)
    reach = finding.campaigns[0].reaches[0]
    assert reach.explanations.nothing_unusual
    assert {one.input for one in reach.stress} == {"meter", "bore", "length", "gauges"}
    assert not any(caution.about == "explanation" for caution in finding.campaigns[0].cautions)
    entry = record(finding)["campaigns"][0]["reaches"][0]
    assert [one["input"] for one in entry["stress"]][:2] == ["meter", "meter"]


def test_one_flow_alone_is_answered_with_everything_it_leaves_open(tmp_path):
    finding = sheet(tmp_path, [(0.0, 0.0), (3.5, 45.0)])
    found = finding.campaigns[0].reaches[0].explanations
    assert len(found.alike) >= 4
    assert "cannot tell" in page(finding)


@pytest.mark.parametrize("seed", range(12))
def test_any_readings_end_in_an_answer_that_can_be_printed(seed):
    """Wild bores, viscosities, noises and head losses: probabilities stay numbers, and every form can be written."""
    rng = np.random.default_rng([41, seed])
    count = int(rng.choice([1, 2, 5, 30]))
    bore = float(np.exp(rng.uniform(np.log(0.01), np.log(1.2))))
    made = make_readings(
        bore=bore,
        length=float(np.exp(rng.uniform(np.log(40.0 * bore), np.log(5000.0)))),
        roughness=bore * float(rng.choice([1e-6, 1e-3, 0.04])),
        velocities=np.sort(rng.uniform(0.1, 5.0, count)),
        viscosity=float(np.exp(rng.uniform(np.log(3e-7), np.log(3e-5)))),
        noise=float(np.exp(rng.uniform(np.log(1e-7), np.log(2.0)))),
        levelled=bool(rng.random() < 0.5),
        senses=str(rng.choice(["volume", "velocity"])),
        bore_relative=float(rng.choice([0.0, 0.003, 0.05])),
    )
    head = (made.head_loss_m, -made.head_loss_m, 0.0 * made.head_loss_m, rng.normal(0.0, 5.0, count))[seed % 4]
    found = explain(replace(made, head_loss_m=head), Correlation(), (None, (2e-5, 1e-4))[seed % 2])
    assert all(0.0 <= one.probability <= 1.0 for one in found.ranked)
    finding = with_explanations(found)
    json.loads(record_json(finding))
    assert paragraph(found).endswith(".")
    assert ranking(found, bore).rows
    assert explanations(found).axes
