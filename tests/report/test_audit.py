"""The audit trail: every row, and nothing lost."""

import csv
import io

import numpy as np
import pytest
from invented import plant_line, street_main

from fieldfit.report.audit import audit_csv


def read(finding, index=0):
    return list(csv.DictReader(io.StringIO(audit_csv(finding.campaigns[index], finding.section))))


def test_used_and_set_aside_rows_add_up_to_the_log():
    finding = plant_line()
    rows = read(finding)
    used = [row for row in rows if row["plateau"]]
    aside = [row for row in rows if row["set aside because"]]
    assert len(used) == finding.campaigns[0].screening.used
    assert len(used) + len(aside) == len(rows) == finding.campaigns[0].log.line.size
    assert not [row for row in used if row["set aside because"]]


def test_units_stand_in_the_headings():
    assert list(read(plant_line())[0]) == [
        "line", "time", "flow [m3/s]", "upstream [Pa]", "downstream [Pa]", "temperature [degC]", "plateau",
        "set aside because",
    ]  # fmt: skip


def test_values_are_those_of_the_log():
    finding = plant_line()
    log, rows = finding.campaigns[0].log, read(finding)
    assert [int(row["line"]) for row in rows] == log.line.tolist()
    assert [float(row["upstream [Pa]"]) for row in rows] == pytest.approx(log.pressure_pa[0], rel=1e-8)
    assert rows[1]["time"] == "2026-05-12T08:00:10"
    missing = np.flatnonzero(np.isnan(log.flow_m3_s))
    assert missing.size
    assert {rows[k]["flow [m3/s]"] for k in missing} == {""}


def test_a_sheet_has_no_clock_and_no_temperature():
    assert list(read(street_main(), 1)[0]) == [
        "line", "flow [m3/s]", "hydrant 12 [Pa]", "hydrant 14 [Pa]", "hydrant 17 [Pa]", "plateau", "set aside because",
    ]  # fmt: skip


def test_a_heading_with_a_comma_stays_one_column():
    finding = plant_line(taps=('gauge 1, "old"', "downstream"))
    assert 'gauge 1, "old" [Pa]' in read(finding)[0]
