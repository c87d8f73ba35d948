"""A transmitter between two taps: the same pipe, the same answer as two gauges give."""

import numpy as np
import pytest
from crew import PLANT, bring, columns_of, section_text
from instruments import Gauge, Kit, Meter, Pipe, Plan
from simulator import GRAVITY, Errors, simulate, water

from fieldfit.assessment import assess
from fieldfit.errors import InputError
from fieldfit.field.section_file import read_section

PIPE = Pipe(bore_m=0.15, length_m=300.0, roughness_m=1e-3, elevation_m=(10.0, 40.0), temperature_degc=10.0)
AREA = np.pi / 4.0 * 0.15**2
TRANSMITTER = '\n[differential]\ncolumn = "dp"\naccuracy = "0.1 % of 2 bar"\nserial = "DP-03"\n'


@pytest.fixture(scope="module")
def day():
    """A test uphill by 30 m, without instrument errors."""
    kit = Kit(
        gauge=Gauge(full_scale_pa=1e6, limit=0.001, step_pa=10.0, noise_pa=100.0),
        meter=Meter(limit=0.005, step_m3_s=1e-5, noise=0.001),
    )
    plan = Plan(flows_m3_s=tuple(AREA * v for v in (0.6, 1.0, 1.4, 1.9)), supply_pa=8e5, dwell_s=60.0)
    return simulate(np.random.default_rng(3), PIPE, kit, plan, Errors())


def with_transmitter(day, folder, *, hose_degc=None, extra="", statics=True):
    """Section file with places only, and a log with what a transmitter below both taps reads."""
    folder.mkdir(parents=True, exist_ok=True)
    text = section_text(day, PLANT)
    kept = [line for line in text.splitlines() if not (line.startswith("accuracy") and "of 1000 kPa" in line)]
    (folder / "section.toml").write_text("\n".join(kept) + "\n" + TRANSMITTER + extra, encoding="utf-8")
    main, _ = water(10.0)
    hose = water(hose_degc)[0] if hose_degc is not None else main
    upper, lower = day.rows.pressure_pa
    # Each line hangs from its tap down to the transmitter at height zero.
    read = upper + hose * GRAVITY * 10.0 - (lower + hose * GRAVITY * 40.0)
    flow, _, _, temperature = columns_of(day, PLANT)
    rows = [
        f"{t},{q},{p / 1e3:.3f},{c}"
        for t, q, p, c, still in zip(
            day.rows.time_s, flow, read, temperature, np.isin(day.rows.window, (0, day.rows.window.max())), strict=True
        )
        if statics or not still
    ]
    log = folder / "log.csv"
    log.write_text("\n".join(["time [s],flow [L/s],dp [kPa],temperature [degC]", *rows]) + "\n", encoding="utf-8")
    return folder / "section.toml", log


def friction(campaign):
    return campaign.reaches[0].wall.friction_factor


def test_transmitter_gives_what_two_gauges_give(day, tmp_path):
    gauges = assess(*bring(day, tmp_path / "gauges")).campaigns[0]
    found = assess(*with_transmitter(day, tmp_path / "dp")).campaigns[0]
    assert friction(found).best == pytest.approx(friction(gauges).best, rel=0.002)
    assert found.reaches[0].readings.head_loss_m == pytest.approx(gauges.reaches[0].readings.head_loss_m, rel=0.01)


def test_its_errors_are_those_of_one_instrument(day, tmp_path):
    wall = assess(*with_transmitter(day, tmp_path, statics=False)).campaigns[0].reaches[0].wall
    own = [entry.error for entry in wall.budget if "DP-03" in entry.error]
    assert sorted(own) == ["span of gauge DP-03", "zero of gauge DP-03"]
    assert not [entry.error for entry in wall.budget if "gauge" in entry.error and "DP-03" not in entry.error]


def test_warm_water_in_a_parallel_hose_is_levelled(day, tmp_path):
    clean = assess(*with_transmitter(day, tmp_path / "same", statics=False)).campaigns[0]
    warm = {"hose_degc": 25.0, "statics": False}
    told = 'hose_temperature = "25 degC ± 0.5 K"\n'
    corrected = assess(*with_transmitter(day, tmp_path / "told", extra=told, **warm)).campaigns[0]
    ignored = assess(*with_transmitter(day, tmp_path / "untold", **warm)).campaigns[0]
    head = clean.reaches[0].readings.head_loss_m
    assert corrected.reaches[0].readings.head_loss_m == pytest.approx(head, abs=0.001)
    # The rise of 30 m makes the 0.080 m of the published example.
    assert ignored.reaches[0].readings.head_loss_m - head == pytest.approx(0.080, abs=0.002)
    assert corrected.reaches[0].readings.elevation_drop.standard > 0.0


def test_a_static_takes_the_hose_off_without_being_told(day, tmp_path):
    clean = assess(*with_transmitter(day, tmp_path / "same")).campaigns[0]
    found = assess(*with_transmitter(day, tmp_path / "warm", hose_degc=25.0)).campaigns[0]
    assert friction(found).best == pytest.approx(friction(clean).best, rel=0.001)


def test_no_survey_is_needed_while_the_lines_hold_the_mains_water(day, tmp_path):
    section, log = with_transmitter(day, tmp_path, statics=False)
    kept = [line for line in section.read_text(encoding="utf-8").splitlines() if not line.startswith("elevation")]
    section.write_text("\n".join(kept) + "\n", encoding="utf-8")
    assert assess(section, log).campaigns[0].reaches[0].wall.state == "measured"
    section.write_text("\n".join(kept) + '\nhose_temperature = "25 degC"\n', encoding="utf-8")
    with pytest.raises(InputError, match="the hose's water needs the taps' elevations"):
        read_section(section)


def test_two_taps_only(day, tmp_path):
    section, _ = with_transmitter(day, tmp_path)
    third = '[[tap]]\ncolumn = "third"\nstation = "150 m"\n'
    section.write_text(section.read_text(encoding="utf-8") + third, encoding="utf-8")
    with pytest.raises(InputError, match=r"a differential transmitter joins two taps, and there are 3"):
        read_section(section)
