"""Why gauges at rest disagree with the survey: each mistake made on purpose, and found."""

import numpy as np
import pytest
from crew import PLANT, bring, columns_of, heading, section_text
from instruments import Gauge, Kit, Meter, Pipe, Plan
from simulator import Errors, simulate

from fieldfit.assessment import assess
from fieldfit.field.static_doubts import static_doubts
from fieldfit.field.static_reasons import ATMOSPHERE_M, AtRest, say_reasons, static_reasons

WEIGHT = 9798.0
UPPER, LOWER = 61.8, 57.1


def rest(upper_pa=None, lower_pa=None, elevation=(UPPER, LOWER), **more):
    """Gauges of a main at rest whose upper gauge has 40 m of head on it."""
    upper = 40.0 * WEIGHT if upper_pa is None else upper_pa
    lower = (40.0 + UPPER - LOWER) * WEIGHT if lower_pa is None else lower_pa
    values = {"pressure_pa": (upper, lower), "weight_pa_m": WEIGHT, "expected_m": 0.15, "elevation_m": elevation}
    return AtRest(**(values | more))


P1, P2 = 40.0 * WEIGHT, (40.0 + UPPER - LOWER) * WEIGHT
CASES = {
    "gauges swapped": rest(P2, P1),
    "elevation sign": rest(elevation=(-UPPER, -LOWER)),
    "both elevations in another unit": rest(elevation=(UPPER / 0.3048, LOWER / 0.3048)),
    "one elevation in another unit": rest(elevation=(UPPER, LOWER / 0.3048)),
    "one pressure in another unit": rest(lower_pa=P2 / 6.894757),
    "both pressures in another unit": rest(P1 / 6.894757, P2 / 6.894757),
    "absolute pressure": rest(upper_pa=P1 + 101325.0),
    "slip in an elevation": rest(elevation=(UPPER, LOWER + 10.0)),
    "water still flows": rest(lower_pa=P2 - 1.3 * WEIGHT, smallest_loss_m=2.0),
}


@pytest.mark.parametrize("name", CASES)
def test_each_mistake_is_named_first_or_beside_its_twin(name):
    found = static_reasons(CASES[name])
    assert found
    # A swap of gauges and a wrong sign of the elevations look the same; so may two units.
    alike = {one.name for one in found if one.left_m == pytest.approx(found[0].left_m, abs=0.05)}
    assert name in alike | {found[0].name}


def test_nothing_is_named_within_limits():
    assert static_reasons(rest()) == ()
    assert say_reasons(rest()) == ""
    assert static_reasons(rest(lower_pa=P2 - 0.2 * WEIGHT)) == ()


def test_what_no_slip_explains_is_a_valve_or_air():
    assert static_reasons(rest(lower_pa=P2 - 6.37 * WEIGHT)) == ()
    assert "a valve shut between the taps" in say_reasons(rest(lower_pa=P2 - 6.37 * WEIGHT))


def test_what_is_left_is_the_disagreement_with_the_mistake_undone():
    found = static_reasons(rest(upper_pa=P1 + 101325.0))[0]
    assert found.left_m == pytest.approx(101325.0 / WEIGHT - ATMOSPHERE_M, abs=1e-9)


def test_ratio_of_feet_and_metres_is_seen_whichever_way():
    low = rest(elevation=(UPPER * 0.3048, LOWER * 0.3048))
    assert "metres were written as feet in both elevations" in say_reasons(low)
    high = rest(elevation=(UPPER / 0.3048, LOWER / 0.3048))
    assert "feet were written as metres in both elevations" in say_reasons(high)


def test_a_transmitter_has_no_gauges_to_swap():
    found = static_reasons(rest(3.0 * WEIGHT, 0.0, elevation=None))
    assert "gauges" not in " ".join(one.text for one in found)


PIPE = Pipe(bore_m=0.15, length_m=300.0, roughness_m=1e-3, elevation_m=(12.0, 17.0), temperature_degc=12.0)
AREA = np.pi / 4.0 * 0.15**2


