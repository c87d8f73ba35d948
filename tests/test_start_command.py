"""A newcomer's first hour: start a section, fill it in, assess it, as people's folders and editors make it."""

import json
import re
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

from fieldfit.cli import main

SAMPLE = Path(__file__).resolve().parents[1] / "sample_data" / "kiln_cooling"
LOG = "2026-05-12.csv"
FILLED_IN = (
    "Kiln cooling supply",
    "52.5 mm ± 0.5 %",
    "flow",
    "0.5 % of reading",
    "upstream",
    "0 m ± 0.02 m",
    "0.25 % of 10 bar",
    "downstream",
    "38.2 m ± 0.02 m",
    "0.25 % of 10 bar",
)


def roughness_mm(record):
    return json.loads(record.read_text("utf-8"))["campaigns"][0]["reaches"][0]["roughness_mm"]


def test_a_blank_file_filled_in_is_assessed(tmp_path, monkeypatch, capsys):
    monkeypatch.chdir(tmp_path)
    assert main(["start", "kiln 2/cooling supply"]) == 0
    folder = tmp_path / "kiln 2" / "cooling supply"
    assert f'fieldfit assess "{Path("kiln 2/cooling supply")}"' in capsys.readouterr().out
    shutil.copy(SAMPLE / LOG, folder)

    assert main(["assess", "kiln 2/cooling supply"]) == 2
    assert "is still to be filled in" in capsys.readouterr().err
    values = iter(FILLED_IN)
    file = folder / "section.toml"
    blank = file.read_text("utf-8")
    file.write_text(re.sub(r'(?m)^(\w+ = )"FILL IN"', lambda key: f'{key[1]}"{next(values)}"', blank), "utf-8")
    assert list(values) == []

    assert main(["assess", "kiln 2/cooling supply", "--json", "record.json"]) == 0
    assert capsys.readouterr().out.startswith("Kiln cooling supply (material unknown, bore 52.50 ± 0.26 mm)")
    low, high = roughness_mm(tmp_path / "record.json")["with_correlation"]
    assert low < 0.35 < high
    assert len(list((tmp_path / "reports").iterdir())) == 3


def test_nothing_is_overwritten(tmp_path, capsys):
    assert main(["start", str(tmp_path)]) == 0
    written = (tmp_path / "section.toml").read_bytes()
    capsys.readouterr()
    assert main(["start", str(tmp_path)]) == 2
    assert "nothing was overwritten" in capsys.readouterr().err
    assert (tmp_path / "section.toml").read_bytes() == written


def test_a_file_in_the_way_of_the_folder_is_named(tmp_path, capsys):
    (tmp_path / "taken").touch()
    assert main(["start", str(tmp_path / "taken")]) == 2
    assert "taken" in capsys.readouterr().err


@pytest.mark.parametrize("mark", [b"", b"\xef\xbb\xbf"], ids=["plain", "with a byte-order mark"])
def test_line_ends_of_any_editor_give_the_same_numbers(tmp_path, mark):
    for file in ("section.toml", LOG):
        (tmp_path / file).write_bytes(mark + (SAMPLE / file).read_bytes().replace(b"\n", b"\r\n"))
    for name, folder in (("theirs", tmp_path), ("ours", SAMPLE)):
        assert main(["assess", str(folder), "--out", str(tmp_path / name)]) == 0
    theirs, ours = (
        json.loads((tmp_path / name / "kiln-cooling-supply.json").read_text("utf-8"))["campaigns"][0]
        for name in ("theirs", "ours")
    )
    assert theirs["log"].pop("sha256") != ours["log"].pop("sha256")
    assert theirs == ours


def test_it_runs_from_any_folder_as_a_program(tmp_path):
    done = subprocess.run(
        [sys.executable, "-m", "fieldfit", "assess", str(SAMPLE), "--out", "their reports"],
        cwd=tmp_path,
        capture_output=True,
        text=True,
        encoding="utf-8",
        check=False,
    )
    assert done.returncode == 0, done.stderr
    assert re.search(r"(?m)^  roughness +0\.36 mm", done.stdout)
    assert [line.partition(": ")[0] for line in done.stderr.splitlines()] == ["Written"] * 3
    assert (tmp_path / "their reports" / "kiln-cooling-supply.html").is_file()


def test_the_python_way_in_shows_itself_in_a_notebook():
    import fieldfit

    finding = fieldfit.assess(SAMPLE, SAMPLE / LOG)
    assert isinstance(finding, fieldfit.Finding)
    shown = finding._repr_html_()
    assert "Worse than new" in shown
    assert shown.startswith("<iframe")


def test_reports_written_beside_the_log_are_not_taken_for_one(tmp_path, monkeypatch, capsys):
    shutil.copytree(SAMPLE, tmp_path, dirs_exist_ok=True)
    monkeypatch.chdir(tmp_path)
    for _ in range(2):
        assert main(["assess", ".", "--out", "."]) == 0, capsys.readouterr().err
    assert len(list(tmp_path.glob("*.csv"))) == 2
