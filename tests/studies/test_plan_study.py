"""Planned against achieved: 100 pipes, each tested thirty times by its plan, all errors drawn afresh each time.

Run it with ``pytest -m slow -s tests/studies/test_plan_study.py``.
"""

import numpy as np
import pytest
from handovers_plan import spread_found

from fieldfit.decisions.expected import expected
from fieldfit.decisions.planning import plan_test
from fieldfit.field.section_file import read_section

SECTIONS, TESTS, SEED = 100, 30, 9
SECTION = """
name = "Invented main {number}"
material = "cast iron"
bore = "{bore:.1f} mm ± {bore_limit:.2f} %"
temperature = "12 degC ± 1 degC"
[flow]
column = "flow"
accuracy = "{meter:.2f} % of reading"
[[tap]]
column = "upper"
station = "0 m ± 0.1 m"
elevation = "20.00 m ± 0.02 m"
accuracy = "{gauge:.2f} % of 10 bar"
[[tap]]
column = "lower"
station = "{length:.0f} m ± 0.1 m"
elevation = "19.00 m ± 0.02 m"
accuracy = "{gauge:.2f} % of 10 bar"
[plan]
flow = "{flow:.1f} L/s"
static = "8 bar"
"""


@pytest.fixture(scope="module")
def ratios(tmp_path_factory):
    """Spread found over uncertainty planned, of ln C and of ln ε, for every pipe."""
    folder = tmp_path_factory.mktemp("plans")
    found = []
    for number in range(SECTIONS):
        rng = np.random.default_rng([SEED, number])
        bore = float(np.exp(rng.uniform(np.log(80.0), np.log(400.0))))
        text = SECTION.format(
            number=number,
            bore=bore,
            bore_limit=rng.uniform(0.2, 1.5),
            meter=rng.uniform(0.3, 2.0),
            gauge=rng.uniform(0.05, 0.4),
            length=bore * rng.uniform(1200.0, 2500.0) / 1000.0,
            flow=1000.0 * rng.uniform(1.2, 2.2) * np.pi / 4.0 * (bore / 1000.0) ** 2,
        )
        (folder / "section.toml").write_text(text, encoding="utf-8")
        section = read_section(folder)
        layout = plan_test(section).layout
        roughness = bore / 1000.0 * float(np.exp(rng.uniform(np.log(0.002), np.log(0.02))))
        planned = expected(section, section.wishes, layout, roughness)
        ln_c, ln_roughness = spread_found(section, layout, roughness, tests=TESTS, seed=number)
        found.append((ln_c / planned.ln_c, ln_roughness / planned.ln_roughness))
    ratios = np.array(found)
    print(f"\n{SECTIONS} pipes, {TESTS} tests each: spread found over uncertainty planned")
    for name, column in zip(("ln C", "ln roughness"), ratios.T, strict=True):
        low, high = np.quantile(column, (0.05, 0.95))
        print(f"{name:14} root mean square {rms(column):.3f}   5 to 95 % of pipes {low:.2f} to {high:.2f}")
    return ratios


def rms(values):
    """Root mean square, the fair mean of a ratio of standard deviations."""
    return float(np.sqrt(np.mean(values**2)))


@pytest.mark.slow
@pytest.mark.parametrize("column", [0, 1], ids=["ln C", "ln roughness"])
def test_planned_uncertainty_is_achieved_within_ten_percent(ratios, column):
    assert rms(ratios[:, column]) == pytest.approx(1.0, abs=0.10)
    # One pipe's spread over thirty tests is itself known to 13 %.
    assert np.mean(np.abs(ratios[:, column] - 1.0) < 0.3) >= 0.9
