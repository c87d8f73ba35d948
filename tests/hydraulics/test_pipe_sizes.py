"""Pipe by its trade name: the ways it is written, the tolerances, and what is refused."""

import math
import re

import pytest
from fluids.piping import nearest_pipe
from hypothesis import given
from hypothesis import strategies as st

from fieldfit.errors import InputError
from fieldfit.hydraulics.materials import material
from fieldfit.hydraulics.metal_pipe import NPS_BY_DN, STAINLESS_SCHEDULES, STEEL_SCHEDULES
from fieldfit.hydraulics.pipe_sizes import EXAMPLES, PipeSize, pipe_size
from fieldfit.hydraulics.plastic_pipe import LEAST_WALL_MM


@pytest.mark.parametrize("example", EXAMPLES)
def test_every_example_works_and_its_name_is_understood_again(example):
    size = pipe_size(example)
    assert 0.0 < size.bore_standard_m < 0.03 * size.bore_m
    assert len(size.source) > 10
    assert pipe_size(size.name) == size
    assert size.material is None or material(size.material).name == size.material


@pytest.mark.parametrize(
    ("text", "name"),
    [
        ('6" sch 40', "NPS 6 schedule 40"),
        ("6 in schedule 40", "NPS 6 schedule 40"),
        ("6-inch Sch.40", "NPS 6 schedule 40"),
        ("schedule 40, NPS 6", "NPS 6 schedule 40"),
        ("DN150 SCH40", "NPS 6 schedule 40"),
        ("NPS 6 (DN 150) schedule 40", "NPS 6 schedule 40"),
        ('1-1/2" Sch40', "NPS 1-1/2 schedule 40"),
        ("1 1/2 in schedule 40", "NPS 1-1/2 schedule 40"),
        ("½ in sch 40", "NPS 1/2 schedule 40"),
        ("NPS 12 std", "NPS 12 STD"),
        ("12 in XXS seamless pipe", "NPS 12 XXS"),
        ("NPS 6 sch 10S", "NPS 6 schedule 10S"),
        ("PE 100 DN200 SDR11", "DN 200 PE100 SDR 11"),
        ("PE100-RC DN 200 SDR 11 PN 16", "DN 200 PE100 SDR 11"),
        ("DN 200 PE100 PN 16", "DN 200 PE100 SDR 11"),
        ("HDPE OD 63 SDR 13,6", "DN 63 PE SDR 13.6"),
        ("200 mm PE80 SDR 17", "DN 200 PE80 SDR 17"),
        ("uPVC DN 110 SDR 21", "DN 110 PVC-U SDR 21"),
        ("C900 8-inch DR18", "8 in PVC C900 DR 18"),
        ("PVC 8 in SDR 26", "8 in PVC SDR 26"),
        ("6 in ductile iron class 52 cement lined", "ductile iron 6 in class 52 cement-lined"),
        ("AWWA C151 6 in DI PC 350 cement-mortar lined", "ductile iron 6 in PC350 cement-lined"),
        ("ductile iron 12 in class 350 double cement-lined", "ductile iron 12 in PC350 double cement-lined"),
        ("ductile iron pipe DN 200 C40 unlined", "DN 200 ductile iron C40 unlined"),
        ("copper tube type M 3/4 in", "ASTM B88 type M 3/4 in"),
        ("BS 1387 heavy DN 25", "DN 25 EN 10255 heavy"),
    ],
)
def test_the_ways_it_is_written(text, name):
    assert pipe_size(text).name == name


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("NPS 2 schedule 40", None),  # black or galvanized: a schedule does not say
        ("NPS 2 schedule 40 galvanised steel", "galvanized steel"),
        ("NPS 2 schedule 40 carbon steel", "carbon steel"),
        ("NPS 2 schedule 40S", "stainless steel"),
        ("DN 110 PE100 SDR 11", "polyethylene"),
        ("6 in PVC schedule 40", "PVC"),
        ("ductile iron 6 in PC350 cement-lined", "cement-lined ductile iron"),
        ("ductile iron 6 in PC350 unlined", None),
        ("copper type L 1 in", "copper or brass"),
    ],
)
def test_the_material_only_where_the_size_settles_it(text, expected):
    assert pipe_size(text).material == expected


@given(st.sampled_from(STEEL_SCHEDULES + STAINLESS_SCHEDULES), st.sampled_from(sorted(NPS_BY_DN)))
def test_steel_agrees_with_the_library_and_its_wall_tolerance(schedule, dn):
    nps = NPS_BY_DN[dn]
    try:
        _, bore_m, _, wall_m = nearest_pipe(NPS=nps, schedule=schedule)
    except ValueError:
        with pytest.raises(InputError, match=f"no NPS .* schedule {schedule}"):
            pipe_size(f"DN {dn} schedule {schedule}")
        return
    size = pipe_size(f"DN {dn} schedule {schedule}")
    assert size.bore_m == pytest.approx(bore_m, abs=1e-6)
    # The bore moves by twice the wall's 12.5 %, rectangular (GUM 4.3.7).
    assert size.bore_standard_m == pytest.approx(2 * 0.125 * wall_m / math.sqrt(3), rel=1e-3)


# CALC: ISO 4065 takes the wall as d/(2S + 1), S from the series R10, to 0.01 mm and then up to 0.1 mm.
SERIES_R10 = {7.4: 5, 9.0: 6, 11.0: 7, 13.6: 8, 17.0: 9, 21.0: 10, 26.0: 11}


