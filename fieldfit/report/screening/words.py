"""What screening says in words: the verdict, what to measure again, and how a log was read."""

from __future__ import annotations

import numpy as np

from fieldfit.field.clock_words import say_clock
from fieldfit.field.section import Section
from fieldfit.field.service_log import block_seconds
from fieldfit.report.digits import fixed, significant
from fieldfit.report.screening.finding import CampaignScreen, Check

MINUTE_S, HOUR_S, DAY_S = 60.0, 3600.0, 86_400.0


def headline(campaign: CampaignScreen) -> str:
    """Return the verdict on one log."""
    weak = len(failed(campaign, needed=False))
    if not campaign.good:
        return "Not good enough to assess"
    if weak == 0:
        return "Good enough to assess"
    return f"Good enough to assess, with {weak} weak point{'' if weak == 1 else 's'}"


def answer(campaign: CampaignScreen) -> str:
    """Return the reasons for the verdict, as sentences."""
    missing = failed(campaign, needed=True)
    if missing:
        return " ".join(dict.fromkeys(check.because for check in missing))
    weak = failed(campaign, needed=False)
    if weak:
        return " ".join(dict.fromkeys(check.because for check in weak))
    return "Flows, head losses, statics and resolution are all as they should be."


def failed(campaign: CampaignScreen, needed: bool) -> tuple[Check, ...]:
    """Return the checks that were not passed: those an assessment needs, or those that only weaken it."""
    return tuple(check for check in campaign.all_checks if not check.passed and check.needed == needed)


def again(campaign: CampaignScreen) -> list[str]:
    """Return what to measure again or to look into, most weighty first."""
    return list(dict.fromkeys(check.do for check in (*failed(campaign, True), *failed(campaign, False)) if check.do))


def reading(campaign: CampaignScreen, section: Section) -> str:
    """Return how the log was read, as a sentence."""
    log, screening = campaign.log, campaign.screening
    flowing = int(np.count_nonzero(~campaign.plateaus.static))
    if screening.block is not None:
        blocks = np.unique(screening.block[screening.plateau > 0]).size
        forced = "as the section file asks" if section.screen_mode == "service" else "for its flow seldom stands still"
        return (
            f"Read as a service log, {forced}: rows in time blocks of {duration(block_seconds(log, section))}, "
            f"{blocks} blocks in {flowing} groups of like flow."
        )
    if log.kind == "sheet":
        return "Read as a hand sheet: every row is a reading of its own."
    if campaign.plateaus.number.size and int(np.max(campaign.plateaus.rows)) == 1:
        return "Read as a hand sheet with times: no stretch is steady over enough rows, and the rows are few and far apart."
    statics = campaign.plateaus.number.size - flowing
    return f"Read as a test in steps: {count(flowing, 'flowing plateau')}, {count(statics, 'static')}."


def extent(campaign: CampaignScreen) -> str:
    """Return how long the log is and how far apart its rows are."""
    log = campaign.log
    rows = f"{fixed(log.rows, 0)} rows"
    told = log.time_s[np.isfinite(log.time_s)]
    steps = np.diff(told)
    if log.rows_in_file is not None:
        # Only some rows are here; lines tell how many lie between.
        steps = steps / np.diff(log.line[np.isfinite(log.time_s)])
    if log.kind == "sheet" or not np.any(steps > 0.0):
        return rows
    apart = duration(float(np.median(steps[steps > 0.0])))
    return f"{rows}, {apart} apart, over {duration(float(np.max(told) - np.min(told)))}"


def clocks(campaign: CampaignScreen) -> list[str]:
    """Return what was found of the loggers' clocks, as sentences; none for a log of one logger."""
    every = campaign.log.clocks
    reference = [one for one in every if one.how == "reference"]
    told = [f"All times are those of {one.file} ({', '.join(one.columns)})." for one in reference]
    return told + [say_clock(one, every) for one in every if one.how != "reference"]


def duration(seconds: float) -> str:
    """Return a time in the unit that people use for it.

    Examples
    --------
    >>> duration(2.0), duration(900.0), duration(9000.0), duration(259200.0)
    ('2 s', '15 min', '2.5 h', '3 days')
    """
    if seconds < 2.0 * MINUTE_S:
        return f"{_plain(seconds)} s"
    if seconds < 2.0 * HOUR_S:
        return f"{_plain(seconds / MINUTE_S)} min"
    if seconds < 2.0 * DAY_S:
        return f"{_plain(seconds / HOUR_S)} h"
    return f"{_plain(seconds / DAY_S)} days"


def _plain(value: float) -> str:
    text = significant(value, 3)
    return text.rstrip("0").rstrip(".") if "." in text else text


def count(number: int, noun: str) -> str:
    """Return a number of things.

    Examples
    --------
    >>> count(1, "static"), count(0, "static")
    ('1 static', '0 statics')
    """
    return f"{number} {noun}{'' if number == 1 else 's'}"
