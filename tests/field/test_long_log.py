"""Long logs: read in parts, they say what the same log says read in one piece."""

import csv
import io
import json
import shutil
import sys
import types
from dataclasses import replace

import numpy as np
import pytest
from long_log_maker import LEVELS_M_S, SECTION, write_long_log

from fieldfit import progress
from fieldfit.assessment import assess
from fieldfit.cli import main
from fieldfit.errors import InputError
from fieldfit.field import line_blocks, long_log, long_screens, row_runs, row_store
from fieldfit.field.clock import repeated_or_backwards
from fieldfit.field.even_sample import Sample
from fieldfit.field.log_file import read_log
from fieldfit.field.long_log import open_long_log, read_long_log
from fieldfit.field.plateaus import screen, summarise
from fieldfit.field.readings import Screening
from fieldfit.field.resolution import SAMPLE
from fieldfit.field.row_runs import RunCounter
from fieldfit.field.row_store import RowStore
from fieldfit.field.screens import CLOCK, MISSING, OUTLIER, RANGE, REVERSED, STUCK, UNSTEADY
from fieldfit.field.section_file import read_section
from fieldfit.report.record import record

WEIGHT = 9798.0
ROWS = 200_000
SMALL = 24_000
ROW_REASONS = {MISSING, CLOCK, RANGE, STUCK, REVERSED}


@pytest.fixture(scope="module")
def main_log(tmp_path_factory):
    return write_long_log(tmp_path_factory.mktemp("long"), ROWS)


@pytest.fixture
def short_is_long(monkeypatch):
    """Take every log for a long one."""
    monkeypatch.setattr(long_log, "LONG_LOG_BYTES", 1)


@pytest.fixture
def tiny_parts(monkeypatch, short_is_long):
    """Cut every log into so many parts that everything lies near an edge."""
    monkeypatch.setattr(row_store, "ROWS_AT_ONCE", 997)
    monkeypatch.setattr(line_blocks, "BLOCK_BYTES", 20_011)
    monkeypatch.setattr(line_blocks, "FIRST_BYTES", 1_003)


def in_parts(path):
    section = read_section(path.parent / "section.toml")
    opened = open_long_log(path, section)
    assert opened is not None
    return read_long_log(opened, WEIGHT)


def in_one_piece(path):
    section = read_section(path.parent / "section.toml")
    log = read_log(path, section)
    screening = screen(log, section)
    return log, screening, summarise(log, screening, section, WEIGHT)


def row_by_row(runs, log):
    """Plateau and reason of every row of a log, from runs that do not overlap."""
    plateau, reason = np.zeros(log.rows, dtype=np.int64), np.empty(log.rows, dtype="<U40")
    for first, last, number, why in zip(runs.first_line, runs.last_line, runs.plateau, runs.reason, strict=True):
        rows = slice(np.searchsorted(log.line, first), np.searchsorted(log.line, last) + 1)
        plateau[rows], reason[rows] = number, why
    return plateau, reason


def spoilt(path, changes):
    """The log with some of its lines changed: a function of the fields by line number."""
    lines = path.read_text().splitlines()
    for number, change in changes.items():
        lines[number - 1] = ",".join(change(lines[number - 1].split(",")))
    path.write_text("\n".join(lines) + "\n")
    return path


def with_field(place, text):
    return lambda fields: [*fields[:place], text, *fields[place + 1 :]]


