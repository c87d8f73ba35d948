"""Bores of pipe against published figures.

READ: seen in the source or a quotation of it; MEM: recalled from the named publication; CALC: computed independently.
"""

import math

import pytest

from fieldfit.hydraulics.pipe_sizes import pipe_size

# READ, ASME B36.10M, inside diameter, mm. The metric edition rounds outside diameter and wall to 0.1 and 0.01 mm.
STEEL = [
    ("NPS 1/2 schedule 40", 15.80),
    ("NPS 1 schedule 40", 26.64),
    ("NPS 2 schedule 40", 52.50),
    ("NPS 3 schedule 40", 77.93),
    ("NPS 4 schedule 40", 102.26),
    ("NPS 6 schedule 40", 154.05),
    ("NPS 8 schedule 40", 202.7),
    ("NPS 12 schedule 40", 303.2),
    ("NPS 12 STD", 304.8),
    ("NPS 24 schedule 40", 575.0),
    ("NPS 2 schedule 80", 49.25),
    ("NPS 4 schedule 80", 97.18),
]


@pytest.mark.parametrize(("text", "bore_mm"), STEEL)
def test_steel(text, bore_mm):
    assert pipe_size(text).bore_m * 1e3 == pytest.approx(bore_mm, abs=0.07)


@pytest.mark.parametrize(
    ("text", "bore_mm"),
    # READ, ASTM B88, inside diameter, mm.
    [("ASTM B88 type L 1/2 in", 13.84), ("ASTM B88 type L 1 in", 26.04), ("ASTM B88 type L 2 in", 50.42)],
)
def test_copper(text, bore_mm):
    assert pipe_size(text).bore_m * 1e3 == pytest.approx(bore_mm, abs=0.006)


@pytest.mark.parametrize(
    ("kind", "size_in", "wall_in"),
    # READ, tables after ASTM B88: wall, in; the outside diameter is the nominal size plus 1/8 in.
    [("K", 0.5, 0.049), ("K", 2, 0.083), ("K", 6, 0.192), ("L", 0.75, 0.045), ("L", 4, 0.114), ("L", 6, 0.140)],
)
def test_copper_walls(kind, size_in, wall_in):
    size = pipe_size(f"copper type {kind} {size_in} in")
    assert size.bore_m / 0.0254 == pytest.approx(size_in + 0.125 - 2 * wall_in, abs=1e-6)


# READ, AWWA C150 and C151: outside diameter, walls of the special thickness classes 50 to 56, walls by pressure class, in.
# MEM where the tables seen disagree: 10 in PC350 is 0.26.
DUCTILE_IRON = {
    4: (4.80, (None, 0.26, 0.29, 0.32, 0.35, 0.38, 0.41), {350: 0.25}),
    6: (6.90, (0.25, 0.28, 0.31, 0.34, 0.37, 0.40, 0.43), {350: 0.25}),
    8: (9.05, (0.27, 0.30, 0.33, 0.36, 0.39, 0.42, 0.45), {350: 0.25}),
    10: (11.10, (0.29, 0.32, 0.35, 0.38, 0.41, 0.44, 0.47), {350: 0.26}),
    12: (13.20, (0.31, 0.34, 0.37, 0.40, 0.43, 0.46, 0.49), {350: 0.28}),
    14: (15.30, (0.33, 0.36, 0.39, 0.42, 0.45, 0.48, 0.51), {250: 0.28, 300: 0.30, 350: 0.31}),
    16: (17.40, (0.34, 0.37, 0.40, 0.43, 0.46, 0.49, 0.52), {250: 0.30, 300: 0.32, 350: 0.34}),
    18: (19.50, (0.35, 0.38, 0.41, 0.44, 0.47, 0.50, 0.53), {250: 0.31, 300: 0.34, 350: 0.36}),
    20: (21.60, (0.36, 0.39, 0.42, 0.45, 0.48, 0.51, 0.54), {250: 0.33, 300: 0.36, 350: 0.38}),
    24: (25.80, (0.38, 0.41, 0.44, 0.47, 0.50, 0.53, 0.56), {200: 0.33, 250: 0.37, 300: 0.40, 350: 0.43}),
}


@pytest.mark.parametrize("size", DUCTILE_IRON)
def test_ductile_iron(size):
    outside_in, by_thickness_class, by_pressure_class = DUCTILE_IRON[size]
    walls = {f"class {number}": wall for number, wall in zip(range(50, 57), by_thickness_class, strict=True) if wall}
    walls |= {f"PC{number}": wall for number, wall in by_pressure_class.items()}
    for wall_class, wall_in in walls.items():
        unlined = pipe_size(f"ductile iron {size} in {wall_class} unlined").bore_m / 0.0254
        assert unlined == pytest.approx(outside_in - 2 * wall_in, abs=1e-6)
        # MEM, AWWA C104: cement lining 1/16 in to 12 in pipe, 3/32 in from 14 to 24 in.
        lined = pipe_size(f"ductile iron {size} in {wall_class} cement-lined").bore_m / 0.0254
        assert unlined - lined == pytest.approx(2 * (1 / 16 if size <= 12 else 3 / 32), abs=1e-6)


