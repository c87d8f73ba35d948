"""Campaigns' events, water, growth and thresholds of a section file."""

from __future__ import annotations

import datetime as dt
import re
from dataclasses import replace

from fieldfit.errors import InputError, near_miss
from fieldfit.field.accuracy import accuracy
from fieldfit.field.outlook import Changes, Outlook, Thresholds
from fieldfit.field.quantities import quantity, uncertain
from fieldfit.field.section import Campaign, Section, Tap
from fieldfit.field.toml_table import TomlTable
from fieldfit.field.uncertain import Accuracy, Uncertain
from fieldfit.field.unit_spellings import Dimension
from fieldfit.field.units import shown

_PER_YEAR = re.compile(r"\s*(?:/|per)\s*(?:years?|yr|a)\b", re.IGNORECASE)
RATE_LIMIT = "50 %"
"""Limit of a growth rate that nothing is said of."""


def read_cleaned(table: TomlTable) -> tuple[bool, dt.date | None]:
    """Return whether the pipe was cleaned before a campaign, and the day when it is written."""
    if isinstance(table.values.get("cleaned"), dt.date):
        day, tested = table.date("cleaned"), table.date("date")
        if day is not None and tested is not None and day > tested:
            advice = "A cleaning belongs to the first campaign after it."
            raise InputError(f"the cleaning of {day} is later than the test", advice).at(table.where("cleaned"))
        return True, day
    return table.flag("cleaned"), None


def read_changes(table: TomlTable) -> Changes:
    """Return what changed before a campaign.

    Parameters
    ----------
    table : TomlTable
        The `[[campaign]]` table.

    Raises
    ------
    InputError
        When a value cannot be read, or a bore is given without lining.
    """
    relined, lining = _lining(table)
    bore = _with_limit(table, "bore", "52.5 mm")
    if bore is not None and not relined:
        seen = "the bore of a campaign differs from the section's, and nothing says that the pipe was lined"
        advice = 'The bore is the as-new one: leave it out, for deposits are part of the answer, or write relined = "..." too.'
        raise InputError(seen, advice).at(table.where("bore"))
    return Changes(
        cleaned_on=read_cleaned(table)[1],
        relined=relined,
        lining=lining,
        bore=bore,
        length=_with_limit(table, "length", "38.2 m"),
        valve=table.text("valve"),
        meter_accuracy=_accuracy(table, "meter_accuracy", "flow"),
        gauges=_gauges(table),
        gauge_accuracy=_accuracy(table, "gauge_accuracy", "pressure"),
        recalibrated=_serials(table),
        promised_c=_number(table, "promised_c", (10.0, 250.0)),
        note=table.text("note"),
    )


def read_outlook(top: TomlTable) -> Outlook:
    """Return what is known of the water and asked of the years ahead.

    Raises
    ------
    InputError
        When a value cannot be read or makes no sense.
    """
    water, growth, duty = top.table("water"), top.table("growth"), top.table("duty")
    head = _positive(duty, "head", "length", "15 m")
    return Outlook(
        langelier=_number(water, "langelier", (-10.0, 5.0)),
        ph=_number(water, "ph", (3.0, 12.0)),
        rate_m_year=_rate(growth),
        until=growth.date("until") if growth else None,
        worse_by=_share(growth, "worse_by", Outlook().worse_by),
        available_head_m=head,
        thresholds=_thresholds(top.table("threshold"), duty is not None, head is not None),
    )


def section_on(section: Section, campaign: Campaign | None) -> Section:
    """Return what is known of a section on the day of a campaign: its meter, gauges, bore and taps of that day.

    Parameters
    ----------
    section : Section
        The section.
    campaign : Campaign or None
        The campaign; None for a log that no campaign names.

    Raises
    ------
    InputError
        When a gauge is named at a tap that is not there, or a length is given for more than two taps.
    """
    if campaign is None:
        return section
    changes = campaign.changes
    known = _as_lined(section, campaign)
    meter = known.meter
    if campaign.meter is not None or changes.meter_accuracy is not None:
        serial = campaign.meter or meter.serial
        meter = replace(meter, serial=serial, accuracy=changes.meter_accuracy or meter.accuracy)
    return replace(known, meter=meter, taps=_taps(known, changes))


def _as_lined(section: Section, campaign: Campaign) -> Section:
    """Return the section with the bore and material of the last lining up to a campaign."""
    known = section
    order = section.campaigns.index(campaign) if campaign in section.campaigns else -1
    for earlier in (*section.campaigns[: order + 1], *(() if order >= 0 else (campaign,))):
        changes = earlier.changes
        if changes.relined:
            known = replace(known, bore=changes.bore or known.bore, material=changes.lining or known.material)
    return known


