"""What reports print of devices and clocks."""

import json
import re

import numpy as np
import pytest
from crew import PLANT, section_text
from instruments import Gauge, Kit, Meter, Pipe, Plan
from loggers import Logger, logger_text
from matplotlib.figure import Figure
from simulator import simulate

from fieldfit.assessment import assess
from fieldfit.field.section_file import read_section
from fieldfit.report import figures
from fieldfit.report.clock_block import clock_block
from fieldfit.report.device_rows import device_rows
from fieldfit.report.page import page
from fieldfit.report.record import record
from fieldfit.report.screening.page import screen_page
from fieldfit.screening import screen_logs

AREA = np.pi / 4.0 * 0.15**2


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    """A test of two loggers, a minute apart."""
    kit = Kit(
        gauge=Gauge(full_scale_pa=1e6, limit=0.0025, step_pa=100.0, noise_pa=400.0),
        meter=Meter(limit=0.005, step_m3_s=1e-5),
    )
    plan = Plan(flows_m3_s=tuple(AREA * v for v in (0.6, 1.0, 1.4, 1.9)), supply_pa=5e5, drift=0.02)
    pipe = Pipe(bore_m=0.15, length_m=300.0, roughness_m=1e-3, temperature_degc=12.0)
    day = simulate(np.random.default_rng(2), pipe, kit, plan)
    path = tmp_path_factory.mktemp("two")
    (path / "section.toml").write_text(section_text(day, PLANT), encoding="utf-8")
    loggers = (
        Logger(file="main.csv", channels=("flow", "upstream", "temperature")),
        Logger(file="far (end).csv", channels=("downstream",), ahead_s=60.5),
    )
    for logger in loggers:
        (path / logger.file).write_text(logger_text(day, logger), encoding="utf-8")
    return path


@pytest.fixture(scope="module")
def finding(folder):
    return assess(folder)


def test_record_has_the_clocks(finding):
    plain = json.loads(json.dumps(record(finding), allow_nan=False))
    campaign = plain["campaigns"][0]
    found = {one["file"]: one for one in campaign["clocks"]}
    # The files were read in the order of their names: the far end's first.
    assert found["main.csv"]["how"] == "reference"
    far = found["far (end).csv"]
    assert far["how"] == "recovered"
    assert far["interval_s"][0] <= 60.5 <= far["interval_s"][1]
    assert far["offset_s"] == far["best_s"]
    assert far["drift_ppm"] == 0.0
    assert len(far["sha256"]) == 64


def test_page_shows_sentences_and_evidence(finding):
    text = page(finding)
    assert "The loggers&#39; clocks" in text or "The loggers' clocks" in text
    assert re.search(r"The clock of far \(end\)\.csv is 60\.\d.s ahead", text)
    assert "Loggers on one clock" in text
    assert text.count("<svg") >= 2


def test_screening_page_shows_them_too(folder):
    text = screen_page(screen_logs(folder))
    assert "Loggers on one clock" in text
    assert "The clock of far (end).csv is" in text


def test_figure_is_drawn_for_several_loggers_only(finding, folder):
    section = read_section(folder)
    log = finding.campaigns[0].log
    assert isinstance(figures.clocks(log, section), Figure)
    single = log.__class__(**{name: getattr(log, name) for name in log.__dataclass_fields__ if name != "clocks"})
    assert figures.clocks(single, section) is None
    assert clock_block(single, section, "k") is None


def test_devices_stand_among_what_was_known(tmp_path):
    path = tmp_path / "section.toml"
    taps = "".join(f'\n[[tap]]\ncolumn = "{name}"\nstation = "{at} m"\n' for name, at in (("up", 0), ("down", 90)))
    device = '\n[flow]\ndevice = "orifice"\ncolumn = "plate"\nthroat = "60 mm"\naccuracy = "0.1 % of 1 bar"\n'
    between = '\n[differential]\ncolumn = "dp"\naccuracy = "0.1 % of 1 bar"\nserial = "DP-3"\n'
    path.write_text(f'name = "x"\nbore = "100 mm"\ntemperature = "12 degC"\n{device}{taps}{between}', encoding="utf-8")
    told = dict(device_rows(read_section(path)))
    assert "in a pipe of 100" in told["Orifice"]
    assert "corner tappings, by ISO 5167" in told["Orifice"]
    assert told["Transmitter between the taps"].startswith("dp (DP-3), 0.1 % of 1 bar")