@pytest.mark.parametrize(("size", "bore_in"), [(6, 6.28), (8, 8.43), (12, 12.52)])
def test_lined_ductile_iron_as_the_trade_prints_it(size, bore_in):
    # MEM, Ductile Iron Pipe Research Association: actual inside diameter of cement-lined class 350 pipe, in.
    assert pipe_size(f"ductile iron {size} in PC350 cement-lined").bore_m / 0.0254 == pytest.approx(bore_in, abs=0.006)


@pytest.mark.parametrize(
    ("dn", "outside_mm", "least_wall_mm"),
    # READ, EN 545:2010, outside diameter and least wall of class 40, mm.
    [(80, 98, 3.0), (100, 118, 3.0), (150, 170, 3.0), (200, 222, 3.1), (300, 326, 4.6), (400, 429, 6.0)],
)
def test_metric_ductile_iron(dn, outside_mm, least_wall_mm):
    # READ, maker's table after EN 545: the nominal wall is 1.3 mm + 0.001 DN above the least one.
    bore = pipe_size(f"DN {dn} ductile iron C40 unlined").bore_m * 1e3
    assert bore == pytest.approx(outside_mm - 2 * (least_wall_mm + 1.3 + 0.001 * dn), abs=0.01)
    # READ, formula of EN 545:2006 for class K: e = K(0.5 + 0.001 DN); MEM: never under 6 mm.
    bore = pipe_size(f"DN {dn} ductile iron K9 unlined").bore_m * 1e3
    assert bore == pytest.approx(outside_mm - 2 * max(6.0, 9 * (0.5 + 0.001 * dn)), abs=0.11)
    # READ, EN 545: cement mortar 4.0 mm up to DN 300, 5.0 mm from DN 350.
    lined = pipe_size(f"DN {dn} ductile iron K9 cement-lined").bore_m * 1e3
    assert bore - lined == pytest.approx(8.0 if dn <= 300 else 10.0, abs=1e-6)


@pytest.mark.parametrize(
    ("dn", "sdr", "least_mm", "greatest_mm"),
    # READ, tables after ISO 4427-2 with the tolerances of grade V, wall, mm.
    [
        (110, "11", 10.0, 11.1),
        (200, "11", 18.2, 20.2),
        (90, "11", 8.2, 9.2),
        (160, "11", 14.6, 16.2),
        (315, "11", 28.6, 31.6),
        (355, "11", 32.2, 35.6),
        (500, "11", 45.4, 50.1),
        (560, "11", 50.8, 56.0),
        (125, "13.6", 9.2, 10.3),
        (250, "13.6", 18.4, 20.4),
        (400, "13.6", 29.4, 32.5),
        (110, "17", 6.6, 7.4),
        (225, "17", 13.4, 14.9),
        (560, "17", 33.2, 36.7),
        (140, "9", 15.7, 17.4),
        (315, "7.4", 43.1, 47.6),
    ],
)
def test_polyethylene(dn, sdr, least_mm, greatest_mm):
    # READ, ISO 11922-1: outside diameter grade B, 0.006 d rounded up to 0.1 mm, from 0.3 to 4 mm.
    outside_range = min(max(math.ceil(round(0.06 * dn, 6)) / 10, 0.3), 4.0)
    largest = dn + outside_range - 2 * least_mm
    smallest = dn - 2 * greatest_mm
    size = pipe_size(f"DN {dn} PE100 SDR {sdr}")
    assert size.bore_m * 1e3 == pytest.approx((largest + smallest) / 2, abs=1e-6)
    assert size.bore_standard_m * 1e3 == pytest.approx((largest - smallest) / 2 / math.sqrt(3), rel=1e-9)


@pytest.mark.parametrize("text", ["DN 110 PE100 SDR 11", "DN 200 PE100 SDR 11"])
def test_a_nominal_pe_bore_is_uncertain_by_two_percent(text):
    # PRACTICE: a nominal PE bore is uncertain by about 2 %, its C by 6 %.
    size = pipe_size(text)
    assert 2 * size.bore_standard_m / size.bore_m == pytest.approx(0.02, abs=0.003)
    assert 2.63 * 2 * size.bore_standard_m / size.bore_m == pytest.approx(0.055, abs=0.01)


@pytest.mark.parametrize(
    ("text", "bore_in"),
    # MEM, makers' average inside diameters, in: made to the least wall plus half its tolerance.
    [("6 in PVC schedule 40", 6.031), ("6 in PVC C900 DR 18", 6.09), ("2 in PVC schedule 40", 2.047)],
)
def test_american_pvc(text, bore_in):
    assert pipe_size(text).bore_m / 0.0254 == pytest.approx(bore_in, abs=0.006)


def test_the_bore_behind_a_published_pvc_test():
    # READ second-hand: 6 in PVC, true bore 5.88 in, gave C 158 (and 150 on the nominal 6 in).
    size = pipe_size("6 in PVC C900 DR 14")
    assert abs(size.bore_m / 0.0254 - 5.88) < 2 * size.bore_standard_m / 0.0254


@pytest.mark.parametrize(("dn", "outside_mm", "wall_mm"), [(25, 33.7, 3.2), (50, 60.3, 3.6), (100, 114.3, 4.5)])
def test_threaded_steel_tube(dn, outside_mm, wall_mm):
    # MEM, EN 10255 medium series, mm; the walls also READ in the fluids library.
    assert pipe_size(f"DN {dn} EN 10255 medium").bore_m * 1e3 == pytest.approx(outside_mm - 2 * wall_mm, abs=1e-6)
