"""The tables of the ageing: campaigns, changes, laws, outlook, thresholds."""

from __future__ import annotations

import datetime as dt

from fieldfit.decisions.ageing import Ageing
from fieldfit.decisions.growth import LAWS
from fieldfit.decisions.growth_prior import Belief
from fieldfit.decisions.visits import Stage
from fieldfit.inference.change import Change
from fieldfit.report import trend_words as words
from fieldfit.report.digits import fixed, limit, litres, percent, significant
from fieldfit.report.tables import Row, Table

YEARS = (0, 5, 10, 20)
EVENTS = {
    "laid": "laid",
    "first test": "first test",
    "cleaned": "cleaned",
    "lined": "lined",
    "unmarked": "better, nobody said why",
}


def campaigns(ageing: Ageing) -> Table:
    """Return every campaign by the joint fit."""
    head = ("test", "roughness [mm]", f"C at {litres(ageing.duty.flow_m3_s)}", "since the test before")
    rows = []
    for point in ageing.points:
        wall = words.triple(point.roughness_m, "", 1e3)
        if point.roughness_m[0] <= 0.0:
            wall = f"under {limit(1e3 * max(point.roughness_m[2], 1e-6))}"
        rows.append((point.date.isoformat(), wall, words.triple(point.c), "; ".join(point.events) or "–"))
    return Table(head=head, rows=tuple(rows))


def changes(ageing: Ageing) -> Table | None:
    """Return the changes between campaigns; None with one."""
    if not ageing.changes:
        return None
    head = ("from, to", "head loss, times", "C, times", "roughness, times", "roughness, more by [mm]")
    rows = []
    for change in ageing.changes:
        ratio = change.roughness_ratio
        rows.append(
            (
                _pair(change),
                words.triple(change.head_loss_ratio),
                words.triple(change.c_ratio),
                "–" if ratio is None else words.triple(ratio),
                words.triple(change.roughness_change_m, "", 1e3),
            )
        )
    return Table(head=head, rows=tuple(rows))


def certainty(ageing: Ageing) -> Table | None:
    """Return how sure the changes are, by the joint fit and by subtraction; None with one campaign."""
    if not ageing.changes:
        return None
    by = f"{100.0 * ageing.changes[0].worse_by:.0f} %"
    head = ("from, to", "worse at all", f"worse by over {by}", "smallest rise seen", "± together", "± subtracted")
    rows = [
        (
            _pair(change),
            percent(change.probability_worse),
            percent(change.probability_worse_by),
            f"{significant(100.0 * change.smallest, 2)} %",
            f"{significant(196.0 * change.standard, 2)} %",
            f"{significant(196.0 * change.naive_standard, 2)} %",
        )
        for change in ageing.changes
    ]
    return Table(head=head, rows=tuple(rows))


def _pair(change: Change) -> str:
    return f"{change.since:%Y-%m} to {change.until:%Y-%m}"


def _orders(belief: Belief) -> str:
    """Return the range of something known by its order of magnitude [mm]."""
    low, high = (significant(1e3 * value, 2) for value in belief.span)
    return f"{low} to {high} mm"


def growth(ageing: Ageing) -> tuple[Row, ...]:
    """Return what is known of the growth, and from where."""
    formulas = {law.name: law.formula for law in LAWS}
    laws = ", ".join(f"{name} ({formulas[name]}) {percent(share)}" for name, share in ageing.growth.probabilities)
    rows = [
        ("Laws, with their probabilities", laws),
        ("Growth over the next ten years", f"{words.triple(ageing.rate_ahead_m_year, 'mm', 1e3)} a year"),
        ("Rate believed in beforehand", f"{_orders(ageing.rate)} a year: {ageing.rate.source}"),
    ]
    if ageing.rate_past_m_year is not None:
        rows.insert(
            1, (_until_now(ageing.stages[-1]), f"{words.triple(ageing.rate_past_m_year, 'mm', 1e3)} a year on average")
        )
    for stage, belief in zip(ageing.stages, ageing.starts, strict=True):
        name = f"Roughness on {stage.start.isoformat()} ({EVENTS[stage.event]}), believed in beforehand"
        rows.append((name, f"{_orders(belief)}: {belief.source}"))
    return tuple(rows)


