"""Published and recalculated readings on water mains through the whole chain.

READ: seen in the source or a quotation of it; MEM: recalled from the named publication; CALC: computed independently.
"""

import math

import numpy as np
import pytest
from crew import GPM, INCH, PSI, Units, rounded
from fluids.friction import Colebrook
from instruments import Gauge, Kit, Meter, Pipe, Plan
from simulator import GRAVITY, simulate, water

from fieldfit.assessment import assess
from fieldfit.report.record import record

MAIN = """\
name = "Water main"
bore = "{bore}"
temperature = "{temperature}"

[flow]
column = "flow"
accuracy = "{meter}"

[[tap]]
column = "p1"
station = "0 m ± 0"
elevation = "0 m ± 0"
accuracy = "{gauge}"

[[tap]]
column = "p2"
station = "{length} ± 0.1 %"
elevation = "0 m ± 0"
accuracy = "{gauge}"
"""


def wall_of(folder, heading, rows, **known):
    """Write the section file and a hand sheet, assess them, and return the only wall."""
    section, sheet = folder / "section.toml", folder / "sheet.csv"
    known = {"temperature": "60 degF ± 1 degF", "meter": "1 % of reading", "gauge": "0.05 % of 100 psi"} | known
    section.write_text(MAIN.format(**known), encoding="utf-8")
    lines = [heading, *(",".join(f"{value:.7g}" for value in row) for row in rows)]
    sheet.write_text("\n".join(lines) + "\n", encoding="utf-8")
    return assess(section, sheet).campaigns[0].reaches[0].wall


@pytest.mark.parametrize(
    ("readings", "published_c"),
    [
        # Bore in, length ft, flow gpm, loss psi. CALC from the Hazen-Williams formula; its published forms differ by
        # up to 0.4 %.
        ((8.39, 1000.0, 500.0, 5.0), 73.4),
        ((6.16, 1000.0, 500.0, 20.0), 78.3),
        ((4.00, 500.0, 100.0, 3.0), 93.4),
        ((24.34, 5000.0, 5000.0, 6.0), 96.4),
    ],
)
def test_hazen_williams_back_calculation(tmp_path, readings, published_c):
    bore, length_ft, flow_gpm, loss_psi = readings
    wall = wall_of(
        tmp_path,
        "flow [gpm],p1 [psi],p2 [psi]",
        [(flow_gpm, 60.0 + loss_psi, 60.0)],
        bore=f"{bore} in ± 0.2 %",
        length=f"{length_ft} ft",
    )
    assert wall.state == "measured"
    assert wall.hazen_williams_c.best == pytest.approx(published_c, rel=0.005)
    assert wall.flow_m3_s == pytest.approx(flow_gpm * GPM, rel=1e-9)
    low, high = wall.hazen_williams_c.measurement
    assert low < published_c < high


def pvc_rows():
    """Readings that mean C 158 in a bore of 5.88 in over 1000 ft, by psi/ft = 4.52 Q^1.85/(C^1.85 d^4.87)."""
    flows = np.array([250.0, 400.0, 550.0, 700.0])
    loss = 1000.0 * 4.52 * flows**1.85 / (158.0**1.85 * 5.88**4.87)
    return np.column_stack([flows, 50.0 + loss, np.full_like(flows, 50.0)])


@pytest.mark.parametrize(("bore", "published_c"), [("5.88 in", 158.0), ("6.00 in", 150.0)])
def test_pvc_pipe_is_smooth_within_uncertainty_whichever_bore_is_believed(tmp_path, bore, published_c):
    # READ second-hand: a 6 in PVC pipe whose true bore is 5.88 in gave C 158; on the nominal bore the same readings
    # give 150. A smooth wall allows 150 to 155, so neither is a roughness.
    wall = wall_of(
        tmp_path,
        "flow [gpm],p1 [psi],p2 [psi]",
        pvc_rows(),
        bore=f"{bore} ± 1 %",
        length="1000 ft",
        meter="2 % of reading",
    )
    assert wall.state == "upper limit"
    assert wall.roughness_m.best is None
    assert wall.hazen_williams_c.best == pytest.approx(published_c, rel=0.005)


def report_rows(density):
    """Readings over 100 m of 150 mm pipe that mean a roughness of 27.6 mm; CALC with the fluids library."""
    rows = []
    _, viscosity = water(12.0)
    for flow in (0.006, 0.009, 0.012):
        velocity = flow / (math.pi / 4.0 * 0.15**2)
        f = Colebrook(velocity * 0.15 / viscosity, 27.6 / 150.0)
        drop_pa = density * f * 100.0 / 0.15 * velocity**2 / 2.0
        rows.append((1e3 * flow, 300.0 + 1e-3 * drop_pa, 300.0))
    return rows


