"""The audit trail: what became of every row of a log."""

from __future__ import annotations

import csv
import datetime as dt
import io
import math
from collections.abc import Iterable

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.log import AUDIT_HEADINGS
from fieldfit.field.row_runs import RowRuns
from fieldfit.field.section import Section
from fieldfit.report.finding import ScreenedLog


def audit_csv(campaign: ScreenedLog, section: Section) -> str:
    """Return all rows of a log as CSV: readings in SI units, plateau, and why a row was set aside.

    Of a log too long to keep all rows it is one line for each run of rows with one fate.

    Parameters
    ----------
    campaign : ScreenedLog
        A log and what became of its rows.
    section : Section
        Names the columns.

    Returns
    -------
    str
        One heading line and one line per row; a missing value is empty, as is the reason of a row that is used.
    """
    log, screening = campaign.log, campaign.screening
    if screening.runs is not None:
        return _written(*_of_runs(screening.runs, log.start))
    timed = log.kind == "logger"
    headings = ["line", *(["time" if log.start else "time [s]"] if timed else []), f"{section.meter.column} [m3/s]"]
    columns: list[Iterable[str]] = [map(str, log.line.tolist())]
    if timed:
        columns.append(_times(log.start, log.time_s))
    columns.append(_numbers(log.flow_m3_s))
    for tap, pressure in zip(section.taps, log.pressure_pa, strict=True):
        headings.append(f"{tap.column} [Pa]")
        columns.append(_numbers(pressure))
    if log.temperature_degc is not None:
        headings.append("temperature [degC]")
        columns.append(_numbers(log.temperature_degc))
    headings += AUDIT_HEADINGS
    columns += [(str(n) if n else "" for n in screening.plateau.tolist()), screening.reason.tolist()]
    return _written(headings, columns)


def _of_runs(runs: RowRuns, start: dt.datetime | None) -> tuple[list[str], list[Iterable[str]]]:
    """Return headings and columns for runs of rows; `rows` is less than the lines where other runs lie between."""
    time = "time" if start else "time [s]"
    headings = ["first line", "last line", f"first {time}", f"last {time}", "rows", *AUDIT_HEADINGS]
    columns: list[Iterable[str]] = [
        map(str, runs.first_line.tolist()),
        map(str, runs.last_line.tolist()),
        _times(start, runs.first_s),
        _times(start, runs.last_s),
        map(str, runs.rows.tolist()),
        (str(n) if n else "" for n in runs.plateau.tolist()),
        runs.reason.tolist(),
    ]
    return headings, columns


def _written(headings: list[str], columns: list[Iterable[str]]) -> str:
    """Return a table as CSV."""
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(headings)
    writer.writerows(zip(*columns, strict=True))
    return out.getvalue()


def _numbers(values: NDArray[np.float64]) -> Iterable[str]:
    return ("" if math.isnan(value) else f"{value:.9g}" for value in values.tolist())


def _times(start: dt.datetime | None, time_s: NDArray[np.float64]) -> Iterable[str]:
    if start is None:
        return _numbers(time_s)
    # A log that starts with a row without a clock has NaN there.
    return (
        "" if math.isnan(seconds) else (start + dt.timedelta(seconds=round(seconds, 3))).isoformat()
        for seconds in time_s.tolist()
    )
