"""One file per logger: the same test, the same answer."""

import numpy as np
import pytest
from crew import PLANT, bring, section_text
from instruments import Gauge, Kit, Meter, Pipe, Plan
from loggers import Logger, logger_text
from simulator import simulate

from fieldfit.assessment import assess
from fieldfit.errors import InputError
from fieldfit.field.campaign_files import gather_parts, read_campaign_log
from fieldfit.field.joined_log import read_joined_log
from fieldfit.field.log_file import read_log
from fieldfit.field.screens import UNPAIRED
from fieldfit.field.section_file import read_section

PIPE = Pipe(bore_m=0.15, length_m=300.0, roughness_m=1e-3, temperature_degc=12.0)
AREA = np.pi / 4.0 * 0.15**2


@pytest.fixture(scope="module")
def day():
    """A stepped test, simulated every half second."""
    kit = Kit(
        gauge=Gauge(full_scale_pa=1e6, limit=0.0025, step_pa=100.0, noise_pa=500.0),
        meter=Meter(limit=0.005, step_m3_s=1e-5),
    )
    plan = Plan(
        flows_m3_s=tuple(AREA * v for v in (0.6, 1.0, 1.4, 1.9)),
        supply_pa=5e5,
        source_loss_pa=5e4,
        dwell_s=60.0,
        ramp_s=10.0,
        interval_s=0.5,
        drift=0.02,
    )
    return simulate(np.random.default_rng(11), PIPE, kit, plan)


def write(folder, day, loggers, extra=""):
    """Section file and one file per logger; return the section file and the paths."""
    folder.mkdir(parents=True, exist_ok=True)
    (folder / "section.toml").write_text(section_text(day, PLANT) + extra, encoding="utf-8")
    paths = []
    for logger in loggers:
        paths.append(folder / logger.file)
        paths[-1].write_text(logger_text(day, logger), encoding="utf-8")
    return folder / "section.toml", paths


def three(up=0.0, down=0.0, every=(4, 4, 4), phase=(0, 0, 0)):
    """Meter, upper and lower gauge, each with a logger of its own."""
    return [
        Logger(file="flow.csv", channels=("flow", "temperature"), every=every[0], phase=phase[0]),
        Logger(file="up.csv", channels=("upstream",), ahead_s=up, every=every[1], phase=phase[1]),
        Logger(file="down.csv", channels=("downstream",), ahead_s=down, every=every[2], phase=phase[2]),
    ]


def one(day, folder):
    """The friction factor that a single clean file gives."""
    section, paths = write(folder, day, [Logger(file="all.csv", channels=CHANNELS, every=4)])
    return assess(section, *paths).campaigns[0]


CHANNELS = ("flow", "upstream", "downstream", "temperature")


def friction(campaign):
    return campaign.reaches[0].wall.friction_factor.best


def test_files_on_one_clock_give_the_very_log_of_a_single_file(day, tmp_path):
    whole = one(day, tmp_path / "whole")
    section, paths = write(tmp_path / "parts", day, three())
    log = read_joined_log(paths, read_section(section))
    for name in ("time_s", "flow_m3_s", "pressure_pa", "temperature_degc", "reason", "pressure_step_pa"):
        assert np.array_equal(getattr(log, name), getattr(whole.log, name)), name
    assert log.start == whole.log.start
    assert {clock.how for clock in log.clocks} == {"reference", "agrees"}
    assert log.file == "flow.csv + up.csv + down.csv"


@pytest.mark.parametrize("lag", [2.0, -15.0, 60.0, 3600.0])
def test_skew_is_found_and_does_not_bias_friction(day, tmp_path, lag):
    whole = friction(one(day, tmp_path / "whole"))
    loggers = [
        Logger(file="flow_up.csv", channels=("flow", "upstream", "temperature"), every=4),
        Logger(file="down.csv", channels=("downstream",), every=4, phase=1, ahead_s=lag),
    ]
    section, paths = write(tmp_path / "parts", day, loggers)
    campaign = assess(section, *paths).campaigns[0]
    clock = campaign.log.clocks[1]
    assert clock.interval_s[0] <= lag <= clock.interval_s[1]
    assert clock.interval_s[1] - clock.interval_s[0] < 3.0
    assert friction(campaign) == pytest.approx(whole, rel=0.005)


def test_skew_left_alone_would_have_biased_it(day, tmp_path):
    """The check above can fail: with clocks stated as equal the same files give another answer."""
    whole = friction(one(day, tmp_path / "whole"))
    extra = "".join(f'\n[[logger]]\nfile = "{name}.csv"\noffset = "0 s"\n' for name in ("flow", "up", "down"))
    section, paths = write(tmp_path / "parts", day, three(down=60.0), extra)
    skewed = friction(assess(section, *paths).campaigns[0])
    assert skewed is None or abs(skewed / whole - 1.0) > 0.02


