"""Dates, times and zones as people and loggers write them."""

import datetime as dt

import numpy as np
import pandas as pd
import pytest
from hypothesis import given
from hypothesis import strategies as st

from fieldfit.errors import InputError
from fieldfit.field.clock import read_clock
from fieldfit.field.clock_numbers import number_stamps
from fieldfit.field.clock_texts import ClockPlace, read_times_of_day
from fieldfit.field.date_forms import Known, read_dates
from fieldfit.field.log_start import log_start
from fieldfit.field.summer_time import straightened

NOON = dt.datetime(2026, 5, 12, 8, 0, 1)


def stamps(*texts, known=None, said=None):
    """Texts read as dates."""
    found = read_dates(pd.Series(texts, dtype="str"), known or Known(), "log.csv", [] if said is None else said)
    return [stamp.astype("datetime64[us]").item() for stamp in found]


def clock(*texts, heading="time", dates=None, **place):
    """Texts read as a clock, with what was said."""
    said = []
    days = None if dates is None else pd.Series(dates, dtype="str")
    where = ClockPlace(file="log.csv", heading=heading, **place)
    return read_clock(pd.Series(texts, dtype="str"), days, np.arange(2, 2 + len(texts)), where, said), said


@pytest.mark.parametrize(
    "text",
    [
        "12.05.2026 08:00:01",
        "12.5.2026 8:00:01",
        "12.05.26 08:00:01",
        "12.05.2026 08.00.01",
        "12-May-2026 08:00:01",
        "12 May 2026 08:00:01",
        "Tue 12 May 2026 08:00:01",
        "May 12, 2026 8:00:01 am",
        "May 12 2026 08:00:01",
        "12/May/26 8:00:01 A.M.",
        "2026/05/12 08:00:01",
        "2026.05.12 8:00:01",
        "2026-05-12 08:00:01 AM",
        "12.05.2026  08:00:01",
    ],
)
def test_one_moment_in_many_writings(text):
    assert stamps(text) == [NOON]


@pytest.mark.parametrize(
    ("text", "hour"), [("12:00:01 am", 0), ("12:00:01 pm", 12), ("1:00:01 pm", 13), ("11:00:01 p.m.", 23)]
)
def test_halves_of_a_day(text, hour):
    assert stamps(f"12.05.2026 {text}")[0].hour == hour


@pytest.mark.parametrize("fraction", [".25", ",25", ":25", ".250000"])
def test_fractions_of_a_second(fraction):
    read = stamps(f"12.05.2026 08:00:01{fraction}")[0]
    assert read - NOON == dt.timedelta(milliseconds=250)


@given(
    moments=st.lists(st.datetimes(dt.datetime(2001, 1, 1), dt.datetime(2059, 12, 31)), min_size=1, max_size=5),
    form=st.sampled_from(["%d.%m.%Y %H:%M:%S", "%d-%b-%Y %I:%M:%S %p", "%Y/%m/%d %H:%M", "%d.%m.%y %H:%M:%S.%f"]),
)
def test_what_was_written_is_read(moments, form):
    written = [f"{moment:{form}}" for moment in moments]
    assert stamps(*written) == [dt.datetime.strptime(text, form) for text in written]


def test_day_and_month_are_told_by_a_day_that_is_no_month():
    said = []
    assert stamps("05/12/2026 08:00", "05/13/2026 08:00", said=said)[1] == dt.datetime(2026, 5, 13, 8)
    assert said == ["Dates such as '05/12/2026 08:00' were read month first: no other order fits all rows."]
    assert stamps("05/12/2026 08:00", "13/12/2026 08:00")[0] == dt.datetime(2026, 12, 5, 8)


