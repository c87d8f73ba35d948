"""New pipe against published figures.

READ: seen in the source or a quotation of it; MEM: recalled from the named publication; CALC: computed independently.
"""

import pytest
from fluids.friction import HHR_roughness, material_roughness

from fieldfit.hydraulics.materials import material

# READ, ASHRAE Handbook – Fundamentals 2021, ch. 3, mm.
ASHRAE = [
    ("copper", 0.0015),
    ("PVC", 0.0015),
    ("polyethylene", 0.0015),
    ("commercial steel", 0.046),
    ("asphalted cast iron", 0.12),
    ("galvanized iron", 0.15),
    ("cast iron", 0.26),
]


@pytest.mark.parametrize(("name", "roughness_mm"), ASHRAE)
def test_typical_roughness_of_ashrae(name, roughness_mm):
    assert material(name).roughness_m[1] == pytest.approx(roughness_mm * 1e-3)
    assert "ASHRAE" in material(name).source


@pytest.mark.parametrize(
    ("names", "low_mm", "high_mm"),
    [
        (("spun concrete", "cast concrete"), 0.3, 3.0),  # READ, ASHRAE F2021 ch. 3
        (("riveted steel",), 0.9, 9.0),  # READ, ASHRAE F2021 ch. 3
        (("carbon steel",), 0.02, 0.10),  # READ, Idelchik: seamless steel, new
        (("galvanized steel",), 0.07, 0.15),  # READ, Idelchik
        (("asbestos cement",), 0.05, 0.10),  # READ, Idelchik: new
    ],
)
def test_published_ranges_lie_within_ours(names, low_mm, high_mm):
    low = min(material(name).roughness_m[0] for name in names)
    high = max(material(name).roughness_m[2] for name in names)
    assert low <= low_mm * 1e-3 * (1 + 1e-9)
    assert high >= high_mm * 1e-3 * (1 - 1e-9)


def test_cement_lining_of_farshad():
    # READ, Farshad and Rieke 2006, as the fluids library keeps it: 0.033 mm.
    measured = material_roughness("Cement lining")
    assert measured == 33e-6
    assert material("cement-lined ductile iron").roughness_m[1] == measured
    assert material("cement-lined steel").roughness_m[1] == measured
    assert material("GRP").roughness_m[1] == material_roughness("Fiberglass lining")


@pytest.mark.parametrize(
    ("name", "key"),
    # READ, Idelchik as the fluids library keeps it: every range of new pipe overlaps ours.
    [
        ("carbon steel", "Seamless steel tubes, New and unused"),
        ("carbon steel", "Welded steel tubes, Good condition"),
        ("galvanized steel", "Galvanized steel tubes, Bright galvanization; new"),
        ("galvanized steel", "Galvanized steel tubes, Ordinary galvanization"),
        ("asphalt-dipped cast iron", "Cast-iron tubes, New, bituminized"),
        ("asphalt-dipped cast iron", "Cast-iron tubes, Coated with asphalt"),
        ("asbestos cement", "Asbestos cement tubes, New"),
        ("spun concrete", "Reinforced concrete tubes, New"),
        ("copper", "Seamless tubes made from brass, copper, lead, aluminum, Commercially smooth"),
    ],
)
def test_ranges_of_idelchik(name, key):
    least, greatest, _ = HHR_roughness[key]
    low, _, high = material(name).roughness_m
    assert low <= least * (1 + 1e-9)
    assert high >= greatest * (1 - 1e-9)


@pytest.mark.parametrize(
    ("name", "c"),
    # READ or PRACTICE, C of new pipe.
    [("PVC", 150), ("polyethylene", 150), ("copper", 150), ("carbon steel", 140), ("cement-lined ductile iron", 140)],
)
def test_typical_c(name, c):
    assert material(name).hazen_williams_c[1] == c


def test_c_of_galvanized_steel():
    # READ: 110 to 120.
    low, typical, high = material("galvanized steel").hazen_williams_c
    assert low <= 110
    assert 110 <= typical <= 120 <= high


@pytest.mark.parametrize(
    ("name", "c"),
    # READ, Fair, Geyer and Okun, Table 5.1, new pipe; asbestos cement and welded coated steel 140, coated cast iron 130.
    [("asbestos cement", 140), ("carbon steel", 140), ("asphalt-dipped cast iron", 130), ("riveted steel", 110)],
)
def test_c_of_fair_geyer_and_okun(name, c):
    assert material(name).hazen_williams_c[1] == c


def test_c_of_lamont_for_uncoated_cast_iron():
    # MEM, Lamont 1981: new uncoated cast iron at 0.9 m/s, 121 to 134 from 75 mm to 1200 mm bore.
    low, typical, high = material("uncoated cast iron").hazen_williams_c
    assert low <= 121
    assert 121 <= typical <= 134 <= high


def test_tests_on_lined_pipe_lie_in_the_range():
    # READ, Ductile Iron Pipe Research Association: mean of tests on new cement-lined pipe 144, older 140.
    low, _, high = material("cement-lined ductile iron").hazen_williams_c
    assert all(low < c < high for c in (140, 144))
    # READ, AWWA M11: C = 140 + 0.17 d, d in inches.
    low, _, high = material("cement-lined steel").hazen_williams_c
    assert all(low < 140 + 0.17 * d < high for d in (4, 24, 96))