def test_a_roughness_of_a_fifth_of_the_bore_is_refused(tmp_path):
    # READ: a published field report gave 27.6 mm in a pipe of 150 mm, ε/D 0.18.
    wall = wall_of(
        tmp_path,
        "flow [L/s],p1 [kPa],p2 [kPa]",
        report_rows(water(12.0)[0]),
        bore="150 mm ± 0.5 %",
        length="100 m",
        temperature="12 degC ± 0.5 degC",
    )
    assert wall.state == "no estimate"
    assert wall.roughness_m.best is None
    assert wall.roughness_m.with_correlation is None
    assert "0.05" in wall.because


def test_the_same_loss_is_an_ordinary_roughness_behind_a_deposit(tmp_path):
    # CALC: the loss of that report is 3 mm plus 14 mm of deposit all round, a bore of 122 mm.
    wall = wall_of(
        tmp_path,
        "flow [L/s],p1 [kPa],p2 [kPa]",
        report_rows(water(12.0)[0]),
        bore="122 mm ± 0.5 %",
        length="100 m",
        temperature="12 degC ± 0.5 degC",
    )
    assert wall.state == "measured"
    assert wall.roughness_m.best == pytest.approx(3e-3, rel=0.15)


EXACT_UNITS = {
    "psi": Units(flow=("gpm", GPM), pressure=("psi", PSI), bore=("in", INCH)),
    "kPa": Units(flow=("m3/h", 1.0 / 3600.0), pressure=("kPa", 1e3)),
    "bar": Units(flow=("L/s", 1e-3), pressure=("bar", 1e5)),
}


def exact_files(folder, day, units):
    """Write one day's readings with every digit in some units; return the paths."""
    folder.mkdir()
    section, log = folder / "section.toml", folder / "log.csv"
    flow, pressure = units.flow, units.pressure
    section.write_text(
        MAIN.format(
            bore=f"{day.pipe.bore_m / units.bore[1]:.17g} {units.bore[0]} ± 0.4 %",
            temperature="12 degC ± 0.5 degC",
            meter="0.5 % of reading",
            gauge=f"{0.002 * 1e6 / pressure[1]:.17g} {pressure[0]}",
            length=f"{day.pipe.length_m:.17g} m",
        ),
        encoding="utf-8",
    )
    # The instruments' steps are the same whatever the unit: the readings are stepped first and converted after.
    q = np.array(rounded(day.rows.flow_m3_s, 1e-5), dtype=float) / flow[1]
    p1, p2 = np.array([rounded(p, 100.0) for p in day.rows.pressure_pa], dtype=float) / pressure[1]
    lines = [f"time [s],flow [{flow[0]}],p1 [{pressure[0]}],p2 [{pressure[0]}]"]
    lines += [",".join(f"{v:.17g}" for v in row) for row in zip(day.rows.time_s, q, p1, p2, strict=True)]
    log.write_text("\n".join(lines) + "\n", encoding="utf-8")
    return section, log


def flat(value, path=""):
    """A record as one flat dict from path to value."""
    if isinstance(value, dict):
        return {k: v for key, part in value.items() for k, v in flat(part, f"{path}/{key}").items()}
    if isinstance(value, list):
        return {k: v for number, part in enumerate(value) for k, v in flat(part, f"{path}/{number}").items()}
    return {path: value}


def test_the_same_log_in_three_sets_of_units_gives_the_same_record(tmp_path):
    pipe = Pipe(bore_m=0.1023, length_m=126.0, roughness_m=0.6e-3)
    kit = Kit(
        gauge=Gauge(full_scale_pa=1e6, limit=0.002, step_pa=100.0, noise_pa=300.0),
        meter=Meter(limit=0.005, step_m3_s=1e-5),
    )
    plan = Plan(flows_m3_s=(0.006, 0.009, 0.012, 0.015, 0.018), supply_pa=5e5, source_loss_pa=3e4)
    day = simulate(np.random.default_rng(1839), pipe, kit, plan)
    records = {}
    for name, units in EXACT_UNITS.items():
        section, log = exact_files(tmp_path / name, day, units)
        records[name] = flat(record(assess(section, log)))
    base = records.pop("kPa")
    assert base["/campaigns/0/reaches/0/state"] == "measured"
    assert base["/campaigns/0/plateaus"] == 5
    for other in records.values():
        assert list(other) == list(base)
        for path, value in base.items():
            if path.endswith("/sha256") or "/warnings/" in path:
                continue
            if isinstance(value, float):
                assert other[path] == pytest.approx(value, rel=1e-9, abs=1e-12), path
            else:
                assert other[path] == value, path


def test_weight_of_water_and_of_a_psi():
    # MEM: 2.31 ft of water to the psi at 60 degF, the trade's figure.
    assert PSI / (water(15.56)[0] * GRAVITY) / 0.3048 == pytest.approx(2.31, abs=0.005)
