"""One clean log written again as loggers, spreadsheets and clipboards would have written it."""

from __future__ import annotations

import csv
import datetime as dt
import io
import math
from collections.abc import Callable
from dataclasses import dataclass, replace
from itertools import pairwise
from pathlib import Path

import numpy as np

SAMPLE = Path(__file__).parent.parent / "sample_data" / "kiln_cooling"
PSI = 0.45359237 * 9.80665 / 0.0254**2 / 1000.0  # kPa
GALLON = 231 * 0.254**3  # L
IMPERIAL = 4.54609  # L
FOOT = 0.3048  # m
BORE_M = 0.0525


@dataclass(frozen=True, slots=True, kw_only=True)
class Table:
    """The clean log: columns as numbers in L/s, kPa and °C."""

    time: tuple[dt.datetime, ...]
    flow: np.ndarray
    upstream: np.ndarray
    downstream: np.ndarray
    temperature: np.ndarray


@dataclass(frozen=True, slots=True, kw_only=True)
class Export:
    """The same log in another writing, and what may be left of it."""

    data: bytes
    suffix: str = ".csv"
    section: tuple[tuple[str, str], ...] = ()
    """Texts in the section file and what they become."""
    says: str = ""
    """Part of a sentence that must be among what was assumed."""
    flow_within: float = 1e-12
    """Most the flow may be off, relative to the largest."""
    pressure_within: float = 1e-12
    time_within: float = 1e-6
    """[s]"""
    dated: bool = True
    """Whether the clock knows the day."""
    start: dt.datetime | None = None
    """Time of the first row, where it is not the clean log's."""
    timed: bool = True
    roughness_within: float = 1e-6
    aside: int = 0
    """Rows that this writing costs, which the clean log has."""
    surplus: int = 0
    """Rows that this writing adds, which cannot be used."""


def clean() -> Table:
    """The sample's log, without its few rows that lack a value, repeat a time or hold a spike."""
    with (SAMPLE / "2026-05-12.csv").open(encoding="utf-8", newline="") as file:
        rows = [row for row in csv.reader(file) if all(row)][1:]
    rows = [row for row in rows if max(map(float, row[2:4])) < 500.0]
    rows = [row for before, row in pairwise([[""], *rows]) if row[0] > before[0]]
    numbers = np.array([[float(cell) for cell in row[1:]] for row in rows]).T
    return Table(
        time=tuple(dt.datetime.fromisoformat(row[0]) for row in rows),
        flow=numbers[0],
        upstream=numbers[1],
        downstream=numbers[2],
        temperature=numbers[3],
    )


def plain(time: dt.datetime) -> str:
    """A time as the clean log has it."""
    return time.isoformat()


def text(
    table: Table,
    clock: Callable[[dt.datetime], str] = plain,
    heads: tuple[str, ...] = ("time", "flow [L/s]", "upstream [kPa]", "downstream [kPa]", "temperature [degC]"),
    forms: tuple[str, ...] = ("{:.2f}", "{:.1f}", "{:.1f}", "{:.1f}"),
    separator: str = ",",
) -> str:
    """A log with one line of headings."""
    columns = (table.flow, table.upstream, table.downstream, table.temperature)
    rows = [
        [clock(time), *(form.format(value) for form, value in zip(forms, values, strict=True))]
        for time, *values in zip(table.time, *columns, strict=True)
    ]
    out = io.StringIO()
    csv.writer(out, delimiter=separator, lineterminator="\n").writerows([heads, *rows])
    return out.getvalue()


def scaled(table: Table, flow: float = 1.0, pressure: float = 1.0) -> Table:
    """The log in other units."""
    return replace(
        table, flow=table.flow / flow, upstream=table.upstream / pressure, downstream=table.downstream / pressure
    )


def shifted(table: Table, first: dt.datetime) -> Table:
    """The log as if it had begun at another time."""
    return replace(table, time=tuple(first + (time - table.time[0]) for time in table.time))


def seconds(table: Table) -> np.ndarray:
    """Times from the first row [s]."""
    return np.array([(time - table.time[0]).total_seconds() for time in table.time])


