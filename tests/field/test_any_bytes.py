"""Whatever bytes a file holds, it is read or refused in words, and nothing else happens."""

from pathlib import Path

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from fieldfit.errors import InputError
from fieldfit.field.log_file import read_log
from fieldfit.field.section_file import read_section

BAD = Path(__file__).parent / "bad"
GOOD = (BAD / "section.toml").read_text(encoding="utf-8")
HEADINGS = "time,flow [L/s],upstream [kPa],downstream [kPa],temperature [degC]\n"
ROW = "2026-05-12T08:00:00,0.00,412.1,400.3,14.2\n"

FIELDS = st.sampled_from(
    [
        "0.1",
        "412",
        "1,5",
        "-",
        "NaN",
        "inf",
        "1e999",
        "true",
        "",
        " ",
        '"',
        "2026-05-12T08:00:00",
        "08:00",
        "Average",
        "٣",
        "\x1a",
        "0x10",
        "1_0",
    ]
)
ROWS = st.lists(st.lists(FIELDS, max_size=7), max_size=6)
SEPARATED = st.tuples(st.sampled_from([",", ";", "\t"]), ROWS).map(
    lambda drawn: (HEADINGS.replace(",", drawn[0]) + "\n".join(drawn[0].join(row) for row in drawn[1])).encode()
)


@st.composite
def spoilt(draw, text):
    """A good file with a few bytes cut out and others put in."""
    data = text.encode()
    place = draw(st.integers(0, len(data)))
    return data[:place] + draw(st.binary(max_size=8)) + data[place + draw(st.integers(0, 8)) :]


@pytest.fixture(scope="module")
def section():
    return read_section(BAD / "section.toml")


def check_log(path, data, section):
    path.write_bytes(data)
    try:
        log = read_log(path, section)
    except InputError as error:
        assert error.seen  # noqa: PT017
        return
    good = log.reason == ""
    assert np.all(np.isfinite(log.flow_m3_s[good]))
    assert np.all(np.isfinite(log.pressure_pa[:, good]))
    assert np.all(np.diff(log.time_s[good]) > 0.0)
    assert np.all(np.diff(log.line) > 0)


ANY = settings(max_examples=150, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])


@ANY
@given(data=st.binary(max_size=300))
def test_any_bytes_as_a_log(tmp_path, section, data):
    check_log(tmp_path / "log.csv", data, section)


@ANY
@given(data=st.binary(max_size=100).map(lambda tail: HEADINGS.encode() + tail) | spoilt(HEADINGS + ROW * 3) | SEPARATED)
def test_almost_any_log(tmp_path, section, data):
    check_log(tmp_path / "log.csv", data, section)


@ANY
@given(
    data=st.binary(max_size=300)
    | st.text(max_size=100).map(lambda text: text.encode("utf-8", "surrogatepass"))
    | spoilt(GOOD)
)
def test_any_bytes_as_a_section_file(tmp_path, data):
    path = tmp_path / "section.toml"
    path.write_bytes(data)
    try:
        section = read_section(path)
    except InputError as error:
        assert error.do  # noqa: PT017
        return
    assert section.bore.value > 0.0
    assert len(section.taps) >= 2
