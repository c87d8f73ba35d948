"""The record: keys, order, units, and nothing that JSON cannot hold."""

import json
from dataclasses import replace

import pytest
from invented import no_estimate, plant_line, smooth_pipe, street_main

from fieldfit.report.record import record, record_json

FINDINGS = {"measured": plant_line, "upper limit": smooth_pipe, "several": street_main, "no estimate": no_estimate}


def numbers(value):
    if isinstance(value, dict):
        for part in value.values():
            yield from numbers(part)
    elif isinstance(value, list):
        for part in value:
            yield from numbers(part)
    elif isinstance(value, float):
        yield value


def starts(given, wanted):
    return list(given)[: len(wanted)] == wanted


def test_keys_stand_in_the_published_order():
    whole = record(plant_line())
    assert list(whole) == ["schema", "fieldfit", "section", "campaigns", "ageing", "decisions"]
    assert whole["schema"] == 1
    assert starts(whole["section"], ["name", "material", "bore_m", "length_m"])
    campaign = whole["campaigns"][0]
    assert starts(campaign, ["date", "log", "plateaus", "reaches", "warnings"])
    assert list(campaign["log"]) == ["file", "sha256", "rows", "used", "set_aside"]
    assert list(campaign["warnings"][0]) == ["about", "text"]


def test_keys_of_a_reach_stand_in_the_published_order():
    reach = record(plant_line())["campaigns"][0]["reaches"][0]
    wanted = [
        "from", "to", "state", "roughness_mm", "hazen_williams_c", "friction_factor", "new_pipe", "reduced_chi_square",
        "budget", "explanations",
    ]  # fmt: skip
    assert starts(reach, wanted)
    band = ["best", "measurement", "with_correlation"]
    assert list(reach["roughness_mm"]) == band
    assert starts(reach["hazen_williams_c"], [*band, "flow_m3_s"])
    assert starts(reach["friction_factor"], ["best", "measurement", "reynolds"])
    assert starts(reach["new_pipe"], ["roughness_mm", "source", "head_loss_ratio", "probability_worse"])
    assert list(reach["budget"][0]) == ["error", "share", "measurement_share", "standard", "pull"]
    assert reach["explanations"] is None


def test_units_are_those_of_the_keys():
    finding = plant_line()
    wall = finding.campaigns[0].reaches[0].wall
    reach = record(finding)["campaigns"][0]["reaches"][0]
    assert reach["roughness_mm"]["best"] == pytest.approx(1e3 * wall.roughness_m.best, rel=1e-15)
    assert reach["new_pipe"]["roughness_mm"] == pytest.approx([0.03, 0.045, 0.09])
    assert record(finding)["section"]["length_m"] == 38.2


def test_numbers_keep_all_their_digits():
    finding = plant_line()
    read = json.loads(record_json(finding))["campaigns"][0]["reaches"][0]
    assert read["hazen_williams_c"]["flow_m3_s"] == finding.campaigns[0].reaches[0].wall.flow_m3_s
    assert read["hazen_williams_c"]["best"] == finding.campaigns[0].reaches[0].wall.hazen_williams_c.best


@pytest.mark.parametrize("make", FINDINGS.values(), ids=FINDINGS)
def test_json_is_strict_and_says_what_the_record_says(make):
    finding = make()
    text = record_json(finding)
    assert text.endswith("}\n")
    assert json.loads(text) == record(finding)


def test_an_upper_limit_has_no_best_value_and_starts_at_zero():
    roughness = record(smooth_pipe())["campaigns"][0]["reaches"][0]["roughness_mm"]
    assert roughness["best"] is None
    assert roughness["measurement"][0] == roughness["with_correlation"][0] == 0.0
    assert roughness["with_correlation"][1] > roughness["measurement"][1] > 0.0


def test_what_is_not_a_number_becomes_null():
    finding = no_estimate()
    campaign = finding.campaigns[0]
    reach = campaign.reaches[0]
    nowhere = replace(reach.wall, flow_m3_s=float("nan"), reynolds=float("inf"), velocity_m_s=float("nan"))
    finding = replace(finding, campaigns=(replace(campaign, reaches=(replace(reach, wall=nowhere),)),))
    found = json.loads(record_json(finding))["campaigns"][0]["reaches"][0]
    assert found["roughness_mm"] == {"best": None, "measurement": None, "with_correlation": None}
    assert found["hazen_williams_c"]["flow_m3_s"] is None
    assert found["friction_factor"]["reynolds"] is None


def test_rows_add_up():
    for campaign in record(street_main())["campaigns"]:
        log = campaign["log"]
        assert log["used"] + sum(log["set_aside"].values()) == log["rows"]


def test_every_number_is_a_plain_float():
    assert all(type(value) is float for value in numbers(record(street_main())))