def volumes(table: Table) -> np.ndarray:
    """Volume that has passed since the first row [L], each row's flow held since the row before."""
    return np.append(0.0, np.cumsum(table.flow[1:] * np.diff(seconds(table))))


def to_unit(flow_unit: str, litres: float, pressure_unit: str, kilopascals: float) -> Export:
    """The log in other units, with every digit."""
    heads = ("time", f"flow [{flow_unit}]", f"upstream ({pressure_unit})", f"downstream_{pressure_unit}", "temp, °C")
    forms = ("{!r}", "{!r}", "{!r}", "{:.1f}")
    written = text(scaled(clean(), litres, kilopascals), heads=heads, forms=forms).replace("np.float64(", "")
    return Export(
        data=written.replace(")", "").replace(f"upstream ({pressure_unit}", f"upstream ({pressure_unit})").encode()
    )


def lines_of(written: str) -> list[str]:
    """The lines of a log."""
    return written.splitlines()


def with_lines(written: str, places: dict[int, str]) -> bytes:
    """A log with lines put in before others, by their place from 0; at -1 behind all."""
    lines = lines_of(written)
    for place in sorted(places, reverse=True):
        if place >= 0:
            lines[place:place] = places[place].split("\n")
    if -1 in places:
        lines += places[-1].split("\n")
    return ("\n".join(lines) + "\n").encode()


def signal(low: float, high: float, first: float, last: float) -> Callable[[np.ndarray], np.ndarray]:
    """Readings as the signal of a transmitter."""
    return lambda values: first + (values - low) / (high - low) * (last - first)


def raw_signals() -> Export:
    """Both gauges as 4-20 mA, the meter as 1-5 V in millivolts; one fault on each side."""
    table = clean()
    current = signal(0.0, 1000.0, 4.0, 20.0)
    volts = signal(0.0, 10.0, 1000.0, 5000.0)
    raw = replace(table, flow=volts(table.flow), upstream=current(table.upstream), downstream=current(table.downstream))
    heads = ("time", "flow [mV]", "upstream [mA]", "downstream [mA]", "temperature [degC]")
    lines = lines_of(text(raw, heads=heads, forms=("{:.1f}", "{:.4f}", "{:.4f}", "{:.1f}")))
    lines[40] = ",".join([*lines[40].split(",")[:2], "3.45", *lines[40].split(",")[3:]])
    lines[60] = ",".join([*lines[60].split(",")[:3], "21.30", *lines[60].split(",")[4:]])
    pressure_keys = 'signal = "4-20 mA"\nrange = "0 to 10 bar"\n'
    return Export(
        data="\n".join(lines).encode(),
        section=(
            ('column = "flow"\n', 'column = "flow"\nsignal = "1-5 V"\nrange = "0 to 10 L/s"\n'),
            ('column = "upstream"\n', f'column = "upstream"\n{pressure_keys}'),
            ('column = "downstream"\n', f'column = "downstream"\n{pressure_keys}'),
        ),
        says="raw signal of 4-20 mA",
        flow_within=1e-4,
        pressure_within=1e-4,
        roughness_within=0.02,
        aside=2,
    )


def totaliser(top: float | None = None, reset: int | None = None) -> Export:
    """A running count in tenths of a litre, that rolls over at its top or is set back to zero at a row."""
    table = clean()
    counted = volumes(table) + (top - 300.0 if top else 12345.0)
    if top:
        counted %= top
    if reset:
        counted[reset:] -= counted[reset] - 0.3
    heads = ("time", "flow [L]", "upstream [kPa]", "downstream [kPa]", "temperature [degC]")
    written = text(replace(table, flow=counted), heads=heads, forms=("{:.2f}", "{:.1f}", "{:.1f}", "{:.1f}"))
    return Export(
        data=written.encode(),
        says="rolled over" if top else "was reset" if reset else "runs on",
        flow_within=2e-3,
        roughness_within=0.05,
        aside=2 if reset else 1,
    )


