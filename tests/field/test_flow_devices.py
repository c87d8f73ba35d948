"""Flow devices through section file and log."""

import numpy as np
import pytest

from fieldfit.assessment import assess
from fieldfit.errors import InputError
from fieldfit.field.constrictions import Throat, constriction_accuracy, constriction_flow
from fieldfit.field.flow_devices import Outlet, pitot_accuracy
from fieldfit.field.log_file import read_log
from fieldfit.field.section_file import read_section
from fieldfit.field.uncertain import Accuracy, Uncertain

HEAD = """\
name = "Quarry Street main"
bore = "152.4 mm ± 1 mm"
temperature = "10 degC"
"""
TAPS = """
[[tap]]
column = "upstream"
station = "0 m"
elevation = "10 m ± 0.02 m"
accuracy = "0.1 % of 10 bar"
[[tap]]
column = "downstream"
station = "300 m"
elevation = "10 m ± 0.02 m"
accuracy = "0.1 % of 10 bar"
"""
OUTLETS = """
[flow]
device = "pitot"
[[outlet]]
column = "pitot A"
diameter = "2.5 in"
edge = "rounded"
accuracy = "2 % of 60 psi"
[[outlet]]
column = "pitot B"
diameter = "2.5 in"
coefficient = "0.8 ± 3 %"
accuracy = "2 % of 60 psi"
"""
ORIFICE = """
[flow]
device = "orifice"
column = "plate"
throat = "75 mm ± 0.1 %"
accuracy = "0.25 % of 0.5 bar"
"""
PSI, GPM = 6894.757293168361, 231.0 * 0.0254**3 / 60.0


def section(tmp_path, flow):
    path = tmp_path / "section.toml"
    path.write_text(HEAD + flow + TAPS, encoding="utf-8")
    return read_section(path)


def test_pitots_at_two_hydrants_are_summed(tmp_path):
    known = section(tmp_path, OUTLETS)
    pitots = np.array([[0.0, 0.0], [25.0, 28.0], [9.0, 10.0], [16.0, 0.0], [36.0, 40.0]])
    gpm = 29.84 * 6.25 * (0.9 * np.sqrt(pitots[:, 0]) + 0.8 * np.sqrt(pitots[:, 1]))
    # Hazen–Williams, psi per foot (NFPA 13), at a C of 110.
    loss = 300.0 / 0.3048 * 4.52 * gpm**1.85 / (110.0**1.85 * 6.0**4.87)
    rows = [f"{a:g},{b:g},140.0,{140.0 - fall:.1f}" for (a, b), fall in zip(pitots, loss, strict=True)]
    log = tmp_path / "log.csv"
    log.write_text(
        "\n".join(["pitot A [psi],pitot B [psi],upstream [psi],downstream [psi]", *rows]) + "\n", encoding="utf-8"
    )
    assert read_log(log, known).flow_m3_s / GPM == pytest.approx(gpm, rel=6e-4)
    wall = assess(known, log).campaigns[0].reaches[0].wall
    assert wall.state == "measured"
    assert wall.hazen_williams_c.best == pytest.approx(110.0, rel=0.05)
    assert wall.budget[0].error in {"meter gain", "friction correlation"}


def test_pitots_uncertainty_holds_the_coefficient_and_grows_at_small_flow():
    limit = 0.05 / np.sqrt(3.0)
    one = Outlet(
        column="p",
        diameter=Uncertain(value=0.0635, standard=0.0),
        coefficient=Uncertain(value=0.9, standard=0.9 * limit),
        accuracy=Accuracy(text="", fixed=1000.0),
    )
    found = pitot_accuracy((one,))
    assert found.gain == pytest.approx(limit)
    factor = 0.9 * np.pi / 4.0 * 0.0635**2 * np.sqrt(2.0 / 999.1)
    flow = factor * np.sqrt([20e3, 200e3])
    # Half the relative error of the pressure, beside the coefficient's.
    assert found.gain_at(flow) == pytest.approx(np.hypot(limit, 0.5 * 1000.0 / np.array([20e3, 200e3])))
    assert pitot_accuracy((one, one)).gain == pytest.approx(limit)


def test_orifice_plate_by_the_library(tmp_path):
    from fluids.flow_meter import differential_pressure_meter_solver

    known = section(tmp_path, ORIFICE)
    log = tmp_path / "log.csv"
    log.write_text("plate [kPa],upstream [kPa],downstream [kPa]\n0,500,500\n5,480,440\n20,450,300\n", encoding="utf-8")
    read = read_log(log, known)
    density = known.liquid.density_kg_m3(np.array([10.0]))[0]
    viscosity = known.liquid.viscosity_m2_s(np.array([10.0]))[0] * density
    mass = differential_pressure_meter_solver(
        D=0.1524, rho=density, mu=viscosity, k=1e9, D2=0.075, P1=1e9, P2=1e9 - 20e3,
        meter_type="ISO 5167 orifice", taps="corner",
    )  # fmt: skip
    assert read.flow_m3_s[2] == pytest.approx(mass / density, rel=1e-6)
    assert read.flow_m3_s[0] == 0.0
    assert read.flow_step_m3_s > 0.0


