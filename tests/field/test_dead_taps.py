import numpy as np
import pytest
from survey_maker import exact_day, old_main, read

from fieldfit.field.dead_taps import bridge_dead_taps
from fieldfit.field.log_file import read_log
from fieldfit.field.reaches import reach_readings
from fieldfit.field.screens import DEAD_TAP, MISSING

FIRST, LAST = 90, 150


def spoiled(column, what, taps=slice(None)):
    """Replace one column of some rows; keep only some of the taps in the section file."""

    def edit(section, log):
        rows = [line.split(",") for line in log.splitlines()]
        for row in rows[FIRST:LAST]:
            row[column] = what
        parts = section.split("\n[[tap]]")
        kept = [parts[0], *parts[1:][taps]]
        return "\n[[tap]]".join(kept), "\n".join(",".join(row) for row in rows) + "\n"

    return edit


@pytest.fixture(scope="module")
def day():
    return exact_day(old_main())


@pytest.mark.parametrize("what", ["", "412.0", "9999"], ids=["silent", "stuck", "out of range"])
def test_a_tap_that_is_dead_leaves_its_rows_to_the_others(day, tmp_path, what):
    _, _, screening, plateaus = read(day, tmp_path, spoiled(4, what))
    lost = np.isnan(plateaus.pressure_pa)
    assert np.flatnonzero(np.any(lost, axis=1)).tolist() == [2]
    assert 1 <= np.count_nonzero(lost[2]) <= 3
    rows = screening.plateau[FIRST + 10 : LAST - 10]
    assert np.count_nonzero(rows) > 0.5 * rows.size
    assert np.all(np.isfinite(plateaus.random_pa[[0, 3, 4]]))


def test_reaches_beside_it_say_so_and_the_others_go_on(day, tmp_path):
    section, _, _, plateaus = read(day, tmp_path, spoiled(4, ""))
    dead = set(plateaus.number[np.isnan(plateaus.pressure_pa[2])].tolist())
    for reach in range(5):
        readings = reach_readings(plateaus, section, reach)
        aside = {number for number, why in readings.set_aside if why == DEAD_TAP}
        assert aside == (dead if reach in {1, 2} else set())
        assert np.all(np.isfinite(readings.head_loss_m))
        assert set(readings.number.tolist()).isdisjoint(aside)


def test_what_is_filled_in_comes_near_to_what_was_lost(day, tmp_path):
    section, *_ = read(day, tmp_path / "a", spoiled(4, ""))
    log = read_log(tmp_path / "a" / "log.csv", section)
    bridged, dead = bridge_dead_taps(log, section)
    _, whole, *_ = read(day, tmp_path / "b")
    assert np.flatnonzero(dead[2]).tolist() == list(range(FIRST - 1, LAST - 1))
    assert bridged.pressure_pa[2] == pytest.approx(whole.pressure_pa[2], abs=2500.0)
    assert np.all(bridged.reason[dead[2]] == "")


def test_single_gaps_stay_gaps(day, tmp_path):
    def edit(section, log):
        rows = [line.split(",") for line in log.splitlines()]
        for row in (40, 80, 120):
            rows[row][4] = ""
        return section, "\n".join(",".join(row) for row in rows) + "\n"

    _, _, screening, plateaus = read(day, tmp_path, edit)
    assert screening.reason[[39, 79, 119]].tolist() == [MISSING] * 3
    assert np.all(np.isfinite(plateaus.pressure_pa))


def test_with_two_taps_a_dead_one_ends_the_reading(day, tmp_path):
    _, _, screening, plateaus = read(day, tmp_path, spoiled(2, "", slice(0, 2)))
    assert np.all(screening.reason[FIRST - 1 : LAST - 1] == MISSING)
    assert np.all(np.isfinite(plateaus.pressure_pa))


def test_rows_without_flow_or_with_one_tap_alive_stay_out(day, tmp_path):
    def edit(section, log):
        rows = [line.split(",") for line in log.splitlines()]
        for row in rows[FIRST:LAST]:
            row[2:7] = [""] * 5
        return section, "\n".join(",".join(row) for row in rows) + "\n"

    _, _, screening, _ = read(day, tmp_path, edit)
    assert np.all(screening.reason[FIRST - 1 : LAST - 1] == MISSING)