def pulses(running: bool) -> Export:
    """Pulses of 0.01 L, running on or in each row."""
    table = clean()
    whole = np.rint(volumes(table) / 0.01)
    counts = whole if running else np.append(0.0, np.diff(whole))
    heads = ("time", "flow [pulses]", "upstream [kPa]", "downstream [kPa]", "temperature [degC]")
    keys = 'column = "flow"\npulse = "0.01 L"\n' + ("totaliser = true\n" if running else "")
    return Export(
        data=text(replace(table, flow=counts), heads=heads, forms=("{:.0f}", "{:.1f}", "{:.1f}", "{:.1f}")).encode(),
        section=(('column = "flow"\n', keys),),
        flow_within=2e-3,
        roughness_within=0.05,
        aside=1,
        says="since the row before",
    )


def velocity() -> Export:
    """A clamp-on meter that logs m/s."""
    area = math.pi / 4.0 * BORE_M**2
    heads = ("time", "flow [m/s]", "upstream [kPa]", "downstream [kPa]", "temperature [degC]")
    table = scaled(clean(), flow=area * 1000.0)
    return Export(
        data=text(table, heads=heads, forms=("{:.7f}", "{:.1f}", "{:.1f}", "{:.1f}")).encode(),
        section=(('column = "flow"\n', 'column = "flow"\nsenses = "velocity"\n'),),
        flow_within=1e-6,
        roughness_within=math.inf,  # a velocity meter shares its error with the bore
        says="as-new bore",
    )


def absolute(how: str) -> Export:
    """Absolute gauges: with a barometer in the log, with one in the section file, or with none."""
    table = clean()
    air = 98.7
    high = replace(table, upstream=table.upstream + air, downstream=table.downstream + air)
    heads = ("time", "flow [L/s]", "upstream [kPa abs]", "downstream [kPa(a)]", "temperature [degC]")
    lines = lines_of(text(high, heads=heads))
    section: tuple[tuple[str, str], ...] = ()
    if how == "column":
        lines = [f"{line},{'barometer [hPa]' if number == 0 else '987.0'}" for number, line in enumerate(lines)]
    elif how == "key":
        section = (("[flow]", '[log]\nbarometer = "987 hPa"\n\n[flow]'),)
    return Export(
        data="\n".join(lines).encode(),
        section=section,
        says={"column": "by the barometer", "key": "98.7 kPa of air", "none": "standard 101.3 kPa"}[how],
        pressure_within=1.0 if how == "none" else 1e-9,
    )


def one_absolute() -> Export:
    """One gauge in psia and one in psi, with the barometer in the section file."""
    table = clean()
    mixed = replace(table, upstream=(table.upstream + 98.7) / PSI, downstream=table.downstream / PSI)
    heads = ("time", "flow [L/s]", "upstream [psia]", "downstream [psi]", "temperature [degC]")
    return Export(
        data=text(mixed, heads=heads, forms=("{:.2f}", "{:.8f}", "{:.8f}", "{:.1f}")).encode(),
        section=(("[flow]", '[log]\nbarometer = "987 hPa"\n\n[flow]'),),
        says="'upstream'",
        pressure_within=1e-8,
    )


def summer(first: str, back: bool) -> Export:
    """A night in which clocks are changed: local time that goes back or on an hour on the way."""
    table = shifted(clean(), dt.datetime.fromisoformat(first))
    change = dt.datetime.fromisoformat(f"{first[:11]}{'03' if back else '02'}:00:00")
    hour = dt.timedelta(hours=-1 if back else 1)
    return Export(
        data=text(table, lambda time: plain(time if time < change else time + hour)).encode(),
        says="summer time",
        start=table.time[0],
    )


def zone_words() -> Export:
    """The same night with the names of the zones."""
    table = shifted(clean(), dt.datetime(2026, 10, 25, 2, 55))
    change = dt.datetime(2026, 10, 25, 3)
    hour = dt.timedelta(hours=1)

    def clock(time: dt.datetime) -> str:
        summer_time = time < change
        return f"{time if summer_time else time - hour:%Y-%m-%d %H:%M:%S} {'CEST' if summer_time else 'CET'}"

    return Export(data=text(table, clock).encode(), says="turned into CET", start=table.time[0] - hour)


