"""How the pipe ages, in plain words."""

from __future__ import annotations

import datetime as dt

import numpy as np

from fieldfit.decisions.ageing import Ageing
from fieldfit.decisions.cleaning import Cleaning
from fieldfit.decisions.forecast import HORIZON_YEARS, Crossing, Fan
from fieldfit.inference.change import Change
from fieldfit.report.digits import fixed, litres, percent, significant, value_with_band

SURE, HARDLY = 0.95, 0.05


def day(date: dt.date | None) -> str:
    """Return a day in words, or that there is none.

    Examples
    --------
    >>> day(dt.date(2033, 2, 6)), day(None)
    ('6 February 2033', 'not within 100 years')
    """
    return f"not within {HORIZON_YEARS:.0f} years" if date is None else f"{date.day} {date:%B %Y}"


def month(date: dt.date | None) -> str:
    """Return a month in words, or that there is none."""
    return f"not within {HORIZON_YEARS:.0f} years" if date is None else f"{date:%B %Y}"


def triple(values: tuple[float, float, float], unit: str = "", scale: float = 1.0) -> str:
    """Return best and 95 % range of a triple.

    Examples
    --------
    >>> triple((0.065e-3, 0.0817e-3, 0.102e-3), "mm", 1e3)
    '0.082 mm (0.065 to 0.102 mm)'
    """
    low, best, high = (value * scale for value in values)
    return value_with_band(best, (low, high), unit)


def headline(ageing: Ageing) -> str:
    """Return the answer in half a dozen words."""
    if ageing.published:
        return "Looking ahead on a published rate"
    if ageing.stages[-1].event == "unmarked":
        return "Better than before, and nobody said why"
    latest = _latest(ageing)
    if latest is None or HARDLY < latest.probability_worse < SURE:
        return "No worsening shown yet"
    if latest.probability_worse <= HARDLY:
        return "Not worse than before"
    rate = ageing.rate_past_m_year or ageing.rate_ahead_m_year
    return f"Roughening by {significant(1e3 * rate[1], 2)} mm a year"


def answer(ageing: Ageing) -> str:
    """Return the answer on one reach in one paragraph of plain words."""
    told = [_change_words(ageing), _growth_words(ageing), _ahead_words(ageing)]
    return " ".join(text for text in told if text)


def _latest(ageing: Ageing) -> Change | None:
    """Return the change over the present stage, or the last step in it; None with one campaign there."""
    first = ageing.stages[-1].first
    steps = [change for change in ageing.changes if change.earlier >= first]
    return max(steps, key=lambda change: change.later - change.earlier) if steps else None


def _change_words(ageing: Ageing) -> str:
    """Say what has changed, and what the joint fit bought."""
    change = _latest(ageing)
    if change is None:
        return ""
    return (
        f"From {day(change.since)} to {day(change.until)} the head loss at equal flow and temperature went to "
        f"{triple(change.head_loss_ratio)} times what it was; the probability that the pipe has worsened at all is "
        f"{percent(change.probability_worse)}. {bought(change)}"
    )


def bought(change: Change) -> str:
    """Say what fitting jointly bought."""
    joint, naive = (significant(196.0 * value, 2) for value in (change.standard, change.naive_standard))
    return (
        f"Fitted together the tests give that ratio to ±{joint} %; subtracted as if nothing were shared they would give it "
        f"to ±{naive} %."
    )


def _growth_words(ageing: Ageing) -> str:
    """Say how fast it grows, and on what that stands."""
    rate = triple(ageing.rate_ahead_m_year, "mm", 1e3)
    if ageing.published:
        why = (
            "One test cannot tell how fast the wall grows"
            if len(ageing.visits) == 1
            else "No time between two tests is free of cleaning or lining, so the tests cannot tell how fast the wall grows"
        )
        return (
            f"{why}: the rate stands on {ageing.rate.source}, taken wide, and on the wall as it was laid. Ahead it comes to "
            f"{rate} a year."
        )
    name, share = max(ageing.growth.probabilities, key=lambda pair: pair[1])
    law = f"the {name} law" if share >= 0.9 else "laws averaged, for the tests do not decide between them"
    return f"Over the next ten years the wall grows by {rate} a year ({law})."


