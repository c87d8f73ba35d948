"""The answer in plain words, for each state."""

from dataclasses import replace

from invented import no_estimate, plant_line, smooth_pipe

from fieldfit.report.words import answer, headline


def reach_of(finding):
    return finding.campaigns[0].reaches[0]


def with_wall(reach, **changes):
    return replace(reach, wall=replace(reach.wall, **changes))


def test_a_measured_wall_is_told_with_both_ranges_c_and_new_pipe():
    text = answer(reach_of(plant_line()))
    assert "0.31 mm rough" in text
    assert "between 0.28 and 0.35 mm" in text
    assert "between 0.21 and 0.44 mm" in text
    assert "C is 111.2 (109.3 to 113.1) at 3.50 L/s, 14 °C and a bore of 52.50 mm" in text
    assert "1.47 times the head of new carbon steel (1.31 to 1.65)" in text
    assert "over 99 %" in text
    assert "friction correlation (58 % of the variance)" in text
    assert "among the measurements themselves: bore (40 %)" in text


def test_an_upper_limit_never_names_a_best_roughness():
    reach = reach_of(smooth_pipe())
    text = answer(reach)
    assert "cannot be told from a smooth pipe" in text
    assert "not rougher than 0.042 mm" in text
    assert "C is 151" in text
    assert "mm rough" not in text
    assert "not to be told from smooth" in headline(reach)


def test_no_estimate_says_why_and_what_to_do_next():
    text = answer(reach_of(no_estimate()))
    assert "gives no roughness" in text
    assert "Every reading is laminar" in text
    assert "0.19 L/s" in text


def test_the_verdict_follows_the_probability():
    reach = reach_of(plant_line())
    told = [
        headline(replace(reach, new_pipe=replace(reach.new_pipe, probability_worse=p))) for p in (0.99, 0.7, 0.3, 0.01)
    ]
    assert told == ["Worse than new", "Probably worse than new", "Not shown to be worse than new", "As good as new"]


def test_without_a_material_nothing_is_claimed_against_new():
    text = answer(reach_of(plant_line(material=None)))
    assert "no value for new pipe" in text
    assert "times the head" not in text
