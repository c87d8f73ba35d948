"""README: its commands run, its tables are complete, its numbers are today's."""

import json
import re
import shlex
import subprocess
import sys
from pathlib import Path

import pytest
import typer

from fieldfit.cli import app, main
from fieldfit.field.accuracy import accuracy
from fieldfit.field.blank_section import ABOUT
from fieldfit.field.instrument_classes import ASME_GRADES, EN_CLASSES, METER_CLASSES
from fieldfit.field.screens import SCREENS
from fieldfit.field.section_keys import KEYS, LISTS, TABLES
from fieldfit.field.unit_spellings import OFFERED
from fieldfit.hydraulics.fitting_losses import FITTING_KINDS
from fieldfit.hydraulics.materials import MATERIALS
from fieldfit.hydraulics.pipe_sizes import EXAMPLES

ROOT = Path(__file__).resolve().parents[1]
README = (ROOT / "README.md").read_text("utf-8")
BLOCKS = re.findall(r"(?ms)^```(\w+)\n(.*?)^```$", README)
VENV = "python3 -m venv .venv && .venv/bin/pip install -q "


def part(heading):
    """The text under a heading, up to the next of its level."""
    return re.search(rf"(?ms)^## {heading}\n(.*?)(?=^## |\Z)", README)[1]


def blocks(kind, text=README):
    """Every block of code of a kind."""
    return [code for its_kind, code in re.findall(r"(?ms)^```(\w+)\n(.*?)^```$", text) if its_kind == kind]


def table(*head):
    """Rows of the table with this heading."""
    found = re.search(rf"(?m)^\| {re.escape(' | '.join(head))} \|\n\|[-|]+\n((?:\|.*\n)*)", README)
    assert found, f"README has no table with the heading {head}"
    return [[cell.strip() for cell in re.split(r"(?<!\\)\|", row)[1:-1]] for row in found[1].splitlines()]


def assert_rows(rows, *head):
    """Hold a table to its rows; the message is the table as it should be."""
    lines = [" | ".join(cells) for cells in (head, ["---"] * len(head), *rows)]
    assert table(*head) == [list(row) for row in rows], "\n".join(f"| {line} |" for line in lines)


@pytest.fixture
def folder(tmp_path, monkeypatch):
    """A folder with the sample data in it, and the small section that README shows."""
    (tmp_path / "sample_data").symlink_to(ROOT / "sample_data", target_is_directory=True)
    (tmp_path / "orchard_bank").mkdir()
    (tmp_path / "orchard_bank" / "section.toml").write_text(blocks("toml")[0], "utf-8")
    (tmp_path / "orchard_bank" / "sheet.csv").write_text(blocks("csv")[0], "utf-8")
    monkeypatch.chdir(tmp_path)
    return tmp_path


@pytest.mark.parametrize(("heading", "installs"), [("Run it", "."), ("Test it", '".[dev,liquids]"')])
def test_two_commands_do_for_a_newcomer(heading, installs):
    (command,) = blocks("sh", part(heading))
    assert command.count("\n") == 1
    assert command.startswith(f"{VENV}{installs} && .venv/bin/")


def test_the_test_command_runs_pytest():
    assert blocks("sh", part("Test it"))[0].endswith("&& .venv/bin/python -m pytest -q\n")


def test_the_run_command_prints_what_the_example_shows(folder, capsys):
    words = shlex.split(blocks("sh", part("Run it"))[0])
    assert words[words.index("&&", words.index("install")) + 1] == ".venv/bin/fieldfit"
    assert main(words[words.index(".venv/bin/fieldfit") + 1 :]) == 0
    shown, printed = blocks("text", part("A worked example"))[0], capsys.readouterr().out
    assert shown == printed, f"the answer is now:\n{printed}"


def examples():
    """Every line of every other example for a shell."""
    first = {blocks("sh", part(heading))[0] for heading in ("Run it", "Test it")}
    return [line for code in blocks("sh") if code not in first for line in code.splitlines()]


@pytest.mark.parametrize("line", examples())
def test_every_example_runs(folder, line):
    words = shlex.split(line)
    assert words[0] == "fieldfit"
    if words[1] == "start":
        (folder / words[2] / "section.toml").unlink()
    assert main(words[1:]) == 0