def test_the_averages_are_those_of_all_rows(main_log, short_is_long):
    """The ordinary averages over the very rows that the long log's plateaus hold."""
    _, screening, plateaus = in_parts(main_log)
    section = read_section(main_log.parent / "section.toml")
    log = read_log(main_log, section)
    plateau, reason = row_by_row(screening.runs, log)
    whole = summarise(log, Screening(reason=reason, plateau=plateau, counts=()), section, WEIGHT)
    assert plateaus.number.tolist() == whole.number.tolist()
    assert plateaus.static.tolist() == whole.static.tolist()
    assert plateaus.rows.tolist() == whole.rows.tolist()
    assert np.count_nonzero(plateaus.static) == LEVELS_M_S.count(0.0)
    np.testing.assert_allclose(plateaus.flow_m3_s, whole.flow_m3_s, rtol=1e-10, atol=1e-15)
    np.testing.assert_allclose(plateaus.pressure_pa, whole.pressure_pa, rtol=1e-10)
    np.testing.assert_allclose(plateaus.temperature_degc, whole.temperature_degc, rtol=1e-10)
    np.testing.assert_allclose(plateaus.curvature_pa, whole.curvature_pa, rtol=1e-7, atol=1e-9)
    np.testing.assert_allclose(plateaus.independent_rows, whole.independent_rows, rtol=1e-7)
    np.testing.assert_allclose(plateaus.random_pa, whole.random_pa, rtol=1e-7)
    np.testing.assert_allclose(plateaus.start_s, whole.start_s)
    np.testing.assert_allclose(plateaus.end_s, whole.end_s)
    np.testing.assert_allclose(plateaus.flow_slope_m3_s2, whole.flow_slope_m3_s2, rtol=1e-5, atol=1e-13)


def test_plain_means_would_not_do(main_log, short_is_long):
    """With a flow that wanders by 3 %, leaving the curvature out moves a head loss by a good part of its error."""
    _, _, plateaus = in_parts(main_log)
    assert np.max(plateaus.curvature_pa / plateaus.random_pa) > 1.0


def test_both_ways_reach_the_same_answer(main_log, monkeypatch):
    whole = assess(main_log.parent).campaigns[0]
    monkeypatch.setattr(long_log, "LONG_LOG_BYTES", 1)
    parts = assess(main_log.parent).campaigns[0]
    assert whole.screening.runs is None
    assert parts.screening.runs is not None
    assert parts.log.rows == whole.log.rows == ROWS
    one, other = whole.reaches[0].wall, parts.reaches[0].wall
    for name in ("hazen_williams_c", "friction_factor", "roughness_m"):
        band, mine = getattr(one, name), getattr(other, name)
        standard = (band.measurement[1] - band.measurement[0]) / 3.92
        assert abs(mine.best - band.best) < 0.01 * standard
    used = {where.screening.used for where in (whole, parts)}
    # Edges are sought on blocks first, so a plateau may gain or lose some rows of its ends.
    assert max(used) - min(used) < 0.002 * ROWS


@pytest.mark.parametrize("cut", ["short_is_long", "tiny_parts"])
def test_rows_are_set_aside_for_the_same_reasons(tmp_path, request, cut):
    path = write_long_log(tmp_path, SMALL)
    changes = {number: with_field(1, "") for number in (40, 41, 7000, SMALL)}
    changes |= {number: with_field(2, "ERR") for number in (9000, 15_000)}
    changes |= {11_000: with_field(0, "2026-03-02T00:00:01.000"), 11_500: with_field(0, "2026-03-02T09:59:59.000")}
    changes |= {number: with_field(2, "1000.02") for number in (12_000, 12_001)}
    changes |= {number: with_field(3, "401.23") for number in range(13_000, 13_400)}
    changes |= {number: with_field(1, "-9.5") for number in (18_000, 18_001, 18_002)}
    changes |= {20_000: with_field(3, "100.00")}
    spoilt(path, changes)
    log, screening, _ = in_one_piece(path)
    request.getfixturevalue(cut)
    _, parts, _ = in_parts(path)
    plateau, reason = row_by_row(parts.runs, log)
    for why in ROW_REASONS:
        assert log.line[reason == why].tolist() == log.line[screening.reason == why].tolist(), why
        assert np.any(reason == why), why
    assert reason[np.flatnonzero(log.line == 20_000)[0]] == OUTLIER
    assert np.all((plateau > 0) == (reason == ""))
    assert parts.runs.total == SMALL == parts.used + sum(count for _, count in parts.counts)


