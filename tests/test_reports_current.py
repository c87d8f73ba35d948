"""The committed reports: what the program writes today from the committed sample data."""

import importlib.util
import json
import re
import tomllib
from pathlib import Path

import pytest

from fieldfit.report.files import safe_name

ROOT = Path(__file__).resolve().parents[1]
REPORTS = ROOT / "reports"
AGAIN = "The reports are not current. Run: python sample_data/make_reports.py"
LARGEST = 2_000_000
LARGEST_PICTURE = 200_000


@pytest.fixture(scope="module")
def rebuilt(tmp_path_factory):
    spec = importlib.util.spec_from_file_location("make_reports", ROOT / "sample_data" / "make_reports.py")
    make = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(make)
    folder = tmp_path_factory.mktemp("reports")
    (folder / "left-from-an-earlier-run.html").touch()
    make.main(folder)
    return folder


def names(folder, ending="*"):
    return sorted(path.name for path in folder.glob(ending))


def test_every_section_has_its_report_and_nothing_else_is_there(rebuilt):
    assert names(REPORTS) == names(rebuilt), AGAIN
    sections = [tomllib.loads(path.read_text("utf-8")) for path in (ROOT / "sample_data").glob("*/section.toml")]
    assert len(sections) > 4
    for section in sections:
        assert any(name.startswith(safe_name(section["name"])) for name in names(REPORTS, "*.html"))


def test_they_stay_small():
    sizes = {path.name: path.stat().st_size for path in REPORTS.iterdir()}
    assert sum(sizes.values()) < LARGEST, sizes
    assert all(size < LARGEST_PICTURE for name, size in sizes.items() if name.endswith(".png"))


def leaves(value, place=""):
    """Every value of a record under the path that leads to it."""
    parts = value.items() if isinstance(value, dict) else enumerate(value) if isinstance(value, list) else ()
    found = {} if parts else {place: value}
    for key, part in parts:
        found |= leaves(part, f"{place}/{key}")
    return found


@pytest.mark.parametrize("name", names(REPORTS, "*.json"))
def test_records_hold_the_same_numbers(rebuilt, name):
    committed, current = (leaves(json.loads((folder / name).read_text("utf-8"))) for folder in (REPORTS, rebuilt))
    assert committed.keys() == current.keys(), AGAIN
    # Other versions of the libraries may round the last digits their own way.
    wrong = {
        place: (value, current[place])
        for place, value in committed.items()
        if current[place] != (pytest.approx(value, rel=1e-6, abs=1e-9) if isinstance(value, float) else value)
    }
    assert wrong == {}, AGAIN


def words(page):
    """A page without its drawings and the versions it was made with."""
    page = re.sub(r'<p id="versions">.*?</p>', "", page)
    return re.sub(r"<svg.*?</svg>", "", page, flags=re.DOTALL).splitlines()


@pytest.mark.parametrize("name", names(REPORTS, "*.html"))
def test_pages_say_the_same(rebuilt, name):
    committed, current = (words((folder / name).read_text("utf-8")) for folder in (REPORTS, rebuilt))
    assert committed == current, AGAIN


@pytest.mark.parametrize("name", names(REPORTS, "*.csv"))
def test_rows_are_the_same(rebuilt, name):
    assert (REPORTS / name).read_bytes() == (rebuilt / name).read_bytes(), AGAIN
