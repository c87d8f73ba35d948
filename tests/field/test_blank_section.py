import re
import tomllib

import pytest

from fieldfit.errors import InputError
from fieldfit.field.blank_section import blank_section, write_blank_section
from fieldfit.field.section_file import read_section
from fieldfit.field.section_keys import KEYS, PLACEHOLDER


def fill_in(text):
    """Put the example behind each placeholder in its place, and the first tap at zero."""
    filled = re.sub(rf'"{PLACEHOLDER}"(.*such as )(".*")', r"\2\1\2", text)
    return filled.replace('station = "38.2 m', 'station = "0.0 m', 1)


def test_blank_file_is_toml_and_says_what_to_fill_in(tmp_path):
    path = write_blank_section(tmp_path / "new" / "kiln-supply")
    assert path == tmp_path / "new" / "kiln-supply" / "section.toml"
    tomllib.loads(path.read_text(encoding="utf-8"))
    with pytest.raises(
        InputError, match=r"section\.toml:9, key 'bore': 'bore' is still to be filled in\. Write bore = "
    ):
        read_section(path)


def test_every_key_is_explained():
    lines = blank_section().splitlines()
    for key in KEYS:
        if key.table != "fluid":
            assert any(line.lstrip("# ").startswith(f"{key.name} = ") and key.meaning in line for line in lines), key


def test_filled_in_it_can_be_read(tmp_path):
    path = write_blank_section(tmp_path)
    path.write_text(fill_in(path.read_text(encoding="utf-8")), encoding="utf-8")
    section = read_section(path)
    assert section.name == "Kiln cooling supply"
    assert [tap.column for tap in section.taps] == ["upstream", "downstream"]
    assert section.taps[1].station.value == pytest.approx(38.2)


def test_with_every_option_taken_it_can_be_read(tmp_path):
    path = write_blank_section(tmp_path)
    text = fill_in(path.read_text(encoding="utf-8"))
    options = re.sub(r"(?m)^# (?=\[|\w+ = )", "", text)
    either = re.sub(
        r'(?m)^((pipe|fluid|roughness|head_loss|time|length|signal|range|pulse) = |kind = "gate|flow = "2\.4).*\n',
        "",
        options,
    )
    path.write_text(either, encoding="utf-8")
    section = read_section(path)
    assert (section.material, section.fittings[0].count, section.duty_flow_m3_s) == (
        "carbon steel",
        2,
        pytest.approx(0.003),
    )
    assert len(section.screen_limits) == sum(key.table == "screen" for key in KEYS) - 1  # all but the mode


def test_nothing_is_overwritten(tmp_path):
    (tmp_path / "section.toml").write_text("mine")
    with pytest.raises(
        InputError, match=r"section\.toml: there is one already\. Name another folder; nothing was overwritten"
    ):
        write_blank_section(tmp_path)
    assert (tmp_path / "section.toml").read_text() == "mine"


def test_a_file_in_the_folders_place_is_said(tmp_path):
    (tmp_path / "kiln").write_text("mine")
    with pytest.raises(InputError, match="a file of this name stands where the folder should be"):
        write_blank_section(tmp_path / "kiln")
    with pytest.raises(InputError, match="it cannot be written"):
        write_blank_section(tmp_path / "kiln" / "below")
    with pytest.raises(InputError, match="it cannot be written"):
        write_blank_section("nul\0byte")
