"""Words in, words and exit status out: the statuses 0, 1 and 2 end to end, and never a traceback."""

import json
import os
import subprocess
import sys
from pathlib import Path

import pytest
import typer

import fieldfit.assessment
from fieldfit.cli import app, main

ROOT = Path(__file__).resolve().parents[1]
SAMPLE = ROOT / "sample_data" / "kiln_cooling"
COMMANDS = typer.main.get_command(app).commands
OIL_SECTION = """
name = "Lacquer transfer line"
bore = "52.5 mm"
fluid = { name = "lacquer", density = "900 kg/m3", viscosity = "100 cSt" }
temperature = "20 degC"
[flow]
column = "flow"
accuracy = "0.5 % of reading"
[[tap]]
column = "upstream"
station = "0 m"
elevation = "1 m"
accuracy = "0.25 % of 10 bar"
[[tap]]
column = "downstream"
station = "38.2 m"
elevation = "1 m"
accuracy = "0.25 % of 10 bar"
"""
OIL_SHEET = "flow [L/s],upstream [kPa],downstream [kPa]\n0,300,300\n1.5,350,322\n3.0,400,344\n"


@pytest.fixture
def lacquer(tmp_path):
    """A line so viscous that its flow is laminar: the readings carry no roughness."""
    (tmp_path / "section.toml").write_text(OIL_SECTION, "utf-8")
    (tmp_path / "sheet.csv").write_text(OIL_SHEET, "utf-8")
    return tmp_path


def test_readings_that_allow_no_answer_end_with_1_and_a_report(lacquer, capsys):
    assert main(["assess", str(lacquer), "--out", str(lacquer / "out")]) == 1
    printed = capsys.readouterr().out
    assert "no estimate" in printed
    assert "laminar" in printed
    record = json.loads((lacquer / "out" / "lacquer-transfer-line.json").read_text("utf-8"))
    assert record["campaigns"][0]["reaches"][0]["state"] == "no estimate"
    assert (lacquer / "out" / "lacquer-transfer-line.html").is_file()


@pytest.mark.parametrize(
    ("words", "said"),
    [
        ([], "Usage"),
        (["asses", "x"], "assess"),
        (["assess"], "Missing argument"),
        (["assess", "x", "--jsn", "y"], "--json"),
        (["assess", "x", "--json"], "requires an argument"),
        (["assess", "no such folder"], 'fieldfit start "no such folder"'),
        (["assess", str(SAMPLE), "no-such-log.csv"], "no-such-log.csv: there is no such log"),
        (["assess", str(SAMPLE), str(SAMPLE)], "this is a folder, not a log"),
        (["assess", str(SAMPLE), *[str(SAMPLE / "2026-05-12.csv")] * 2], "this log is named twice"),
        (["accept", str(SAMPLE)], "there is no [contract] table"),
        (["plan", str(SAMPLE)], "there is no [plan] table"),
        (["assess", str(SAMPLE / "2026-05-12.csv")], "this is a log, not a section file"),
        (["assess", str(ROOT / "tests")], "no section.toml in the folder"),
        (["start"], "Missing argument"),
    ],
)
def test_wrong_words_end_with_2_and_say_what_to_do(words, said, capsys, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    assert main(words) == 2
    both = capsys.readouterr()
    assert said in both.err + both.out
    assert "Traceback" not in both.err
    assert list(tmp_path.iterdir()) == []


@pytest.fixture(scope="module")
def found():
    """One assessment for all tests of what happens after it."""
    return fieldfit.assessment.assess(SAMPLE)


@pytest.fixture
def assessed(found, monkeypatch):
    """Every assessment comes out the same, at once."""
    monkeypatch.setattr(fieldfit.assessment, "assess", lambda *_: found)


@pytest.mark.usefixtures("assessed")
@pytest.mark.parametrize("option", ["--out", "--json"])
@pytest.mark.parametrize("place", ["taken/deeper", "taken"])
def test_a_place_that_cannot_be_written_ends_with_2(option, place, tmp_path, capsys):
    blocked = tmp_path / place
    (tmp_path / "taken").touch()
    if option == "--json" and place == "taken":
        (tmp_path / "taken").unlink()
        blocked.mkdir()
    # A later option of the same name wins.
    words = ["assess", str(SAMPLE), "--out", str(tmp_path / "out"), option, str(blocked)]
    assert main(words) == 2
    said = capsys.readouterr().err
    assert said.startswith(f"{blocked}: it cannot be written")
    assert said.endswith(f"Name another place with {option}.\n")
    assert not list(tmp_path.rglob("*.part"))


@pytest.mark.skipif(os.name == "nt", reason="Windows has no devices in folders")
@pytest.mark.usefixtures("assessed")
def test_a_device_stays_where_it_is(tmp_path):
    assert main(["assess", str(SAMPLE), "--out", str(tmp_path), "--json", os.devnull]) == 0
    assert not Path(os.devnull).is_file()
    assert not list(tmp_path.rglob("*.part"))


def test_stopping_it_ends_with_2(monkeypatch, capsys):
    def interrupted(*_):
        raise KeyboardInterrupt

    monkeypatch.setattr(fieldfit.assessment, "assess", interrupted)
    assert main(["assess", str(SAMPLE)]) == 2
    assert capsys.readouterr().err == "Stopped.\n"


def run(tmp_path, *words, **how):
    """Run it as a program of its own."""
    return subprocess.run(
        [sys.executable, "-m", "fieldfit", *words], cwd=tmp_path, stderr=subprocess.PIPE, check=False, **how
    )


def test_a_reader_that_hangs_up_leaves_no_traceback(tmp_path):
    read, write = os.pipe()
    os.close(read)
    with os.fdopen(write, "wb") as pipe:
        done = run(tmp_path, "assess", str(SAMPLE), stdout=pipe)
    assert b"Traceback" not in done.stderr


def test_a_terminal_that_lacks_a_letter_still_gets_the_answer(tmp_path):
    section = (SAMPLE / "section.toml").read_text("utf-8").replace("Kiln cooling supply", "Οδός 7")
    (tmp_path / "section.toml").write_text(section, "utf-8")
    terminal = os.environ | {"PYTHONIOENCODING": "cp1252"}
    log = SAMPLE / "2026-05-12.csv"
    done = run(tmp_path, "assess", ".", str(log), stdout=subprocess.PIPE, env=terminal)
    assert done.returncode == 0, done.stderr
    assert done.stdout.decode("cp1252").startswith("???? 7 (carbon steel, bore 52.50 ± 0.26 mm)")


@pytest.mark.parametrize("words", [[], *([name] for name in COMMANDS)], ids=["fieldfit", *COMMANDS])
def test_help_has_an_example(words, capsys):
    assert main([*words, "--help"]) == 0
    shown = " ".join(capsys.readouterr().out.split())
    assert f"Example: fieldfit {' '.join(words)}" in shown


def test_it_tells_its_version(capsys):
    assert main(["--version"]) == 0
    assert capsys.readouterr().out == f"fieldfit {fieldfit.__version__}\n"