def two_columns(day: str, clock: str, heads: tuple[str, str] = ("Date", "Time")) -> bytes:
    """Day and time in columns of their own."""
    heading, *rows = lines_of(text(clean(), lambda time: f"{time:{day}}|{time:{clock}}"))
    return "\n".join(
        [heading.replace("time", ",".join(heads), 1), *(row.replace("|", ",", 1) for row in rows)]
    ).encode()


def untimed(above: str) -> bytes:
    """A log without a column of times, of rows that are two seconds apart."""
    lines = [line.partition(",")[2] for line in lines_of(text(even(clean())))]
    return (above + "\n".join(lines)).encode()


def even(table: Table) -> Table:
    """The clean log with rows two seconds apart throughout."""
    return replace(table, time=tuple(table.time[0] + dt.timedelta(seconds=2 * row) for row in range(len(table.time))))


def spreadsheet(how: str) -> Export:
    """A workbook: with real times or with days and times apart, the readings on the first sheet or another."""
    from openpyxl import Workbook

    table, book = clean(), Workbook()
    sheet = book.active
    if how != "plain":
        sheet.title = "Notes"
        sheet.append(["Tested with the kiln down"])
        sheet = book.create_sheet("Readings")
    sheet.append(["Logger 7"])
    sheet.append([])
    apart = how == "apart"
    sheet.append(
        [
            *(["Date", "Time"] if apart else ["time"]),
            "flow [L/s]",
            "upstream [kPa]",
            "downstream [kPa]",
            "temperature [degC]",
        ]
    )
    columns = (table.flow, table.upstream, table.downstream, table.temperature)
    for time, *values in zip(table.time, *columns, strict=True):
        sheet.append([*([time.date(), time.time()] if apart else [time]), *map(float, values)])
    out = io.BytesIO()
    book.save(out)
    key = (("[flow]", '[log]\nsheet = "Readings"\n\n[flow]'),) if how == "named" else ()
    return Export(
        data=out.getvalue(), suffix=".xlsx", says=f"sheet '{'Sheet' if how == 'plain' else 'Readings'}'", section=key
    )


def serial(time: dt.datetime) -> str:
    """A time as spreadsheets count days."""
    return f"{(time - dt.datetime(1899, 12, 30)) / dt.timedelta(days=1):.8f}"


def unix(parts: int) -> Callable[[dt.datetime], str]:
    """A time as seconds since 1970, or parts of them."""
    return lambda time: str(round((time - dt.datetime(1970, 1, 1)).total_seconds() * parts))


def from_start(unit_s: float, form: str) -> Callable[[dt.datetime], str]:
    """A time as a count from the first row."""
    first = clean().time[0]
    return lambda time: form.format((time - first).total_seconds() / unit_s)


def exports() -> dict[str, Callable[[], Export]]:
    """Every writing by its name."""
    return {**_marks(), **_units(), **_meters(), **_clocks(), **_books()}