def test_three_loggers_of_unlike_speed(day, tmp_path):
    whole = friction(one(day, tmp_path / "whole"))
    section, paths = write(tmp_path / "parts", day, three(up=-5.0, down=61.5, every=(4, 1, 10), phase=(0, 0, 3)))
    campaign = assess(section, *paths).campaigns[0]
    log = campaign.log
    assert log.line.size == len(logger_text(day, three(every=(4, 1, 10), phase=(0, 0, 3))[2]).splitlines()) - 1
    up, down = log.clocks[1:]
    assert up.interval_s[0] <= -5.0 <= up.interval_s[1]
    assert down.interval_s[0] <= 61.5 <= down.interval_s[1]
    assert friction(campaign) == pytest.approx(whole, rel=0.005)
    assert any("averaged onto them" in sentence for sentence in log.assumed)


def test_a_stated_offset_stands(day, tmp_path):
    whole = friction(one(day, tmp_path / "whole"))
    extra = '\n[[logger]]\nfile = "down.csv"\noffset = "+3600 s"\n[[logger]]\nfile = "up.csv"\noffset = "0 s"\n'
    section, paths = write(tmp_path / "parts", day, three(down=3600.0), extra)
    campaign = assess(section, *paths).campaigns[0]
    assert [clock.how for clock in campaign.log.clocks] == ["agrees", "given", "given"]
    assert friction(campaign) == pytest.approx(whole, rel=0.001)
    assert any("3600.0 s ahead, as the section file says" in sentence for sentence in campaign.log.assumed)


def test_two_clocks_in_one_file(day, tmp_path):
    """A column that a file's second clock wrote is told by its column."""
    text = logger_text(day, Logger(file="x", channels=CHANNELS, every=4)).splitlines()
    cells = [row.split(",") for row in text]
    moved = [*cells[1:6], *cells[1:-5]]
    rows = [cells[0]] + [[*row[:3], other[3], row[4]] for row, other in zip(cells[1:], moved, strict=True)]
    folder = tmp_path / "one"
    folder.mkdir()
    extra = '\n[[logger]]\ncolumns = ["downstream"]\n'
    (folder / "section.toml").write_text(section_text(day, PLANT) + extra, encoding="utf-8")
    (folder / "all.csv").write_text("\n".join(",".join(row) for row in rows) + "\n", encoding="utf-8")
    log = assess(folder).campaigns[0].log
    found = next(clock for clock in log.clocks if clock.columns == ("downstream",))
    assert found.interval_s[0] <= 10.0 <= found.interval_s[1]


def test_edges_are_set_aside_and_nothing_is_dropped(day, tmp_path):
    section, paths = write(tmp_path, day, three())
    lines = paths[2].read_text(encoding="utf-8").splitlines()
    paths[2].write_text("\n".join([lines[0], *lines[21:-11]]) + "\n", encoding="utf-8")
    campaign = assess(section, *paths).campaigns[0]
    counts = dict(campaign.screening.counts)
    assert campaign.log.line.size == len(lines) - 1
    assert campaign.screening.used + sum(counts.values()) == campaign.log.line.size
    assert counts[UNPAIRED] == 31


def test_a_gap_in_one_logger_is_a_missing_value_not_a_line(day, tmp_path):
    section, paths = write(tmp_path, day, three())
    lines = paths[1].read_text(encoding="utf-8").splitlines()
    paths[1].write_text("\n".join([*lines[:60], *lines[75:]]) + "\n", encoding="utf-8")
    log = read_joined_log(paths, read_section(section))
    assert np.count_nonzero(log.reason == "missing value") == 15
    assert np.all(np.isnan(log.pressure_pa[0][log.reason == "missing value"]))


def test_part_files_on_the_command_line_and_in_the_folder_are_one_campaign(day, tmp_path):
    section, paths = write(tmp_path, day, three(down=15.0))
    known = read_section(section)
    given, logs = gather_parts(known, paths)
    assert logs == (paths[0],)
    assert given.campaigns[0].parts == tuple(paths[1:])
    assert len(assess(section, *paths).campaigns) == 1
    assert len(assess(tmp_path).campaigns) == 1
    assert read_campaign_log(paths[0], given).clocks[2].how == "recovered"


def test_complete_files_stay_campaigns_of_their_own(day, tmp_path):
    section, paths = write(
        tmp_path, day, [Logger(file=name, channels=CHANNELS, every=4) for name in ("a.csv", "b.csv")]
    )
    assert gather_parts(read_section(section), paths)[1] == tuple(paths)


