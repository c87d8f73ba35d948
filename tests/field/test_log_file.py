import datetime as dt
import hashlib
from pathlib import Path

import numpy as np
import pytest

from fieldfit.errors import InputError
from fieldfit.field.log_file import read_channels, read_log
from fieldfit.field.log_rows import MISSING_MARKS
from fieldfit.field.section_file import read_section

HEADINGS = "time,flow [L/s],upstream [kPa],downstream [kPa],temperature [degC]\n"
ROW_1 = "2026-05-12T08:00:00,0.00,412.1,400.3,14.2\n"
ROW_2 = "2026-05-12T08:00:01,0.10,412.0,400.3,14.3\n"
PLAIN = HEADINGS + ROW_1 + ROW_2
SECTION = (Path(__file__).parent / "bad" / "section.toml").read_text(encoding="utf-8")


@pytest.fixture
def read(tmp_path):
    """Read bytes or a text as a log of the section, which may be changed."""

    def reader(text, *changes):
        section = SECTION
        for old, new in changes:
            assert old in section
            section = section.replace(old, new)
        (tmp_path / "section.toml").write_text(section, encoding="utf-8")
        path = tmp_path / "log.csv"
        path.write_bytes(text if isinstance(text, bytes) else text.encode())
        return read_log(path, read_section(tmp_path))

    return reader


def same(log, other, rel=0.0):
    """Whether two logs hold the same values."""
    for name in (
        "line",
        "time_s",
        "flow_m3_s",
        "pressure_pa",
        "temperature_degc",
        "flow_step_m3_s",
        "pressure_step_pa",
    ):
        np.testing.assert_allclose(getattr(log, name), getattr(other, name), rtol=rel, atol=0.0, err_msg=name)
    return log.reason.tolist() == other.reason.tolist() and (log.kind, log.start) == (other.kind, other.start)


def test_a_plain_log(read):
    log = read(PLAIN)
    assert (log.file, log.kind, log.start) == ("log.csv", "logger", dt.datetime(2026, 5, 12, 8))
    assert log.sha256 == hashlib.sha256(PLAIN.encode()).hexdigest()
    assert log.line.tolist() == [2, 3]
    assert log.time_s.tolist() == [0.0, 1.0]
    assert log.flow_m3_s == pytest.approx([0.0, 1e-4])
    assert log.pressure_pa == pytest.approx(np.array([[412.1e3, 412.0e3], [400.3e3, 400.3e3]]))
    assert log.temperature_degc.tolist() == [14.2, 14.3]
    assert log.reason.tolist() == ["", ""]
    assert log.assumed == ()
    for values in (log.line, log.time_s, log.flow_m3_s, log.pressure_pa, log.temperature_degc, log.reason):
        assert not values.flags.writeable


@pytest.mark.parametrize(
    ("heading", "quoted"),
    [
        ("upstream [psi]", False),
        ("upstream (psi)", False),
        ("upstream, psi", True),
        ("upstream_psi", False),
        ("upstream psi", False),
        ("UPSTREAM [PSI]", False),
        ("Upstream  (psig)", False),
        ("upstream [bar(g)]", False),
        ("upstream(psi)", False),
        (" upstream [ psi ] ", False),
    ],
)
def test_headings_in_all_forms(read, heading, quoted):
    text = PLAIN.replace("upstream [kPa]", f'"{heading}"' if quoted else heading)
    unit = 1e5 if "bar" in heading else 6894.757293168361
    assert read(text).pressure_pa[0] == pytest.approx([412.1 * unit, 412.0 * unit], rel=1e-14)


def test_headings_with_spaces_underscores_and_brackets_in_the_name(read):
    text = PLAIN.replace("upstream [kPa]", "P_up (north) [kPa]").replace("downstream [kPa]", "p_down_kPa")
    log = read(text, ('"upstream"', '"P_up (north)"'), ('"downstream"', '"P_down"'))
    assert same(log, read(PLAIN))


def test_a_heading_may_stand_whole_in_the_section_file(read):
    text = HEADINGS.replace("temperature [degC]", "flow [gpm]") + ROW_1 + ROW_2
    assert read(text, ('"flow"', '"Flow [L/s]"')).flow_m3_s == pytest.approx([0.0, 1e-4])