def _ahead_words(ageing: Ageing) -> str:
    """Say what C will be in ten years."""
    last = ageing.visits[-1].date
    then = min(last.replace(year=last.year + 10, day=min(last.day, 28)), ageing.forecast.dates[-1])
    c = at(ageing, ageing.forecast.c, then)
    return f"By {month(then)} C at {litres(ageing.duty.flow_m3_s)} comes to {triple(c)}."


def at(ageing: Ageing, fan: Fan, date: dt.date) -> tuple[float, float, float]:
    """Return a forecast on a day of the present stage: 95 % low, median, 95 % high."""
    here = ageing.forecast.stage == len(ageing.stages) - 1
    days = np.array([moment.toordinal() for moment in ageing.forecast.dates], dtype=np.float64)[here]
    low, middle, high = (
        float(np.interp(date.toordinal(), days, line[here])) for line in (fan.most[0], fan.middle, fan.most[1])
    )
    return low, middle, high


def threshold_words(crossing: Crossing, ageing: Ageing) -> str:
    """Return what is crossed."""
    if crossing.what == "c":
        return f"C {crossing.limit:g} at {litres(ageing.duty.flow_m3_s)}"
    if crossing.what == "head_loss":
        return f"a head loss of {crossing.limit:g} m at {litres(ageing.duty.flow_m3_s)}"
    head = f"{ageing.duty.head_m or 0.0:g}"
    return f"a capacity of {litres(crossing.limit)} at {head} m of head"


def crossing_words(crossing: Crossing, ageing: Ageing) -> str:
    """Say when a threshold is crossed."""
    name = threshold_words(crossing, ageing)
    name = name[0].upper() + name[1:]
    asked = (
        ""
        if crossing.by is None or crossing.probability_by is None
        else f" Probability before {day(crossing.by)}: {percent(crossing.probability_by)}."
    )
    if crossing.already >= SURE:
        return f"{name} was already crossed by the last test.{asked}"
    if crossing.never >= SURE:
        return f"{name} is not reached within {HORIZON_YEARS:.0f} years.{asked}"
    early, middle, late = crossing.dates
    if crossing.already >= 0.5:
        return (
            f"{name} was crossed by the last test with a probability of {percent(crossing.already)}; with 90 % it is by "
            f"{month(late)}.{asked}"
        )
    return (
        f"{name} is reached by {month(middle)} with even odds, by {month(early)} with 10 % and by {month(late)} with "
        f"90 %.{asked}"
        if late is not None
        else f"{name} is reached by {month(early)} with 10 %; with {percent(crossing.never)} it is not reached within "
        f"{HORIZON_YEARS:.0f} years.{asked}"
    )


def cleaning_words(cleaning: Cleaning, ageing: Ageing) -> str:
    """Say what a cleaning brought."""
    done = {"cleaned": "The cleaning of", "lined": "The lining of"}.get(cleaning.event, "Whatever was done before")
    told = (
        f"{done} {day(cleaning.date)} brought C at {litres(ageing.duty.flow_m3_s)} from {fixed(cleaning.c_before[1], 0)} "
        f"to {fixed(cleaning.c_after[1], 0)}: a gain of {triple(cleaning.c_gain)} with a probability of "
        f"{percent(cleaning.probability_gain)} that there is one. At equal head it carries {triple(cleaning.capacity_ratio)} "
        "times the flow."
    )
    if cleaning.promise is not None and cleaning.promised_c is not None and cleaning.probability_promise is not None:
        told += (
            f" Promised was C {fixed(cleaning.promised_c, 0)}: {cleaning.promise}, with a probability of "
            f"{percent(cleaning.probability_promise)} that it was reached."
        )
    if cleaning.regrowth is not None and cleaning.probability_faster is not None:
        told += (
            f" Since then the wall has grown {triple(cleaning.regrowth)} times as fast as before; the probability that it "
            f"grows faster is {percent(cleaning.probability_faster)}."
        )
    return told
