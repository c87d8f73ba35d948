import numpy as np
import pytest
from crew import bring
from fluids.friction import Colebrook
from instruments import Pipe, Plan
from simulator import simulate, water
from survey_maker import HEIGHTS, KIT, TREMBLING, exact_day, old_main, readings_of, surveyed

from fieldfit.assessment import read_campaign
from fieldfit.field.reaches import reach_readings
from fieldfit.field.section_file import read_section
from fieldfit.field.survey_readings import survey_readings
from fieldfit.inference.fit import fit_reach
from fieldfit.inference.head_model import head_model
from fieldfit.inference.survey_fit import fit_survey, free_walls, widened_noise
from fieldfit.inference.survey_model import survey_model

VALVE = (0.0, 0.0, 25.0, 0.0, 0.0)


def friction(day, reach, flow):
    """Friction factor of the true pipe by the fluids library, at one flow."""
    line = day.line
    bore = line.reach_bore_m[reach] if line.reach_bore_m else line.bore_m
    rough = np.broadcast_to(line.roughness_m, len(line.station_m) - 1)[reach]
    _, viscosity = water(line.temperature_degc)
    return Colebrook(4.0 * flow / (np.pi * bore * viscosity), rough / bore)


@pytest.fixture(scope="module")
def valve(tmp_path_factory):
    return surveyed(exact_day(old_main(hidden_k=VALVE)), tmp_path_factory.mktemp("valve"))


@pytest.mark.parametrize("statics", ["both", "none"])
def test_two_taps_give_the_answer_of_a_single_reach(tmp_path, statics):
    pipe = Pipe(bore_m=0.1016, length_m=300.0, roughness_m=0.8e-3, fitting_k=2.0, elevation_m=(10.0, 12.0))
    plan = Plan(flows_m3_s=(5e-3, 8e-3, 11e-3, 13e-3), supply_pa=5.5e5, statics=statics)
    files = bring(simulate(np.random.default_rng(5), pipe, KIT, plan), tmp_path)
    section = read_section(files[0])
    log, screening, plateaus = read_campaign(section, files[1])
    alone = fit_reach(head_model(reach_readings(plateaus, section, 0), section.correlation))
    model = survey_model(survey_readings(plateaus, section, (log, screening)), section.correlation)
    noise, reduced = widened_noise(model)
    together = fit_survey(model, free_walls(model), noise)
    value, standard = together.of_reach(0)
    assert model.pipe.reference_flow_m3_s == pytest.approx(alone.model.reference.flow_m3_s, rel=1e-3)
    assert value == pytest.approx(alone.ln_friction, abs=0.02 * alone.standard)
    assert standard == pytest.approx(alone.standard, rel=0.01)
    assert max(reduced, 0.01) == pytest.approx(max(alone.reduced_chi_square, 0.01), rel=0.05)


@pytest.mark.parametrize("kind", ["plain", "two bores", "unknown side flow"])
def test_slopes_are_those_of_the_predicted_heads(tmp_path, kind):
    line = old_main(reach_bore_m=(0.1016, 0.1016, 0.08, 0.08, 0.1016)) if kind == "two bores" else old_main()

    def edit(section, log):
        branch = '\n[[branch]]\nstation = "220 m"\nflow = "unknown"\n' if kind == "unknown side flow" else ""
        return section + '\n[[fitting]]\nname = "bend"\nk = 0.8\nstation = "100 m"\n' + branch, log

    readings = readings_of(exact_day(line), tmp_path, edit)
    model = survey_model(readings, readings.section.correlation)
    rng = np.random.default_rng(0)
    walls, u = np.full(5, -3.4) + rng.normal(0, 0.05, 5), rng.normal(0, 0.3, len(model.errors.names))
    local, branch, step = rng.uniform(0, 5, 5), 1.2e-3 * (kind == "unknown side flow"), 1e-6
    found = model.predict(walls, u, local, branch)

    def slope(change, one):
        return (change(step * one) - change(-step * one)) / (2.0 * step)

    for row, one in zip(found.by_wall, np.eye(5), strict=True):
        assert row == pytest.approx(slope(lambda d: model.predict(walls + d, u, local, branch).head_m, one), abs=1e-6)
    for row, one in zip(found.by_local, np.eye(5), strict=True):
        assert row == pytest.approx(slope(lambda d: model.predict(walls, u, local + d, branch).head_m, one), abs=1e-6)
    for row, one in zip(found.by_error, np.eye(len(u)), strict=True):
        assert row == pytest.approx(slope(lambda d: model.predict(walls, u + d, local, branch).head_m, one), abs=1e-6)
    numeric = slope(lambda d: model.predict(walls, u, local, branch + 1e-3 * d).head_m, 1.0) * 1e3
    assert found.by_branch == pytest.approx(numeric, abs=1e-3)