def test_the_section_files_unit_wins_and_that_is_said(read):
    change = ('column = "upstream"', 'column = "upstream"\nunit = "psi"')
    log = read(PLAIN, change)
    assert log.pressure_pa[0, 0] == pytest.approx(412.1 * 6894.757293168361)
    assert log.assumed == ("Column 'upstream' was read in psi, as the section file says; its heading says kPa.",)
    assert read(PLAIN.replace("upstream [kPa]", "upstream"), change).assumed == ()
    assert read(PLAIN.replace("upstream [kPa]", "upstream [psig]"), change).assumed == ()


def test_other_columns_do_not_matter(read):
    text = "note,battery [V]," + HEADINGS + "ok,12.1," + ROW_1 + '"8"" valve, open",low,' + ROW_2
    assert same(read(text), read(PLAIN))


@pytest.mark.parametrize("separator", [";", "\t"])
def test_separators_are_recognised(read, separator):
    log = read(PLAIN.replace(",", separator))
    assert same(log, read(PLAIN))
    assert log.assumed == (f"Fields are parted by {'semicolons' if separator == ';' else 'tabs'}.",)


@pytest.mark.parametrize("separator", [";", "\t"])
def test_decimal_commas_are_recognised_and_said(read, separator):
    log = read(PLAIN.replace(",", separator).replace(".", ","))
    assert same(log, read(PLAIN))
    assert "Commas in numbers are decimal marks." in log.assumed


def test_decimal_commas_are_recognised_far_down(read):
    log = read(PLAIN.replace(".00", "").replace(",", ";").replace("0.10;412.0;400.3;14.3", "0;412;400;14") * 1)
    assert log.flow_m3_s.tolist() == [0.0, 0.0]
    rows = "".join(f"{number};412;400\n" for number in range(100))
    assert (
        read("flow [L/s];upstream [kPa];downstream [kPa]\n" + rows + "0,25;412,5;400\n").pressure_pa[0, -1] == 412.5e3
    )


@pytest.mark.parametrize(
    "encode",
    [
        lambda text: b"\xef\xbb\xbf" + text.encode(),
        lambda text: text.encode("utf-16"),
        lambda text: b"\xfe\xff" + text.encode("utf-16-be"),
        lambda text: text.replace("\n", "\r\n").encode(),
        lambda text: text.replace("\n", "\r").encode(),
        lambda text: text.rstrip("\n").encode(),
    ],
)
def test_text_as_programs_save_it(read, encode):
    assert same(read(encode(PLAIN)), read(PLAIN))


def test_lines_above_the_headings(read):
    above = 'Logger 7, serial 118\n8" main\nflow in L/s\n\n'
    log = read(above + PLAIN)
    assert log.line.tolist() == [6, 7]
    assert log.assumed == ("The headings were found in line 5; what stands above them was not read.",)


def test_blank_lines_and_blank_rows_are_passed_over(read):
    log = read(HEADINGS + "\n" + ROW_1 + "\n,,,,\n" + ROW_2 + "\n\n")
    assert log.line.tolist() == [3, 6]


@pytest.mark.parametrize("word", ["Average", "MIN:", "mean", "Std Dev", "End of file"])
def test_a_row_of_averages_at_the_end_is_left_out_and_said(read, word):
    log = read(PLAIN + f"\n{word},0.05,412.05,400.3,14.2\n")
    assert same(log, read(PLAIN))
    assert log.assumed == (f"Line 5 ('{word}') is no reading and was left out.",)


def test_a_row_of_averages_below_a_hand_sheet(read):
    log = read("run,flow [L/s],upstream [kPa],downstream [kPa]\n1,1.0,412,400\n2,2.0,410,390\nAverage,1.5,411,395\n")
    assert log.line.tolist() == [2, 3]


def test_headings_over_again_are_left_out_and_said(read):
    log = read(HEADINGS + ROW_1 + HEADINGS + ROW_2)
    assert log.line.tolist() == [2, 4]
    assert log.assumed == ("Line 3 ('time') is no reading and was left out.",)


@pytest.mark.parametrize("mark", [*MISSING_MARKS, "NaN", "NA", "N/A", "ERR", "Bad", "NULL", " nan ", '"--"', "bAd"])
def test_marks_of_a_missing_value(read, mark):
    log = read(HEADINGS + ROW_1 + ROW_2.replace("412.0", mark))
    assert np.isnan(log.pressure_pa[0, 1])
    assert log.reason.tolist() == ["", "missing value"]
    assert log.pressure_pa[1, 1] == 400.3e3


def test_a_short_row_lacks_its_last_values(read):
    log = read(HEADINGS + ROW_1 + "2026-05-12T08:00:01,0.10,412.0\n")
    assert log.reason.tolist() == ["", "missing value"]