def test_two_decimal_marks_in_one_log_are_refused(tmp_path, tiny_parts):
    path = write_long_log(tmp_path, SMALL)
    names, *rows = path.read_text().replace(",", ";").splitlines()
    rows[15_000:] = [row.partition(";")[0] + row[row.index(";") :].replace(".", ",") for row in rows[15_000:]]
    path.write_text("\n".join([names, *rows]) + "\n")
    with pytest.raises(InputError, match=r"log\.csv(:1[45]\d\d\d)?: .*decimal (mark|one)"):
        in_parts(path)


def test_commas_that_come_late_are_understood(tmp_path, tiny_parts):
    path = write_long_log(tmp_path, SMALL)
    names, *rows = path.read_text().replace(",", ";").splitlines()
    whole = [f"{row.split(';')[0]};0;599;595;15" for row in rows[:5_000]]
    path.write_text("\n".join([names, *whole, *(row.replace(".", ",") for row in rows[5_000:])]) + "\n")
    log, _, plateaus = in_parts(path)
    assert len(plateaus.number) == len(LEVELS_M_S)
    assert np.max(plateaus.flow_m3_s) == pytest.approx(0.0441, rel=0.01)
    assert "Commas in numbers are decimal marks." in log.assumed


def test_eighty_footers_make_a_few_sentences(tmp_path, tiny_parts):
    path = write_long_log(tmp_path, SMALL)
    names, *rows = path.read_text().splitlines()
    pieces = [line for first in range(0, SMALL, 300) for line in (*rows[first : first + 300], "Average,1,2,3,4")]
    path.write_text("\n".join([names, *pieces]) + "\n")
    log, screening, _ = in_parts(path)
    assert screening.runs.total == SMALL
    assert 3 < len(log.assumed) < 20


MISTAKES = {
    "text": (16_000, with_field(2, "hello")),
    "comma": (16_001, lambda fields: [*fields, "1"]),
    "time": (15_000, with_field(0, "2026-13-02T00:10:00.000")),
    "infinite": (15_001, with_field(3, "inf")),
    "no zone": (15_002, lambda fields: [fields[0] + "+01:00", *fields[1:]]),
}


@pytest.mark.parametrize("name", MISTAKES)
def test_a_mistake_in_the_middle_is_named_with_its_line(tmp_path, tiny_parts, name):
    line, change = MISTAKES[name]
    path = spoilt(write_long_log(tmp_path, SMALL), {line: change})
    section = read_section(tmp_path / "section.toml")
    with pytest.raises(InputError) as part:
        in_parts(path)
    if name != "no zone":
        with pytest.raises(InputError) as whole:
            read_log(path, section)
        assert str(part.value) == str(whole.value)
        assert f"log.csv:{line}" in str(part.value)
    assert "log.csv" in str(part.value)


def joined(names, rows):
    return "\n".join([names, *rows])


REWRITTEN = {
    "semicolons and decimal commas": lambda names, rows: joined(
        names.replace(",", ";"), [";".join(row).replace(".", ",") for row in rows]
    ),
    "quoted times": lambda names, rows: joined(names, [",".join([f'"{row[0]}"', *row[1:]]) for row in rows]),
    "universal time": lambda names, rows: joined(names, [",".join([row[0] + "Z", *row[1:]]) for row in rows]),
    "seconds from the start": lambda names, rows: joined(
        names.replace("time", "elapsed [s]", 1),
        [",".join([f"{0.05 * number:.2f}", *row[1:]]) for number, row in enumerate(rows)],
    ),
    "time in the third column": lambda names, rows: joined(
        ",".join([*names.split(",")[1:3], "time", *names.split(",")[3:]]),
        [",".join([*row[1:3], row[0], *row[3:]]) for row in rows],
    ),
    "preamble, blank lines and a footer": lambda names, rows: joined(
        "Logger 7\n\n" + names,
        [*(",".join(row) for row in rows[:3000]), "", "", *(",".join(row) for row in rows[3000:]), "Average,1,2,3,4"],
    ),
    "lines ended as in Windows": lambda names, rows: joined(names, [",".join(row) for row in rows]).replace(
        "\n", "\r\n"
    ),
}
"""The log as other loggers would have written it, from its line of headings and the fields of its rows."""