def _marks() -> dict[str, Callable[[], Export]]:
    """Separators, marks, encodings, and lines that are no readings."""
    base = text(clean())
    semicolons = text(clean(), separator=";")
    commas = semicolons.replace(".", ",")
    thousands = text(
        scaled(clean(), pressure=0.001),
        separator=";",
        forms=("{:.2f}", "{:,.1f}", "{:,.1f}", "{:.1f}"),
        heads=("time", "flow [L/s]", "upstream [Pa]", "downstream [Pa]", "temperature [degC]"),
    )
    swiss = thousands.replace(",", "’")
    german = thousands.replace(",", "#").replace(".", ",").replace("#", ".")
    heads = base.splitlines()[0]
    bare = base.replace(heads, "time,flow,upstream,downstream,temperature")
    preamble = {0: 'Logger 7; serial 118\nOperator, shift 2\nFlow in L/s, 8" main\n'}
    footer = {-1: "\nAverage,2.41,383.2,343.9,14.0\nMax,5.02,414.6,398.9,14.1\nRecords: 312\nEnd of file"}
    latin = base.replace("degC", "°C").encode("cp1252")
    return {
        "tabs": lambda: Export(data=text(clean(), separator="\t").encode(), says="parted by tabs"),
        "semicolons": lambda: Export(data=semicolons.encode(), says="parted by semicolons"),
        "upright strokes": lambda: Export(data=text(clean(), separator="|").encode(), says="parted by upright strokes"),
        "decimal comma": lambda: Export(data=commas.encode(), says="decimal marks"),
        "decimal comma in quotation marks": lambda: Export(
            data=text(clean(), forms=("{:.2f}", "{:.1f}", "{:.1f}", "{:.1f}"), separator="\t")
            .replace(".", ",")
            .replace("\t", '","')
            .replace("\n", '"\n"')
            .join(['"', ""])[:-1]
            .encode(),
            says="decimal marks",
        ),
        "thousands with commas": lambda: Export(data=thousands.encode()),
        "thousands with points": lambda: Export(data=german.encode(), says="decimal marks"),
        "thousands with apostrophes": lambda: Export(data=swiss.encode()),
        "decimal mark stated": lambda: Export(
            data=text(clean(), separator="\t", forms=("{:.3f}", "{:.3f}", "{:.3f}", "{:.3f}"))
            .replace(".", ",")
            .encode(),
            section=(("[flow]", '[log]\ndecimal = "comma"\n\n[flow]'),),
        ),
        "latin letters": lambda: Export(data=latin, says="Windows-1252"),
        "utf-16 with its mark": lambda: Export(data=base.encode("utf-16")),
        "utf-16 without its mark": lambda: Export(data=base.encode("utf-16-le"), says="no mark of its encoding"),
        "lines above": lambda: Export(data=with_lines(base, preamble), says="found in line 5"),
        "units below": lambda: Export(
            data=with_lines(bare, {1: ",L/s,kPa,kPa,°C"}), says="Line 2 was read as the units"
        ),
        "units below in brackets": lambda: Export(
            data=with_lines(bare, {1: "[yyyy-mm-dd hh:mm:ss],[L/s],[kPa],[kPa],[°C]"}), says="as the units"
        ),
        "lines below": lambda: Export(data=with_lines(base, footer), says="('Average') is no reading"),
        "comments": lambda: Export(
            data=with_lines(
                base.replace("time,", "#time,", 1), {9: '# valve opened, one turn, slowly, by hand, "Jo", 9'}
            ),
            says="",
        ),
        "headings over again": lambda: Export(
            data=with_lines(base, {100: heads, 200: heads}), says="('time') is no reading"
        ),
        "headings broken into lines": lambda: Export(
            data=base.replace("flow [L/s]", '"flow\n[L/s]"').replace("upstream [kPa]", '"upstream\n(kPa)"').encode(),
            says="found in line 3",
        ),
        "remarks in headings": lambda: Export(
            data=base.replace("flow [L/s]", '"Flow, L/s (serial 118, channel 2)"')
            .replace("upstream [kPa]", "Upstream (kPa) (PG-07)")
            .encode()
        ),
        "remarks beside rows": lambda: Export(
            data=with_lines(
                "\n".join(
                    ("note," if not row else "end," if row == 40 else ",") + line
                    for row, line in enumerate(lines_of(base))
                ),
                {},
            )
        ),
        "quoted fields": lambda: Export(
            data=base.replace(",", '","').replace("\n", '"\n"').join(['"', ""])[:-1].encode()
        ),
        "trailing separators": lambda: Export(data=base.replace("\n", ",\n").encode()),
        "blank lines": lambda: Export(data=base.replace("\n", "\n\n").encode()),
        "word lines": lambda: Export(
            data=with_lines(base, {50: "Logger paused by hand,,,,", 90: "2026-05-12T08:02:57,*** battery low ***,,,"}),
            says="battery low",
            surplus=1,
        ),
        "zeros at the end": lambda: Export(data=base.encode() + b"\0" * 4096, says="Zero bytes"),
        "cut off": lambda: Export(
            data=base.encode() + b"2026-05-12T08:30:00,4.97,32" + b"\0" * 512, says="was cut off", surplus=1
        ),
    }