def test_day_and_month_that_may_change_places_are_an_error_unless_nothing_depends_on_it():
    with pytest.raises(InputError, match=r"one row is of 2026-06-05 or of 2026-05-06.*Write dates = \"day first\""):
        stamps("05/06/2026 23:59", "06/06/2026 00:00")
    said = []
    assert stamps("05/06/2026 08:00", "05/06/2026 09:00", said=said)[0] == dt.datetime(2026, 6, 5, 8)
    assert "was taken as 2026-06-05, the day first" in said[0]
    assert stamps("06/06/2026 08:00")[0] == dt.datetime(2026, 6, 6, 8)


def test_years_of_two_figures_may_stand_first():
    with pytest.raises(InputError, match="of 2012-05-26 or of 2026-05-12"):
        stamps("26-05-12 23:59", "27-05-12 00:00")
    assert stamps("26-05-12 08:00", known=Known(order="year first"))[0] == dt.datetime(2026, 5, 12, 8)
    assert stamps("26-05-32 08:00", "26-05-12 08:00")[1] == dt.datetime(2012, 5, 26, 8)


def test_the_day_of_the_test_settles_the_order():
    said = []
    read = stamps("05/06/2026 23:59", "05/07/2026 00:00", known=Known(day=dt.date(2026, 5, 6)), said=said)
    assert read[1] - read[0] == dt.timedelta(minutes=1)
    assert "begins on the day of the test" in said[0]
    stated = stamps("05/06/2026 23:59", "05/07/2026 00:00", known=Known(order="month first"))
    assert stated == read


def test_a_date_beside_times_may_stand_once_or_with_a_midnight():
    found, said = clock("08:00:00", "08:00:05", dates=["12.05.2026", None])
    assert (found.start, found.time_s.tolist()) == (dt.datetime(2026, 5, 12, 8), [0.0, 5.0])
    assert any("hold for the rows below" in sentence for sentence in said)
    found, _ = clock("1899-12-30 08:00:00", "1899-12-30 08:00:05", dates=["2026-05-12 00:00:00"] * 2)
    assert found.start == dt.datetime(2026, 5, 12, 8)
    found, _ = clock("80000", "80005", dates=["20260512", "20260512"])
    assert (found.start, found.time_s[1]) == (dt.datetime(2026, 5, 12, 8), 5.0)


def test_times_of_day_run_on_past_midnight():
    found, said = clock("23:59:59", "00:00:01", "23:59:59", "00:00:01")
    assert found.time_s.tolist() == [0.0, 2.0, 86400.0, 86402.0]
    assert said == ["The clock runs on past midnight: rows below belong to the next day."]


def test_hours_beyond_a_day_count_from_the_start():
    assert clock("25:00:00", "25:00:05")[0].time_s.tolist() == [0.0, 5.0]
    assert clock("05:30", "05:40", heading="elapsed [mm:ss]")[0].time_s.tolist() == [0.0, 10.0]
    assert clock("05:30", "05:40", heading="elapsed [hh:mm]")[0].time_s.tolist() == [0.0, 600.0]
    with pytest.raises(InputError, match="may be hours and minutes, or minutes and seconds"):
        read_times_of_day(pd.Series(["05:30"], dtype="str"), ClockPlace(file="a", heading="elapsed"), None, [])


@pytest.mark.parametrize("zone", ["+02:00", " +0200", " UTC+2", " GMT+02:00"])
def test_offsets_are_turned_into_utc(zone):
    found, said = clock(f"12.05.2026 10:00:00{zone}", f"12.05.2026 10:00:05{zone}")
    assert (found.start, found.time_s[1]) == (dt.datetime(2026, 5, 12, 8), 5.0)
    assert "Times with a zone were turned into UTC." in said


def test_a_zone_with_a_name_is_kept_or_told_from_the_other():
    found, said = clock("2026-10-25 02:59:59 CEST", "2026-10-25 02:00:00 CET")
    assert found.time_s.tolist() == [0.0, 1.0]
    assert any("turned into CET" in sentence for sentence in said)
    found, said = clock("2026-07-01 10:00:00 EST", "2026-07-01 10:00:05 EST")
    assert found.start == dt.datetime(2026, 7, 1, 10)
    assert any("in one zone, EST" in sentence for sentence in said)