def test_a_missing_temperature_does_not_cost_the_row(read):
    log = read(HEADINGS + ROW_1 + ROW_2.replace("14.3", "--"))
    assert np.isnan(log.temperature_degc[1])
    assert log.reason.tolist() == ["", ""]
    assert log.assumed == ("The temperature is missing in 1 of 2 rows; the others stand for them.",)
    assert read(HEADINGS + ROW_1.replace("14.2", "")).temperature_degc is None


@pytest.mark.parametrize(
    ("heading", "factor", "offset"),
    [
        ("Temp (degF)", 5.0 / 9.0, -160.0 / 9.0),
        ("water temperature [K]", 1.0, -273.15),
        ("TEMPERATURE, °C", 1.0, 0.0),
        ("water_temp_C", 1.0, 0.0),
    ],
)
def test_temperature_in_any_unit(read, heading, factor, offset):
    log = read(PLAIN.replace("temperature [degC]", f'"{heading}"').replace("14.", "290."))
    assert log.temperature_degc == pytest.approx([290.2 * factor + offset, 290.3 * factor + offset], abs=1e-12)


def test_the_waters_temperature_is_preferred(read):
    text = "temp [degC]," + PLAIN.replace("temperature", "water temperature").replace("2026", "30.0,2026")
    assert read(text).temperature_degc.tolist() == [14.2, 14.3]


@pytest.mark.parametrize(
    ("first", "second"),
    [
        ("2026-05-12T08:00:00", "2026-05-12T08:00:01"),
        ("2026-05-12 08:00:00", "2026-05-12 08:00:01"),
        ("2026-05-12T08:00:00.000", "2026-05-12T08:00:01.000"),
        ("2026-05-12T08:00", "2026-05-12T08:00:01"),
        ("2026-05-12T08:00:00Z", "2026-05-12T08:00:01Z"),
        ("2026-05-12T10:00:00+02:00", "2026-05-12T09:00:01+01:00"),
        (" 2026-05-12T08:00:00 ", '"2026-05-12T08:00:01 "'),
    ],
)
def test_times_in_iso_forms(read, first, second):
    log = read(HEADINGS + ROW_1.replace("2026-05-12T08:00:00", first) + ROW_2.replace("2026-05-12T08:00:01", second))
    assert (log.start, log.time_s.tolist()) == (dt.datetime(2026, 5, 12, 8), [0.0, 1.0])


def test_fractions_of_a_second(read):
    log = read(HEADINGS + ROW_1.replace("08:00:00", "08:00:00.250") + ROW_2.replace("08:00:01", "08:00:00.375"))
    assert log.time_s.tolist() == [0.0, 0.125]


def test_times_of_day_beside_a_column_of_dates(read):
    text = "date," + PLAIN.replace("2026-05-12T", "2026-05-12,")
    assert same(read(text), read(PLAIN))


def test_times_of_day_alone(read):
    log = read(PLAIN.replace("2026-05-12T0", ""))
    assert (log.start, log.time_s.tolist()) == (None, [0.0, 1.0])
    assert log.assumed == ("The clock has no dates: all rows were taken to be of one day.",)


def test_a_clock_that_counts_from_the_start(read):
    text = (
        HEADINGS.replace("time", "elapsed (min)")
        + ROW_1.replace("2026-05-12T08:00:00", "3.5")
        + ROW_2.replace("2026-05-12T08:00:01", "4")
    )
    log = read(text)
    assert (log.start, log.time_s.tolist()) == (None, [0.0, 30.0])


def test_a_clock_by_another_name_is_found_by_its_dates(read):
    log = read(PLAIN.replace("time", "Stempel"))
    assert same(log, read(PLAIN))
    assert log.assumed == ("The column 'Stempel' was taken as the clock.",)


def test_repeated_and_backward_times_keep_their_rows(read):
    times = ["08:00:00", "08:00:01", "08:00:01", "07:00:00", "08:00:02", ""]
    rows = "".join(f"{'2026-05-12T' + time if time else ''},1.0,412,400,14\n" for time in times)
    log = read(HEADINGS + rows)
    late = "clock repeated or backwards"
    assert log.reason.tolist() == ["", "", late, late, "", "missing value"]
    assert log.time_s[:5].tolist() == [0.0, 1.0, 1.0, -3600.0, 2.0]
    assert log.flow_m3_s.tolist() == [1e-3] * 6