def _units() -> dict[str, Callable[[], Export]]:
    """Units in headings."""
    flows = {
        "gpm": GALLON / 60.0, "US gpm": GALLON / 60.0, "imperial gpm": IMPERIAL / 60.0, "igpm": IMPERIAL / 60.0,
        "L/min": 1 / 60.0, "m³/h": 1 / 3.6, "ML/d": 1e6 / 86400.0, "MGD": GALLON * 1e6 / 86400.0,
        "ft³/s": (10 * FOOT) ** 3, "cfs": (10 * FOOT) ** 3, "L/s": 1.0,
    }  # fmt: skip
    pressures = {
        "psi": PSI, "psig": PSI, "bar": 100.0, "MPa": 1000.0, "kg/cm²": 98.0665, "mH2O": 9.80665,
        "ftH2O": 9.80665 * FOOT, "inHg": 13595.1 * 9.80665 * 0.0254 / 1000.0, "mmHg": 13.5951 * 9.80665 / 1000.0,
        "mbar": 0.1, "kPa": 1.0,
    }  # fmt: skip

    def one(flow: str, pressure: str) -> Callable[[], Export]:
        return lambda: to_unit(flow, flows[flow], pressure, pressures[pressure])

    return {f"{f} and {p}": one(f, p) for f, p in zip(flows, pressures, strict=True)} | {"fahrenheit": _fahrenheit}


def _fahrenheit() -> Export:
    """Temperature in °F."""
    table = clean()
    warm = replace(table, temperature=table.temperature * 1.8 + 32.0)
    heads = ("time", "flow [L/s]", "upstream [kPa]", "downstream [kPa]", "Water temp (°F)")
    return Export(data=text(warm, heads=heads, forms=("{:.2f}", "{:.1f}", "{:.1f}", "{:.4f}")).encode())


def _meters() -> dict[str, Callable[[], Export]]:
    """What instruments may log in place of flow and gauge pressure."""
    return {
        "absolute with a barometer": lambda: absolute("column"),
        "absolute with a stated barometer": lambda: absolute("key"),
        "absolute throughout": lambda: absolute("none"),
        "one absolute gauge": one_absolute,
        "totaliser": totaliser,
        "totaliser that rolls over": lambda: totaliser(top=10_000.0),
        "totaliser that is reset": lambda: totaliser(reset=150),
        "pulses running on": lambda: pulses(running=True),
        "pulses of each row": lambda: pulses(running=False),
        "raw signals": raw_signals,
        "velocity": velocity,
    }


