"""The rooms of the house: imports run down it, never back up, and the program's face stays light."""

import ast
import re
import subprocess
import sys
from pathlib import Path

import pytest

HOUSE = Path(__file__).parent.parent / "fieldfit"
MAY_IMPORT = {
    "hydraulics": set(),
    "field": {"hydraulics"},
    "inference": {"hydraulics", "field"},
    "decisions": {"hydraulics", "field", "inference"},
    "report": {"hydraulics", "field", "inference", "decisions"},
}


def imported_rooms(path):
    """Rooms that a module imports, wherever in the file."""
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        names = []
        if isinstance(node, ast.ImportFrom) and node.module:
            names = [node.module]
        elif isinstance(node, ast.Import):
            names = [alias.name for alias in node.names]
        for name in names:
            parts = name.split(".")
            if parts[0] == "fieldfit" and len(parts) > 1:
                yield parts[1]


@pytest.mark.parametrize("room", MAY_IMPORT)
def test_imports_run_down_the_house(room):
    files = sorted((HOUSE / room).rglob("*.py"))
    assert files
    for path in files:
        allowed = MAY_IMPORT[room] | {room, "errors"}
        wrong = set(imported_rooms(path)) - allowed
        assert not wrong, f"{path.relative_to(HOUSE)} imports {sorted(wrong)}"


def test_only_the_command_line_knows_typer_and_nobody_pyplot():
    for path in HOUSE.rglob("*.py"):
        text = path.read_text(encoding="utf-8")
        assert not re.search(r"import.*pyplot", text), path
        assert path.name == "cli.py" or not re.search(r"import typer|from typer", text), path


def test_the_command_line_loads_nothing_heavy():
    code = (
        "import sys, fieldfit.cli; "
        "print(*[n for n in ('numpy', 'scipy', 'pandas', 'lmfit', 'matplotlib', 'pint', 'jinja2') if n in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.split() == []


def test_files_hold_one_noun():
    long = {
        path.name: count for path in HOUSE.rglob("*.py") if (count := len(path.read_text("utf-8").splitlines())) > 310
    }
    assert long == {}
