"""The answer in a terminal."""

import pytest
from invented import no_estimate, plant_line, smooth_pipe, street_main

from fieldfit.report.summary import WIDTH, summary


@pytest.mark.parametrize("make", [plant_line, smooth_pipe])
def test_an_answer_takes_about_a_dozen_lines(make):
    lines = summary(make()).splitlines()
    assert 9 <= len(lines) <= 14
    assert max(map(len, lines)) <= WIDTH


def test_it_says_what_the_engineer_needs():
    text = summary(plant_line())
    for part in (
        "Kiln cooling supply (carbon steel, bore 52.50 ± 0.18 mm)",
        "measured: worse than new",
        "0.31 mm (0.28 to 0.35 mm)",
        "0.21 to 0.44 mm",
        "111.2 (109.3 to 113.1)",
        "3.50 L/s, 14 °C, bore 52.50 mm",
        "1.47 (1.31 to 1.65) times the head loss of new carbon steel",
        "over 99 %",
        "friction correlation 58 %, bore 17 %, meter gain 12 %",
        "253 of 296 used; set aside: 36 unsteady",
        "1: static",
    ):
        assert part in text


def test_a_limit_is_told_as_a_limit():
    text = summary(smooth_pipe())
    assert "upper limit" in text
    assert "not rougher than 0.042 mm (95 %)" in text


def test_no_estimate_gives_the_reason_and_the_next_step():
    text = summary(no_estimate())
    assert "Every reading is laminar" in text
    assert "turbulent" in text
    assert "roughness  " not in text


def test_every_reach_and_campaign_has_its_block():
    text = summary(street_main())
    assert text.count("hydrant 12 to hydrant 14") == 2
    assert text.count("hydrant 14 to hydrant 17") == 2
    assert text.count("rows  ") == 2


def test_a_name_cannot_steer_the_terminal():
    text = summary(plant_line(name="red \x1b[31malert\x1b[0m\nline"))
    assert "\x1b" not in text
    assert text.splitlines()[0].startswith("red [31malert [0m line")
