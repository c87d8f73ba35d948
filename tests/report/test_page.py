"""The page: complete by itself, safe, and in agreement with the record."""

import re
from dataclasses import replace
from html.parser import HTMLParser

import pytest
from invented import no_estimate, plant_line, smooth_pipe, street_main

from fieldfit.report.page import page, page_in_notebook, tied

HOSTILE = "<script>alert('x')</script> & \"quotes\" $\\frac$ -->"
FINDINGS = {"measured": plant_line, "upper limit": smooth_pipe, "several": street_main, "no estimate": no_estimate}
VOID = {"meta", "rect"}
LOADS = {"src", "href", "xlink:href", "data", "action", "srcset", "poster"}


class Reader(HTMLParser):
    """Collects tags, identifiers and loads, and checks that what opens is closed."""

    def __init__(self, text):
        super().__init__()
        self.tags, self.ids, self.loads, self.open, self.words = [], [], [], [], []
        self.feed(text)

    def handle_starttag(self, tag, attrs):
        self.tags.append(tag)
        self.ids += [value for name, value in attrs if name == "id"]
        self.loads += [value for name, value in attrs if name in LOADS and not value.startswith("#")]
        if tag not in VOID:
            self.open.append(tag)

    def handle_startendtag(self, tag, attrs):
        self.handle_starttag(tag, attrs)
        if tag not in VOID:
            self.open.pop()

    def handle_endtag(self, tag):
        assert self.open.pop() == tag

    def handle_data(self, data):
        self.words.append(data)


@pytest.fixture(scope="module")
def pages():
    return {name: page(make()) for name, make in FINDINGS.items()}


@pytest.mark.parametrize("name", FINDINGS)
def test_it_needs_nothing_from_outside_and_runs_nothing(pages, name):
    read = Reader(pages[name])
    assert not read.open
    assert not read.loads
    assert not {"script", "link", "iframe", "img", "object", "embed"} & set(read.tags)
    assert not re.search(r"url\((?!#)|@import|javascript:|\son\w+=", pages[name])
    addresses = set(re.findall(r"https?://[^\s\"'<>]+", pages[name]))
    assert addresses <= {"http://www.w3.org/1999/xlink", "http://www.w3.org/2000/svg"}


@pytest.mark.parametrize("name", FINDINGS)
def test_identifiers_of_all_figures_are_apart_and_every_reference_has_its_target(pages, name):
    ids = Reader(pages[name]).ids
    assert len(ids) == len(set(ids))
    wanted = set(re.findall(r'href="#([^"]+)"', pages[name])) | set(re.findall(r"url\(#([^)]+)\)", pages[name]))
    assert wanted <= set(ids)


def test_a_page_of_one_reach_stays_small(pages):
    assert len(pages["measured"].encode()) < 600_000


def test_hostile_names_are_words_everywhere():
    finding = plant_line(name=HOSTILE, taps=("<b>up</b>", "a&b"), file="<i>log</i>.csv")
    campaign = finding.campaigns[0]
    finding = replace(finding, campaigns=(replace(campaign, cautions=(replace(campaign.cautions[0], text=HOSTILE),)),))
    text = page(finding)
    read = Reader(text)
    assert not {"script", "b>up", "i"} & set(read.tags)
    assert "<b>up" not in text
    assert "&lt;script&gt;alert" in text
    assert any(HOSTILE in words for words in read.words)


def test_the_answer_stands_first_and_the_cautions_before_the_figures(pages):
    text = pages["measured"]
    places = [
        text.index(part)
        for part in (
            'class="answer"', "Read with care", "Head loss against flow", "Friction-factor chart", "C against flow",
            "What the fit leaves over", "What limits the certainty.", "The log itself", "Results in numbers",
            "What was taken as known", "How it was computed", "Before anyone acts on it", 'id="versions"', "SHA-256",
        )
    ]  # fmt: skip
    assert places == sorted(places)


def test_it_says_what_must_be_said_before_anyone_acts(pages):
    for name in FINDINGS:
        words = " ".join(" ".join(Reader(pages[name]).words).split())
        for part in ("screening calculation", "local codes", "authority having jurisdiction", "licensed engineer",
                     "140 kPa (20 psi)", "backflow", "lock out"):  # fmt: skip
            assert part in words


def test_numbers_agree_with_the_record(pages):
    words = " ".join(Reader(pages["measured"]).words).replace("\u00a0", " ")
    for part in ("0.31", "0.28 to 0.35", "0.21 to 0.44", "111.2", "109.3 to 113.1", "1.47 (1.31 to 1.65)", "over 99 %"):
        assert part in words
    assert "100 %" not in words
    assert "nan" not in words.lower().split()


def test_every_plateau_has_its_row_and_every_reason_its_count(pages):
    words = Reader(pages["measured"]).words
    finding = plant_line()
    for reason, count in finding.campaigns[0].screening.counts:
        assert f"set aside: {reason}" in words
        assert str(count) in words
    numbers = finding.campaigns[0].reaches[0].wall.plateaus.number
    assert all(str(n) in words for n in numbers)


def test_an_upper_limit_shows_no_best_value(pages):
    words = " ".join(Reader(pages["upper limit"]).words).replace("\u00a0", " ")
    assert "under 0.042 mm" in words
    assert "not rougher than 0.042 mm" in words


def test_no_estimate_shows_the_reason_once_and_no_result(pages):
    words = " ".join(Reader(pages["no estimate"]).words)
    assert words.count("Every reading is laminar") == 1
    assert "by these readings alone" not in words


def test_every_reach_of_every_campaign_has_its_block(pages):
    text = pages["several"]
    assert text.count('class="answer"') == 4
    assert text.count("Head loss against flow") == 4
    assert text.count("The log itself") == 2


def test_a_reach_without_any_plateau_still_prints():
    finding = no_estimate("No steady flow was found in the log.")
    campaign = finding.campaigns[0]
    reach = campaign.reaches[0]
    arrays = ("number", "flow_m3_s", "head_loss_m", "random_m", "temperature_degc", "density_kg_m3", "viscosity_m2_s")
    emptied = {name: getattr(reach.readings, name)[:0] for name in arrays}
    nowhere = dict.fromkeys(
        ("flow_m3_s", "velocity_m_s", "reynolds", "temperature_degc", "viscosity_m2_s", "smooth_friction_factor"),
        float("nan"),
    )
    bare = replace(
        reach,
        readings=replace(reach.readings, **emptied, pressure_pa=reach.readings.pressure_pa[:, :0], levelling=None),
        wall=replace(reach.wall, **nowhere),
    )
    text = page(replace(finding, campaigns=(replace(campaign, reaches=(bare,)),)))
    assert "No steady flow was found in the log." in text
    assert "The log itself" in text


def test_in_a_notebook_the_page_keeps_to_its_frame():
    read = Reader(page_in_notebook(plant_line()))
    assert read.tags == ["iframe"]
    assert not read.ids


def test_a_number_keeps_hold_of_its_unit():
    assert tied("between 0.28 and 0.35 mm at 3.50 L/s, 12 ± 3 %") == (
        "between 0.28 and 0.35\u00a0mm at 3.50\u00a0L/s, 12\u00a0±\u00a03\u00a0%"
    )
