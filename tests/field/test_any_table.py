"""Whatever table a logger writes in whatever form, its numbers come back or the reason is said."""

import datetime as dt
from pathlib import Path

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from fieldfit.errors import InputError
from fieldfit.field.log_file import read_channels, read_log
from fieldfit.field.section_file import read_section

GOOD = (Path(__file__).parent / "bad" / "section.toml").read_text(encoding="utf-8")
COLUMN = 'column = "flow"\n'
SECTIONS = {
    "plain": GOOD,
    "totaliser": GOOD.replace(COLUMN, f"{COLUMN}totaliser = true\n"),
    "pulses": GOOD.replace(COLUMN, f'{COLUMN}pulse = "10 L"\n'),
    "signal": GOOD.replace(COLUMN, f'{COLUMN}signal = "4-20 mA"\nrange = "0 to 50 L/s"\n'),
    "velocity": GOOD.replace(COLUMN, f'{COLUMN}unit = "m/s"\nsenses = "velocity"\n'),
    "stated": GOOD.replace(
        "[flow]", '[log]\ndates = "day first"\ndecimal = "comma"\ninterval = "2 s"\nbarometer = "baro"\n\n[flow]'
    ),
}
MARKS = {",": ".", ";": ",.", "\t": ",.", "|": ".,"}
GROUPS = {".": ["", ",", " ", "’"], ",": ["", ".", "\u202f", "'"]}
CLOCKS = [
    "%Y-%m-%dT%H:%M:%S",
    "%d.%m.%Y %H:%M:%S",
    "%d/%m/%Y %H:%M:%S",
    "%m/%d/%Y %I:%M:%S %p",
    "%d-%b-%y %H:%M:%S",
    "%b %d %Y %H:%M:%S",
    "%Y/%m/%d %H:%M:%S",
    "%Y-%m-%d %H:%M:%SZ",
]
ABOVE = ["", "Logger 7\n", "Start: 12.05.2026 08:00\nInterval: 10 s\n\n", "# flow, upstream\n"]
BELOW = ["", "\n", "Average;1;2;3\n", "# end\n", "End of file\n", "\n\n"]
MISSING = st.sampled_from(["", "--", "NaN", "#N/A", "ERR", "n/a"])
NUMBERS = st.integers(-99_999_999, 999_999_999)


@st.composite
def tables(draw):
    """Whole numbers to be written with some decimals, None where missing, and how they are written."""
    separator = draw(st.sampled_from(list(MARKS)))
    mark = draw(st.sampled_from(list(MARKS[separator])))
    rows = draw(
        st.lists(st.tuples(NUMBERS | st.none(), NUMBERS | st.none(), NUMBERS | st.none()), min_size=1, max_size=8)
    )
    return {
        "rows": rows,
        "decimals": draw(st.tuples(*[st.integers(0, 4)] * 3)),
        "separator": separator,
        "mark": mark,
        "group": draw(st.sampled_from(GROUPS[mark])),
        "clock": draw(st.sampled_from(CLOCKS)),
        "start": draw(st.datetimes(dt.datetime(2001, 1, 1), dt.datetime(2060, 1, 1))).replace(microsecond=0),
        "step": draw(st.sampled_from([1, 7, 60, 3600, 86_400, 40 * 86_400])),
        "encoding": draw(st.sampled_from(["utf-8", "utf-8-sig", "utf-16", "utf-16-le", "cp1252"])),
        "above": draw(st.sampled_from(ABOVE)),
        "below": draw(st.sampled_from(BELOW)),
        "missing": draw(MISSING),
        "units_below": draw(st.booleans()),
    }


def number(whole, decimals, table):
    """A number with its decimal mark and thousands separators."""
    if whole is None:
        return table["missing"]
    digits = f"{abs(whole):0{decimals + 1}d}"
    front, back = (digits[:-decimals], digits[-decimals:]) if decimals else (digits, "")
    front = f"{int(front):,}".replace(",", table["group"])
    text = ("-" if whole < 0 else "") + front + (table["mark"] + back if back else "")
    return f'"{text}"' if table["separator"] in text else text


def written(table):
    """The table as a log, and the lines of its rows."""
    separator = table["separator"]
    units = ("L/s", "kPa", "kPa")
    names = ("flow", "upstream", "downstream")
    heads = names if table["units_below"] else [f"{name} [{unit}]" for name, unit in zip(names, units, strict=True)]
    lines = [*table["above"].splitlines(), separator.join(["time", *heads])]
    lines += [separator.join(["", *units])] if table["units_below"] else []
    first = len(lines) + 1
    for row, values in enumerate(table["rows"]):
        time = table["start"] + dt.timedelta(seconds=row * table["step"])
        cells = [number(value, places, table) for value, places in zip(values, table["decimals"], strict=True)]
        lines.append(separator.join([f"{time:{table['clock']}}", *cells]))
    text = "\n".join(lines) + "\n" + table["below"].replace(";", separator)
    return text.encode(table["encoding"], "replace"), first


