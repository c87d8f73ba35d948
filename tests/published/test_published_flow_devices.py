"""Flow devices against published figures.

READ: seen in the source or a quotation of it; MEM: recalled from the named publication; CALC: computed independently.
"""

import numpy as np
import pytest
from chemicals import iapws95_rho

from fieldfit.field.constrictions import Throat, coefficient_standard, constriction_flow
from fieldfit.field.differential import hose_head
from fieldfit.field.flow_devices import OUTLET_COEFFICIENTS, Outlet, flow_at_residual, pitot_flow, pumper_factor
from fieldfit.field.uncertain import Accuracy, Uncertain

INCH, PSI, GPM = 0.0254, 6894.757293168361, 231.0 * 0.0254**3 / 60.0
EXACT = Accuracy(text="0")


def exactly(value):
    return Uncertain(value=value, standard=0.0)


def outlet(coefficient, inches, pumper=False):
    return Outlet(
        column="pitot",
        diameter=exactly(inches * INCH),
        coefficient=exactly(coefficient),
        accuracy=EXACT,
        pumper=pumper,
    )


@pytest.mark.parametrize(
    ("coefficient", "psi", "gpm"),
    [
        (0.90, 25.0, 839.2),  # NFPA 291, Q = 29.84 c d² √p (READ), CALC
        (0.90, 40.0, 1061.6),  # the same
        (0.80, 28.0, 789.5),  # the same
    ],
)
def test_pitot_at_an_outlet_of_two_and_a_half_inches(coefficient, psi, gpm):
    flow = pitot_flow(np.array([psi * PSI]), outlet(coefficient, 2.5))[0] / GPM
    # The table's constant is rounded, and the density of water is not quite fixed by it: 0.02 %.
    assert flow == pytest.approx(gpm, rel=2e-4)


def test_coefficients_of_outlets():
    # NFPA 291 (READ).
    assert OUTLET_COEFFICIENTS == {"rounded": 0.90, "square": 0.80, "projecting": 0.70}


@pytest.mark.parametrize(
    ("psi", "factor"), [(2.0, 0.97), (3.0, 0.92), (4.0, 0.89), (5.0, 0.86), (6.0, 0.84), (7.0, 0.83), (20.0, 0.83)]
)
def test_factor_of_pumper_outlets(psi, factor):
    # NFPA 291 (READ).
    pressure = np.array([psi * PSI])
    assert pumper_factor(pressure, outlet(0.9, 4.5, pumper=True))[0] == pytest.approx(factor)
    assert pumper_factor(pressure, outlet(0.9, 4.5))[0] == 1.0


def test_flow_at_another_residual():
    # NFPA 291: 800 gpm at static 65, residual 50, asked at 20 psi (CALC); several web pages print wrong answers.
    flow = flow_at_residual(800.0 * GPM, 65.0 * PSI, 50.0 * PSI, 20.0 * PSI)
    assert flow / GPM == pytest.approx(1447.9, abs=0.05)


def test_two_columns_of_water_at_different_temperature():
    # Principle Walski 1985; main 10 °C, hose 25 °C, 30 m of height: 0.080 m (CALC).
    main, hose = (iapws95_rho(273.15 + degrees, 101325.0) for degrees in (10.0, 25.0))
    assert hose_head(30.0, main, hose) == pytest.approx(0.080, abs=0.0005)


@pytest.mark.parametrize(
    ("beta", "percent"),
    [
        (0.15, 0.55),  # ISO 5167-2:2003, 5.3.3.1: (0.7 − β) % from 0.1 to 0.2 (MEM)
        (0.5, 0.5),  # 0.5 % from 0.2 to 0.6 (MEM)
        (0.7, 0.6669),  # (1.667 β − 0.5) % from 0.6 to 0.75 (MEM)
    ],
)
def test_uncertainty_of_an_orifices_coefficient(beta, percent):
    plate = Throat(kind="orifice", throat=exactly(beta * 0.2), pipe=exactly(0.2), tappings="corner", accuracy=EXACT)
    assert 200.0 * coefficient_standard(plate) == pytest.approx(percent, abs=1e-4)


@pytest.mark.parametrize(("reynolds", "beta"), [(1e5, 0.5), (1e6, 0.5), (1e5, 0.6), (3e4, 0.4)])
def test_orifice_solves_coefficient_and_flow_together(reynolds, beta):
    # Reader-Harris/Gallagher equation, corner tappings: ISO 5167-2:2003, 5.3.2.1 (MEM), written out once more.
    pipe, density, viscosity = 0.1, 998.2, 1.0016e-3
    mass = reynolds * np.pi * pipe * viscosity / 4.0
    a = (19000.0 * beta / reynolds) ** 0.8
    expected = (
        0.5961
        + 0.0261 * beta**2
        - 0.216 * beta**8
        + 0.000521 * (1e6 * beta / reynolds) ** 0.7
        + (0.0188 + 0.0063 * a) * beta**3.5 * (1e6 / reynolds) ** 0.3
    )
    area = np.pi * (beta * pipe) ** 2 / 4.0
    difference = (mass / (expected * area)) ** 2 * (1.0 - beta**4) / (2.0 * density)
    plate = Throat(kind="orifice", throat=exactly(beta * pipe), pipe=exactly(pipe), tappings="corner", accuracy=EXACT)
    flow = constriction_flow(np.array([difference / 9.0, difference, 3.0 * difference]), plate, density, viscosity)
    assert flow[1] * density == pytest.approx(mass, rel=2e-6)


@pytest.mark.parametrize(
    ("kind", "coefficient"),
    [
        ("venturi, as cast", 0.984),  # ISO 5167-4:2003, 5.5.2 (MEM)
        ("venturi, machined", 0.995),  # ISO 5167-4:2003, 5.5.3 (MEM)
        ("venturi, welded", 0.985),  # ISO 5167-4:2003, 5.5.4 (MEM)
    ],
)
def test_venturi_coefficients(kind, coefficient):
    tube = Throat(kind=kind, throat=exactly(0.1), pipe=exactly(0.2), tappings="corner", accuracy=EXACT)
    flow = constriction_flow(np.array([1e4]), tube, 998.2, 1.0016e-3)[0]
    ideal = np.pi / 4.0 * 0.1**2 * np.sqrt(2e4 / 998.2 / (1.0 - 0.5**4))
    assert flow / ideal == pytest.approx(coefficient, rel=1e-9)
