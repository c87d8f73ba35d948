"""Cold starts, as ratios to what the libraries alone cost.

Run it with ``pytest -m benchmark -s tests/benchmarks``.
"""

import os
import subprocess
import sys
import time
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
SAMPLE = ROOT / "sample_data" / "kiln_cooling"
RUNS = 7
HELLO = """
import typer
app = typer.Typer()
@app.command()
def greet(name: str):
    "Greet someone."
    print(name)
app(["--help"])
"""


def seconds(*words, folder):
    """Shortest of several cold runs."""
    best = float("inf")
    for _ in range(RUNS):
        start = time.perf_counter()
        done = subprocess.run(
            [sys.executable, *words],
            cwd=folder,
            capture_output=True,
            env={**os.environ, "PYTHONHASHSEED": "0"},
            check=False,
        )
        best = min(best, time.perf_counter() - start)
        assert done.returncode == 0, done.stderr
    return best


@pytest.mark.benchmark
def test_cold_starts(tmp_path):
    times = {
        "bare python": seconds("-c", "pass", folder=tmp_path),
        "typer hello --help": seconds("-c", HELLO, folder=tmp_path),
        "fieldfit --help": seconds("-m", "fieldfit", "--help", folder=tmp_path),
        "import lmfit, pandas, matplotlib.figure, typer": seconds(
            "-c", "import lmfit, pandas, matplotlib.figure, typer", folder=tmp_path
        ),
        "fieldfit assess, 300 rows, with report": seconds("-m", "fieldfit", "assess", str(SAMPLE), folder=tmp_path),
    }
    for name, value in times.items():
        print(f"{name:50s} {value:7.3f} s")
    start = times["fieldfit --help"] / times["typer hello --help"]
    whole = times["fieldfit assess, 300 rows, with report"] / times["import lmfit, pandas, matplotlib.figure, typer"]
    print(f"help over hello {start:.2f} (limit 1.5); assess over its libraries {whole:.2f} (limit 2)")
    assert start <= 1.5
    assert whole <= 2.0
