"""`fieldfit screen` from words to exit status."""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path

import pytest
from bad_logs import brought

from fieldfit.cli import main
from fieldfit.screening import screen_logs

SAMPLES = sorted((Path(__file__).resolve().parents[1] / "sample_data").glob("*/section.toml"))


@pytest.mark.parametrize(("name", "status"), [("sound", 0), ("service", 0), ("all static", 1), ("too short", 1)])
def test_status_says_whether_it_is_good_enough(tmp_path, capsys, name, status):
    folder = brought(name, tmp_path)
    record = tmp_path / "screening.json"
    assert main(["screen", str(folder), "--out", str(tmp_path / "out"), "--json", str(record)]) == status
    printed = capsys.readouterr()
    assert ("not good enough" in printed.out) == (status == 1)
    assert printed.err.count("Written: ") == 4
    assert json.loads(record.read_text(encoding="utf-8"))["good_enough"] == (status == 0)


def test_bad_input_ends_with_2_and_a_place(tmp_path, capsys):
    folder = brought("sound", tmp_path)
    (folder / "log.csv").write_text("time,flow\n1,2\n", encoding="utf-8")
    assert main(["screen", str(folder), "--out", str(tmp_path / "out")]) == 2
    assert "log.csv" in capsys.readouterr().err
    assert not (tmp_path / "out").exists()


def test_water_that_runs_backwards_throughout_is_bad_input(tmp_path, capsys):
    folder = brought("sound", tmp_path)
    log = folder / "log.csv"
    head, *rows = log.read_text(encoding="utf-8").splitlines()
    turned = [",".join([first, f"-{flow}", *rest]) for first, flow, *rest in (row.split(",") for row in rows)]
    log.write_text("\n".join([head, *turned]) + "\n", encoding="utf-8")
    assert main(["screen", str(folder), "--out", str(tmp_path / "out")]) == 2
    assert "negative in every row that flows" in capsys.readouterr().err


@pytest.mark.parametrize("section", SAMPLES, ids=lambda path: path.parent.name)
def test_the_samples_are_good_enough_and_add_up(section):
    finding = screen_logs(section.parent)
    assert finding.good
    for campaign in finding.campaigns:
        assert campaign.screening.used + sum(number for _, number in campaign.screening.counts) == campaign.log.rows


def test_screening_never_fits(tmp_path):
    """Neither the fit nor its library is loaded, so nothing can have been fitted."""
    folder = brought("sound", tmp_path)
    code = (
        "import sys; from fieldfit.cli import main; "
        f"main(['screen', {str(folder)!r}, '--out', {str(tmp_path / 'out')!r}]); "
        "print('loaded', *[name for name in ('lmfit',) if name in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.splitlines()[-1].split() == ["loaded"]
