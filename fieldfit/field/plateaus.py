"""From the rows of a log to plateaus: which rows count, and why the others don't."""

from __future__ import annotations

from collections import Counter
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from fieldfit.errors import InputError
from fieldfit.field.averages import summarise
from fieldfit.field.log import Log
from fieldfit.field.readings import Screening
from fieldfit.field.row_screens import ROW_SCREENS, pauses, still_below
from fieldfit.field.screens import OUTLIER, UNSTEADY, limit
from fieldfit.field.section import Section
from fieldfit.field.service_log import group_service_log, is_service_log
from fieldfit.field.steady import steady_stretches
from fieldfit.field.stretches import drifts, outliers, parted, ramps, settled

__all__ = ["read_by_hand", "screen", "set_plateaus_aside", "summarise"]

Rows = NDArray[np.int64]
Outcome = tuple[NDArray[np.object_], Rows]

HAND_ROWS = 100
"""Most rows of a sheet with a clock."""
HAND_SECONDS = 20.0
"""Time between readings from which they may have been written by hand [s]."""


def screen(log: Log, section: Section) -> Screening:
    """Judge every row of a log: part of a plateau, or set aside with its reason.

    A long log whose flow seldom stands still is read as a service log: its rows are grouped by flow, and each group
    counts as a plateau.

    Parameters
    ----------
    log : Log
        N rows.
    section : Section
        Gives the limits of the screens.

    Returns
    -------
    Screening
        Statics count as plateaus.

    Raises
    ------
    InputError
        When no row has all its values, or the water runs backwards throughout.
    """
    reason = log.reason.astype(object)
    plateau = np.zeros(len(reason), dtype=np.int64)
    _check_direction(log, section)
    for why, caught in ROW_SCREENS:
        reason[(reason == "") & caught(log, section)] = why
    good = np.flatnonzero(reason == "")
    block = None
    if log.kind == "logger":
        _number_plateaus(log, section, good, (reason, plateau))
    if log.kind == "sheet" or (not np.any(plateau) and read_by_hand(log)):
        reason[good] = ""
        plateau[good] = np.arange(1, len(good) + 1)
    elif is_service_log(log, section, plateau):
        reason[good] = ""
        plateau, block, far = group_service_log(log, section, good)
        reason[far] = OUTLIER
    reason[(reason == "") & (plateau == 0)] = UNSTEADY
    return _screening(reason.astype(np.str_), plateau, block)


def read_by_hand(log: Log) -> bool:
    """Return whether a log with a clock looks like a sheet all the same: few rows, far apart."""
    rows = len(log.time_s)
    return rows < 2 or (rows <= HAND_ROWS and float(np.nanmedian(np.diff(log.time_s))) >= HAND_SECONDS)


def set_plateaus_aside(screening: Screening, reasons: dict[int, str]) -> Screening:
    """Return the screening with whole plateaus set aside, by number; the others keep theirs."""
    reason = screening.reason.astype(object)
    plateau = screening.plateau.copy()
    for number, why in reasons.items():
        rows = screening.plateau == number
        reason[rows] = why
        plateau[rows] = 0
    changed = _screening(reason.astype(np.str_), plateau, screening.block)
    if screening.runs is None:
        return changed
    runs = screening.runs.set_aside(reasons)
    return replace(changed, runs=runs, counts=runs.counts)


def _screening(reason: NDArray[np.str_], plateau: Rows, block: Rows | None) -> Screening:
    """Freeze the outcome and count the reasons."""
    counts = Counter(reason[plateau == 0].tolist()).most_common()
    for values in (reason, plateau, block):
        if values is not None:
            values.setflags(write=False)
    return Screening(reason=reason, plateau=plateau, counts=tuple(counts), block=block)


def _check_direction(log: Log, section: Section) -> None:
    """Refuse a log without a complete row, or one whose flow is negative throughout."""
    flow = log.flow_m3_s[log.reason == ""]
    if flow.size == 0:
        raise InputError(
            "no row has a value in every column that is needed",
            "See the reasons in the log's columns; every reading needs flow and all pressures.",
            log.file,
        )
    moving = np.abs(flow) > still_below(log, section)
    if np.any(moving) and np.all(flow[moving] < 0.0):
        raise InputError(
            f"the flow is negative in every row that flows (largest {np.min(flow) * 1000.0:.3g} L/s)",
            "If the meter was fitted the other way round, change the sign of the column; if the water ran from the last "
            "tap to the first, count the stations from the other end.",
            f"{log.file}, column '{section.meter.column}'",
        )


def _number_plateaus(log: Log, section: Section, good: Rows, outcome: Outcome) -> None:
    """Find a logger's plateaus among the good rows and write numbers and reasons."""
    reason, plateau = outcome
    number = 0
    stretches = steady_stretches(log.flow_m3_s[good], limit(section, "flow_step"))
    for first, stop in parted(stretches, good, pauses(log, section)):
        rows = settled(log.flow_m3_s, good[first:stop])
        far = outliers(log, rows, limit(section, "outlier"))
        inside = np.flatnonzero(~far)
        rows, far = rows[inside[0] : inside[-1] + 1], far[inside[0] : inside[-1] + 1]
        kept = rows[~far]
        if len(kept) < limit(section, "plateau_rows") or drifts(log, section, kept) or ramps(log, section, good, kept):
            continue
        reason[rows[far]] = OUTLIER
        number += 1
        plateau[kept] = number
