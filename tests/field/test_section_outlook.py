"""Campaigns' events, water, growth and thresholds in a section file."""

import datetime as dt

import pytest

from fieldfit.errors import InputError
from fieldfit.field.section_file import read_section
from fieldfit.field.section_outlook import section_on

TOP = """\
name = "Main"
material = "uncoated cast iron"
installed = 1990-05-01
bore = "150 mm ± 1 mm"
"""
TABLES = """
[flow]
column = "flow"
accuracy = "1 % of reading"
meter = "M-1"

[[tap]]
column = "up"
station = "0 m"
accuracy = "0.1 % of 6 bar"
gauge = "G-1"

[[tap]]
column = "down"
station = "300 m"
accuracy = "0.1 % of 6 bar"
gauge = "G-2"
"""


@pytest.fixture
def read(tmp_path):
    def from_text(extra):
        path = tmp_path / "section.toml"
        path.write_text(TOP + TABLES + extra, encoding="utf-8")
        return read_section(path)

    return from_text


def campaign(lines, date="2010-05-01"):
    return f'\n[[campaign]]\ndate = {date}\nlog = "{date}.csv"\n{lines}\n'


def test_a_campaign_has_its_own_instruments(read):
    section = read(
        campaign("")
        + campaign(
            'meter = "M-2"\nmeter_accuracy = "0.5 % of reading"\ngauges = { down = "G-9" }\n'
            'gauge_accuracy = "0.25 % of 6 bar"\nrecalibrated = ["G-1"]',
            "2020-05-01",
        )
    )
    before, after = (section_on(section, one) for one in section.campaigns)
    assert (before.meter.serial, after.meter.serial) == ("M-1", "M-2")
    assert after.meter.accuracy.gain == pytest.approx(before.meter.accuracy.gain / 2.0)
    assert [tap.gauge for tap in after.taps] == ["G-1", "G-9"]
    assert after.taps[1].accuracy.fixed == pytest.approx(2.5 * after.taps[0].accuracy.fixed)
    assert section.campaigns[1].changes.recalibrated == ("G-1",)


def test_a_lining_holds_for_every_campaign_after_it(read):
    section = read(
        campaign("")
        + campaign('relined = "epoxy-lined steel"\nbore = "148 mm ± 0.5 mm"', "2015-05-01")
        + campaign("", "2020-05-01")
    )
    bores = [section_on(section, one).bore.value for one in section.campaigns]
    assert bores == pytest.approx([0.150, 0.148, 0.148])
    assert section_on(section, section.campaigns[2]).material == "epoxy-lined steel"


def test_a_day_or_a_word_tells_of_a_cleaning(read):
    section = read(campaign("cleaned = true") + campaign("cleaned = 2019-04-01", "2020-05-01"))
    assert [one.cleaned for one in section.campaigns] == [True, True]
    assert [one.changes.cleaned_on for one in section.campaigns] == [None, dt.date(2019, 4, 1)]


def test_other_taps_on_a_day_have_their_own_length(read):
    section = read(campaign('length = "280 m ± 0.5 m"'))
    taps = section_on(section, section.campaigns[0]).taps
    assert taps[1].station.value - taps[0].station.value == pytest.approx(280.0)


def test_water_growth_and_thresholds(read):
    section = read(
        '[water]\nlangelier = -1.3\nph = 7.2\n[growth]\nrate = "0.002 in per year ± 50 %"\nuntil = 2050-01-01\n'
        'worse_by = "5 %"\n[duty]\nflow = "18 L/s"\nhead = "6 m"\n[threshold]\nc = 95\nhead_loss = "7 m"\n'
        'capacity = "17 L/s"\nby = 2035-01-01\n'
    )
    outlook = section.outlook
    assert (outlook.langelier, outlook.ph, outlook.worse_by) == (-1.3, 7.2, 0.05)
    assert outlook.rate_m_year.value == pytest.approx(0.002 * 0.0254)
    assert outlook.rate_m_year.relative == pytest.approx(0.5 / 3**0.5)
    assert (outlook.until, outlook.available_head_m) == (dt.date(2050, 1, 1), 6.0)
    assert (outlook.thresholds.c, outlook.thresholds.head_loss_m) == (95.0, 7.0)
    assert outlook.thresholds.capacity_m3_s == pytest.approx(0.017)


@pytest.mark.parametrize(
    ("extra", "said"),
    [
        (campaign('bore = "151 mm"'), "bore of a campaign differs from the section's, and nothing says"),
        (campaign("cleaned = 2011-01-01"), "the cleaning of 2011-01-01 is later than the test"),
        (campaign('cleaned = "yes"'), "is neither true nor false"),
        (campaign('relined = "eposy-lined steel"'), "is not in the new-pipe table"),
        (campaign('gauges = "G-9"'), "the gauges of the campaign cannot be read"),
        (campaign('recalibrated = "G-1"'), "the instruments calibrated anew cannot be read"),
        (campaign("promised_c = 5"), "'5' is out of range"),
        (campaign('length = "-3 m"'), "is not positive"),
        ('[growth]\nrate = "0.05 mm"\n', "'0.05 mm' is not per year"),
        ('[growth]\nrate = "-0.05 mm/year"\n', "is not positive"),
        ("[water]\nph = 70\n", "'70' is out of range"),
        ('[threshold]\nhead_loss = "7 m"\n', "a head loss is named without the flow it is for"),
        (
            '[duty]\nflow = "18 L/s"\n[threshold]\ncapacity = "17 L/s"\n',
            "a capacity is named without the head it is for",
        ),
        ('[duty]\nflow = "18 L/s"\nhead = "0 m"\n', "is not positive"),
        ("[growth]\nworse_by = 20\n", "is out of range"),
    ],
)
def test_bad_values_are_refused(read, extra, said):
    with pytest.raises(InputError) as error:
        read(extra)
    assert said in str(error.value)
    assert error.value.where.startswith("section.toml:")


def test_a_gauge_at_no_tap_is_refused_with_the_near_miss(read):
    section = read(campaign('gauges = { dwon = "G-9" }'))
    with pytest.raises(InputError, match=r"where no tap is\. Did you mean 'down'\?"):
        section_on(section, section.campaigns[0])