@pytest.mark.parametrize("code", blocks("python"))
def test_every_python_example_runs(folder, code):
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr
    assert done.stdout.startswith("measured 0.0003")


def test_the_example_of_a_log_is_one(folder):
    assert len(blocks("csv")) == 2
    (folder / "short.csv").write_text(blocks("csv")[1], "utf-8")
    assert main(["assess", "sample_data/kiln_cooling", "short.csv"]) == 1


def test_every_file_it_points_to_is_there():
    targets = re.findall(r"\]\(([^)#:]+)\)", README)
    assert targets
    assert [target for target in targets if not (ROOT / target).exists()] == []


def test_every_command_and_option_has_its_row():
    commands = typer.main.get_command(app)
    options = {("fieldfit", "--version")}
    for name, command in commands.commands.items():
        options |= {(name, option) for its in command.params for option in its.opts if option.startswith("--")}
    rows = table("command", "option", "what it does")
    shown = {(command.strip("`"), option.strip("`").split()[0]) for command, option, _ in rows if option}
    assert shown - {("every command", "--help")} == {pair for pair in options if pair[1] != "--help"}
    headed = [command.strip("`").split()[1] for command, option, _ in rows if not option]
    assert sorted(headed) == sorted(commands.commands)


def key_tables():
    """README's tables of keys, as they should be."""
    lines = []
    for name in dict.fromkeys(key.table for key in KEYS):
        called = {
            **dict.fromkeys(TABLES, f"[{name}]"),
            **dict.fromkeys(LISTS, f"[[{name}]]"),
            "fluid": f"{name} = {{ }}",
        }
        about = {"": "Top of the file.", "fluid": "A liquid of your own.", **ABOUT}[name]
        lines += ["", f"`{called[name]}` {about}" if name else about, ""]
        lines += ["| key | needed | example | what it says |", "|---|---|---|---|"]
        lines += [
            f"| `{key.name}` | {'yes' if key.required else ''} | `{key.example}` | {key.meaning} |"
            for key in KEYS
            if key.table == name
        ]
    return "\n".join(lines) + "\n"


def test_every_key_has_its_row():
    assert "\n" + key_tables() in README, key_tables()


def test_every_reason_has_its_row():
    rows = [[screen.reason, screen.asks, ", ".join(f"`{name}`" for name in screen.limits)] for screen in SCREENS]
    assert_rows(rows, "set aside because", "what it means", "limits that steer it")


def test_every_kind_of_value_has_its_units():
    assert_rows([[name, " ".join(f"`{unit}`" for unit in units)] for name, units in OFFERED.items()], "for", "such as")


def test_every_form_of_accuracy_is_understood():
    rows = table("of", "accuracy", "what it means")
    for dimension, text, _ in rows:
        assert accuracy(text.strip("`"), dimension).text
    said = {text.split()[0].strip("`"): meaning for _, text, meaning in rows}
    for standard, names in (("ASME", ASME_GRADES), ("EN", EN_CLASSES), ("ISO", METER_CLASSES)):
        listed = re.search(r"(?:grade|class) ([\w., ]+? or \w[\w.]*)", said[standard])[1]
        assert re.split(r", | or ", listed) == list(names)


def test_every_form_of_pipe_size_is_shown():
    assert_rows([[f"`{example}`"] for example in EXAMPLES], "pipe")


def test_every_material_and_fitting_is_listed():
    materials = re.search(r"(?s)are known for: (.*?)\. Other", part("The section file"))[1]
    assert " ".join(materials.split()).split(", ") == [row.name for row in MATERIALS]
    kinds = re.search(r"(?s)a `kind`: (.*?)\.\n", part("The section file"))[1]
    assert re.findall(r"`([^`]+)`", " ".join(kinds.split())) == list(FITTING_KINDS)


def test_every_key_of_the_record_is_there():
    record = json.loads((ROOT / "reports" / "kiln-cooling-supply.json").read_text("utf-8"))
    places = [place for places, _ in table("key", "what it holds") for place in re.findall(r"`([^`]+)`", places)]
    assert "campaigns/reaches/roughness_mm" in places
    for place in places:
        value = record
        for key in place.split("/"):
            value = (value[0] if isinstance(value, list) else value)[key]


def test_every_state_is_explained():
    assert [state for state, *_ in table("state", "when", "what is given")] == [
        "`measured`",
        "`upper limit`",
        "`no estimate`",
    ]