def test_a_hand_sheet(read):
    log = read("flow [gpm],upstream [psi],downstream [psi]\n0,62,58\n100,60,50\n200,56,38\n")
    assert (log.kind, log.start, log.time_s.tolist()) == ("sheet", None, [1.0, 2.0, 3.0])
    assert log.flow_m3_s == pytest.approx([0.0, 100 * 6.30902e-5, 200 * 6.30902e-5], rel=1e-6)
    assert any("hand sheet" in sentence for sentence in log.assumed)
    assert any("US gallons" in sentence for sentence in log.assumed)


def test_a_hand_sheet_with_days_only(read):
    log = read("date,flow [L/s],upstream [kPa],downstream [kPa]\n2026-05-12,1,412,400\n2026-05-12,2,410,390\n")
    assert (log.kind, log.reason.tolist()) == ("sheet", ["", ""])


def test_one_row_is_a_log(read):
    assert read(HEADINGS + ROW_1).line.tolist() == [2]


def test_three_taps_in_the_sections_order(read):
    middle = '[[tap]]\ncolumn = "middle"\nstation = "20 m"\naccuracy = "0"\n'
    log = read("downstream [kPa],flow [L/s],middle [kPa],upstream [kPa]\n1,2,3,4\n", ("[flow]", middle + "[flow]"))
    assert log.pressure_pa[:, 0].tolist() == [4e3, 3e3, 1e3]


SYSTEMS = {
    "gpm, psi, °F": ("gpm", 231 * 0.0254**3 / 60.0, "psi", 0.45359237 * 9.80665 / 0.0254**2, "degF", 1.8, 32.0),
    "m³/h, kPa, °C": ("m3/h", 1.0 / 3600.0, "kPa", 1e3, "degC", 1.0, 0.0),
    "L/s, bar, K": ("L/s", 1e-3, "bar", 1e5, "K", 1.0, 273.15),
}


@pytest.mark.parametrize("system", SYSTEMS)
def test_the_same_log_in_three_systems_of_units(read, system):
    rng = np.random.default_rng(20260512)
    flow = np.round(rng.normal(3.0, 0.2, 300), 2) * 1e-3
    pressure = np.round(rng.normal([[412.0], [400.0]], 2.0, (2, 300)), 1) * 1e3
    temperature = np.round(rng.normal(14.0, 0.3, 300), 1)

    def text(system):
        flow_unit, flow_si, pressure_unit, pressure_si, temperature_unit, per_kelvin, zero = system
        rows = zip(flow / flow_si, *(pressure / pressure_si), temperature * per_kelvin + zero, strict=True)
        lines = [
            f"2026-05-12T08:{i // 60:02d}:{i % 60:02d},{','.join(repr(float(v)) for v in row)}"
            for i, row in enumerate(rows)
        ]
        head = f"time,flow [{flow_unit}],upstream [{pressure_unit}],downstream [{pressure_unit}],temperature [{temperature_unit}]"
        return "\n".join([head, *lines])

    written = read(text(("L/s", 1e-3, "kPa", 1e3, "degC", 1.0, 0.0)))
    assert (written.flow_step_m3_s, written.pressure_step_pa.tolist()) == (
        pytest.approx(1e-5),
        [pytest.approx(100.0)] * 2,
    )
    assert same(read(text(SYSTEMS[system])), written, rel=1e-12)


def test_text_in_a_number_is_placed_far_down_too(read):
    rows = "".join(f"{number}.5,412,400\n" for number in range(300))
    with pytest.raises(InputError, match=r"log\.csv:302, column 'upstream \[kPa\]': 'O12' is not a number"):
        read("flow [L/s],upstream [kPa],downstream [kPa]\n" + rows + "1,O12,400\n")


def test_a_file_may_hold_some_of_the_columns(tmp_path):
    path = tmp_path / "gauge.csv"
    path.write_text("Logger of downstream, north end\ntime,downstream [bar]\n2026-05-12T08:00:00,4.003\n")
    section = read_section(Path(__file__).parent / "bad" / "section.toml")
    channels = read_channels(path, section)
    assert {name: values.tolist() for name, values in channels.values.items()} == {"downstream": [400.3e3]}
    assert dict(channels.steps) == {"downstream": pytest.approx(100.0)}
    assert (channels.start, channels.line.tolist()) == (dt.datetime(2026, 5, 12, 8), [3])
    with pytest.raises(InputError, match="no heading 'flow'"):
        read_log(path, section)
    path.write_text("time,level [m]\n2026-05-12T08:00:00,4.003\n")
    with pytest.raises(InputError, match="no heading 'flow'"):
        read_channels(path, section)