def _until_now(stage: Stage) -> str:
    return f"Growth from {stage.start.isoformat()} ({EVENTS[stage.event]}) to the last test"


def outlook(ageing: Ageing) -> Table:
    """Return the forecast at a few moments."""
    forecast, duty = ageing.forecast, ageing.duty
    flow = litres(duty.flow_m3_s)
    fans = [
        ("roughness [mm]", forecast.roughness_m, 1e3),
        (f"C at {flow}", forecast.c, 1.0),
        (f"head loss at {flow} [m]", forecast.head_loss_m, 1.0),
    ]
    if forecast.capacity_m3_s is not None and duty.head_m is not None:
        fans.append((f"capacity at {duty.head_m:g} m [L/s]", forecast.capacity_m3_s, 1e3))
    fans.append(("deposit, if bore [mm]", forecast.deposit_m, 1e3))
    last, end = ageing.visits[-1].date, forecast.dates[-1]
    days = [day for day in (_later(last, years) for years in YEARS) if day <= end + dt.timedelta(days=31)]
    rows = [
        (min(day, end).isoformat(), *(words.triple(words.at(ageing, fan, day), "", scale) for _, fan, scale in fans))
        for day in days
    ]
    return Table(head=("day", *(name for name, _, _ in fans)), rows=tuple(rows))


def _later(date: dt.date, years: int) -> dt.date:
    """Return the same day some years on."""
    return date.replace(year=date.year + years, day=28 if (date.month, date.day) == (2, 29) else date.day)


def thresholds(ageing: Ageing) -> Table | None:
    """Return when each threshold is crossed."""
    if not ageing.crossings:
        return None
    by = ageing.crossings[0].by
    head: Row = ("reached", "with 10 %", "with 50 %", "with 90 %", "already", "not within 100 years")
    head = (*head, f"before {by.isoformat()}") if by else head
    rows = []
    for crossing in ageing.crossings:
        days = tuple("never" if day is None else day.isoformat() for day in crossing.dates)
        row: Row = (words.threshold_words(crossing, ageing), *days, percent(crossing.already), percent(crossing.never))
        rows.append((*row, percent(crossing.probability_by or 0.0)) if by else row)
    return Table(head=head, rows=tuple(rows))


def cleanings(ageing: Ageing) -> tuple[tuple[str, tuple[Row, ...]], ...]:
    """Return what each cleaning brought, titled."""
    found = []
    for cleaning in ageing.cleanings:
        before, after = ageing.visits[cleaning.before].date, ageing.visits[cleaning.after].date
        rows: list[Row] = [
            (f"C at {litres(ageing.duty.flow_m3_s)} before", words.triple(cleaning.c_before)),
            ("after", words.triple(cleaning.c_after)),
            ("Gain", f"{words.triple(cleaning.c_gain)}; probability of any: {percent(cleaning.probability_gain)}"),
            ("Flow at equal head", f"{words.triple(cleaning.capacity_ratio)} times"),
            ("Head loss at the duty", f"{words.triple(cleaning.head_loss_ratio)} times"),
            ("Hydraulic power that friction no longer takes at the duty", words.triple(cleaning.power_saved_w, "W")),
        ]
        if cleaning.promised_c is not None:
            share = percent(cleaning.probability_promise or 0.0)
            rows.append((f"Promised C {fixed(cleaning.promised_c, 0)}", f"{cleaning.promise}; probability {share}"))
        if cleaning.regrowth is not None:
            share = percent(cleaning.probability_faster or 0.0)
            rows.append(
                (
                    "Growth since over growth before",
                    f"{words.triple(cleaning.regrowth)}; probability of faster: {share}",
                )
            )
        title = f"{EVENTS[cleaning.event].capitalize()}, {cleaning.date.isoformat()}: tests of {before} and {after}"
        found.append((title, tuple(rows)))
    return tuple(found)
