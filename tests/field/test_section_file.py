import codecs
import datetime as dt
import math
from pathlib import Path

import numpy as np
import pytest

from fieldfit.errors import InputError
from fieldfit.field.section_file import read_section
from fieldfit.field.section_taps import default_station_standards

ROOT_3 = 3.0**0.5

TOP = 'name = "Kiln cooling supply"\nbore = "52.5 mm ± 0.2 mm"\ntemperature = "18 degC ± 1 degC"\n'
FLOW = '[flow]\ncolumn = "flow"\naccuracy = "0.5 % of reading"\n'
UPPER = '[[tap]]\ncolumn = "upstream"\nstation = "0 m ± 0.1 m"\naccuracy = "0.25 % of 10 bar"\n'
LOWER = '[[tap]]\ncolumn = "downstream"\nstation = "38.2 m ± 0.1 m"\naccuracy = "0.25 % of 10 bar"\n'

FULL = """
name = "Kiln cooling supply"
material = "Carbon Steel"
installed = 2009-03-01
bore = "52.5 mm ± 0.2 mm"
fluid = "water"
temperature = "18 degC ± 0.5 degC (k=2)"
[flow]
column = "flow"
unit = "m3/h"
accuracy = "0.5 % of reading"
meter = "MAG-118"
senses = "velocity"
[[tap]]
column = "upstream"
station = "0 m ± 0.1 m"
elevation = "1.20 m ± 0.02 m"
accuracy = "0.25 % of 10 bar"
gauge = "PG-07"
[[tap]]
column = "downstream"
unit = "psi"
station = "125 ft ± 3 in"
elevation = "8 ft ± 1 in"
accuracy = 0
gauge = "PG-11"
[[fitting]]
name = "two long-radius bends"
k = "0.5 ± 20 %"
count = 2
station = "12 m"
[[fitting]]
k = 0
[[fitting]]
kind = "gate valve, open"
[[campaign]]
date = 2026-05-12
log = "2026-05-12.csv"
[[campaign]]
date = 2027-05-12T08:00:00
log = "after.csv"
cleaned = true
meter = "MAG-205"
[duty]
flow = "3.0 L/s"
[correlation]
standard_uncertainty = "4 %"
decades = 2
[screen]
static_flow = "2 %"
outlier = 5
"""


@pytest.fixture
def read(tmp_path):
    """Read a text as a section file."""

    def reader(text):
        path = tmp_path / "section.toml"
        path.write_text(text, encoding="utf-8")
        return read_section(path)

    return reader


def test_every_key_arrives(read, tmp_path):
    section = read(FULL)
    assert (section.name, section.material, section.installed) == (
        "Kiln cooling supply",
        "carbon steel",
        dt.date(2009, 3, 1),
    )
    assert (section.bore.value, section.bore.standard) == pytest.approx((0.0525, 0.2e-3 / ROOT_3))
    assert section.bore_source == "given in the section file"
    assert section.liquid.name == "water"
    assert section.temperature.value == 18.0
    assert section.temperature_standard == pytest.approx(0.25)
    meter = section.meter
    assert (meter.column, meter.unit, meter.serial, meter.senses) == ("flow", "m3/h", "MAG-118", "velocity")
    upper, lower = section.taps
    assert (upper.gauge, upper.unit, lower.gauge, lower.unit) == ("PG-07", None, "PG-11", "psi")
    assert (lower.station.value, lower.station.standard) == pytest.approx((38.1, 0.0762 / ROOT_3))
    assert lower.elevation.value == pytest.approx(2.4384)
    assert (lower.accuracy.gain, lower.accuracy.fixed) == (0.0, 0.0)
    bends, nothing, valve = section.fittings
    assert (bends.k.value, bends.k.standard, bends.count, bends.station) == (0.5, pytest.approx(0.1 / ROOT_3), 2, 12.0)
    assert (nothing.k.value, nothing.k.standard) == (0.0, 0.0)
    assert valve.name == "gate valve, open"
    assert "gate valve" in valve.source
    first, second = section.campaigns
    assert (first.date, first.log, first.cleaned, first.meter) == (
        dt.date(2026, 5, 12),
        tmp_path / "2026-05-12.csv",
        False,
        None,
    )
    assert (second.date, second.cleaned, second.meter) == (dt.date(2027, 5, 12), True, "MAG-205")
    assert section.duty_flow_m3_s == pytest.approx(0.003)
    assert (section.correlation.standard, section.correlation.decades) == (0.04, 2.0)
    assert section.screen_limits == (("static_flow", 0.02), ("outlier", 5.0))
    assert section.path == tmp_path / "section.toml"


def test_folder_or_file_is_the_same(read, tmp_path):
    assert read(TOP + FLOW + UPPER + LOWER).taps == read_section(tmp_path).taps == read_section(str(tmp_path)).taps


