"""How the pipe ages, in a dozen lines for a terminal."""

from __future__ import annotations

import textwrap

from fieldfit.decisions.ageing import Ageing
from fieldfit.report import trend_words as words
from fieldfit.report.digits import litres, percent, significant
from fieldfit.report.finding import Finding

WIDTH, NAME_WIDTH = 88, 17


def trend_summary(finding: Finding) -> str:
    """Return the ageing as plain text of about a dozen lines, without colour.

    Parameters
    ----------
    finding : Finding
        What was found, with its ageing.

    Returns
    -------
    str
        Lines without an end of line after the last.
    """
    name = " ".join("".join(letter if letter.isprintable() else " " for letter in finding.section.name).split())
    lines = [f"{name or 'Pipe section'}: how it ages"]
    for ageing in finding.ageing:
        if len(finding.ageing) > 1:
            lines += ["", ageing.place]
        lines += _reach(ageing)
    if not finding.ageing:
        lines += _line("no answer", finding.no_ageing or "No campaign gives an estimate.")
    return "\n".join(lines)


def _reach(ageing: Ageing) -> list[str]:
    verdict = words.headline(ageing)
    lines = _line("verdict", verdict)
    for visit, point in zip(ageing.visits, ageing.points, strict=True):
        told = f"{words.triple(point.roughness_m, 'mm', 1e3)}, C {words.triple(point.c)}"
        lines += _line(visit.date.isoformat(), "; ".join((told, *point.events)))
    for change in ageing.changes:
        told = (
            f"head loss {words.triple(change.head_loss_ratio)} times, together ±{significant(196.0 * change.standard, 2)} %, "
            f"subtracted ±{significant(196.0 * change.naive_standard, 2)} %; worse: {percent(change.probability_worse)}"
        )
        lines += _line(f"{change.since:%Y-%m} {change.until:%Y-%m}", told)
    lines += _line("growth ahead", f"{words.triple(ageing.rate_ahead_m_year, 'mm', 1e3)} a year; {_stand(ageing)}")
    last = ageing.visits[-1].date
    then = min(last.replace(year=last.year + 10, day=min(last.day, 28)), ageing.forecast.dates[-1])
    c = words.triple(words.at(ageing, ageing.forecast.c, then))
    lines += _line(f"C in {then:%Y-%m}", f"{c} at {litres(ageing.duty.flow_m3_s)}")
    for crossing in ageing.crossings:
        lines += _line("threshold", words.crossing_words(crossing, ageing))
    for cleaning in ageing.cleanings:
        lines += _line(cleaning.event, words.cleaning_words(cleaning, ageing))
    for remark in ageing.remarks:
        lines += _line("care", remark)
    return lines


def _stand(ageing: Ageing) -> str:
    if ageing.published:
        return f"from {ageing.rate.source}"
    return ", ".join(f"{name} {percent(share)}" for name, share in ageing.growth.probabilities)


def _line(name: str, text: str) -> list[str]:
    """Return a named line, wrapped under itself."""
    return textwrap.wrap(
        text,
        WIDTH,
        initial_indent=f"  {name:<{NAME_WIDTH}} ",
        subsequent_indent=" " * (NAME_WIDTH + 3),
        break_long_words=False,
        break_on_hyphens=False,
    )
