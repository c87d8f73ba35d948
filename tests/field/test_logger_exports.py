"""A log is the same log however it was written down."""

import csv
import io
from dataclasses import replace

import logger_exports as le
import numpy as np
import pytest

from fieldfit.assessment import assess_campaign
from fieldfit.errors import InputError
from fieldfit.field.campaign_files import logs_beside
from fieldfit.field.log_file import read_log
from fieldfit.field.section_file import read_section
from fieldfit.report.audit import audit_csv

EXPORTS = le.exports()
BY_FIRST_ROW = ("missing value", "signal fault", "line cut off")


@pytest.fixture(scope="module")
def clean(tmp_path_factory):
    path = tmp_path_factory.mktemp("clean") / "clean.csv"
    path.write_text(le.text(le.clean()), encoding="utf-8")
    section = read_section(le.SAMPLE)
    return section, assess_campaign(section, path, None)


def written(export, folder):
    """Write an export with its section file."""
    known = (le.SAMPLE / "section.toml").read_text(encoding="utf-8")
    for old, new in export.section:
        assert old in known
        known = known.replace(old, new, 1)
    (folder / "section.toml").write_text(known, encoding="utf-8")
    path = folder / f"export{export.suffix}"
    path.write_bytes(export.data)
    return read_section(folder), path


@pytest.fixture(scope="module")
def assessed(tmp_path_factory):
    """Assess an export once for all tests."""
    done = {}

    def finder(name):
        if name not in done:
            export = EXPORTS[name]()
            section, path = written(export, tmp_path_factory.mktemp("export"))
            done[name] = export, section, assess_campaign(section, path, None)
        return done[name]

    return finder


@pytest.mark.parametrize("name", EXPORTS)
def test_the_same_record_however_it_was_written(name, assessed, clean):
    (export, _, campaign), (_, reference) = assessed(name), clean
    log, true = campaign.log, reference.log
    assert any(export.says in sentence for sentence in log.assumed) or not export.says, log.assumed
    count = len(true.reason)
    assert len(log.reason) == count + export.surplus
    lost = np.isin(log.reason, BY_FIRST_ROW)
    assert int(lost.sum()) == export.aside + export.surplus, set(log.reason)
    here = np.flatnonzero(~lost)
    there = here - np.searchsorted(np.flatnonzero(lost), here) * bool(export.surplus)
    time = 2.0 * np.arange(count) if not export.timed else true.time_s
    np.testing.assert_allclose(log.time_s[here], time[there], atol=export.time_within)
    largest = true.flow_m3_s.max()
    np.testing.assert_allclose(log.flow_m3_s[here], true.flow_m3_s[there], atol=export.flow_within * largest)
    span = true.pressure_pa.max()
    np.testing.assert_allclose(log.pressure_pa[:, here], true.pressure_pa[:, there], atol=export.pressure_within * span)
    difference = log.pressure_pa[0] - log.pressure_pa[1]
    expected = true.pressure_pa[0] - true.pressure_pa[1]
    np.testing.assert_allclose(difference[here], expected[there], atol=min(export.pressure_within, 1e-3) * span)
    np.testing.assert_allclose(log.temperature_degc[here], true.temperature_degc[there], atol=1e-4)
    assert log.start == ((export.start or true.start) if export.dated else None)
    wall, best = campaign.reaches[0].wall, reference.reaches[0].wall.roughness_m.best
    assert wall.roughness_m.best == pytest.approx(best, rel=export.roughness_within)


@pytest.mark.parametrize("name", EXPORTS)
def test_the_audit_adds_up(name, assessed, clean):
    export, section, campaign = assessed(name)
    rows = list(csv.DictReader(io.StringIO(audit_csv(campaign, section))))
    aside = sum(bool(row["set aside because"]) for row in rows)
    used = sum(bool(row["plateau"]) and not row["set aside because"] for row in rows)
    read = len(clean[1].log.reason) + export.surplus
    assert used + aside == len(rows) == read
    assert aside == sum(count for _, count in campaign.screening.counts)


def test_no_two_writings_are_alike():
    data = [EXPORTS[name]().data for name in EXPORTS if not EXPORTS[name]().section]
    assert len(set(data)) == len(data)


def test_a_velocity_needs_a_meter_that_senses_it(tmp_path):
    section, path = written(replace(EXPORTS["velocity"](), section=()), tmp_path)
    with pytest.raises(InputError, match=r"export\.csv:1, column 'flow \[m/s\]': the column is a velocity"):
        read_log(path, section)


@pytest.mark.parametrize("suffix", [".txt", ".tsv", ".dat", ".xlsx"])
def test_the_folders_only_log_may_have_another_ending(suffix, tmp_path):
    name = "workbook, plain" if suffix == ".xlsx" else "tabs"
    export = replace(EXPORTS[name](), suffix=suffix)
    section, path = written(export, tmp_path)
    assert logs_beside(section) == [path]
    (tmp_path / "log.csv").write_text("time\n", encoding="utf-8")
    assert logs_beside(section) == [tmp_path / "log.csv"]