def test_a_shut_valve_is_found_between_its_taps_with_its_size(valve):
    first = valve.likely[0]
    assert (first.cause, first.reaches) == ("local loss", (2,))
    low, high = first.local_k[0].measurement
    assert low < 25.0 < high
    assert high - low < 2.5
    _, head = first.local_k[0].best, first.head_m[0]
    assert head == pytest.approx(25.0 * (13e-3 / (np.pi * 0.1016**2 / 4)) ** 2 / 2 / 9.80665, rel=0.04)
    assert valve.same_wall.probability < 1e-6


def test_a_bad_reach_of_one_gap_is_not_told_from_a_local_loss(tmp_path):
    valve = surveyed(exact_day(old_main(hidden_k=VALVE), kit=TREMBLING), tmp_path)
    assert {valve.likely[index].cause for index in (0, *valve.alike)} == {"local loss", "bad reach"}
    assert valve.apart > 10.0
    walls = [valve.reaches[2].rival, valve.reaches[2].explained]
    low, high = sorted(wall.hazen_williams_c.best for wall in walls)
    assert low < 0.8 * high
    assert [reach.rival for index, reach in enumerate(valve.reaches) if index != 2] == [None] * 4


def test_taken_together_the_valve_leaves_the_wall_alone(valve):
    for reach in valve.reaches:
        low, high = reach.explained.friction_factor.measurement
        assert low < Colebrook(reach.explained.reynolds, 0.6e-3 / 0.1016) < high


def test_a_bad_stretch_is_a_slope_and_not_a_step(tmp_path):
    day = exact_day(old_main(roughness_m=(0.6e-3, 0.6e-3, 2e-3, 2e-3, 0.6e-3)))
    found = surveyed(day, tmp_path)
    first = found.likely[0]
    assert (first.cause, first.reaches, found.alike) == ("bad reach", (2, 3), ())
    assert first.probability > 0.9
    low, high = first.wall.roughness_m.with_correlation
    assert low < 2e-3 < high


def test_one_wall_from_end_to_end(tmp_path):
    found = surveyed(exact_day(old_main()), tmp_path)
    assert found.likely[0].cause == "one wall"
    assert found.same_wall.probability > 0.01
    assert found.same_wall.degrees_of_freedom == 4
    assert len(found.pooled) == 1
    low, high = found.pooled[0].roughness_m.measurement
    assert low < 0.6e-3 < high


@pytest.mark.parametrize(("share", "seen"), [(0.2, False), (2.0, True)])
def test_the_smallest_loss_that_could_be_seen_parts_what_is_seen_from_what_is_not(tmp_path, share, seen):
    smallest = surveyed(exact_day(old_main()), tmp_path / "sound").reaches[1].smallest_k
    hidden = (0.0, share * smallest, 0.0, 0.0, 0.0)
    found = surveyed(exact_day(old_main(hidden_k=hidden), seed=3), tmp_path / "hidden")
    assert (found.likely[0].cause in {"local loss", "bad reach"}) is seen
    if seen:
        assert found.likely[0].reaches == (1,)


def test_two_local_losses_are_both_placed(tmp_path):
    found = surveyed(exact_day(old_main(hidden_k=(0.0, 12.0, 0.0, 30.0, 0.0))), tmp_path)
    assert (found.likely[0].cause, found.likely[0].reaches) == ("two local losses", (1, 3))
    for band, true in zip(found.likely[0].local_k, (12.0, 30.0), strict=True):
        assert band.measurement[0] < true < band.measurement[1]


def test_velocity_heads_count_where_the_bore_changes(tmp_path):
    bores = (0.1016, 0.1016, 0.0700, 0.0700, 0.1016)
    day = exact_day(old_main(reach_bore_m=bores))
    found = surveyed(day, tmp_path)
    assert found.likely[0].cause == "one wall"
    for index, reach in enumerate(found.reaches):
        low, high = reach.wall.friction_factor.measurement
        assert low < friction(day, index, reach.wall.flow_m3_s) < high
        assert reach.wall.bore_m == bores[index]
    # Without velocity heads the first narrow reach would lose 0.45 m more at 13 L/s than it does.
    rise = (13e-3 / (np.pi / 4)) ** 2 * (0.07**-4 - 0.1016**-4) / 2 / 9.80665
    assert rise == pytest.approx(0.45, abs=0.01)


