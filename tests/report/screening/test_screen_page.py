"""Page, figures, summary, record and files of a screening, held to what it found."""

from __future__ import annotations

import csv
import io
import json
import re
from html.parser import HTMLParser

import pytest
from bad_logs import LOGS, brought

from fieldfit.report import figures
from fieldfit.report.audit import audit_csv
from fieldfit.report.figures.cloud import row_heads
from fieldfit.report.screening import words
from fieldfit.report.screening.files import write_screen_json, write_screening
from fieldfit.report.screening.page import screen_page
from fieldfit.report.screening.record import screen_record, screen_record_json
from fieldfit.report.screening.summary import screen_summary
from fieldfit.report.summary import WIDTH
from fieldfit.screening import screen_logs

VOID = {"meta", "br", "hr", "img", "path", "use", "rect", "col", "link"}


class Reader(HTMLParser):
    """Text of a page, and whether its elements are closed in order."""

    def __init__(self, text):
        super().__init__()
        self.words, self.open, self.links = [], [], []
        self.feed(text)

    def handle_starttag(self, tag, attrs):
        self.links += [value for name, value in attrs if name in ("src", "href") and not value.startswith("#")]
        if tag not in VOID:
            self.open.append(tag)

    def handle_endtag(self, tag):
        if tag not in VOID:
            assert self.open.pop() == tag

    def handle_data(self, data):
        if "style" not in self.open:
            self.words.append(data)

    @property
    def text(self):
        return " ".join(" ".join(self.words).replace("\u00a0", " ").replace("\u2060", "").split())


@pytest.fixture(scope="module")
def findings(tmp_path_factory):
    folder = tmp_path_factory.mktemp("logs")
    return {name: screen_logs(brought(name, folder / name.replace(" ", "-"))) for name in LOGS}


@pytest.mark.parametrize("name", LOGS)
def test_page_says_what_was_found(findings, name):
    campaign = findings[name].campaigns[0]
    page = Reader(screen_page(findings[name]))
    assert page.open == []
    assert page.links == []
    assert words.headline(campaign) in page.text
    for check in campaign.all_checks:
        assert check.because in page.text
    for text in words.again(campaign):
        assert text in page.text
    for reason, number in campaign.screening.counts:
        assert re.search(rf"{re.escape(reason)} .*? {number} ", page.text)
    assert campaign.log.sha256 in page.text
    assert "nan" not in page.text.lower().split()


def test_page_shows_limits_in_force_and_the_steps(findings, tmp_path):
    folder = brought("sound", tmp_path)
    section = folder / "section.toml"
    section.write_text(section.read_text(encoding="utf-8") + "\n[screen]\noutlier = 7.5\n", encoding="utf-8")
    text = Reader(screen_page(screen_logs(folder))).text
    assert "outlier 7.5" in text
    assert "upstream 0.100 kPa" in text


def test_a_hostile_name_stays_text(tmp_path):
    folder = brought("sound", tmp_path)
    section = folder / "section.toml"
    hostile = "<script>alert(1)</script>"
    section.write_text(section.read_text(encoding="utf-8").replace('"sound"', f'"{hostile}"'), encoding="utf-8")
    page = screen_page(screen_logs(folder))
    assert "<script" not in page
    assert hostile in Reader(page).text


@pytest.mark.parametrize("name", LOGS)
def test_summary_is_short_and_says_the_same(findings, name):
    text = screen_summary(findings[name])
    lines = text.splitlines()
    assert len(lines) <= 32
    assert max(map(len, lines)) <= WIDTH
    whole = " ".join(text.split())
    campaign = findings[name].campaigns[0]
    assert words.headline(campaign).lower() in whole.lower()
    for check in words.failed(campaign, needed=True):
        assert check.because in whole
    assert f"{campaign.screening.used} of {campaign.log.rows} used" in whole


def test_summary_of_a_sound_log_is_a_dozen_lines(findings):
    assert len(screen_summary(findings["sound"]).splitlines()) <= 12


@pytest.mark.parametrize("name", LOGS)
def test_record_is_plain_and_adds_up(findings, name):
    record = json.loads(screen_record_json(findings[name]))
    assert record == screen_record(findings[name])
    assert list(record) == ["schema", "fieldfit", "section", "good_enough", "campaigns"]
    campaign = record["campaigns"][0]
    log = campaign["log"]
    assert log["used"] + sum(log["set_aside"].values()) == log["rows"]
    every = [check for reach in campaign["reaches"] for check in reach["checks"]] + campaign["checks"]
    assert record["good_enough"] == all(check["passed"] for check in every if check["needed"])
    assert campaign["read_as"] == ("service" if name == "service" else "plateaus")


@pytest.mark.parametrize("name", LOGS)
def test_the_file_of_rows_tells_every_row(findings, name):
    campaign = findings[name].campaigns[0]
    rows = list(csv.DictReader(io.StringIO(audit_csv(campaign, findings[name].section))))
    assert len(rows) == campaign.log.rows
    used = [row for row in rows if row["plateau"]]
    assert len(used) == campaign.screening.used
    assert all(bool(row["plateau"]) != bool(row["set aside because"]) for row in rows)


def test_files_are_written_beside_those_of_an_assessment(findings, tmp_path):
    written = [path.name for path in write_screening(findings["sound"], tmp_path)]
    assert written == ["sound-screening.html", "sound-screening.json", "sound-screening-2026-05-12-rows.csv"]
    alone = write_screen_json(findings["sound"], tmp_path / "own.json")
    assert alone.read_text(encoding="utf-8") == (tmp_path / "sound-screening.json").read_text(encoding="utf-8")


@pytest.mark.parametrize("name", LOGS)
def test_figures_draw_any_log(findings, name):
    finding = findings[name]
    campaign = finding.campaigns[0]
    drawn = {"rows": figures.rows(campaign, finding.section), "cloud": figures.cloud(campaign, 0, finding.section)}
    at_rest = figures.statics(campaign, 0)
    assert (at_rest is None) == (campaign.reaches[0].heads.levelling is None)
    if at_rest is not None:
        drawn["statics"] = at_rest
    for text in figures.svg(drawn).values():
        assert text.startswith("<svg")
        # A log of days stays small on the page.
        assert len(text) < 600_000


def test_rows_of_the_cloud_lie_on_their_plateaus(findings):
    finding = findings["sound"]
    campaign = finding.campaigns[0]
    heads = campaign.reaches[0].heads
    shown = row_heads(campaign, 0, finding.section)
    for number, head in zip(heads.plateaus.number, heads.head_loss_m, strict=True):
        assert shown[campaign.screening.plateau == number].mean() == pytest.approx(head, abs=0.02)


def test_a_notebook_shows_the_page(findings):
    assert findings["sound"]._repr_html_().startswith("<iframe")
