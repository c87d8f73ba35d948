"""Published measurements on smooth pipe through the whole chain: each must end as an upper limit.

READ: seen in the source or a quotation of it; MEM: recalled from the named publication; CALC: computed independently.
"""

import numpy as np
import pytest
from crew import FOOT, INCH, PSI
from fluids.friction import oregon_smooth_data
from simulator import GRAVITY, water

from fieldfit.assessment import assess

SMOOTH_PIPE = """\
name = "Smooth pipe"
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
station = "{length} ± 0"
elevation = "0 m ± 0"
accuracy = "0"

[screen]
static_flow = 0.001
"""


def wall_of(folder, heading, rows, **known):
    """Write the section file and a hand sheet of flow and pressure drop, assess them, and return the only wall."""
    section, sheet = folder / "section.toml", folder / "sheet.csv"
    section.write_text(SMOOTH_PIPE.format(**known), encoding="utf-8")
    # The second gauge stands at a ten-thousandth, so that its column shows how finely it was read.
    rows = [(flow, drop + 1e-4, 1e-4) for flow, drop in rows]
    lines = [heading, *(",".join(f"{value:.7f}" for value in row) for row in rows)]
    sheet.write_text("\n".join(lines) + "\n", encoding="utf-8")
    return assess(section, sheet).campaigns[0].reaches[0].wall


def test_oregon_smooth_pipe_ends_as_upper_limit(tmp_path):
    # READ: Swanson, Julian, Ihas & Donnelly 2002 (J. Fluid Mech. 461), the Oregon pipe, as shipped in `fluids`:
    # Re and Darcy f. CALC: the water they would mean in a pipe of 100 mm bore and 200 m length at 20 degC.
    reynolds, f = (np.array(column) for column in oregon_smooth_data)
    turbulent = reynolds > 5000.0
    reynolds, f = reynolds[turbulent], f[turbulent]
    bore, length = 0.1, 200.0
    density, viscosity = water(20.0)
    velocity = reynolds * viscosity / bore
    flow = np.pi / 4.0 * bore**2 * velocity
    pressure = density * GRAVITY * f * length / bore * velocity**2 / (2.0 * GRAVITY)
    wall = wall_of(
        tmp_path,
        "flow [L/s],p1 [kPa],p2 [kPa]",
        np.column_stack([1e3 * flow, 1e-3 * pressure]),
        bore="100 mm ± 0.1 %",
        temperature="20 degC ± 0.1 degC",
        meter="0.5 % of reading",
        gauge="1 % of reading",
        length="200 m",
    )
    assert wall.state == "upper limit"
    assert wall.roughness_m.best is None
    assert wall.roughness_m.measurement[0] == wall.roughness_m.with_correlation[0] == 0.0
    # READ: the turbulent rows lie -4.6 to +3.7 % from Prandtl's smooth law.
    away = f / prandtl(reynolds) - 1.0
    assert -0.047 < away.min() < away.max() < 0.038
    assert wall.friction_factor.best == pytest.approx(prandtl(wall.reynolds), rel=0.05)
    assert wall.roughness_m.with_correlation[1] < 1e-3 * bore


def prandtl(reynolds):
    """Friction factor of a smooth pipe, 1/√f = 2 log10(Re √f) − 0.8 (Prandtl), by repeated substitution."""
    f = 0.02
    for _ in range(60):
        f = (2.0 * np.log10(reynolds * np.sqrt(f)) - 0.8) ** -2
    return f


# Munson, Young & Okiishi, Example 7.4: smooth 0.496 in pipe, 5 ft between taps, water at 60 degF.
MUNSON_VELOCITY_FT_S = np.array([1.17, 1.95, 2.91, 5.84, 11.13, 16.92, 23.34, 28.73])  # MEM
MUNSON_DROP_LBF_FT2 = np.array([6.26, 15.6, 30.9, 106.0, 329.0, 681.0, 1200.0, 1730.0])  # MEM
MUNSON_REYNOLDS = np.array([4010, 6680, 9970, 20000, 38100, 58000, 80000, 98500])  # READ, dimensionless groups
MUNSON_FRICTION = np.array([0.039, 0.035, 0.031, 0.0264, 0.0226, 0.0202, 0.01878, 0.01786])  # READ, likewise


def test_munson_readings_are_smooth(tmp_path):
    bore = 0.496 * INCH
    gpm = MUNSON_VELOCITY_FT_S * FOOT * np.pi / 4.0 * bore**2 / (231.0 * INCH**3 / 60.0)
    drop_psi = MUNSON_DROP_LBF_FT2 / 144.0
    wall = wall_of(
        tmp_path,
        "flow [gpm],p1 [psi],p2 [psi]",
        np.column_stack([gpm, drop_psi]),
        bore="0.496 in ± 0.2 %",
        temperature="60 degF ± 1 degF",
        meter="1 % of reading",
        gauge="1 % of reading",
        length="5 ft",
    )
    assert wall.state == "upper limit"
    values = wall.plateaus
    # All but perhaps the first, at the edge of the critical zone; within what printed digits and memory allow.
    used = len(values.reynolds)
    assert used >= 7
    assert values.reynolds == pytest.approx(MUNSON_REYNOLDS[-used:], rel=0.02)
    assert values.friction_factor == pytest.approx(MUNSON_FRICTION[-used:], rel=0.03)
    assert wall.roughness_m.with_correlation[1] < 2e-3 * bore
    assert drop_psi[-1] * PSI == pytest.approx(1730.0 * 47.880259, rel=1e-6)


def test_drawn_tube_from_one_reading_is_an_upper_limit_with_a_huge_band(tmp_path):
    # READ: Cengel & Cimbala, Example 8-3: bore 2 in, 0.2 ft3/s, 200 ft, roughness 7e-6 ft, density 62.36 lbm/ft3,
    # viscosity 7.536e-4 lbm/(ft s) (water at 60 degF); answers Re 126 400, f 0.0174, drop 11.8 psi.
    wall = wall_of(
        tmp_path,
        "flow [ft3/s],p1 [psi],p2 [psi]",
        [(0.2, 11.80)],
        bore="2.000 in ± 0.2 %",
        temperature="60 degF ± 1 degF",
        meter="0.5 % of reading",
        gauge="0.5 % of reading",
        length="200 ft",
    )
    true_roughness = 7e-6 * FOOT
    assert wall.state == "upper limit"
    assert wall.reynolds == pytest.approx(126400.0, rel=0.005)
    assert wall.friction_factor.best == pytest.approx(0.0174, rel=0.005)
    low, high = wall.roughness_m.with_correlation
    assert low == 0.0
    assert high > 5.0 * true_roughness
    assert wall.roughness_m.measurement[1] > true_roughness
