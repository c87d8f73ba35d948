"""Units against NIST SP 811 (2008), appendix B, and the UK Weights and Measures Act; figures MEM unless marked."""

import pytest

from fieldfit.field.quantities import quantity

ROWS = [
    # text, dimension, SI value, digits it was printed with
    ("1 psi", "pressure", 6.894757e3, 7),
    ("1 kg/cm²", "pressure", 9.80665e4, 7),
    ("1 inHg", "pressure", 3.386389e3, 7),
    ("1 ftH2O", "pressure", 2.989067e3, 7),
    ("1 mH2O", "pressure", 9.80665e3, 7),
    ("1 mmHg", "pressure", 1.333224e2, 7),
    ("1 inH2O", "pressure", 2.490889e2, 7),
    ("1 gpm", "flow", 6.309020e-5, 7),
    ("1 cfs", "flow", 2.831685e-2, 7),
    ("1 MGD", "flow", 4.381264e-2, 7),
    ("1 imperial gpm", "flow", 4.54609e-3 / 60.0, 12),  # 4.546 09 L exactly
    ("1 lb/ft3", "density", 1.601846e1, 7),
    ("1 cP", "dynamic viscosity", 1.0e-3, 12),
    ("1 lb/(ft s)", "dynamic viscosity", 1.488164, 7),
    ("1 cSt", "kinematic viscosity", 1.0e-6, 12),
    ("1 ft2/s", "kinematic viscosity", 9.290304e-2, 7),
    ("1 mile", "length", 1.609344e3, 12),
    ("212 degF", "temperature", 100.0, 12),
    ("273.15 K", "temperature", 0.0, 12),
]


@pytest.mark.parametrize(("text", "dimension", "published", "digits"), ROWS)
def test_unit_is_as_published(text, dimension, published, digits):
    assert quantity(text, dimension, "-") == pytest.approx(published, rel=0.6 * 10.0 ** (1 - digits), abs=1e-10)
