"""Reports as files: safe names, whole files or none."""

import json
import os
import re

import pytest
from hypothesis import given
from hypothesis import strategies as st
from invented import plant_line, street_main

from fieldfit.report import files
from fieldfit.report.files import RESERVED, safe_name, write_json, write_reports
from fieldfit.report.record import record


@given(st.text(max_size=200))
def test_any_name_becomes_a_safe_one(name):
    safe = safe_name(name)
    assert re.fullmatch(r"[a-z0-9]+(-[a-z0-9]+)*", safe)
    assert len(safe) <= files.LONGEST + len("-section")
    assert safe not in RESERVED


@pytest.mark.parametrize(
    ("name", "safe"),
    [
        ("../../etc/passwd", "etc-passwd"),
        (r"C:\Windows\system32", "c-windows-system32"),
        ("<script>alert(1)</script>", "script-alert-1-script"),
        ("CON", "con-section"),
        ("com1", "com1-section"),
        ("...", "section"),
        ("井戸", "section"),
        ("Mühlgasse 7", "muhlgasse-7"),
        ("x" * 300, "x" * 60),
        ("name\nwith\x00control", "name-with-control"),
    ],
)
def test_hostile_names_stay_in_the_folder(name, safe):
    assert safe_name(name) == safe


def test_page_record_and_rows_are_written(tmp_path):
    written = write_reports(plant_line(), tmp_path / "new" / "folder")
    assert [path.name for path in written] == [
        "kiln-cooling-supply.html",
        "kiln-cooling-supply.json",
        "kiln-cooling-supply-2026-05-12-rows.csv",
    ]
    assert json.loads(written[1].read_text(encoding="utf-8")) == record(plant_line())
    assert sorted(path.name for path in written[0].parent.iterdir()) == sorted(path.name for path in written)


def test_every_campaign_has_its_own_rows(tmp_path):
    finding = street_main()
    names = {path.name for path in write_reports(finding, tmp_path)}
    assert {"tanner-s-row-main-2026-05-12-rows.csv", "tanner-s-row-main-second-visit-rows.csv"} < names
    twice = write_reports(type(finding)(section=finding.section, campaigns=finding.campaigns[:1] * 2), tmp_path)
    assert len(set(twice)) == 4


def test_lines_end_alike_on_every_system(tmp_path):
    for path in write_reports(plant_line(), tmp_path):
        assert b"\r" not in path.read_bytes()


def test_the_same_finding_gives_the_same_bytes(tmp_path):
    first = [path.read_bytes() for path in write_reports(plant_line(), tmp_path / "a")]
    second = [path.read_bytes() for path in write_reports(plant_line(), tmp_path / "b")]
    assert first == second


def test_a_failure_while_writing_leaves_no_file(tmp_path, monkeypatch):
    def full_disk(source, target):
        raise OSError("no space left on device")

    monkeypatch.setattr(files.os, "replace", full_disk)
    with pytest.raises(OSError, match="no space"):
        write_reports(plant_line(), tmp_path)
    assert list(tmp_path.iterdir()) == []


def test_a_failure_while_composing_leaves_the_old_report(tmp_path, monkeypatch):
    before = {path: path.read_bytes() for path in write_reports(plant_line(), tmp_path)}

    def broken(campaign, section):
        raise ValueError("no rows")

    monkeypatch.setattr(files, "audit_csv", broken)
    with pytest.raises(ValueError, match="no rows"):
        write_reports(plant_line(), tmp_path)
    assert {path: path.read_bytes() for path in tmp_path.iterdir()} == before


def test_the_record_alone_replaces_an_older_one(tmp_path):
    path = tmp_path / "finding.json"
    path.write_text("old", encoding="utf-8")
    assert write_json(plant_line(), path) == path
    assert json.loads(path.read_text(encoding="utf-8"))["schema"] == 1
    assert os.listdir(tmp_path) == ["finding.json"]