@pytest.fixture(scope="module")
def sections(tmp_path_factory):
    """Sections whose logs hold different things."""
    known = {}
    for name, text in SECTIONS.items():
        folder = tmp_path_factory.mktemp(name)
        (folder / "section.toml").write_text(text, encoding="utf-8")
        known[name] = read_section(folder)
    return known


SLOW = settings(max_examples=250, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])


@SLOW
@given(table=tables())
def test_numbers_come_back_or_it_is_said_why_not(tmp_path, sections, table):
    data, first = written(table)
    path = tmp_path / "log.csv"
    path.write_bytes(data)
    try:
        log = read_log(path, sections["plain"])
    except InputError as error:
        assert error.do  # noqa: PT017
        return
    order = log.line - first
    assert order.min() >= 0
    expected = np.array(
        [
            [
                np.nan if value is None else value / 10.0**places
                for value, places in zip(row, table["decimals"], strict=True)
            ]
            for row in table["rows"]
        ]
    )
    read = np.column_stack([log.flow_m3_s * 1e3, *(log.pressure_pa / 1e3)])
    np.testing.assert_allclose(read, expected[order], rtol=1e-12)
    # A row that is left out has no number, and no clock is misread but by the whole.
    assert np.isnan(np.delete(expected, order, axis=0)).all()
    if log.start is not None and log.start == table["start"]:
        np.testing.assert_allclose(log.time_s, (order - order[0]) * table["step"], atol=3601.0)
    np.testing.assert_allclose(np.diff(log.time_s), np.diff(order) * table["step"], atol=3601.0)


FIELDS = st.sampled_from(
    [
        *(
            "0.1",
            "412",
            "1,5",
            "1.234,5",
            "1,234.5",
            "1 234",
            "-",
            "NaN",
            "inf",
            "1e999",
            "true",
            "",
            " ",
            '"',
            "4.0",
            "20",
        ),
        *(
            "2026-05-12T08:00:00",
            "12.05.2026",
            "05/06/2026 8:00 pm",
            "12-May-26 08:00",
            "08:00",
            "08:00:00 am",
            "25:10:00",
        ),
        *(
            "46154.5",
            "1778572800",
            "Average",
            "# note",
            "L/s",
            "kPa",
            "[degC]",
            "mA",
            "٣",
            "\x1a",
            "0x10",
            "1_0",
            "CEST",
        ),
    ]
)
HEADS = st.sampled_from(
    [
        "time,flow [L/s],upstream [kPa],downstream [kPa],temperature [degC]",
        "time,flow,upstream,downstream,baro",
        "date,time,flow [m3],upstream [psia],downstream [bara],barometer [hPa]",
        "flow [gpm],upstream [mA],downstream [psi]",
        "elapsed,flow [m/s],upstream [kPa abs],downstream [kPa],temp",
        "#time,flow [pulses],upstream [V],downstream [mH2O]",
        "Date Time (GMT+02:00),flow,upstream kPa,downstream_kPa,temperature_C",
    ]
)
ANY_ROWS = st.lists(st.lists(FIELDS, max_size=7), max_size=7)
LOGS = st.tuples(st.sampled_from(list(MARKS)), HEADS, ANY_ROWS).map(
    lambda drawn: "\n".join([drawn[1].replace(",", drawn[0]), *(drawn[0].join(row) for row in drawn[2])])
)


@pytest.mark.parametrize("name", SECTIONS)
@settings(SLOW, max_examples=60)
@given(text=LOGS | st.text(max_size=200), encoding=st.sampled_from(["utf-8", "utf-16", "cp1252"]))
def test_any_table_is_read_or_refused(tmp_path, sections, name, text, encoding):
    path = tmp_path / "log.csv"
    path.write_bytes(text.encode(encoding, "replace"))
    for read in (read_log, read_channels):
        try:
            log = read(path, sections[name])
        except InputError as error:
            assert error.do  # noqa: PT017
            continue
        good = log.reason == ""
        values = [log.flow_m3_s, *log.pressure_pa] if read is read_log else list(log.values.values())
        assert all(np.all(np.isfinite(column[good])) for column in values)
        assert not any(np.any(np.isinf(column)) for column in values)
        assert np.all(np.diff(log.time_s[good]) > 0.0)
        assert np.all(np.diff(log.line) > 0)