@pytest.mark.parametrize("kind", REWRITTEN)
def test_every_form_of_file_gives_the_same_plateaus(tmp_path, tiny_parts, kind):
    path = write_long_log(tmp_path, SMALL)
    _, _, plain = in_parts(path)
    names, *lines = path.read_text().splitlines()
    path.write_bytes((REWRITTEN[kind](names, [line.split(",") for line in lines]) + "\n").encode())
    log, screening, plateaus = in_parts(path)
    assert screening.runs.total == SMALL
    np.testing.assert_allclose(plateaus.flow_m3_s, plain.flow_m3_s, rtol=1e-12)
    np.testing.assert_allclose(plateaus.pressure_pa, plain.pressure_pa, rtol=1e-12)
    np.testing.assert_allclose(plateaus.start_s, plain.start_s, atol=1e-6)
    whole = read_log(path, read_section(tmp_path / "section.toml"))
    assert set(log.assumed) == set(whole.assumed)
    assert set(log.line.tolist()) <= set(whole.line.tolist())
    assert log.start == whole.start


@pytest.mark.parametrize("encoding", ["utf-16", "utf-8-sig"])
def test_other_encodings_are_read_in_parts_too(tmp_path, tiny_parts, encoding):
    path = write_long_log(tmp_path, SMALL)
    _, screening, plain = in_parts(path)
    path.write_text(path.read_text(), encoding=encoding)
    _, again, plateaus = in_parts(path)
    assert again.runs.first_line.tolist() == screening.runs.first_line.tolist()
    np.testing.assert_allclose(plateaus.pressure_pa, plain.pressure_pa, rtol=1e-12)


def test_an_hour_of_summer_time_is_taken_out_across_parts(tmp_path, tiny_parts):
    path = write_long_log(tmp_path, SMALL)
    lines = path.read_text().splitlines()
    start, step = np.datetime64("2026-10-25T02:45:00.000"), np.timedelta64(50, "ms")
    times = start + step * np.arange(SMALL)
    times[times >= np.datetime64("2026-10-25T03:00:00")] -= np.timedelta64(1, "h")
    rows = [",".join([str(time), line.partition(",")[2]]) for time, line in zip(times, lines[1:], strict=True)]
    path.write_text("\n".join([lines[0], *rows]) + "\n")
    log, screening, plateaus = in_parts(path)
    assert CLOCK not in dict(screening.counts)
    assert plateaus.end_s[-1] == pytest.approx(0.05 * (SMALL - 1))
    assert any("end of summer time" in sentence for sentence in log.assumed)


def test_a_clock_that_leaps_is_judged_the_same_in_parts():
    rng = np.random.default_rng(4)
    for _ in range(40):
        time = np.cumsum(rng.choice([1.0, 1.0, 1.0, 0.0, -2.0, 30.0], 300, p=[0.5, 0.2, 0.2, 0.04, 0.03, 0.03]))
        time[rng.choice(300, 10, replace=False)] = np.nan
        lonely = rng.choice(np.arange(1, 299), 3, replace=False)
        time[lonely] += 500.0
        with RowStore({"time": np.float64}, 0) as store:
            store.append({"time": time})
            latest = long_screens._Latest(types.SimpleNamespace(store=store))
            found = [latest.not_later(time[first : first + 37], min(first + 37, 300)) for first in range(0, 300, 37)]
        wrong = np.concatenate(found)
        assert wrong.tolist() == repeated_or_backwards(time).tolist()