@pytest.fixture(scope="module")
def day():
    kit = Kit(
        gauge=Gauge(full_scale_pa=1e6, limit=0.0025, step_pa=100.0, noise_pa=300.0),
        meter=Meter(limit=0.005, step_m3_s=1e-5),
    )
    plan = Plan(flows_m3_s=tuple(AREA * v for v in (0.6, 1.0, 1.4, 1.9)), supply_pa=5e5, drift=0.001)
    return simulate(np.random.default_rng(5), PIPE, kit, plan, Errors())


def about_statics(campaign):
    return " ".join(one.text for one in campaign.cautions if one.about == "static")


def test_swapped_columns_are_named_in_the_cautions(day, tmp_path):
    section, log = bring(day, tmp_path)
    assert about_statics(assess(section, log).campaigns[0]) == ""
    text = section.read_text(encoding="utf-8").replace('elevation = "12 m', 'elevation = "-12 m')
    section.write_text(text.replace('elevation = "17 m', 'elevation = "-17 m'), encoding="utf-8")
    said = about_statics(assess(section, log).campaigns[0])
    assert "the elevations have the wrong sign" in said


def spoilt(day, folder, change):
    """Section and log of the day, its rows changed by a function of time, window and columns."""
    columns = [np.array([float(cell) for cell in column]) for column in columns_of(day, PLANT)]
    change(day.rows.time_s, day.rows.window, columns)
    rows = [f"{t}," + ",".join(f"{c[k]:.4f}" for c in columns) for k, t in enumerate(day.rows.time_s)]
    folder.mkdir(exist_ok=True)
    (folder / "section.toml").write_text(section_text(day, PLANT), encoding="utf-8")
    (folder / "log.csv").write_text("\n".join(["time [s]," + ",".join(heading(PLANT)), *rows]) + "\n", encoding="utf-8")
    campaign = assess(folder).campaigns[0]
    from fieldfit.field.section_file import read_section

    return campaign, static_doubts(campaign.log, campaign.screening, campaign.plateaus, read_section(folder))


def test_sound_statics_raise_no_doubt(day, tmp_path):
    assert spoilt(day, tmp_path, lambda time, window, columns: None)[1] == ()


def test_a_loss_that_still_decays_is_seen(day, tmp_path):
    def change(time, window, columns):
        last = window == window.max()
        columns[2][last] -= 8.0 * np.exp(-(time[last] - time[last][0]) / 25.0)

    campaign, doubts = spoilt(day, tmp_path, change)
    assert [one.sign for one in doubts] == ["decaying loss"]
    assert doubts[0].value < -0.3
    assert "still coming to rest" in about_statics(campaign)


def test_a_section_that_drains_is_seen(day, tmp_path):
    def change(time, window, columns):
        first = window == 0
        fall = 150.0 * (time[first] - time[first][0]) / float(np.ptp(time[first]))
        columns[1][first] -= fall
        columns[2][first] -= fall

    campaign, doubts = spoilt(day, tmp_path, change)
    assert [one.sign for one in doubts] == ["draining"]
    assert "the section was draining" in about_statics(campaign)


def test_flow_in_a_static_is_seen(day, tmp_path):
    def change(time, window, columns):
        columns[0][window == 0] += 0.04

    campaign, doubts = spoilt(day, tmp_path, change)
    assert [one.sign for one in doubts] == ["flow"]
    assert doubts[0].value == pytest.approx(4e-5, rel=0.2)
    assert "The meter shows 0.04 L/s" in about_statics(campaign)


def test_a_static_that_flows_outright_is_none(day, tmp_path):
    def change(time, window, columns):
        for still in (0, window.max()):
            columns[0][window == still] += 1.0

    campaign, doubts = spoilt(day, tmp_path, change)
    assert {one.sign for one in doubts} == {"nearly still"}
    assert "is no static: 1 L/s still flowed" in about_statics(campaign)


def test_statics_that_differ_name_both_causes(day, tmp_path):
    def change(time, window, columns):
        columns[2][window == window.max()] -= 6.0

    said = about_statics(spoilt(day, tmp_path, change)[0])
    assert "a gauge drifted" in said
    assert "water still flowed" in said
