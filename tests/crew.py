"""What the crew brings home from a simulated day: a section file, and a log or a hand sheet."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass

import numpy as np

INCH, FOOT, PSI, GPM = 0.0254, 0.3048, 6894.757293168361, 231.0 * 0.0254**3 / 60.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Units:
    """Units that a crew writes in: the word and what one of it is in SI."""

    flow: tuple[str, float] = ("L/s", 1e-3)
    pressure: tuple[str, float] = ("kPa", 1e3)
    bore: tuple[str, float] = ("mm", 1e-3)
    length: tuple[str, float] = ("m", 1.0)


PLANT = Units()
WORKS = Units(flow=("m3/h", 1.0 / 3600.0), pressure=("bar", 1e5))
STREET = Units(flow=("gpm", GPM), pressure=("psi", PSI), bore=("in", INCH), length=("ft", FOOT))


def text(value_si, unit, digits=9):
    """A value with its unit, in enough digits that writing it loses nothing that matters."""
    return f"{value_si / unit[1]:.{digits}g} {unit[0]}"


def meter_accuracy(meter, units):
    """The meter's limit in its maker's words."""
    of_what = "reading" if meter.span_m3_s is None else text(meter.span_m3_s, units.flow, 6)
    return f"{100.0 * meter.limit:.6g} % of {of_what}"


def section_text(day, units=PLANT, name="Simulated section", extra=""):
    """The section file, as the crew would fill it in before looking at readings; `extra` goes above the tables."""
    pipe, limits, gauge = day.pipe, day.kit.limits, day.kit.gauge
    lines = [
        f'name = "{name}"',
        f'bore = "{text(pipe.bore_m, units.bore)} ± {100.0 * limits.bore:.6g} %"',
        f'temperature = "{pipe.temperature_degc:g} degC ± {limits.temperature_k:g} degC"',
        extra,
        "[flow]",
        'column = "flow"',
        f'accuracy = "{meter_accuracy(day.kit.meter, units)}"',
        f'senses = "{day.kit.meter.senses}"',
    ]
    for column, station, elevation in zip(
        ("upstream", "downstream"), (0.0, pipe.length_m), pipe.elevation_m, strict=True
    ):
        lines += [
            "",
            "[[tap]]",
            f'column = "{column}"',
            f'station = "{text(station, units.length)} ± {text(limits.station_m, units.length, 6)}"',
            f'elevation = "{text(elevation, units.length)} ± {text(limits.elevation_m, units.length, 6)}"',
            f'accuracy = "{100.0 * gauge.limit:.6g} % of {text(gauge.full_scale_pa, units.pressure, 6)}"',
        ]
    if pipe.fitting_k:
        k = f"{pipe.fitting_k:.6g} ± {100.0 * limits.fitting_k:.6g} %"
        lines += ["", "[[fitting]]", 'name = "bends"', f'k = "{k}"']
    return "\n".join(lines) + "\n"


def rounded(values, step):
    """Values in steps of the instrument's resolution, as text."""
    decimals = next(places for places in range(12) if abs(round(step, places) - step) < 1e-6 * step)
    return [f"{value + 0.0:.{decimals}f}" for value in np.round(np.asarray(values) / step) * step]


def columns_of(day, units, select=slice(None)):
    """Flow, pressures and temperature as text, in the crew's units and steps."""
    rows, kit = day.rows, day.kit
    flow_step, pressure_step = kit.meter.step_m3_s / units.flow[1], kit.gauge.step_pa / units.pressure[1]
    return [
        rounded(rows.flow_m3_s[select] / units.flow[1], flow_step),
        *(rounded(row[select] / units.pressure[1], pressure_step) for row in rows.pressure_pa),
        rounded(rows.temperature_degc[select], 0.1),
    ]


def heading(units):
    """Headings of the value columns, each with its unit."""
    flow, pressure = units.flow[0], units.pressure[0]
    return [f"flow [{flow}]", f"upstream [{pressure}]", f"downstream [{pressure}]", "temperature [degC]"]


def log_text(day, units=PLANT, separator=",", spoil=None, start=dt.datetime(2026, 5, 12, 8)):
    """The logger's file; `spoil` is a generator when the log should have the usual gaps and a stuck gauge."""
    columns = columns_of(day, units)
    if spoil is not None:
        size = len(columns[0])
        for row in spoil.choice(size, max(1, size // 60), replace=False):
            columns[spoil.integers(3)][row] = ""
        stuck = spoil.integers(size // 4, size // 2)
        columns[2][stuck : stuck + 9] = [columns[2][stuck]] * 9
    clock = [(start + dt.timedelta(seconds=float(t))).isoformat() for t in day.rows.time_s]
    table = [["time", *heading(units)], *zip(clock, *columns, strict=True)]
    return "\n".join(separator.join(row) for row in table) + "\n"


def sheet_text(day, units=PLANT, separator=","):
    """A hand sheet: one row per flow, statics included, each the mean that an eye takes of a trembling needle."""
    rows = day.rows
    means = []
    for number in range(rows.window.max() + 1):
        here = rows.window == number
        means.append([rows.flow_m3_s[here].mean(), *rows.pressure_pa[:, here].mean(axis=1)])
    flow, upstream, downstream = np.array(means).T
    columns = [
        rounded(flow / units.flow[1], day.kit.meter.step_m3_s / units.flow[1]),
        *(rounded(p / units.pressure[1], day.kit.gauge.step_pa / units.pressure[1]) for p in (upstream, downstream)),
    ]
    table = [heading(units)[:3], *zip(*columns, strict=True)]
    return "\n".join(separator.join(row) for row in table) + "\n"


def bring(day, folder, units=PLANT, form="log", spoil=None):
    """Write the section file and the log or sheet; return their paths."""
    folder.mkdir(parents=True, exist_ok=True)
    section, log = folder / "section.toml", folder / "log.csv"
    section.write_text(section_text(day, units), encoding="utf-8")
    written = sheet_text(day, units) if form == "sheet" else log_text(day, units, spoil=spoil)
    log.write_text(written, encoding="utf-8")
    return section, log
