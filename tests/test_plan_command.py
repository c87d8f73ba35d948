"""A plan made, its sheet filled in and assessed; its own figures held against simulated tests."""

import csv
import io
import itertools
import json
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from handovers_plan import spread_found
from readings_maker import head_loss

from fieldfit.cli import main
from fieldfit.decisions.expected import Layout, expected, planned_flows
from fieldfit.decisions.planning import plan_test
from fieldfit.errors import InputError
from fieldfit.field.section_file import read_section
from fieldfit.report.plan_sheets import crew_sheet, crew_table, plan_record, plan_sheet, plan_summary
from fieldfit.report.sheet import sheet_html

SECTION = """
name = "Invented main"
material = "cast iron"
bore = "150 mm ± 1 %"
temperature = "12 degC ± 1 degC"
[flow]
column = "flow"
accuracy = "1 % of reading"
[[tap]]
column = "upper"
station = "0 m ± 0.1 m"
elevation = "20.00 m ± 0.02 m"
accuracy = "0.25 % of 10 bar"
[[tap]]
column = "lower"
station = "300 m ± 0.1 m"
elevation = "19.00 m ± 0.02 m"
accuracy = "0.25 % of 10 bar"
[plan]
flow = "30 L/s"
static = "5 bar"
c = "4 %"
gauges = "0.1 % of 10 bar; 1 % of 10 bar"
meters = "0.5 % of reading; 2 % of reading"
"""


@pytest.fixture
def section_of(tmp_path):
    def build(text=SECTION):
        (tmp_path / "section.toml").write_text(text, encoding="utf-8")
        return read_section(tmp_path)

    return build


def test_the_plainest_instruments_that_reach_the_wish_are_chosen(section_of):
    easy = plan_test(section_of(SECTION.replace('c = "4 %"', 'c = "8 %"')))
    assert (easy.layout.gauge.text, easy.layout.meter.text) == ("1 % of 10 bar", "2 % of reading")
    assert easy.reached
    hard = plan_test(section_of(SECTION.replace('c = "4 %"', 'c = "1 %"')))
    assert (hard.layout.gauge.text, hard.layout.meter.text) == ("0.1 % of 10 bar", "0.5 % of reading")
    assert not hard.reached
    assert 1.96 * hard.floor_ln_c > 0.01


def test_the_first_order_formula_agrees_with_the_model(section_of):
    plan = plan_test(section_of())
    for one in plan.expected:
        assert one.ln_c == pytest.approx(one.ln_c_first_order, rel=0.2)


def test_more_of_everything_never_makes_it_worse(section_of):
    plan = plan_test(section_of())
    middle = {(option.of, option.value): option.expected[1].ln_c for option in plan.options}
    for of in ("tap spacing", "number of flows", "time each is held"):
        values = [value for (name, _), value in middle.items() if name == of]
        assert all(b <= a * 1.02 for a, b in itertools.pairwise(values)), of
    assert sum(share for _, share in plan.budget) == pytest.approx(1.0)


def test_flows_span_enough_and_stay_turbulent(section_of):
    plan = plan_test(section_of())
    flows = np.array(plan.flows_m3_s)
    assert flows[-1] == pytest.approx(0.03)
    assert flows[-1] / flows[0] > 2.5
    assert plan.volume_m3 == pytest.approx(float(flows.sum()) * (plan.layout.hold_s + 120.0))


@pytest.mark.parametrize(
    ("old", "new", "check"),
    [
        ('static = "5 bar"', 'static = "2.6 bar"', "pressure left at the largest flow"),
        ('flow = "30 L/s"', 'flow = "60 L/s"', "velocity at the largest flow"),
        ('gauges = "0.1 % of 10 bar; 1 % of 10 bar"', 'gauges = "0.1 % of 4 bar"', "gauge range at rest"),
        ('flow = "30 L/s"', 'flow = "0.4 L/s"', "Reynolds number at the lowest flow"),
    ],
)
def test_each_limit_of_the_real_world_is_checked(section_of, old, new, check):
    checks = {one.what: one.passed for one in plan_test(section_of()).checks}
    assert checks[check]
    text = SECTION.replace(old, new)
    if "60 L/s" in new:
        text = text.replace('static = "5 bar"', 'static = "30 bar"')
    failed = {one.what: one.passed for one in plan_test(section_of(text)).checks}
    assert not failed[check]


def test_a_flow_the_supply_cannot_give_is_refused(section_of):
    with pytest.raises(InputError, match=r"the supply cannot give 90 L/s: even with a new wall"):
        plan_test(section_of(SECTION.replace('flow = "30 L/s"', 'flow = "90 L/s"')))


def test_a_section_without_a_plan_says_what_to_write(section_of):
    with pytest.raises(InputError, match=r"there is no \[plan\] table"):
        plan_test(section_of(SECTION.split("[plan]", maxsplit=1)[0]))