def test_nothing_assumed_where_all_is_said(read):
    assert read('fluid = "water"\n' + TOP + FLOW + UPPER + LOWER).assumed == ()


def test_each_default_is_used_and_said(read):
    text = (TOP + FLOW + UPPER + LOWER).replace(" ± 0.2 mm", "").replace(" ± 1 degC", "").replace(" ± 0.1 m", "")
    text = text.replace("station", 'elevation = "1 m"\nstation') + '[[fitting]]\nname = "bends"\nk = 0.5\n'
    section = read(text)
    assert section.bore.standard == pytest.approx(0.525e-3 / ROOT_3)
    assert section.temperature_standard == pytest.approx(1.0 / ROOT_3)
    upper, lower = section.taps
    assert math.hypot(upper.station.standard, lower.station.standard) == pytest.approx(0.005 * 38.2 / ROOT_3)
    assert lower.elevation.standard == pytest.approx(0.05 / ROOT_3)
    assert section.fittings[0].k.standard == pytest.approx(0.15 / ROOT_3)
    assert all(u.assumed for u in (section.bore, upper.station, lower.station, lower.elevation, section.fittings[0].k))
    for begins in (
        "The bore was taken as good to ±1 %: write bore = ",
        "The liquid was taken as water: write fluid = ",
        "The liquid's temperature was taken as good to ±1 degC: write temperature = ",
        "Distances between taps were taken as good to ±0.5 %: write station = ",
        "Elevations of gauges were taken as good to ±0.05 m: write elevation = ",
        "K of bends was taken as good to ±30 %: write k = ",
    ):
        assert sum(sentence.startswith(begins) for sentence in section.assumed) == 1
    assert len(section.assumed) == 6


def test_temperature_limit_holds_for_a_logs_column_too(read):
    section = read((TOP + FLOW + UPPER + LOWER).replace('temperature = "18 degC ± 1 degC"\n', ""))
    assert section.temperature is None
    assert section.temperature_standard == pytest.approx(1.0 / ROOT_3)


@pytest.mark.parametrize("stations", [[0.0, 100.0], [0.0, 100.0, 150.0], [5.0, 6.0, 106.0]])
def test_default_gives_each_of_two_reaches_half_a_percent(stations):
    standards = default_station_standards(stations)
    for number, length in enumerate(np.diff(stations)):
        assert math.hypot(*standards[number : number + 2]) == pytest.approx(0.005 * length / ROOT_3)


def test_default_gives_no_reach_more_than_half_a_percent():
    stations = [0.0, 10.0, 200.0, 210.0, 400.0, 410.0]
    standards = np.array(default_station_standards(stations))
    assert np.all(np.hypot(standards[1:], standards[:-1]) <= 0.005 * np.diff(stations) / ROOT_3 * (1.0 + 1e-12))
    assert np.all(standards > 0.0)


def test_taps_are_put_in_order_and_that_is_said(read):
    section = read('fluid = "water"\n' + TOP + FLOW + LOWER + UPPER)
    assert [tap.column for tap in section.taps] == ["upstream", "downstream"]
    assert section.assumed == (
        "The file names the taps in another order than along the pipe; they were taken as: upstream, downstream.",
    )


def test_elevation_may_be_unknown(read):
    assert [tap.elevation for tap in read(TOP + FLOW + UPPER + LOWER).taps] == [None, None]


@pytest.mark.parametrize(
    ("viscosity", "kinematic"),
    [("32 cSt", 32e-6), ("27.84 cP", 32e-6), ("0.02784 Pa s", 32e-6), ("32 mm2/s ± 3 %", 32e-6)],
)
def test_density_and_viscosity_by_the_unit(read, viscosity, kinematic):
    liquid = read(
        f'fluid = {{ density = "870 kg/m3", viscosity = "{viscosity}", name = "gear oil" }}\n'
        + TOP
        + FLOW
        + UPPER
        + LOWER
    ).liquid
    at = np.array([15.0, 40.0])
    assert liquid.name == "gear oil"
    assert liquid.density_kg_m3(at) == pytest.approx(870.0)
    assert liquid.viscosity_m2_s(at) == pytest.approx(kinematic)
    assert liquid.viscosity_standard == pytest.approx(0.03 / ROOT_3 if "±" in viscosity else 0.02)


def test_fluid_table_may_be_written_long(read):
    text = TOP + FLOW + UPPER + LOWER + '[fluid]\ndensity = "870 kg/m3"\nviscosity = "32 cSt"\n'
    assert read(text).liquid.viscosity_m2_s(np.array([15.0])) == pytest.approx(32e-6)


def test_pipe_gives_bore_source_and_material(read):
    text = TOP.replace('bore = "52.5 mm ± 0.2 mm"', 'pipe = "DN 200 PE100 SDR 11"') + FLOW + UPPER + LOWER
    section = read(text)
    assert section.bore.value == pytest.approx(0.1622, rel=0.01)
    assert section.bore.standard > 0.0
    assert "ISO 4427" in section.bore_source
    assert section.material == "polyethylene"
    assert any("polyethylene" in sentence for sentence in section.assumed)
    assert read('material = "unknown"\n' + text).material is None


