"""Accuracy classes of gauges and meters: limits in percent.

ASME B40.100 grades and ISO 4064-1 errors are partly MEM; EN 837-1 classes are their own names.
"""

import numpy as np
import pytest

from fieldfit.field.accuracy import accuracy

ROOT_3 = 3.0**0.5
ASME = [
    ("4A", 0.1, 0.1),
    ("3A", 0.25, 0.25),
    ("2A", 0.5, 0.5),
    ("1A", 1, 1),
    ("A", 2, 1),
    ("B", 3, 2),
    ("C", 4, 3),
    ("D", 5, 5),
]
EN = ["0.1", "0.25", "0.6", "1", "1.6", "2.5", "4"]


@pytest.mark.parametrize(("grade", "outer", "middle"), ASME)
def test_asme_grade_by_thirds_of_the_scale(grade, outer, middle):
    gauge = accuracy(f"ASME B40.100 grade {grade}, 0-300 kPa", "pressure")
    limits = gauge.standard_at(np.array([50e3, 150e3, 250e3])) * ROOT_3 / 300e3 * 100.0
    assert limits == pytest.approx([outer, middle, outer])
    assert gauge.shape == "rectangular"


@pytest.mark.parametrize("name", EN)
def test_en_class_is_percent_of_full_scale(name):
    gauge = accuracy(f"EN 837-1 class {name} of 10 bar", "pressure")
    assert gauge.standard_at(np.array([5e5])) * ROOT_3 == pytest.approx([float(name) / 100.0 * 10e5])
    assert gauge.span == pytest.approx(10e5)


@pytest.mark.parametrize(("name", "upper", "lower"), [("1", 1.0, 3.0), ("2", 2.0, 5.0)])
def test_iso_class_widens_below_q2(name, upper, lower):
    meter = accuracy(f"ISO 4064 class {name}, Q2 0.4 L/s", "flow")
    flow = np.array([0.3e-3, 0.5e-3])
    assert meter.standard_at(flow) / flow * ROOT_3 * 100.0 == pytest.approx([lower, upper])