@pytest.mark.parametrize(
    ("line", "message"),
    [
        ('c = "0 %"', "cannot be wanted"),
        ("flows = 100", "more than a day holds"),
        ('hold = "0 min"', "is not positive"),
        ('residual = "-1 bar"', "is negative"),
        ('gauges = "0.1 %"', "gauges"),
    ],
)
def test_wishes_that_make_no_plan_are_placed(section_of, line, message):
    key = line.split(" = ", maxsplit=1)[0]
    text = "\n".join(one for one in SECTION.splitlines() if not one.startswith(f"{key} = ") or "bar" in key)
    with pytest.raises(InputError, match=message) as caught:
        section_of(f"{text}\n{line}\n")
    assert f"plan.{key}" in str(caught.value)


def test_planned_and_found_uncertainty_agree(section_of):
    """Over repeated simulated tests the spread of what is found is the planned one; a study holds it closer."""
    section = section_of()
    layout = plan_test(section).layout
    planned = expected(section, section.wishes, layout, 5e-4)
    ln_c, ln_roughness = spread_found(section, layout, 5e-4, tests=120, seed=23)
    assert ln_c == pytest.approx(planned.ln_c, rel=0.2)
    assert ln_roughness == pytest.approx(planned.ln_roughness, rel=0.2)


def fill_in(plan, roughness):
    """The table typed in by a crew on a pipe of known wall."""
    rows = list(csv.reader(io.StringIO(crew_table(plan))))
    flows = [0.0, *planned_flows(plan.section, plan.layout), 0.0]
    head = head_loss(np.array(flows) + 1e-12, bore=0.15, length=300.0, roughness=roughness, viscosity=1.236e-6)
    lines = [rows[0]]
    for row, flow, loss in zip(rows[1:], flows, head, strict=True):
        upper = 500.0 - 30.0 * (flow / 0.03) ** 2
        lower = upper - 999.5 * 9.80665e-3 * (loss - 1.0)
        lines.append([row[0], f"{flow * 1e3:.2f}", f"{upper:.1f}", f"{lower:.1f}", "12.0"])
    return "\n".join(",".join(f'"{cell}"' for cell in line) for line in lines) + "\n"


def test_the_sheet_filled_in_is_read_as_a_log(section_of, tmp_path, capsys):
    section = section_of()
    plan = plan_test(section)
    log = tmp_path / "typed.csv"
    log.write_text(fill_in(plan, 8e-4), encoding="utf-8")
    assert (
        main(["assess", str(tmp_path), str(log), "--out", str(tmp_path / "out"), "--json", str(tmp_path / "r.json")])
        == 0
    )
    record = json.loads((tmp_path / "r.json").read_text(encoding="utf-8"))
    reach = record["campaigns"][0]["reaches"][0]
    assert reach["state"] == "measured"
    low, high = reach["roughness_mm"]["measurement"]
    assert low < 0.8 < high
    assert record["campaigns"][0]["statics"] == 2
    capsys.readouterr()


def test_the_command_writes_plan_sheet_table_and_record(section_of, tmp_path, capsys):
    section_of()
    assert main(["plan", str(tmp_path), "--out", str(tmp_path / "out")]) == 0
    printed = capsys.readouterr().out
    assert "worth the trip" in printed
    names = {path.name for path in (tmp_path / "out").iterdir()}
    stem = "invented-main"
    assert names == {
        f"{stem}-{end}" for end in ("plan.html", "test-sheet.html", "test-sheet.pdf", "readings.csv", "plan.json")
    }
    record = json.loads((tmp_path / "out" / f"{stem}-plan.json").read_text(encoding="utf-8"))
    assert record["reached"] is True
    assert main(["plan", str(tmp_path), "--out", str(Path(tmp_path) / "section.toml")]) == 2


def test_what_is_printed_holds_what_the_crew_needs(section_of):
    plan = plan_test(section_of())
    html = sheet_html(crew_sheet(plan))
    for text in ("static before", "static after", "140 kPa (20 psi)", "Vent both hoses", "10.5 L/s", "Crew leader"):
        assert text in html
    report = sheet_html(plan_sheet(plan))
    for text in (
        "What it could see",
        "What other choices would give",
        "Limits of the real world",
        "first-order formula",
    ):
        assert text in report
    assert len(plan_summary(plan).splitlines()) < 25
    json.dumps(plan_record(plan), allow_nan=False)


def test_a_smooth_wall_is_planned_for_too(section_of):
    section = section_of()
    layout = Layout(
        top_flow_m3_s=0.03,
        flows=4,
        hold_s=60.0,
        length_m=300.0,
        gauge=section.taps[0].accuracy,
        meter=replace(section.meter.accuracy),
    )
    found = expected(section, section.wishes, layout, 0.0)
    assert np.isinf(found.ln_roughness)
    assert found.ln_c > 0.0