@pytest.mark.parametrize(
    ("before", "after", "expected"),
    [
        ("2026-10-25T02:59:58", "2026-10-25T02:00:00", 2.0),  # end of summer time, north
        ("2026-03-29T01:59:58", "2026-03-29T03:00:00", 2.0),  # its beginning
        ("2026-04-05T02:59:58", "2026-04-05T02:00:00", 2.0),  # its end, south
        ("2026-10-24T02:59:58", "2026-10-24T02:00:00", -3598.0),  # a Saturday
        ("2026-07-26T02:59:58", "2026-07-26T02:00:00", -3598.0),  # July
        ("2026-10-25T12:59:58", "2026-10-25T12:00:00", -3598.0),  # noon
        ("2026-10-25T02:29:58", "2026-10-25T01:30:00", -3598.0),  # no full hour
        ("2026-03-29T01:59:58", "2026-03-29T04:00:00", 7202.0),  # two hours
    ],
)
def test_only_a_change_of_summer_time_is_taken_out(before, after, expected):
    first = np.datetime64(before) - np.arange(20, 0, -2)
    later = np.datetime64(after) + np.arange(0, 20, 2)
    times = np.concatenate([first, [np.datetime64(before)], later]).astype("datetime64[ns]")
    said = []
    straight = straightened(times, said)
    assert (straight[11] - straight[10]) / np.timedelta64(1, "s") == expected
    assert bool(said) == (expected == 2.0)
    assert np.all(np.diff(straight[11:]) == np.timedelta64(2, "s"))


@pytest.mark.parametrize("seconds", [1_000_000_000, 1_778_572_800, 4_000_000_000])
@pytest.mark.parametrize("parts", [1, 1000, 1_000_000])
def test_unix_time_by_its_size(seconds, parts):
    read = number_stamps(np.array([seconds * parts, np.nan]), ("log.csv:2", "time"), [])
    assert read[0] == np.datetime64(seconds, "s")
    assert np.isnat(read[1])


@given(st.datetimes(dt.datetime(2001, 1, 1), dt.datetime(2059, 1, 1)))
def test_days_of_spreadsheets(moment):
    days = (moment - dt.datetime(1899, 12, 30)) / dt.timedelta(days=1)
    read = number_stamps(np.array([days, days + 0.25 + 1e-4]), ("log.csv:2", "time"), [])
    assert abs(read[0] - np.datetime64(moment)) <= np.timedelta64(1, "ms")


@pytest.mark.parametrize("number", [0.5, 46154.0, 1e12 / 2, 5e4 + 3e4])
def test_other_numbers_are_no_clock(number):
    with pytest.raises(InputError, match="may be seconds, minutes or days"):
        number_stamps(np.array([number]), ("log.csv:2", "time"), [])


@pytest.mark.parametrize(
    ("lines", "start", "interval"),
    [
        (["Start time: 12.05.2026 08:00:01", "Interval: 00:00:10"], NOON, 10.0),
        (["Start date;12.05.2026", "Start time;08:00:01", "Sample rate;2 Hz"], NOON, 0.5),
        (["# Started\t2026-05-12 08:00:01", "# Logging period\t5 min"], NOON, 300.0),
        (["First reading = May 12, 2026 8:00:01 am", "Sampling every: 1,5 s"], NOON, 1.5),
        (["Report created: 12.05.2026 08:00:01", "Pump interval: 10 s", "Flow rate: 3 s"], None, None),
        (["Serial: 118", "", "start"], None, None),
    ],
)
def test_start_and_interval_above_the_headings(lines, start, interval):
    found = log_start(lines, Known(), "log.csv", [])
    assert (found.start, found.interval_s) == (start, interval)
