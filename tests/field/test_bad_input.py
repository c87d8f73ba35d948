"""A gallery of bad input: one sin in each file, named after it, and how the error must begin."""

import sys
import tomllib
from pathlib import Path

import pytest

from fieldfit.errors import InputError
from fieldfit.field import log_source
from fieldfit.field.log_file import read_log
from fieldfit.field.section_file import read_section

BAD = Path(__file__).parent / "bad"
MESSAGES = tomllib.loads((BAD / "messages.toml").read_text(encoding="utf-8"))
SECTIONS = sorted(BAD.glob("sections/*.toml"))
LOGS = sorted(BAD.glob("logs/*"))


@pytest.fixture(scope="module")
def section():
    return read_section(BAD / "section.toml")


def test_every_sin_has_its_message():
    assert {path.stem for path in SECTIONS} == set(MESSAGES["sections"])
    assert {path.stem for path in LOGS} == set(MESSAGES["logs"])


def test_the_gallery_is_large_enough():
    assert len(LOGS) >= 60
    assert {path.stem for path in BAD.glob("log_sections/*")} <= {path.stem for path in LOGS}


@pytest.mark.parametrize("path", SECTIONS, ids=lambda path: path.stem)
def test_bad_section_file(path):
    with pytest.raises(InputError) as caught:
        read_section(path)
    assert str(caught.value).startswith(MESSAGES["sections"][path.stem])


@pytest.mark.parametrize("path", LOGS, ids=lambda path: path.stem)
def test_bad_log(path, section):
    own = BAD / "log_sections" / f"{path.stem}.toml"
    section = read_section(own) if own.exists() else section
    with pytest.raises(InputError) as caught:
        read_log(path, section)
    assert str(caught.value).startswith(MESSAGES["logs"][path.stem])


def test_what_is_not_there_is_said(tmp_path, section):
    with pytest.raises(InputError, match=r"there is no section\.toml in the folder"):
        read_section(tmp_path)
    with pytest.raises(InputError, match="there is no such file or folder"):
        read_section(tmp_path / "nothing")
    with pytest.raises(InputError, match="there is no such log"):
        read_log(tmp_path / "nothing.csv", section)
    with pytest.raises(InputError, match="this is a folder, not a log"):
        read_log(tmp_path, section)


@pytest.mark.skipif(sys.platform == "win32", reason="a file with a hole in it takes no room elsewhere")
def test_a_log_of_ten_gigabytes_is_refused_unread(tmp_path, section):
    path = tmp_path / "long.csv"
    with path.open("wb") as file:
        file.truncate(10 * 1024**3)
    with pytest.raises(InputError, match=r"long\.csv: the log has 10\.0 GiB, and 4 GiB is the most that is read\. Cut"):
        read_log(path, section)


def test_the_size_limit_is_one_constant(monkeypatch, section):
    monkeypatch.setattr(log_source, "LARGEST_LOG_BYTES", 10)
    with pytest.raises(InputError, match=r"the log has 0\.0 GiB"):
        read_log(BAD / "logs" / "headings_only.csv", section)


def test_a_section_file_of_a_megabyte_is_none(tmp_path):
    path = tmp_path / "section.toml"
    path.write_text("# nothing\n" * 200_000)
    with pytest.raises(InputError, match=r"section\.toml: 2000000 bytes are no section file"):
        read_section(path)