def test_a_campaign_names_the_files_of_its_loggers(day, tmp_path):
    extra = '\n[[campaign]]\ndate = 2026-05-12\nlog = ["flow.csv", "up.csv", "down.csv"]\n'
    write(tmp_path, day, three(down=15.0), extra)
    campaign = assess(tmp_path).campaigns[0]
    assert campaign.log.clocks[2].offset_s == pytest.approx(15.0, abs=0.5)
    assert campaign.campaign.parts == (tmp_path / "up.csv", tmp_path / "down.csv")


def flat(rng, count, level, step):
    return np.round(level * (1.0 + 1e-3 * rng.standard_normal(count)) / step) * step


def flat_files(folder, down_start="08:00:00", start_day="2026-05-12T"):
    """Two loggers of a test in which nothing changes."""
    rng = np.random.default_rng(4)
    flow, up, down = flat(rng, 200, 10.0, 0.01), flat(rng, 200, 400.0, 0.1), flat(rng, 200, 380.0, 0.1)
    clock = [f"{start_day}08:{k // 30:02d}:{2 * (k % 30):02d}" for k in range(200)]
    other = [text.replace("08:", f"{down_start[:2]}:", 1) for text in clock]
    first = ["time,flow [L/s],upstream [kPa]", *(f"{t},{q},{p}" for t, q, p in zip(clock, flow, up, strict=True))]
    second = ["time,downstream [kPa]", *(f"{t},{p}" for t, p in zip(other, down, strict=True))]
    (folder / "a.csv").write_text("\n".join(first) + "\n", encoding="utf-8")
    (folder / "b.csv").write_text("\n".join(second) + "\n", encoding="utf-8")
    return folder / "a.csv", folder / "b.csv"


def test_flat_signals_are_refused_with_the_reason_and_taken_as_equal(day, tmp_path):
    section, _ = write(tmp_path, day, [])
    log = read_joined_log(flat_files(tmp_path), read_section(section))
    assert log.clocks[1].how == "taken as equal"
    assert log.clocks[1].interval_s is None
    assert any("the readings cannot tell" in sentence and "flat" in sentence for sentence in log.assumed)


def test_flat_signals_without_common_time_need_an_offset(day, tmp_path):
    section, _ = write(tmp_path, day, [])
    paths = flat_files(tmp_path, "09:00:00")
    with pytest.raises(InputError, match=r"no time in common.*flat.*\[\[logger\]\] file = \"b\.csv\", offset"):
        read_joined_log(paths, read_section(section))


@pytest.mark.parametrize(
    ("spoil", "message"),
    [
        (lambda text: text.replace("downstream", "elsewhere"), r"no heading"),
        (lambda text: text.replace("downstream", "upstream"), r"'upstream' stands in up\.csv and in down\.csv"),
        (lambda text: "\n".join(row.split(",")[1] for row in text.splitlines()[:40]), r"the file has no clock"),
    ],
)
def test_files_that_do_not_go_together(day, tmp_path, spoil, message):
    section, paths = write(tmp_path, day, three())
    paths[2].write_text(spoil(paths[2].read_text(encoding="utf-8")), encoding="utf-8")
    with pytest.raises(InputError, match=message):
        read_joined_log(paths, read_section(section))


def test_a_column_in_no_file_is_named(day, tmp_path):
    section, paths = write(tmp_path, day, three())
    with pytest.raises(InputError, match=r"flow\.csv, up\.csv: none of the files has the column 'downstream'"):
        read_joined_log(paths[:2], read_section(section))


def test_a_single_ordinary_file_is_read_as_ever(day, tmp_path):
    section, log = bring(day, tmp_path)
    known = read_section(section)
    assert read_campaign_log(log, known).clocks == ()
    assert np.array_equal(read_campaign_log(log, known).flow_m3_s, read_log(log, known).flow_m3_s)


def test_an_absolute_gauge_of_its_own_logger_needs_the_barometer(day, tmp_path):
    section, paths = write(tmp_path, day, three())
    for path in paths[1:]:
        path.write_text(path.read_text(encoding="utf-8").replace("[kPa]", "[kPa abs]"), encoding="utf-8")
    gauges = read_joined_log(paths, read_section(section))
    assert any("standard 101.3 kPa" in sentence for sentence in gauges.assumed)
    original = read_joined_log(write(tmp_path / "gauge", day, three())[1], read_section(section))
    np.testing.assert_allclose(gauges.pressure_pa, original.pressure_pa - 101_325.0)
    paths[1].write_text(paths[1].read_text(encoding="utf-8").replace("[kPa abs]", "[kPa]"), encoding="utf-8")
    with pytest.raises(InputError, match="'downstream' is absolute and 'upstream' is not"):
        read_joined_log(paths, read_section(section))