def _clocks() -> dict[str, Callable[[], Export]]:
    """Clocks."""

    def dated(form: str, **more: object) -> Callable[[], Export]:
        return lambda: Export(data=text(clean(), lambda time: f"{time:{form}}").encode(), **more)

    def counted(head: str, unit_s: float, form: str = "{:.3f}") -> Callable[[], Export]:
        written = text(clean(), from_start(unit_s, form)).replace("time", head, 1)
        return lambda: Export(data=written.encode(), dated=False, time_within=0.06)

    zone = dt.timedelta(hours=2)
    may = shifted(clean(), dt.datetime(2026, 5, 5, 23, 58))
    keyed = (("[flow]", '[log]\ndates = "month first"\n\n[flow]'),)
    interval = (("[flow]", '[log]\nstart = 2026-05-12T08:00:00\ninterval = "2 s"\n\n[flow]'),)
    midnight = shifted(clean(), dt.datetime(2026, 5, 12, 23, 58))
    return {
        "day first": dated("%d/%m/%Y %H:%M:%S", says="the day first"),
        "day first with points": dated("%d.%m.%Y %H:%M:%S", says="read day first"),
        "month first by its days": lambda: Export(
            data=text(shifted(clean(), dt.datetime(2026, 5, 13, 8)), lambda time: f"{time:%m/%d/%Y %H:%M:%S}").encode(),
            start=dt.datetime(2026, 5, 13, 8),
            says="no other order fits",
        ),
        "month first by the section file": lambda: Export(
            data=text(may, lambda time: f"{time:%m/%d/%Y %H:%M:%S}").encode(), section=keyed, start=may.time[0]
        ),
        "years of two digits": dated("%d.%m.%y %H:%M:%S"),
        "named months": dated("%d-%b-%Y %H:%M:%S"),
        "year first with strokes": dated("%Y/%m/%d %H:%M:%S"),
        "half days": dated("%d.%m.%Y %I:%M:%S %p"),
        "half days with points": lambda: Export(
            data=text(clean(), lambda time: f"{time:%Y-%m-%d} {time.hour % 12 or 12}:{time:%M:%S} a.m.").encode()
        ),
        "date and time apart": lambda: Export(data=two_columns("%d.%m.%Y", "%H:%M:%S")),
        "date and half day apart": lambda: Export(data=two_columns("%d-%b-%y", "%I:%M:%S %p", ("Date", "Time of day"))),
        "order in the heading": lambda: Export(
            data=text(may, lambda time: f"{time:%m/%d/%Y %H:%M:%S}").replace("time", "Time (mm/dd/yyyy)", 1).encode(),
            start=may.time[0],
        ),
        "times of day": dated("%H:%M:%S", dated=False, says="no dates"),
        "times of day past midnight": lambda: Export(
            data=text(midnight, lambda time: f"{time:%H:%M:%S}").encode(), dated=False, says="past midnight"
        ),
        "times of day with the date above": lambda: Export(
            data=with_lines(text(clean(), lambda time: f"{time:%H:%M:%S}"), {0: "Date: 12.05.2026"}), says="2026-05-12"
        ),
        "whole minutes": dated("%d.%m.%Y %H:%M", says="no seconds", time_within=4.0, roughness_within=0.02),
        "seconds from start": counted("time [s]", 1.0),
        "elapsed seconds": counted("Elapsed seconds", 1.0, "{:.0f}"),
        "minutes from start": counted("Elapsed (min)", 60.0),
        "elapsed hours and minutes": lambda: Export(
            data=text(clean(), lambda time: f"{25 + time.hour - 8}:{time:%M:%S}")
            .replace("time", "Elapsed time", 1)
            .encode(),
            dated=False,
        ),
        "start and interval above": lambda: Export(
            data=untimed("Start time: 12.05.2026 08:00:00\nLogging interval: 2 s\n"),
            says="2 s apart",
            timed=False,
            roughness_within=1e-3,
        ),
        "start and interval stated": lambda: Export(
            data=untimed(""), section=interval, says="2 s apart", timed=False, roughness_within=1e-3
        ),
        "days of spreadsheets": lambda: Export(
            data=text(clean(), serial).encode(), says="spreadsheets count", time_within=0.002
        ),
        "unix time": lambda: Export(data=text(clean(), unix(1)).encode(), says="Unix time, seconds"),
        "unix time in thousandths": lambda: Export(data=text(clean(), unix(1000)).encode(), says="milliseconds"),
        "universal time": dated("%Y-%m-%dT%H:%M:%SZ", says="into UTC"),
        "offset from universal time": lambda: Export(
            data=text(clean(), lambda time: f"{time + zone:%d.%m.%Y %H:%M:%S} +02:00").encode(), says="into UTC"
        ),
        "zone in the heading": lambda: Export(
            data=text(clean(), lambda time: f"{time + zone:%Y-%m-%d %H:%M:%S}")
            .replace("time", '"Date Time, GMT+02:00"', 1)
            .encode(),
            says="zone in the heading",
        ),
        "summer time ends": lambda: summer("2026-10-25T02:55:00", back=True),
        "summer time begins": lambda: summer("2026-03-29T01:55:00", back=False),
        "names of zones": zone_words,
    }


def _books() -> dict[str, Callable[[], Export]]:
    """Workbooks."""
    return {f"workbook, {how}": lambda how=how: spreadsheet(how) for how in ("plain", "apart", "named")}
