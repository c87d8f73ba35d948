"""The certificate and the sheet it is printed on."""

import io
import json

import numpy as np
import pytest
from handovers import build, contract_of, read, section_of
from invented import no_estimate, plant_line

from fieldfit.decisions.acceptance import judge_contract
from fieldfit.inference.fit import fit_reach
from fieldfit.inference.head_model import head_model
from fieldfit.report.certificate import VERDICTS, acceptance_record, certificate, handover_summary, verdict_words
from fieldfit.report.files import write_handover
from fieldfit.report.handover import Handover, ReachVerdict
from fieldfit.report.sheet import Bullets, Heading, Paragraph, Places, Sheet, Table, sheet_html
from fieldfit.report.sheet_pdf import sheet_pdf, wrapped


def judged(**changes):
    """A verdict on an invented pipe."""
    contract = contract_of(**changes)
    section = section_of(contract)
    rng = np.random.default_rng(12)
    fit = fit_reach(head_model(read(rng, build(rng)), section.correlation))
    return judge_contract(fit, contract, section)


def handover(acceptance, finding=None):
    """A hand-over with that verdict on an invented line."""
    found = finding or plant_line()
    reach = found.campaigns[0].reaches[0]
    return Handover(finding=found, verdicts=(ReachVerdict(reach=reach, acceptance=acceptance),))


@pytest.mark.parametrize(("limit", "outcome"), [(120.0, "pass"), (170.0, "fail")])
def test_the_verdict_stands_on_top_and_in_words(limit, outcome):
    acceptance = judged(limit=limit)
    sheet = certificate(handover(acceptance))
    assert sheet.blocks[0].text == VERDICTS[outcome]
    told = verdict_words(acceptance)
    assert f"not below {limit:.0f}" in told
    assert ("It is accepted" in told) == (outcome == "pass")
    assert VERDICTS[outcome].lower() in handover_summary(handover(acceptance))


def test_an_undecided_case_says_what_would_decide():
    value = judged().value
    found = handover(judged(limit=value * 0.99))
    assert found.outcome == "undecided"
    html = sheet_html(certificate(found))
    assert "What would help to decide" in html
    assert "would decide" in handover_summary(found)


def test_without_a_friction_factor_there_is_no_verdict_but_a_reason():
    found = handover(None, no_estimate())
    assert found.outcome == "undecided"
    assert "laminar" in sheet_html(certificate(found))
    assert acceptance_record(None) is None


def test_a_bore_by_convention_shows_the_difference_it_makes():
    html = sheet_html(certificate(handover(judged(bore_m=0.21))))
    assert "By the true bore" in html
    assert "by convention" in html


def test_the_record_has_units_in_its_keys_and_no_nan():
    for changes, key in (
        ({}, "limit"),
        ({"subject": "roughness", "limit": 2e-4}, "limit_mm"),
        ({"subject": "head_loss", "limit": 5.0}, "limit_m"),
    ):
        record = acceptance_record(judged(**changes))
        assert key in record
        json.dumps(record, allow_nan=False)
        assert record["band" + key.removeprefix("limit")][0] <= record["value" + key.removeprefix("limit")]


def test_the_files_are_whole(tmp_path):
    paths = write_handover(handover(judged()), tmp_path / "out")
    assert [path.suffix for path in paths] == [".html", ".pdf", ".json"]
    assert sorted((tmp_path / "out").iterdir()) == sorted(paths)
    record = json.loads(paths[2].read_text(encoding="utf-8"))
    assert record["decisions"]["acceptance"]["outcome"] in VERDICTS


def test_hostile_words_stay_words():
    sheet = Sheet(title="<b>&", subtitle="$x_1$ <i>", blocks=(Paragraph(text="</p><script>"),))
    assert "<script>" not in sheet_html(sheet)
    assert "<b>" not in sheet_html(sheet)
    assert sheet_pdf(sheet).startswith(b"%PDF")


def full_sheet(lines):
    return Sheet(
        title="Sheet",
        subtitle="of an invented day",
        blocks=(
            Heading(text="Heading"),
            *(Paragraph(text="words " * 30) for _ in range(lines)),
            Bullets(items=("one", "two")),
            Table(head=("a", "b"), rows=(("1", "2"), ("", "")), widths=(0.5, 0.5), form=True),
            Places(labels=("here", "there")),
        ),
        footer="foot",
    )


def pages_of(pdf):
    pypdf = pytest.importorskip("pypdf")
    return pypdf.PdfReader(io.BytesIO(pdf)).pages


def test_a_sheet_shrinks_to_one_page_before_it_takes_two():
    assert len(pages_of(sheet_pdf(full_sheet(18)))) == 1
    assert len(pages_of(sheet_pdf(full_sheet(60)))) > 1


def test_a_pdf_is_the_same_every_time():
    assert sheet_pdf(full_sheet(2)) == sheet_pdf(full_sheet(2))


def test_wrapping_keeps_all_words_and_the_width():
    text = "a longer line of words that has to be folded more than once to fit"
    lines = wrapped(text, 9.0, 40.0)
    assert " ".join(lines) == text
    assert len(lines) > 2
    assert wrapped("", 9.0, 40.0) == [""]
