"""What is printed of several loggers' clocks, on the page of a report and on that of a screening."""

from __future__ import annotations

import math
from typing import Any

from fieldfit.field.clock_words import say_clock
from fieldfit.field.log import Log
from fieldfit.field.section import Section


def clock_block(log: Log, section: Section, name: str) -> dict[str, Any] | None:
    """Return sentences on clocks, and the figure of the evidence.

    Parameters
    ----------
    log : Log
        The log.
    section : Section
        Names the columns.
    name : str
        Name of the figure, unique on the page.

    Returns
    -------
    dict or None
        ``sentences``, and ``figures``: none, or one with ``name``, ``title``, ``text`` and ``figure``. None for a log
        of one logger.
    """
    if not log.clocks:
        return None
    from fieldfit.report.figures import clocks

    drawn = clocks(log, section)
    figure = {
        "name": name,
        "title": "Loggers on one clock",
        "text": "Left, what each lag of the search leaves unexplained of the pressures; right, a close look about the "
        "best lag. Below, the channels over the greatest change of flow: they move together once the clocks are right.",
        "figure": drawn,
    }
    return {"sentences": clock_sentences(log), "figures": [figure] if drawn is not None else []}


def clock_sentences(log: Log) -> list[str]:
    """Return what was found of the clocks, the reference first; none for a log of one logger."""
    reference = [one for one in log.clocks if one.how == "reference"]
    told = [f"All times are those of {one.file} ({', '.join(one.columns)})." for one in reference]
    return told + [say_clock(one, log.clocks) for one in log.clocks if one.how != "reference"]


def clock_records(log: Log) -> list[dict[str, Any]]:
    """Return what was found of the clocks as plain data.

    Each has ``file`` and its ``sha256``, ``columns``, ``rows``, ``how`` its offset is known, ``offset_s`` ahead as it was
    taken off, the readings' own ``best_s`` with its 95 % ``interval_s``, ``drift_ppm`` and its ``drift_standard_ppm``,
    and ``because`` when the readings could not tell.
    """
    return [
        {
            "file": one.file,
            "offset_s": _number(one.offset_s),
            "interval_s": None if one.interval_s is None else [_number(end) for end in one.interval_s],
            "drift_ppm": _number(1e6 * one.drift),
            "how": one.how,
            "columns": list(one.columns),
            "rows": one.rows,
            "sha256": one.sha256,
            "best_s": _number(one.best_s),
            "drift_standard_ppm": None if one.drift_standard is None else _number(1e6 * one.drift_standard),
            "because": one.because,
        }
        for one in log.clocks
    ]


def _number(value: float) -> float | None:
    """Return a plain number, None for what is not defined."""
    return float(value) if math.isfinite(value) else None
