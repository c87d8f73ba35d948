"""Counts, raw signals and absolute pressures, in numbers worked out by hand."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from fieldfit.errors import InputError
from fieldfit.field.barometer import gauge_pressures
from fieldfit.field.log_columns import Column
from fieldfit.field.log_hints import LogHints
from fieldfit.field.raw_signal import SIGNALS, raw_signal
from fieldfit.field.totaliser import counted_flow
from fieldfit.field.units import unit
from fieldfit.field.workbook import workbook_source

LITRES = Column(heading="V [L]", position=1, unit=unit("L", "volume"), counts="volume")
TEN_LITRES = Column(heading="n", position=1, unit=unit("L", "volume"), counts="pulses")


def flow(counts, times=None, column=LITRES, runs_on=True, said=None):
    """Flow in L/s."""
    counts = np.array(counts, dtype=float)
    times = np.arange(len(counts), dtype=float) if times is None else np.array(times, dtype=float)
    return (counted_flow(counts, times, column, runs_on, [] if said is None else said).flow_m3_s * 1e3).tolist()


def test_a_running_count_is_a_flow():
    assert flow([100, 102, 105, 105]) == pytest.approx([np.nan, 2, 3, 0], nan_ok=True)
    assert flow([100, 102, 106], times=[0, 1, 3]) == pytest.approx([np.nan, 2, 2], nan_ok=True)
    assert flow([100, np.nan, 104]) == pytest.approx([np.nan, np.nan, 2], nan_ok=True)


def test_a_count_that_falls():
    said = []
    assert flow([9997, 9999, 1, 3], said=said) == pytest.approx([np.nan, 2, 2, 2], nan_ok=True)
    assert any("rolled over at 10000" in sentence for sentence in said)
    said = []
    assert flow([4997, 4999, 1, 3], said=said) == pytest.approx([np.nan, 2, np.nan, 2], nan_ok=True)
    assert any("reset 1 times" in sentence for sentence in said)
    assert flow([50, 52, 51, 53]) == pytest.approx([np.nan, 2, -1, 2], nan_ok=True)  # the water ran back


def test_a_long_gap_has_no_flow_of_its_own():
    assert flow([0, 2, 4, 400], times=[0, 1, 2, 100]) == pytest.approx([np.nan, 2, 2, np.nan], nan_ok=True)


def test_rows_whose_clock_stands_still_are_passed_over():
    assert flow([0, 2, 3, 4], times=[0, 1, 1, 2]) == pytest.approx([np.nan, 2, np.nan, 2], nan_ok=True)


def test_the_step_of_a_count_is_that_of_both_its_ends():
    counted = counted_flow(np.arange(20.0) * 3.0, np.arange(20.0) * 10.0, LITRES, True, [])
    assert counted.step_m3_s == pytest.approx(3e-3 / 10.0 * np.sqrt(2.0))


def test_step_is_honest():
    """Rounding a count and taking differences scatters as the stated step says: variance = step² / 12."""
    rng = np.random.default_rng(7)
    volume = np.cumsum(rng.uniform(5.0, 15.0, 20_000))
    counted = counted_flow(np.rint(volume), np.arange(20_000.0), LITRES, True, [])
    error = counted.flow_m3_s[1:] - np.diff(volume) * 1e-3
    assert np.std(error) == pytest.approx(counted.step_m3_s / np.sqrt(12.0), rel=0.02)


def test_whether_a_count_runs_on_is_seen_or_asked():
    rising, wavy = list(range(0, 60, 3)), [3, 4, 2, 5, 3, 4, 2, 6, 3, 5, 2, 4, 3, 5]
    assert flow(rising, runs_on=None)[1] == pytest.approx(3.0)
    assert flow(wavy, column=TEN_LITRES, runs_on=None)[1:] == pytest.approx(wavy[1:])
    with pytest.raises(InputError, match="write its unit with the time"):
        flow(wavy, runs_on=None)
    with pytest.raises(InputError, match="totaliser = true"):
        flow([1, 2, 3], runs_on=None)


@given(st.lists(st.floats(-1e6, 1e6) | st.just(np.nan), max_size=12), st.booleans())
def test_any_counts_give_finite_flow_or_none(counts, runs_on):
    read = np.array(flow(counts, runs_on=runs_on))
    assert not np.isinf(read).any()


@pytest.mark.parametrize("name", SIGNALS)
def test_the_ends_of_a_signal_are_the_ends_of_its_range(name):
    signal = raw_signal(name, "-1 to 9 bar", ("pressure",))
    slope, zero = signal.line
    _, first, last = SIGNALS[name]
    assert (slope * first + zero, slope * last + zero) == pytest.approx((-1e5, 9e5))
    assert signal.sound[0] < first + 1e-9
    assert signal.sound[1] > last


@pytest.mark.parametrize(
    ("text", "name"), [("4..20 mA", "4-20 mA"), ("4 to 20mA", "4-20 mA"), ("0-10VDC", "0-10 V"), ("1–5 V", "1-5 V")]
)
def test_signals_by_many_names(text, name):
    assert raw_signal(text, "10 bar", ("pressure",)).name == name


def test_a_range_may_be_absolute_or_a_velocity():
    assert raw_signal("4-20 mA", "0-10 bara", ("pressure",)).absolute
    assert raw_signal("4-20 mA", "0 to 150 psi abs", ("pressure",)).width == pytest.approx(150 * 6894.757293)
    assert raw_signal("4-20 mA", "0 to 3 m/s", ("flow", "velocity")).measures == "velocity"


def test_the_barometer_in_the_log_comes_before_the_section_file():
    taps = {"a": np.array([500e3, 500e3, 500e3]), "b": np.array([300e3, 300e3, 300e3])}
    air = np.array([98e3, np.nan, 100e3])
    gauges = gauge_pressures(taps, frozenset("a"), air, LogHints(barometer_pa=90e3), [])
    assert gauges["a"].tolist() == [402e3, 401e3, 400e3]
    assert gauges["b"] is taps["b"]
    stated = gauge_pressures(taps, frozenset("ab"), None, LogHints(barometer_pa=90e3), [])
    assert stated["a"][0] - stated["b"][0] == 200e3
    assert stated["a"][0] == 410e3


@pytest.mark.parametrize(
    ("spelling", "plain"),
    [
        ("psia", "psi"),
        ("psi abs", "psi"),
        ("psi(a)", "psi"),
        ("bara", "bar"),
        ("bar (abs)", "bar"),
        ("kPa absolute", "kPa"),
        ("kPaA", "kPa"),
        ("MPa abs.", "MPa"),
        ("mH2O abs", "mH2O"),
        ("kg/cm²a", "kg/cm2"),
        ("inHg abs", "inHg"),
    ],
)
def test_absolute_units(spelling, plain):
    assert unit(spelling, "pressure").absolute
    assert not unit(plain, "pressure").absolute
    assert unit(spelling, "pressure").factor == unit(plain, "pressure").factor


def test_without_the_program_for_workbooks_it_is_said(tmp_path, monkeypatch):
    path = tmp_path / "log.xlsx"
    path.write_bytes(b"PK\3\4")
    monkeypatch.setitem(__import__("sys").modules, "openpyxl", None)
    with pytest.raises(InputError, match=r'pip install "fieldfit\[excel\]"'):
        workbook_source(path, None, bool, [])
