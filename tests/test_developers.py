"""DEVELOPERS.md: what it lists is all there is."""

import re
import tomllib
from pathlib import Path

import pytest
from test_rooms import MAY_IMPORT

ROOT = Path(__file__).resolve().parents[1]
GUIDE = (ROOT / "DEVELOPERS.md").read_text("utf-8")


def first_cells(heading):
    """First cells of all tables under a heading."""
    part = re.search(rf"(?ms)^## {heading}\n(.*?)(?=^## |\Z)", GUIDE)[1]
    return [row.split("|")[1].strip() for row in re.findall(r"(?m)^\|.*", part)]


def test_every_room_is_on_the_plan():
    rooms = {cell.strip("`") for cell in first_cells("The plan of the house")}
    assert set(MAY_IMPORT) <= rooms


@pytest.mark.parametrize("folder", ["published", "studies", "benchmarks"])
def test_every_file_of_checks_is_listed(folder):
    files = {path.name for path in (ROOT / "tests" / folder).glob("test_*.py")}
    assert files == {name for name in files if f"{name}`" in GUIDE}


def test_every_file_it_names_is_there():
    named = set(re.findall(r"`((?:tests|sample_data|field|hydraulics|inference|report)/[\w/]+\.\w+)`", GUIDE))
    assert len(named) > 10
    assert [name for name in named if not (ROOT / name).exists() and not (ROOT / "fieldfit" / name).exists()] == []


def test_every_word_has_one_meaning():
    words = first_cells("One word for each thing")
    assert len(words) == len(set(words))


def test_every_dependency_has_its_reason():
    project = tomllib.loads((ROOT / "pyproject.toml").read_text("utf-8"))["project"]
    wanted = [*project["dependencies"], *(one for extra in project["optional-dependencies"].values() for one in extra)]
    names = {re.match(r"[\w-]+", requirement)[0] for requirement in wanted} - {"fieldfit"}
    told = {name for cell in first_cells("What it stands on") for name in re.findall(r"[\w-]+", cell)}
    assert names <= told, names - told
