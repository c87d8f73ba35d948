"""The fingerprints of faults: what Hazen–Williams C seems to be at four velocities when something is wrong.

D 150 mm, L 300 m, wall 0.1 mm, water at 15 °C; CALC: computed independently of this program. The water behind the table
has a kinematic viscosity of 1.1434e-6 m²/s, 0.4 % above IAPWS at 15 °C, and the table rounds its K of 44.37 to 44.
"""

import numpy as np
import pytest
from readings_maker import make_readings

from fieldfit.field.section import Correlation
from fieldfit.hydraulics.hazen_williams import c_from_friction_factor
from fieldfit.hydraulics.liquids import water
from fieldfit.inference.conditions import conditions_of
from fieldfit.inference.fault_model import GAIN, OFFSET, PLACE, SIZES, WALL, ZERO, Trials, read, unknowns

BORE, LENGTH, GRAVITY = 0.150, 300.0, 9.80665
VELOCITY = np.array([0.3, 0.6, 1.2, 2.0])
AREA = np.pi / 4.0 * BORE**2
LEAK = np.log(0.05 * 1.2 * AREA)

FINGERPRINTS = [  # name, sizes, side of the meter, C at 0.3, 0.6, 1.2 and 2.0 m/s (CALC)
    ("clean 0.1 mm", {}, 0.0, "137.7 137.9 135.9 133.3"),
    ("rough 2 mm", {"wall": np.log(2e-3)}, 0.0, "100.3 95.7 90.9 87.4"),
    ("bore 129.5 mm", {"bore": np.log(np.log(150.0 / 129.5))}, 0.0, "93.2 92.7 90.9 88.8"),
    ("local K = 44", {"local": np.log(44.37)}, 0.0, "96.7 94.1 90.9 88.1"),
    ("offset +0.15 m", {"offset": 0.15}, 0.0, "104.0 125.6 132.3 131.9"),
    ("offset −0.15 m", {"offset": -0.15}, 0.0, "255 154 139.8 134.7"),
    ("leak, meter upstream", {"leak": LEAK, "place": 0.5}, 1.0, "152 145 139.5 135.4"),
    ("leak, meter downstream", {"leak": LEAK, "place": 0.5}, -1.0, "124.9 131.1 132.5 131.2"),
    ("air +0.3 m", {"air": np.log(0.3)}, 0.0, "86.6 115.9 129.0 130.6"),
    ("meter +5 %", {"gain": np.log(1.05)}, 0.0, "144.6 144.8 142.7 139.9"),
]


def apparent_c(sizes, side, viscosity):
    """C that the readings seem to give, by the forward model."""
    # The meter's own error is in the flow it shows; the velocities of the table are the true ones.
    shown = VELOCITY * np.exp(sizes.get("gain", 0.0))
    conditions = conditions_of(
        make_readings(bore=BORE, length=LENGTH, velocities=shown, viscosity=viscosity, gauge_pa=0.0), Correlation()
    )
    centre = np.full((1, len(SIZES)), -np.inf)
    centre[:, [OFFSET, GAIN, ZERO, PLACE]] = 0.0
    centre[:, WALL] = np.log(1e-4)
    for name, value in sizes.items():
        centre[:, SIZES.index(name)] = value
    one = np.ones(1)
    trials = Trials(
        ln_weight=0.0 * one,
        centre=centre,
        spread=np.zeros_like(centre),
        side=side * one,
        flow_ratio=one,
        head_ratio=one,
        shift_m=np.zeros((1, 4)),
    )
    head = read(conditions, trials, np.zeros((1, unknowns(conditions)))).head_m[0]
    friction = head * 2.0 * GRAVITY * BORE / (LENGTH * shown**2)
    return c_from_friction_factor(friction, shown * AREA, BORE)


@pytest.mark.parametrize(("name", "sizes", "side", "printed"), FINGERPRINTS, ids=[row[0] for row in FINGERPRINTS])
def test_forward_models_leave_the_published_fingerprint(name, sizes, side, printed):
    found = apparent_c(sizes, side, 1.1434e-6)
    assert [
        f"{c:.{len(text.partition('.')[2])}f}" for c, text in zip(found, printed.split(), strict=True)
    ] == printed.split()


@pytest.mark.parametrize(("name", "sizes", "side", "printed"), FINGERPRINTS, ids=[row[0] for row in FINGERPRINTS])
def test_with_iapws_water_they_stay_within_one_unit_of_the_last_digit(name, sizes, side, printed):
    viscosity = float(water().viscosity_m2_s(np.array([15.0]))[0])
    found = apparent_c(sizes, side, viscosity)
    wanted = np.array([float(text) for text in printed.split()])
    unit = np.array([10.0 ** -len(text.partition(".")[2]) for text in printed.split()])
    assert np.all(np.abs(found - wanted) <= 1.51 * unit)
