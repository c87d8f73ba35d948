import numpy as np
import pytest

from fieldfit.assessment import assess

GRAVITY = 9.80665
SECTION = """\
name = "Oil line"
bore = "100 mm ± 0.5 %"
temperature = "40 degC"
fluid = { name = "gear oil", density = "870 kg/m3", viscosity = "60 cSt" }
[flow]
column = "Q"
accuracy = "0.3 % of reading"
[[tap]]
column = "p1"
station = "0 m ± 0.05 m"
elevation = "0 m ± 0.01 m"
accuracy = "0.1 % of 10 bar"
[[tap]]
column = "p2"
station = "200 m ± 0.05 m"
elevation = "0 m ± 0.01 m"
accuracy = "0.1 % of 10 bar"
"""


@pytest.fixture
def oil(tmp_path):
    """Four laminar and four turbulent flows in a pipe narrowed to 92 mm, 0.3 mm rough."""
    bore, viscosity, rows = 0.092, 60e-6, ["Q [L/s],p1 [kPa],p2 [kPa]", "0,900.000,900.000"]
    for flow in (3.137e-3, 4.211e-3, 6.043e-3, 8.019e-3, 20.353e-3, 22.129e-3, 24.747e-3, 27.931e-3):
        velocity = flow / (np.pi / 4.0 * bore**2)
        reynolds, x = velocity * bore / viscosity, 6.0
        for _ in range(100):
            x = -2.0 * np.log10(0.3e-3 / bore / 3.7 + 2.51 * x / reynolds)
        f = 64.0 / reynolds if reynolds < 2100.0 else x**-2
        head = f * 200.0 / bore * velocity**2 / (2.0 * GRAVITY)
        rows.append(f"{1e3 * flow:.3f},900.000,{900.0 - 870.0 * GRAVITY * head / 1e3:.3f}")
    (tmp_path / "section.toml").write_text(SECTION, encoding="utf-8")
    (tmp_path / "log.csv").write_text("\n".join(rows) + "\n", encoding="utf-8")
    return assess(tmp_path).campaigns[0].reaches[0]


def test_laminar_plateaus_measure_the_bore(oil):
    one = oil.deposit.map.evidence[0]
    assert one.evidence.kind == "laminar flow"
    assert one.used
    assert one.evidence.bore.value == pytest.approx(0.092, rel=0.003)
    assert 0.0 < one.evidence.bore.relative < 0.02


def test_they_part_deposit_from_roughness(oil):
    low, high = oil.deposit.bore_m.ends
    assert low < 0.092 < high
    assert high - low < 0.004
    low, high = oil.deposit.thickness_m.ends
    assert low < 0.004 < high
    # All of the loss read as roughness in the bore as laid would be far too rough.
    assert oil.wall.roughness_m.best > 3.0 * oil.deposit.roughness_m.best
