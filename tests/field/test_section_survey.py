import pytest

from fieldfit.errors import InputError
from fieldfit.field.reach_pipe import flow_at, reach_flow, section_of_reach, segments, velocity_head_drop
from fieldfit.field.section_file import read_section

TOP = 'name = "Line"\nbore = "100 mm ± 1 mm"\nmaterial = "cast iron"\n[flow]\ncolumn = "flow"\naccuracy = "0.5 % of reading"\n'
TAPS = "".join(
    f'[[tap]]\ncolumn = "t{n}"\nstation = "{at} m"\nelevation = "1 m"\naccuracy = "0.25 % of 10 bar"\n'
    for n, at in enumerate((0, 100, 250, 400), start=1)
)


@pytest.fixture
def read(tmp_path):
    def reader(rest, top=TOP):
        file = tmp_path / "section.toml"
        file.write_text(top + TAPS + rest, encoding="utf-8")
        return read_section(file)

    return reader


def test_a_reach_has_its_own_pipe(read):
    section = read('[[reach]]\nfrom = "t2"\nto = "T3"\nbore = "80 mm ± 0.5 mm"\nmaterial = "PVC"\n')
    assert [section_of_reach(section, k).bore.value for k in range(3)] == [0.1, 0.08, 0.1]
    assert [section_of_reach(section, k).material for k in range(3)] == [
        "uncoated cast iron",
        "PVC",
        "uncoated cast iron",
    ]
    assert any("sit in the pipe above the joint" in text for text in section.assumed)
    narrow = velocity_head_drop(0.008, section, 1)
    # From 100 mm at the joint above to 80 mm at the tap below: V²/2g grows from 0.053 m to 0.129 m.
    assert narrow == pytest.approx(0.0529 - 0.1292, abs=2e-4)


@pytest.mark.parametrize(
    ("rest", "seen"),
    [
        (
            '[[reach]]\nfrom = "t1"\nto = "t3"\nbore = "80 mm"\n',
            "no reach runs from 't1' to 't3'. Name two neighbouring taps",
        ),
        ('[[reach]]\nfrom = "t2"\nto = "t1"\nbore = "80 mm"\n', "no reach runs from 't2' to 't1'"),
        ('[[reach]]\nfrom = "t9"\nto = "t3"\nbore = "80 mm"\n', "there is no tap 't9'"),
        ('[[reach]]\nfrom = "t1"\nto = "t2"\n', "'bore' is missing"),
        (2 * '[[reach]]\nfrom = "t1"\nto = "t2"\nbore = "80 mm"\n', "is described twice"),
        ('[[branch]]\nstation = "400 m"\nflow = "1 L/s"\n', "the branch is at 400 m, and the last tap at 400 m"),
        ('[[branch]]\nstation = "40 m"\nflow = "some"\n', "key 'branch[1].flow'"),
        (2 * '[[branch]]\nstation = "40 m"\nflow = "unknown"\n', "the flows of 2 branches are unknown"),
        ('[[bore_evidence]]\nkind = "cupon"\nbore = "90 mm"\n', "Did you mean 'coupon'?"),
        ('[[bore_evidence]]\nkind = "coupon"\n', "'bore' is missing"),
        ('[[bore_evidence]]\nkind = "coupon"\nbore = "90 mm"\ntime = "9 s"\n', "a coupon gives a bore and has no time"),
        (
            '[[bore_evidence]]\nkind = "tracer"\ntime = "9 s"\n',
            "a tracer needs time, flow and length, and 'flow' is missing",
        ),
        (
            '[[bore_evidence]]\nkind = "tracer"\ntime = "9 s"\nflow = "-1 L/s"\nlength = "9 m"\n',
            "'-1 L/s' is not positive",
        ),
        ('[[bore_evidence]]\nkind = "coupon"\nbore = "9 km"\n', "is no pipe's"),
        ('[[bore_evidence]]\nkind = "coupon"\nbore = "90 mm"\nfrom = "t3"\nto = "t2"\n', "'t3' is not above 't2'"),
        ('[deposit]\ndensity = "1.9 kg/m3"\n', "is no deposit's density"),
        ('[deposit]\nvariation = "300 %"\n', "is out of range"),
    ],
)
def test_what_cannot_be_is_refused_with_its_place(read, rest, seen):
    with pytest.raises(InputError) as caught:
        read(rest)
    assert seen in str(caught.value)
    assert "section.toml" in str(caught.value)


def test_two_taps_at_one_station_are_refused_with_the_consequence(read):
    with pytest.raises(InputError, match=r"both at 100 m.*no pipe, so no friction to measure: leave one of them out"):
        read('[[tap]]\ncolumn = "t5"\nstation = "100 m"\naccuracy = "0.25 % of 10 bar"\n')


def test_a_side_flow_leaves_below_its_station(read):
    section = read('[[branch]]\nstation = "150 m"\nflow = "2 L/s ± 1 %"\n')
    assert [float(flow_at(0.01, at, section)) for at in (100.0, 150.0, 151.0)] == pytest.approx([0.01, 0.01, 0.008])
    assert segments(section, 1) == [(100.0, 150.0), (150.0, 250.0)]
    # A third of the reach at 10 L/s, two thirds at 8 L/s.
    assert float(reach_flow(0.01, section, 1)) == pytest.approx(((100.0 + 2.0 * 64.0) / 3.0) ** 0.5 * 1e-3)


def test_with_the_meter_below_it_a_side_flow_is_added_above(read):
    section = read('[[branch]]\nstation = "150 m"\nflow = "2 L/s"\n', TOP + 'station = "400 m"\n')
    assert [float(flow_at(0.01, at, section)) for at in (100.0, 200.0)] == pytest.approx([0.012, 0.01])
    assert not any("above every branch" in text for text in section.assumed)


def test_a_tracer_gives_the_bore_of_its_volume(read):
    rest = '[[bore_evidence]]\nkind = "tracer"\ntime = "100 s ± 1 %"\nflow = "5 L/s ± 2 %"\nlength = "80 m ± 0"\n'
    one = read(rest).bore_evidence[0]
    assert one.bore.value == pytest.approx((4.0 * 0.5 / (3.141592653589793 * 80.0)) ** 0.5)
    assert one.bore.relative == pytest.approx(0.5 * (0.01**2 + 0.02**2) ** 0.5 / 3**0.5)