def branch(flow):
    """Add a side flow to the section file."""
    return lambda section, log: (section + f'\n[[branch]]\nname = "laundry"\nstation = "225 m"\nflow = "{flow}"\n', log)


def test_a_side_flow_that_is_known_leaves_one_wall(tmp_path):
    day = exact_day(old_main(side_flow=(225.0, 1.5e-3)))
    found = surveyed(day, tmp_path / "known", branch("1.5 L/s ± 2 %"))
    assert found.likely[0].cause == "one wall"
    assert found.side_flow is None
    # Unknown to the file, the same flow looks like a better pipe below it.
    assert surveyed(day, tmp_path / "silent").likely[0].cause != "one wall"


def test_a_side_flow_is_inferred_if_one_wall_serves_all(tmp_path):
    found = surveyed(exact_day(old_main(side_flow=(225.0, 1.5e-3))), tmp_path, branch("unknown"))
    side = found.side_flow
    assert side.name == "laundry"
    assert side.interval_m3_s[0] < 1.5e-3 < side.interval_m3_s[1]
    assert side.interval_m3_s[1] - side.interval_m3_s[0] < 0.3e-3
    free = side.free_interval_m3_s
    assert free[0] < 1.5e-3 < free[1]
    assert free[1] - free[0] > side.interval_m3_s[1] - side.interval_m3_s[0]


def test_a_dead_tap_is_stepped_over(tmp_path):
    def edit(section, log):
        rows = [line.split(",") for line in log.splitlines()]
        for row in rows[70:200]:
            row[4] = ""
        return section, "\n".join(",".join(row) for row in rows) + "\n"

    day = exact_day(old_main(hidden_k=VALVE))
    readings = readings_of(day, tmp_path / "a", edit)
    across = (readings.upper == 1) & (readings.lower == 3)
    assert 2 <= np.count_nonzero(across) < 5
    found = surveyed(day, tmp_path / "b", edit)
    assert (found.likely[0].cause, found.likely[0].reaches) == ("local loss", (2,))
    low, high = found.likely[0].local_k[0].measurement
    assert low < 25.0 < high


def test_neighbouring_head_losses_are_anti_correlated(tmp_path):
    readings = readings_of(exact_day(old_main(), kit=TREMBLING), tmp_path)
    noise = readings.noise_m2
    same = readings.plateau[:-1] == readings.plateau[1:]
    assert np.all(np.diag(noise, 1)[same] < 0.0)
    assert np.all(np.diag(noise, 1)[~same] == 0.0)
    assert np.all(np.linalg.eigvalsh(noise) > 0.0)


def test_the_grade_line_stands_on_the_survey(valve):
    grade = valve.grade
    assert grade.profile_m.tolist() == list(HEIGHTS)
    at_taps = np.interp(grade.station_m, grade.line_station_m, grade.fitted_m)
    assert np.all(np.abs(at_taps - grade.head_m) <= grade.bar_m + 0.05)
    step = grade.fitted_m[9] - grade.fitted_m[10]
    assert step == pytest.approx(valve.likely[0].head_m[0], rel=0.02)


def without_statics(section, log):
    """Leave the rows at rest out of the log."""
    rows = [line.split(",") for line in log.splitlines()]
    kept = [rows[0], *(row for row in rows[1:] if float(row[1]) > 1.0)]
    return section, "\n".join(",".join(row) for row in kept) + "\n"


def test_a_wrong_height_is_traced_to_its_tap(tmp_path):
    def edit(section, log):
        return without_statics(section.replace('"16.1 m', '"18.1 m'), log)

    found = surveyed(exact_day(old_main()), tmp_path / "wrong", edit)
    assert found.reduced_chi_square > 100.0
    assert found.suspect.column == "tap 4"
    assert found.suspect.offset_m == pytest.approx(2.0, abs=0.1)
    assert found.suspect.share > 0.9
    assert surveyed(exact_day(old_main()), tmp_path / "right", without_statics).suspect is None


def test_a_tap_that_was_dead_at_rest_is_left_out_and_the_valve_still_placed(tmp_path):
    def edit(section, log):
        rows = [line.split(",") for line in log.splitlines()]
        for row in rows[1:]:
            row[4] = "" if float(row[1]) < 1.0 else row[4]
        return section, "\n".join(",".join(row) for row in rows) + "\n"

    found = surveyed(exact_day(old_main(hidden_k=VALVE)), tmp_path, edit)
    assert (found.likely[0].cause, found.likely[0].reaches) == ("local loss", (1, 2))
    assert found.reaches[1].wall is None
    low, high = found.likely[0].local_k[0].measurement
    assert low < 25.0 < high