@pytest.mark.parametrize(("outside", "sdr"), sorted(LEAST_WALL_MM))
def test_plastic_walls_follow_the_rule_of_their_series(outside, sdr):
    wall = LEAST_WALL_MM[outside, sdr]
    ratio = 2.0 * 10.0 ** (SERIES_R10[sdr] / 10.0) + 1.0
    by_rule = math.ceil(round(round(outside / ratio, 2) * 10.0, 6)) / 10.0
    assert wall == by_rule or (outside <= 40 and wall in {2.0, 2.3, 3.0} and wall > by_rule)
    size = pipe_size(f"DN {outside} PE SDR {sdr:g}")
    greatest_outside = outside + max(0.3, 0.0061 * outside + 0.1)
    assert outside - 2 * (1.1 * wall + 0.2) < size.bore_m * 1e3 < greatest_outside - 2 * wall
    assert 0.002 < size.bore_standard_m / size.bore_m < 0.03


def test_a_thicker_wall_leaves_less_bore():
    for family in (
        [f"NPS 8 schedule {number}" for number in (20, 40, 60, 80, 120, 160)],
        [f"DN 250 PE100 SDR {ratio}" for ratio in (26, 21, 17, 13.6, 11, 9, 7.4)],
        [f"ductile iron 16 in class {number} cement-lined" for number in range(50, 57)],
        [f"ductile iron 16 in PC{number} cement-lined" for number in (250, 300, 350)],
        [f"ductile iron 16 in PC350 {lining}" for lining in ("unlined", "cement-lined", "double cement-lined")],
        [f"copper type {kind} 2 in" for kind in "MLK"],
        ["DN 50 EN 10255 medium", "DN 50 EN 10255 heavy"],
    ):
        bores = [pipe_size(text).bore_m for text in family]
        assert bores == sorted(bores, reverse=True)
        assert len(set(bores)) == len(bores)


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("NPS 6 schedule 45", r"no NPS 6 schedule 45\. Schedules of NPS 6: 5, 10, 40, 80, 120, 160, STD"),
        ("NPS 7 schedule 40", "NPS 7"),
        ("DN 155 schedule 40", "DN 125, 150, 200"),
        ("8 in DN 150 schedule 40", "two sizes that differ"),
        ("NPS 6 shedule 40", "Did you mean 'schedule'"),
        ("NPS 6 schedule 40 rusty", "'rusty', which is not understood"),
        ("NPS 6 schedule 40 schedule 80", "'schedule 80', which is not understood"),
        ("NPS 6 schedule 40 SDR 11", "mixes a schedule with an SDR"),
        ("6 in PE100 SDR 11", "mixes PE with a size in inches"),
        ("DN 110 PE100 SDR 12", "made in SDR 7.4, 9, 11, 13.6, 17, 21, 26"),
        ("DN 150 PE100 SDR 11", "its outside diameter"),
        ("DN 110 PE100 PN 15", "Say PN 6, 8, 10"),
        ("DN 110 PE100", "its SDR"),
        ("DN 200 SDR 11", r"not understood\. Did you mean 'DN 200 PE100 SDR 11'"),
        ("DN 110 PVC-U PN 10", "does not say its SDR"),
        ("DN 110 PVC-U SDR 9", "DN 110 is made in SDR 13.6, 17, 21, 26"),
        ("DN 50 PVC-U SDR 21", "its outside diameter: 63, 75"),
        ("6 in PVC SDR 25", "SDR 13.5, 17, 21, 26"),
        ("ductile iron 6 in PC350", "cement-lined or unlined"),
        ("ductile iron 6 in cement-lined", "its class, such as PC350"),
        ("ductile iron 6 in PC250 cement-lined", "For 6 in there is PC350, class 50"),
        ("ductile iron 7 in PC350 cement-lined", "Sizes are 3, 4, 6, 8"),
        ("DN 175 ductile iron K9 cement-lined", "Sizes are DN 80, 100"),
        ("copper 1 in", "type K, L or M"),
        ("copper type M 1/4 in", "Sizes of type M"),
        ("DN 50 EN 10255", "medium or heavy"),
        ("DN 60 EN 10255 medium", "Its sizes are DN 15"),
        ("1/0 in schedule 40", "not understood"),
        ("6 in", "not understood"),
        ("banana", "not understood"),
        ("", "not understood"),
    ],
)
def test_refusals_say_what_there_is(text, message):
    with pytest.raises(InputError, match=message):
        pipe_size(text)


def test_an_unknown_text_is_shown_one_example_of_each_form():
    with pytest.raises(InputError) as caught:
        pipe_size("six inch pipe")
    for example in EXAMPLES:
        assert f"'{example}'" in caught.value.do


PIECES = [
    "DN",
    "NPS",
    "6",
    "150",
    "in",
    '"',
    "1/2",
    "schedule",
    "sch",
    "40",
    "STD",
    "PE100",
    "SDR",
    "11",
    "PVC",
    "C900",
]
PIECES += ["ductile", "PC350", "class", "52", "cement-lined", "copper", "type", "L", "K9", "9" * 400, "\x1b[31m", "٣"]


@given(st.one_of(st.text(max_size=40), st.lists(st.sampled_from(PIECES), max_size=8).map(" ".join)))
def test_any_text_is_a_size_or_a_short_printable_error(text):
    try:
        size = pipe_size(text)
    except InputError as caught:
        error = str(caught)
    else:
        assert isinstance(size, PipeSize)
        assert 0.005 < size.bore_m < 1.3
        return
    assert len(error) < 1000
    assert re.fullmatch(r"[^\x00-\x1f\x7f]*", error)