@pytest.mark.parametrize("kind", ["ISA 1932 nozzle", "long radius nozzle", "venturi nozzle", "venturi, machined"])
def test_other_constrictions_go_with_the_root(kind):
    throat = Throat(
        kind=kind,
        throat=Uncertain(value=0.06, standard=0.0),
        pipe=Uncertain(value=0.1, standard=0.0),
        tappings="corner",
        accuracy=Accuracy(text="", fixed=50.0),
    )
    flow = constriction_flow(np.array([-1e4, 10.0, 1e4, 4e4, np.nan]), throat, 999.0, 1.1e-3)
    assert flow[0] == pytest.approx(-flow[2])
    assert flow[1] == 0.0
    assert flow[3] / flow[2] == pytest.approx(2.0, rel=0.01)
    assert np.isnan(flow[4])
    relative = constriction_accuracy(throat, 999.0)
    assert relative.gain_at(flow[2:3])[0] > relative.gain_at(flow[3:4])[0]


def test_diameters_of_an_orifice_count_by_the_standards_weights():
    plate = Throat(
        kind="orifice",
        throat=Uncertain(value=0.05, standard=0.05 * 0.001),
        pipe=Uncertain(value=0.1, standard=0.1 * 0.004),
        tappings="corner",
        accuracy=Accuracy(text="0"),
    )
    beta4 = 0.5**4
    expected = np.sqrt(0.0025**2 + (2.0 / (1.0 - beta4) * 0.001) ** 2 + (2.0 * beta4 / (1.0 - beta4) * 0.004) ** 2)
    assert constriction_accuracy(plate, 999.0).gain == pytest.approx(expected)


@pytest.mark.parametrize("device", ["weir", "bucket", "meter"])
def test_plain_devices_log_their_flow(tmp_path, device):
    known = section(tmp_path, f'[flow]\ndevice = "{device}"\ncolumn = "Q"\naccuracy = "5 % of reading"\n')
    assert known.meter.accuracy.gain == pytest.approx(0.05 / np.sqrt(3.0))
    assert known.meter.throat is None


@pytest.mark.parametrize(
    ("flow", "message"),
    [
        (OUTLETS.replace('"pitot"\n', '"pilot"\n', 1), r"'pilot' is no flow device.*Did you mean 'pitot'"),
        (OUTLETS.replace("rounded", "roundish"), r"outlet\[1\]\.edge'.*'roundish' is no edge.*'rounded'"),
        (OUTLETS.replace('edge = "rounded"\n', ""), r"outlet\[1\].*coefficient is not known.*after feeling inside"),
        (OUTLETS.replace("0.8 ± 3 %", "1.8"), r"a coefficient of 1\.8 is more than all"),
        (OUTLETS.replace('"2.5 in"', '"0 in"', 1), r"0 is no size"),
        (OUTLETS.replace('"pitot"\n', '"weir"\n', 1), r"there is an \[\[outlet\]\], and the device is a weir"),
        ('[flow]\ndevice = "pitot"\ncolumn = "Q"\naccuracy = "1 % of reading"\n', r"a pitot has no \[\[outlet\]\]"),
        (ORIFICE.replace('throat = "75 mm ± 0.1 %"\n', ""), r"the throat of the orifice is missing"),
        (ORIFICE.replace("75 mm", "150 mm"), r"the throat is 0\.98 of the pipe.*ISO 5167 holds from 0\.1 to 0\.8"),
        (ORIFICE + 'tappings = "flanges"\n', r"'flanges' are no tappings.*Did you mean 'flange'"),
        (ORIFICE.replace("0.25 % of 0.5 bar", "0.25 %"), r"may be of reading or of full scale"),
    ],
)
def test_what_a_device_lacks_is_said(tmp_path, flow, message):
    with pytest.raises(InputError, match=message):
        section(tmp_path, flow)


def test_what_a_device_makes_superfluous_is_said(tmp_path):
    spare = OUTLETS.replace('"pitot"\n', '"pitot"\naccuracy = "1 % of reading"\nthroat = "60 mm"\n', 1)
    said = " ".join(section(tmp_path, spare).assumed)
    assert "The accuracy in [flow] was not used" in said
    assert "The throat in [flow] was not used" in said
