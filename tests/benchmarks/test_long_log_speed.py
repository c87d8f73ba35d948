"""Long logs: time beside pandas' own reader, peak memory, and accuracy, all in one run.

Run it with ``pytest -m benchmark -s tests/benchmarks/test_long_log_speed.py``. The file of ten million rows takes half a
gigabyte of disk and is deleted afterwards; so are temporary columns of about the same size.

The reader is ``pandas.read_csv(engine="c", parse_dates=["time"])`` on the same file, in a process of its own like the
others; turns are taken, so that a busy machine hits all alike, and the shortest of each counts. *Statistics* is what
replaces it: from the file to plateaus with their means and noise, imports and the section file left out. The *whole command*
includes the start of the program, the fit, the page and the record; what of it grows with the file is shown by taking
off the same command on a small log.

Reading in two threads wins time only where a processor is free for each. On a machine that is busy with other work the
shared processors, not the program, decide the time; then the ratio of processor time is held to the same limit, which
is the harder test of the two.

Accuracy is asserted against the ordinary averages over all rows in memory, plateau by plateau.
"""

import json
import os
import subprocess
import sys

import numpy as np
import pytest
from long_log_maker import write_long_log

from fieldfit.field import long_log
from fieldfit.field.averages import summarise
from fieldfit.field.log_file import read_log
from fieldfit.field.long_log import open_long_log, read_long_log
from fieldfit.field.readings import Screening
from fieldfit.field.section_file import read_section

SIZES = (100_000, 1_000_000, 10_000_000)
TURNS = 2
MOST_TIMES = 2.5
MOST_MEGABYTES = 500.0
WEIGHT = 9798.0
TIMED = r"""
import json, pathlib, re, resource, sys, time
{imports}
start, busy = time.perf_counter(), time.process_time()
{work}
spent = time.perf_counter() - start, time.process_time() - busy
peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024.0
status = pathlib.Path("/proc/self/status")
if status.is_file():
    # What getrusage tells includes the process that started this one, when that was the larger.
    peak = int(re.search(r"VmHWM:\s+(\d+)", status.read_text())[1]) / 1024.0
print(json.dumps([*spent, peak]))
"""
READER = TIMED.format(
    imports="import pandas",
    work='table = pandas.read_csv(sys.argv[1] + "/log.csv", engine="c", parse_dates=["time"])',
)
STATISTICS = TIMED.format(
    imports="""
from pathlib import Path
import pandas, scipy.fft, scipy.special
from fieldfit.field import long_log
from fieldfit.field.section_file import read_section
long_log.LONG_LOG_BYTES = 1
section = read_section(Path(sys.argv[1]) / "section.toml")
section.liquid.density_kg_m3(section.temperature.value)
""",
    work=f"""
long_log.read_long_log(long_log.open_long_log(Path(sys.argv[1]) / "log.csv", section), {WEIGHT})
""",
)
COMMAND = TIMED.format(
    imports="",
    work='from fieldfit.cli import main\nassert main(["assess", sys.argv[1], "--out", sys.argv[1] + "/out"]) == 0',
)


def run(code, folder):
    """Seconds and peak megabytes of a piece of work in a process of its own."""
    done = subprocess.run(
        [sys.executable, "-c", code, str(folder)],
        capture_output=True,
        text=True,
        check=False,
        env={**os.environ, "PYTHONHASHSEED": "0"},
    )
    assert done.returncode == 0, done.stderr
    return json.loads(done.stdout.splitlines()[-1])


def best_of(folder):
    """Shortest time, shortest processor time and largest memory of reader, statistics and whole command."""
    jobs = {"reader": READER, "statistics": STATISTICS, "command": COMMAND}
    turns = {name: [] for name in jobs}
    for _ in range(TURNS):
        for name, code in jobs.items():
            turns[name].append(run(code, folder))
    return {name: (*np.min(found, axis=0)[:2], np.max(found, axis=0)[2]) for name, found in turns.items()}


def worst_difference(folder, monkeypatch):
    """Largest differences from averages over all rows: in means (in standard errors), and in the errors themselves."""
    section = read_section(folder / "section.toml")
    monkeypatch.setattr(long_log, "LONG_LOG_BYTES", 1)
    _, screening, parts = read_long_log(open_long_log(folder / "log.csv", section), WEIGHT)
    log = read_log(folder / "log.csv", section)
    plateau, reason = np.zeros(log.rows, dtype=np.int64), np.zeros(log.rows, dtype="<U1")
    runs = screening.runs
    for first, last, number in zip(runs.first_line, runs.last_line, runs.plateau, strict=True):
        plateau[np.searchsorted(log.line, first) : np.searchsorted(log.line, last) + 1] = number
    whole = summarise(log, Screening(reason=reason, plateau=plateau, counts=()), section, WEIGHT)
    assert parts.rows.tolist() == whole.rows.tolist()
    heads = [one.pressure_pa[0] - one.pressure_pa[1] - one.curvature_pa[0] for one in (parts, whole)]
    slopes = np.abs(1.9 * (heads[1] - heads[1][0]) / np.where(whole.flow_m3_s == 0.0, 1.0, whole.flow_m3_s))
    off = np.abs(heads[0] - heads[1]) + slopes * np.abs(parts.flow_m3_s - whole.flow_m3_s)
    return (
        float(np.max(off / whole.random_pa[0])),
        float(np.max(np.abs(parts.random_pa / whole.random_pa - 1.0))),
        float(np.max(np.abs(parts.independent_rows / whole.independent_rows - 1.0))),
    )


HEADINGS = (
    ("rows", 11), ("read_csv", 10), ("statistics", 11), ("ratio", 6), ("of processor", 13), ("command", 9), ("ratio", 6),
    ("less start", 11), ("peak", 8), ("means off", 10), ("errors off", 11), ("memory off", 11),
)  # fmt: skip


@pytest.mark.benchmark
@pytest.mark.skipif(sys.platform == "win32", reason="peak memory is asked of the resource module")
def test_long_logs(tmp_path, monkeypatch):
    print("\n" + "".join(f"{name:>{width}}" for name, width in HEADINGS))
    start = None
    for rows in SIZES:
        folder = tmp_path / str(rows)
        path = write_long_log(folder, rows)
        best = best_of(folder)
        reader, statistics, command = (best[name][0] for name in ("reader", "statistics", "command"))
        processor = best["statistics"][1] / best["reader"][1]
        start = start or command
        peak = max(best[name][2] for name in ("statistics", "command"))
        off = worst_difference(folder, monkeypatch)
        path.unlink()
        cells = (
            f"{rows:,}", f"{reader:.2f} s", f"{statistics:.2f} s", f"{statistics / reader:.2f}", f"{processor:.2f}",
            f"{command:.2f} s", f"{command / reader:.2f}", f"{(command - start) / reader:.2f}", f"{peak:.0f} MB",
            *(f"{value:.0e}" for value in off),
        )  # fmt: skip
        print("".join(f"{cell:>{width}}" for cell, (_, width) in zip(cells, HEADINGS, strict=True)), flush=True)
        assert peak <= MOST_MEGABYTES
        assert max(off) < 1e-3
        if rows == SIZES[-1]:
            busy = hasattr(os, "getloadavg") and os.getloadavg()[0] > os.cpu_count() + 0.5
            assert (processor if busy else statistics / reader) <= MOST_TIMES
