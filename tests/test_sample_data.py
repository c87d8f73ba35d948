"""The sample data: as their script writes them, and answered as their truth says."""

import csv
import importlib.util
from pathlib import Path

import pytest

from fieldfit.assessment import assess

SAMPLES = Path(__file__).resolve().parents[1] / "sample_data"
LOGS = {
    "kiln_cooling": "2026-05-12.csv",
    "lantern_row": "2026-05-19.csv",
    "heron_lane": "2026-05-06.csv",
    "clay_pit": "sheet.csv",
}


@pytest.fixture(scope="module")
def truths():
    with (SAMPLES / "truth.csv").open(encoding="utf-8", newline="") as file:
        return {row["section"]: row for row in csv.DictReader(file)}


@pytest.fixture(scope="module")
def walls():
    return {
        name: assess(SAMPLES / name, SAMPLES / name / log).campaigns[0].reaches[0].wall for name, log in LOGS.items()
    }


def test_the_script_writes_what_is_committed(tmp_path):
    spec = importlib.util.spec_from_file_location("make_sample_data", SAMPLES / "make.py")
    make = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(make)
    make.HERE = tmp_path
    make.main()
    written = sorted(path.relative_to(tmp_path) for path in tmp_path.rglob("*.*"))
    assert len(written) == 17
    for path in written:
        assert differences((SAMPLES / path).read_bytes(), (tmp_path / path).read_bytes()) == [], path
        assert (SAMPLES / path).stat().st_size < 60_000


def differences(committed, written):
    """Cells that differ by more than the last digit, which may round the other way on another machine."""
    pairs = zip(cells(committed), cells(written), strict=True)
    return [(a, b) for a, b in pairs if a != b and abs(float(a) - float(b)) > 1.01 * 10.0 ** -len(a.partition(".")[2])]


def cells(content):
    return content.decode("utf-8").replace(";", ",").replace("\n", ",").split(",")


@pytest.mark.parametrize("name", LOGS)
def test_bands_hold_the_truth(walls, truths, name):
    low, high = walls[name].roughness_m.with_correlation
    assert low <= 1e-3 * float(truths[name]["roughness_mm"]) <= high
    low, high = walls[name].roughness_m.measurement
    assert low <= 1e-3 * float(truths[name]["equivalent_roughness_mm"]) <= high


def test_only_the_new_pipe_cannot_be_told_from_smooth(walls):
    assert {name for name, wall in walls.items() if wall.state == "upper limit"} == {"heron_lane"}
    assert all(wall.state == "measured" for name, wall in walls.items() if name != "heron_lane")