def test_bare_gallons_are_said_once(read):
    text = (TOP + FLOW + UPPER + LOWER).replace("0.5 % of reading", "0.5 % of 50 gpm") + '[duty]\nflow = "40 gpm"\n'
    assert sum("US gallons" in sentence for sentence in read(text).assumed) == 1


@pytest.mark.parametrize(
    ("written", "kept"),
    [
        ("../../etc/passwd", "../../etc/passwd"),
        ("<script>alert(1)</script>", "<script>alert(1)</script>"),
        ("  Kiln\\tsupply \\u001b[31m red\\n", "Kiln supply [31m red"),
        ("CON", "CON"),
        ("left\\u202Eright", "left right"),
        ("Σ 管路 №5", "Σ 管路 №5"),
        ("K" + "k" * 119, "K" + "k" * 119),
    ],
)
def test_hostile_names_stay_plain_text(read, written, kept):
    assert read(TOP.replace("Kiln cooling supply", written) + FLOW + UPPER + LOWER).name == kept


def test_name_of_121_characters_is_refused(read):
    with pytest.raises(InputError, match=r"section\.toml:1, key 'name': 'kkk.* has 121 characters"):
        read(TOP.replace("Kiln cooling supply", "k" * 121) + FLOW + UPPER + LOWER)


@pytest.mark.parametrize(
    "encode",
    [lambda t: codecs.BOM_UTF8 + t.encode(), lambda t: t.encode("utf-16"), lambda t: t.replace("\n", "\r\n").encode()],
)
def test_text_as_editors_save_it(tmp_path, encode):
    path = tmp_path / "section.toml"
    path.write_bytes(encode(TOP + FLOW + UPPER + LOWER))
    assert read_section(path).bore.value == pytest.approx(0.0525)


def test_lines_are_found_in_dotted_and_inline_tables(read):
    with pytest.raises(InputError, match=r"section\.toml:4, key 'flow\.accuracy': '7 %' may be"):
        read(TOP + 'flow.accuracy = "7 %"\nflow.column = "flow"\n' + UPPER + LOWER)
    with pytest.raises(InputError, match=r"section\.toml:4, key 'fluid\.density': '870' has no unit"):
        read(TOP + 'fluid = { density = "870", viscosity = "32 cSt" }\n' + FLOW + UPPER + LOWER)


DEVICE_KEYS = ("device", "throat", "throat_pipe", "tappings")
FLOW_KEYS = {"pipe": ("signal", "range", *DEVICE_KEYS), "bore": ("unit", "pulse", *DEVICE_KEYS)}


def test_the_examples_in_the_list_of_keys_are_right(read):
    """Every example that errors and the blank file show is itself accepted."""
    from fieldfit.field.section_keys import KEYS

    def lines(table, skip=()):
        return "".join(f"{key.line}\n" for key in KEYS if key.table == table and key.name not in skip)

    plain, raw = lines("tap", ["signal", "range"]), lines("tap", ["unit"])
    taps = f"[[tap]]\n{plain}[[tap]]\n{raw}".replace('"38.2 m ± 0.1 m"', '"0 m"', 1).replace("upstream", "u", 1)
    rest = "".join(f"[{t}]\n{lines(t)}" for t in ("log", "duty", "correlation", "screen"))
    meter = {one: f"[flow]\n{lines('flow', skip)}" for one, skip in FLOW_KEYS.items()}
    fittings = f"[[fitting]]\n{lines('fitting', ['kind'])}[[fitting]]\n{lines('fitting', ['k'])}[[campaign]]\n{lines('campaign')}"
    coupon = f"[[bore_evidence]]\n{lines('bore_evidence', ['time', 'flow', 'length'])}"
    tracer = "[[bore_evidence]]\n" + lines("bore_evidence", ["bore"]).replace('"coupon"', '"tracer"')
    fittings += f"[[reach]]\n{lines('reach', ['pipe'])}[[branch]]\n{lines('branch')}{coupon}{tracer}[deposit]\n{lines('deposit')}"
    fittings = fittings.replace('from = "upstream"', 'from = "u"').replace('to = "downstream"', 'to = "upstream"')
    for one, other in (("pipe", "bore"), ("bore", "pipe")):
        section = read(lines("", [one]) + meter[one] + rest + taps + fittings)
        assert (section.name, len(section.fittings)) == ("Kiln cooling supply", 2), other
    assert (
        read(lines("", ["pipe", "fluid"]) + f"[fluid]\n{lines('fluid')}" + meter["pipe"] + rest + taps).liquid.name
        == "gear oil"
    )
    assert isinstance(section.path, Path)