def _taps(section: Section, changes: Changes) -> tuple[Tap, ...]:
    """Return the taps of the day."""
    taps = list(section.taps)
    columns = [tap.column for tap in taps]
    for column, serial in changes.gauges:
        if column not in columns:
            advice = f"{near_miss(column, columns)}The taps are: {', '.join(columns)}."
            raise InputError(f"gauges names '{shown(column)}', where no tap is", advice, section.path.name)
        tap = taps[columns.index(column)]
        taps[columns.index(column)] = replace(tap, gauge=serial, accuracy=changes.gauge_accuracy or tap.accuracy)
    if changes.length is not None:
        if len(taps) > 2:
            seen = f"a campaign gives one length, and there are {len(taps)} taps"
            raise InputError(seen, "A length of its own is only understood between two taps.", section.path.name)
        first, length = taps[0].station, changes.length
        taps[0] = replace(taps[0], station=replace(first, standard=0.0))
        station = replace(length, value=first.value + length.value)
        taps[1] = replace(taps[1], station=station)
    return tuple(taps)


def _lining(table: TomlTable) -> tuple[bool, str | None]:
    """Return whether the pipe was lined, and with what."""
    value = table.values.get("relined", False)
    if isinstance(value, bool):
        return value, None
    from fieldfit.hydraulics.materials import material

    text = table.needed("relined")
    with table.at("relined"):
        return True, material(text).name


def _gauges(table: TomlTable) -> tuple[tuple[str, str], ...]:
    """Return the gauges of the day by column."""
    value = table.values.get("gauges", {})
    if isinstance(value, dict) and all(isinstance(serial, str) and serial.strip() for serial in value.values()):
        return tuple((str(column), " ".join(serial.split())) for column, serial in value.items())
    advice = 'Write gauges = { upstream = "PG-21" }: the tap\'s column and the serial of its gauge.'
    raise InputError("the gauges of the campaign cannot be read", advice).at(table.where("gauges"))


def _serials(table: TomlTable) -> tuple[str, ...]:
    """Return the serials of instruments calibrated anew."""
    value = table.values.get("recalibrated", [])
    if isinstance(value, list) and all(isinstance(serial, str) for serial in value):
        return tuple(value)
    advice = 'Write recalibrated = ["MAG-118"], a list of serials.'
    raise InputError("the instruments calibrated anew cannot be read", advice).at(table.where("recalibrated"))


def _accuracy(table: TomlTable, key: str, dimension: Dimension) -> Accuracy | None:
    """Return an accuracy, or None."""
    text = table.number_or_text(key)
    if text is None:
        return None
    with table.at(key):
        return accuracy(text, dimension)


def _with_limit(table: TomlTable, key: str, example: str) -> Uncertain | None:
    """Return a positive length with its limit, or None."""
    text = table.text(key)
    if text is None:
        return None
    with table.at(key):
        value = uncertain(text, "length", example, "1 %")
        if value.value <= 0.0:
            raise InputError(f"'{shown(text)}' is not positive", f'Write it like "{example}".')
        return value


def _rate(table: TomlTable | None) -> Uncertain | None:
    """Return a growth rate [m/year]."""
    text = table.text("rate") if table else None
    if table is None or text is None:
        return None
    with table.at("rate"):
        if not _PER_YEAR.search(text):
            raise InputError(f"'{shown(text)}' is not per year", 'Write it like "0.05 mm/year ± 50 %".')
        rate = uncertain(_PER_YEAR.sub("", text), "length", "0.05 mm/year", RATE_LIMIT)
        if rate.value <= 0.0:
            raise InputError(f"the rate '{shown(text)}' is not positive", 'Write it like "0.05 mm/year ± 50 %".')
        return rate


def _thresholds(table: TomlTable | None, has_duty: bool, has_head: bool) -> Thresholds:
    """Return the thresholds; those at the duty need one."""
    if table is None:
        return Thresholds()
    if "head_loss" in table.values and not has_duty:
        raise InputError("a head loss is named without the flow it is for", 'Add [duty] with flow = "3.0 L/s".').at(
            table.where("head_loss")
        )
    if "capacity" in table.values and not has_head:
        raise InputError("a capacity is named without the head it is for", 'Add head = "15 m" to [duty].').at(
            table.where("capacity")
        )
    return Thresholds(
        c=_number(table, "c", (10.0, 250.0)),
        head_loss_m=_positive(table, "head_loss", "length", "12 m"),
        capacity_m3_s=_positive(table, "capacity", "flow", "2.5 L/s"),
        by=table.date("by"),
    )


def _positive(table: TomlTable | None, key: str, dimension: Dimension, example: str) -> float | None:
    """Return a positive quantity in SI units, or None."""
    text = table.text(key) if table else None
    if table is None or text is None:
        return None
    with table.at(key):
        value = quantity(text, dimension, example)
        if value <= 0.0:
            raise InputError(f"'{shown(text)}' is not positive", f'Write it like "{example}".')
        return value


def _number(table: TomlTable | None, key: str, ends: tuple[float, float]) -> float | None:
    """Return a bare number within two ends, or None."""
    text = table.number_or_text(key) if table else None
    if table is None or text is None:
        return None
    with table.at(key):
        value = quantity(text, "ratio", f"{ends[1]:g}")
        if not ends[0] <= value <= ends[1]:
            raise InputError(f"'{shown(text)}' is out of range", f"It lies between {ends[0]:g} and {ends[1]:g}.")
        return value


def _share(table: TomlTable | None, key: str, usual: float) -> float:
    """Return a share from 0 to 10."""
    value = _number(table, key, (0.0, 10.0))
    return usual if value is None else value
