"""Loggers, wave speed and transmitter keys of a section file."""

import pytest

from fieldfit.errors import InputError
from fieldfit.field.common_clock import wave_speed
from fieldfit.field.section_file import read_section

TEXT = """\
name = "Mill race main"
bore = "150 mm"
temperature = "12 degC"
{top}
[flow]
column = "flow"
accuracy = "1 % of reading"
[[tap]]
column = "upstream"
station = "0 m"
elevation = "3 m"
accuracy = "0.25 % of 10 bar"
[[tap]]
column = "downstream"
station = "300 m"
elevation = "2 m"
accuracy = "0.25 % of 10 bar"
{tables}
"""


def read(tmp_path, tables="", top=""):
    path = tmp_path / "section.toml"
    path.write_text(TEXT.format(top=top, tables=tables), encoding="utf-8")
    return read_section(path)


def test_loggers_are_read(tmp_path):
    tables = (
        '[[logger]]\nfile = "up.csv"\noffset = "+1 h"\ndrift = "1.728 s/day"\n'
        '[[logger]]\ncolumns = ["downstream"]\noffset = "-2.5 s"\n'
        '[[logger]]\nfile = "flow.csv"\ncolumns = "flow"\ndrift = "-20 ppm"\n'
    )
    first, second, third = read(tmp_path, tables).loggers
    assert (first.file, first.columns, first.offset_s) == ("up.csv", (), 3600.0)
    assert first.drift == pytest.approx(20e-6)
    assert (second.file, second.columns, second.offset_s, second.drift) == (None, ("downstream",), -2.5, None)
    assert (third.columns, third.offset_s, third.drift) == (("flow",), None, pytest.approx(-20e-6))


@pytest.mark.parametrize(
    ("tables", "message"),
    [
        ('[[logger]]\noffset = "5 s"\n', r"logger\[1\].*neither a file nor columns.*Write file = "),
        ('[[logger]]\ncolumns = ["downstraem"]\n', r"no instrument has the column 'downstraem'.*'downstream'"),
        ('[[logger]]\nfile = "a.csv"\noffset = "5"\n', r"'5' has no unit.*\+3600 s"),
        ('[[logger]]\nfile = "a.csv"\ndrift = "5 s"\n', r"'5 s' is no drift of a clock.*20 ppm"),
        ("[[logger]]\ncolumns = []\n", r"'columns' is no list of texts"),
        ('[[logger]]\nfile = "a.csv"\noffset_s = "5 s"\n', r"'offset_s' is no key.*Did you mean 'offset'"),
        ('[[campaign]]\nlog = ["a.csv", 5]\n', r"'log' is no list of texts"),
        ('[differential]\naccuracy = "1 % of 1 bar"\n', r"'column' is missing.*column = \"dp\""),
        ('[differential]\ncolumn = "dp"\n', r"'accuracy' is missing"),
    ],
)
def test_what_is_wrong_is_said_with_its_place(tmp_path, tables, message):
    with pytest.raises(InputError, match=message) as error:
        read(tmp_path, tables)
    assert error.value.where.startswith("section.toml:")


def test_wave_speed_is_stated_or_slow_for_the_material(tmp_path):
    assert wave_speed(read(tmp_path, top='wave_speed = "1150 m/s"')) == 1150.0
    assert wave_speed(read(tmp_path)) == 1000.0
    assert wave_speed(read(tmp_path, top='material = "polyethylene"')) == 300.0
    assert wave_speed(read(tmp_path, top='material = "copper"')) == 1000.0
    with pytest.raises(InputError, match=r"'3 m/s' is no speed of a pressure wave"):
        read(tmp_path, top='wave_speed = "3 m/s"')


def test_a_campaign_may_name_several_files(tmp_path):
    campaign = read(tmp_path, '[[campaign]]\nlog = ["a.csv", "b.csv"]\n').campaigns[0]
    assert campaign.log == tmp_path / "a.csv"
    assert campaign.parts == (tmp_path / "b.csv",)
    assert read(tmp_path, '[[campaign]]\nlog = "a.csv"\n').campaigns[0].parts == ()


def test_gauges_beside_a_transmitter_are_said_to_be_unused(tmp_path):
    known = read(tmp_path, '[differential]\ncolumn = "dp"\naccuracy = "0.1 % of 1 bar"\n')
    assert any("The gauges of the taps were not used" in sentence for sentence in known.assumed)
    assert [tap.elevation.value for tap in known.taps] == [0.0, 0.0]
    assert known.differential.rise.value == pytest.approx(-1.0)