def service_log(folder, hours=60, step=2.0):
    """A log of ordinary service: a flow that follows the hours of the day and never stands still."""
    rng = np.random.default_rng(8)
    path = write_long_log(folder, 10)
    time = np.arange(0.0, hours * 3600.0, step)
    velocity = 1.4 + 0.9 * np.sin(2.0 * np.pi * time / 86_400.0) + 0.15 * np.sin(2.0 * np.pi * time / 5_000.0)
    velocity *= 1.0 + 0.03 * rng.standard_normal(time.size)
    from long_log_maker import BORE_M, DENSITY, GRAVITY, head_loss_m

    flow = velocity * np.pi / 4.0 * BORE_M**2 * 1e3
    top = 600.0 + 0.3 * rng.standard_normal(time.size)
    bottom = top - DENSITY * GRAVITY * (head_loss_m(velocity) + 0.4) / 1e3 + 0.3 * rng.standard_normal(time.size)
    stamps = np.datetime64("2026-03-02T00:00:00") + time.astype("timedelta64[s]")
    rows = [f"{t},{q:.3f},{p:.2f},{d:.2f},15.0" for t, q, p, d in zip(stamps, flow, top, bottom, strict=True)]
    path.write_text("\n".join(["time,flow [L/s],upstream [kPa],downstream [kPa],temperature [degC]", *rows]) + "\n")
    return path


def test_a_service_log_is_grouped_both_ways(tmp_path, monkeypatch):
    section = replace(read_section(service_log(tmp_path).parent / "section.toml"), screen_mode="service")
    whole = assess(section).campaigns[0]
    monkeypatch.setattr(long_log, "LONG_LOG_BYTES", 1)
    parts = assess(section).campaigns[0]
    assert whole.screening.block is not None
    assert parts.screening.block is not None
    one, other = whole.reaches[0].wall.hazen_williams_c, parts.reaches[0].wall.hazen_williams_c
    standard = (one.measurement[1] - one.measurement[0]) / 3.92
    assert abs(one.best - other.best) < 0.1 * standard
    assert parts.log.rows == parts.screening.used + sum(count for _, count in parts.screening.counts)


def test_record_and_audit_add_up(main_log, short_is_long, tmp_path, capsys):
    assert main(["assess", str(main_log.parent), "--out", str(tmp_path), "--json", str(tmp_path / "f.json")]) == 0
    assert f"of {ROWS} used" in capsys.readouterr().out
    log = json.loads((tmp_path / "f.json").read_text(encoding="utf-8"))["campaigns"][0]["log"]
    assert log["rows"] == ROWS == log["used"] + sum(log["set_aside"].values())
    (audit,) = tmp_path.glob("*rows.csv")
    rows = list(csv.DictReader(io.StringIO(audit.read_text(encoding="utf-8"))))
    assert sum(int(row["rows"]) for row in rows) == ROWS
    assert sum(int(row["rows"]) for row in rows if row["plateau"]) == log["used"]
    for why, count in log["set_aside"].items():
        assert sum(int(row["rows"]) for row in rows if row["set aside because"] == why) == count
    assert rows[0]["first line"] == "2"
    assert int(rows[-1]["last line"]) == ROWS + 1
    (page,) = tmp_path.glob("*.html")
    assert "one line for each run of rows" in page.read_text(encoding="utf-8")


def test_screening_a_long_log_tells_its_real_interval(main_log, short_is_long, tmp_path, capsys):
    assert main(["screen", str(main_log.parent), "--out", str(tmp_path)]) == 0
    assert "200 000 rows, 0.05 s apart" in capsys.readouterr().out.replace("\u00a0", " ").replace("\u202f", " ")


def test_a_plateau_that_carries_no_roughness_is_set_aside_in_runs(main_log, short_is_long):
    finding = assess(replace(read_section(main_log.parent / "section.toml"), screen_limits=(("turbulent", 1.5e5),)))
    campaign = finding.campaigns[0]
    assert dict(campaign.screening.counts)["critical zone"] > 40_000
    assert record(finding)["campaigns"][0]["log"]["rows"] == ROWS
    assert campaign.screening.used + sum(count for _, count in campaign.screening.counts) == ROWS


