"""The tables of the page: rows of texts, numbers with no more digits than they deserve."""

from __future__ import annotations

import math
from dataclasses import dataclass

from fieldfit.field.reaches import ReachHeads
from fieldfit.field.readings import ReachReadings
from fieldfit.field.section import Section, Tap
from fieldfit.inference.wall import Band, BudgetEntry
from fieldfit.report.device_rows import device_rows
from fieldfit.report.digits import (
    COVERAGE,
    fixed,
    known,
    limit,
    litres,
    percent,
    plus_minus,
    significant,
    span,
    stated,
    value_with_band,
)
from fieldfit.report.finding import Finding, ReachFinding, ScreenedLog

Row = tuple[str, ...]
ACROSS = 7
"""Most counts that stand side by side."""
HARDLY = 0.01
"""Share of the variance below which an error hardly counts [-]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Table:
    """A table of texts; the first cell of each row names it."""

    head: Row
    """Headings."""
    rows: tuple[Row, ...]
    """Rows, as long as the headings."""


def results(reach: ReachFinding) -> Table | None:
    """Return roughness, C and friction factor with both ranges."""
    wall = reach.wall
    rows = [
        _result("Roughness of the wall, equivalent sand grain [mm]", wall.roughness_m, 1e3),
        _result(
            f"Hazen–Williams C at {litres(wall.flow_m3_s)}, {fixed(wall.temperature_degc, 0)} °C", wall.hazen_williams_c
        ),
        _result(f"Darcy friction factor at Reynolds number {significant(wall.reynolds)}", wall.friction_factor),
    ]
    kept = tuple(row for row in rows if row is not None)
    head = ("", "best", "by these readings alone", "with the limit of friction formulas")
    return Table(head=head, rows=kept) if kept else None


def _result(name: str, band: Band, scale: float = 1.0) -> Row | None:
    """Return one result; a limit has no best value."""
    if band.measurement is None or band.with_correlation is None:
        return None
    own, wide = ((low * scale, high * scale) for low, high in (band.measurement, band.with_correlation))
    if band.best is None:
        return (name, "–", f"under {limit(own[1])}", f"under {limit(wide[1])}")
    best = value_with_band(band.best * scale, own).split(" (")[0]
    return (name, best, span(*own), span(*wide))


def comparison(reach: ReachFinding) -> tuple[Row, ...]:
    """Return the pipe against new pipe of its material."""
    new = reach.new_pipe
    if new is None:
        return ()
    low, typical, high = (stated(r * 1e3) for r in new.roughness_m)
    c_low, c_typical, c_high = (significant(c) for c in new.hazen_williams_c)
    ratio = value_with_band(new.head_loss_ratio[1], new.head_loss_ratio[::2])
    over = f"{100.0 * (new.limit - 1.0):.0f} %"
    laws = [f"{name} {significant(e * 1e3, 2)} mm" if e else f"{name}: smooth" for name, e in reach.wall.other_laws]
    return (
        (f"Roughness of new {new.material}", f"{low} to {high} mm, typically {typical} mm ({new.source})"),
        ("C of new pipe at this flow, bore and temperature", f"{c_low} to {c_high}, typically {c_typical}"),
        ("Head loss over that of new pipe", f"{ratio} times; the range holds the limit of friction formulas"),
        (f"Probability that it loses over {over} more than new", percent(new.probability_worse)),
        *((("The same friction factor by other published laws", ", ".join(laws)),) if laws else ()),
    )


def plateaus(reach: ReachFinding) -> Table | None:
    """Return flow, velocity, Reynolds number, head loss, friction factor, C and residual of each plateau."""
    values = reach.wall.plateaus
    if values is None or not values.number.size:
        return None
    head = (
        "plateau", "flow [L/s]", "velocity [m/s]", "Reynolds number [–]", "friction loss [m]", "friction factor [–]",
        "C [–]", "residual [–]",
    )  # fmt: skip
    rows = []
    for k, number in enumerate(values.number):
        f, c = float(values.friction_factor[k]), float(values.hazen_williams_c[k])
        rows.append(
            (
                str(int(number)),
                significant(float(values.flow_m3_s[k]) * 1e3),
                significant(float(values.velocity_m_s[k])),
                significant(float(values.reynolds[k])),
                plus_minus(float(values.friction_loss_m[k]), float(values.friction_loss_standard_m[k])),
                plus_minus(f, f * float(values.friction_factor_relative[k])),
                plus_minus(c, c * float(values.hazen_williams_relative[k])),
                fixed(float(values.residual[k]), 1),
            )
        )
    return Table(head=head, rows=tuple(rows))


def levelling(readings: ReachReadings | ReachHeads) -> str:
    """Return in words how the gauges were levelled."""
    level = readings.levelling
    if level is None:
        drop = readings.elevation_drop
        if drop is None:
            return "There was no static and no survey of heights, so the gauges could not be levelled."
        return (
            f"There was no static: the heights of the gauges come from the survey, which puts the upper one "
            f"{known(drop)} m above the lower one, and the zeros of the gauges stay within their stated limits."
        )
    told = (
        f"Levelled on {_count(level.plateaus, 'static')} at {fixed(level.pressure_pa[0] * 1e-3, 0)} and "
        f"{fixed(level.pressure_pa[1] * 1e-3, 0)} kPa: {plus_minus(level.offset_m, level.standard_m)} m of apparent head loss at "
        f"rest was taken off every reading. The stated limits of gauges and survey allow up to "
        f"±{significant(COVERAGE * level.expected_m, 2)} m."
    )
    if level.drift_m is None:
        return f"{told} With one static only, drift during the test cannot be seen."
    return f"{told} From the first static to the last the gauges drifted by {fixed(level.drift_m, 3)} m."


def _count(number: int, name: str) -> str:
    return f"{number} {name}" + ("" if number == 1 else "s")


def budget(reach: ReachFinding) -> Table | None:
    """Return each error with its shares, its effect on f, and its pull; those that hardly count in one row."""
    if not reach.wall.budget:
        return None
    head = ("error", "share for the roughness", "share for C", "effect on friction factor", "pull")
    small = [e for e in reach.wall.budget if max(e.share, e.measurement_share) < HARDLY and abs(e.pull) < 1.0]
    rows = [_budget_row(entry) for entry in reach.wall.budget if len(small) < 2 or entry not in small]
    if len(small) > 1:
        together = BudgetEntry(
            error=f"{len(small)} smaller ones",
            share=sum(entry.share for entry in small),
            measurement_share=sum(entry.measurement_share for entry in small),
            standard=math.hypot(*(entry.standard for entry in small)),
            pull=0.0,
        )
        rows.append(_budget_row(together))
    return Table(head=head, rows=tuple(rows))


def _budget_row(entry: BudgetEntry) -> Row:
    return (
        entry.error,
        percent(entry.share) if entry.share > 0.0 else "none",
        percent(entry.measurement_share) if entry.measurement_share > 0.0 else "none",
        f"±{significant(100.0 * COVERAGE * entry.standard, 2)} %",
        fixed(entry.pull, 1) if entry.pull else "–",
    )


def rows(campaign: ScreenedLog) -> Table:
    """Return how many rows were used, and how many set aside for which reason."""
    total, screening = campaign.log.rows, campaign.screening
    at_rest = screening.rows_of(campaign.plateaus.number[campaign.plateaus.static])
    counted = [
        ("used, water flowing", screening.used - at_rest),
        ("used, at rest", at_rest),
        *((f"set aside: {reason}", int(count)) for reason, count in screening.counts),
        ("all rows of the log", total),
    ]
    shares = ["all" if count == total else percent(count / total) if count else "none" for _, count in counted]
    numbers = [str(count) for _, count in counted]
    if len(counted) > ACROSS:
        together = zip((name for name, _ in counted), numbers, shares, strict=True)
        return Table(head=("", "rows", "share"), rows=tuple(together))
    return Table(
        head=("", *(name for name, _ in counted)),
        rows=(("rows", *numbers), ("share", *shares)),
    )


def overview(finding: Finding, names: list[tuple[str, str]]) -> Table:
    """Return one line per reach and campaign, when there are several."""
    lines = []
    every = [reach for campaign in finding.campaigns for reach in campaign.reaches]
    for (campaign, place), reach in zip(names, every, strict=True):
        new = reach.new_pipe
        ratio = "–" if new is None else value_with_band(new.head_loss_ratio[1], new.head_loss_ratio[::2])
        wall = reach.wall
        cells = (_short(wall.roughness_m, True, 1e3), _short(wall.hazen_williams_c, False, 1.0), ratio)
        lines.append((f"{campaign}, {place}", *cells))
    head = ("", "roughness, formula's limit included [mm]", "C, by the readings [–]", "head loss over new [–]")
    return Table(head=head, rows=tuple(lines))


def _short(band: Band, wide: bool, scale: float) -> str:
    """Return best value and one of the ranges in one cell."""
    ends = band.with_correlation if wide else band.measurement
    if ends is None:
        return "no estimate"
    low, high = ends[0] * scale, ends[1] * scale
    return f"under {limit(high)}" if band.best is None else value_with_band(band.best * scale, (low, high))


def inputs(section: Section) -> tuple[Row, ...]:
    """Return what was taken as known of the pipe and the instruments."""
    meter, correlation = section.meter, section.correlation
    told: list[Row] = [
        ("Pipe", f"{section.material or 'material unknown'}, laid {_date(section)}"),
        ("Bore", f"{known(section.bore, 1e3)} mm, {section.bore_source}"),
        ("Liquid", f"{section.liquid.name}; properties from {section.liquid.source}"),
        (
            "Temperature",
            ("from the log" if section.temperature is None else f"{fixed(section.temperature.value, 1)} °C")
            + f", good to ±{significant(math.sqrt(3.0) * section.temperature_standard, 2)} K",
        ),
        ("Flow meter", f"{_column(meter.column, meter.serial)}, {meter.accuracy.text}; it senses {meter.senses}"),
    ]
    told += [(f"Tap {index}", _tap(tap, section)) for index, tap in enumerate(section.taps, start=1)]
    told += device_rows(section)
    told += [
        (
            f"Fitting: {part.name}",
            f"K {known(part.k)}" + (f", {part.count} of them" if part.count > 1 else "") + f"; {part.source}",
        )
        for part in section.fittings
    ]
    told.append(
        ("Friction formula", f"good to ±{significant(2.0 * 100.0 * correlation.standard, 2)} %, with 95 % confidence")
    )
    if section.duty_flow_m3_s is not None:
        told.append(("Duty", litres(section.duty_flow_m3_s)))
    told += [(f"Limit of a screen: {name}", f"{value:g} (SI units)") for name, value in section.screen_limits]
    return tuple(told)


def _date(section: Section) -> str:
    return f"{section.installed.day} {section.installed:%B %Y}" if section.installed else "at an unknown date"


def _column(column: str, serial: str | None) -> str:
    return f"{column} ({serial})" if serial else column


def _tap(tap: Tap, section: Section) -> str:
    if section.differential is not None:
        return f"{tap.column} at {known(tap.station)} m"
    height = "height not surveyed" if tap.elevation is None else f"height {known(tap.elevation)} m"
    return f"{_column(tap.column, tap.gauge)} at {known(tap.station)} m, {height}, {tap.accuracy.text}"