def test_fates_that_change_all_the_time_are_counted_in_windows(monkeypatch):
    monkeypatch.setattr(row_runs, "MOST_RUNS", 500)
    rng = np.random.default_rng(2)
    code = np.where(rng.random(30_000) < 0.4, 3, 64)
    code[10_000:20_000] = 128
    counter = RunCounter()
    for first in range(0, code.size, 1_111):
        part = slice(first, first + 1_111)
        counter.add(code[part], np.arange(code.size)[part] + 2, np.arange(code.size)[part] * 1.0)
        assert len(counter.rows) <= 500
    assert counter.rows.sum() == code.size
    for value in (3, 64, 128):
        assert counter.rows[counter.code == value].sum() == np.count_nonzero(code == value)
    whole = counter.code == 128
    assert counter.rows[whole].tolist() == [10_000]
    assert np.all(counter.lines[1] - counter.lines[0] + 1 >= counter.rows)
    assert np.all(np.diff(counter.first) > 0)


def test_a_sample_is_even_and_bounded():
    sample = Sample()
    values = np.arange(100_003.0)
    for part in np.array_split(values, 37):
        sample.add(part)
    taken = sample.values
    assert SAMPLE < len(taken) <= 2 * SAMPLE
    assert set(np.diff(taken).tolist()) == {16.0}


def test_ten_gigabytes_need_room_and_say_so(tmp_path, monkeypatch, short_is_long):
    path = write_long_log(tmp_path, 10)
    opened = open_long_log(path, read_section(tmp_path / "section.toml"))
    monkeypatch.setattr(shutil, "disk_usage", lambda _: types.SimpleNamespace(free=3 * 1024**3))
    stat = type(path).stat
    big = types.SimpleNamespace(st_size=10 * 1024**3)
    monkeypatch.setattr(type(path), "stat", lambda self, **kw: big if self.name == "log.csv" else stat(self, **kw))
    with pytest.raises(InputError, match=r"the log needs about \d+\.\d GiB for temporary files.*3\.0 GiB free.*TMPDIR"):
        read_long_log(opened, WEIGHT)


def test_a_short_log_and_one_of_another_clock_are_read_in_one_piece(tmp_path, monkeypatch):
    path = write_long_log(tmp_path, 2_000)
    section = read_section(tmp_path / "section.toml")
    assert open_long_log(path, section) is None
    monkeypatch.setattr(long_log, "LONG_LOG_BYTES", 1)
    assert open_long_log(path, section) is not None
    path.write_text(path.read_text().replace("2026-03-02T", "02.03.2026 "))
    assert open_long_log(path, section) is None
    assert open_long_log(tmp_path / "nothing.csv", section) is None


def test_progress_is_told_and_ends(main_log, short_is_long):
    told = []
    with progress.told_to(lambda what, share: told.append((what, share))):
        assess(main_log.parent)
    assert {what for what, _ in told} == {"Reading log.csv"}
    shares = [share for _, share in told]
    assert shares == sorted(shares)
    assert shares[-1] == 1.0


class Terminal(io.StringIO):
    def isatty(self):
        return True


@pytest.mark.parametrize(
    ("stream", "patience", "drawn"), [(Terminal, 0.0, True), (Terminal, 60.0, False), (io.StringIO, 0.0, False)]
)
def test_a_bar_is_drawn_on_a_terminal_and_after_a_while_only(monkeypatch, capsys, stream, patience, drawn):
    screen_of = stream()
    monkeypatch.setattr(sys, "stderr", screen_of)
    monkeypatch.setattr(progress, "PATIENCE_S", patience)
    with progress.bar_on_terminal():
        for share in (0.1, 0.5, 1.0):
            progress.tell("Reading [x].csv", share)
    assert ("Reading" in screen_of.getvalue()) is drawn
    assert capsys.readouterr().out == ""


def test_the_section_of_the_long_log_is_an_ordinary_one(tmp_path):
    (tmp_path / "section.toml").write_text(SECTION)
    assert len(read_section(tmp_path / "section.toml").taps) == 2
    assert UNSTEADY
