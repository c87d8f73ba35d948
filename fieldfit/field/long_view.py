"""A long log as its reports show it: some of its rows, and what became of all of them."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.log import Log
from fieldfit.field.long_rows import LongRows
from fieldfit.field.long_screens import CODE, Blocks
from fieldfit.field.long_segments import Segments
from fieldfit.field.readings import Screening
from fieldfit.field.row_runs import RowRuns, RunCounter
from fieldfit.field.screens import CLOCK, MISSING, UNSTEADY

Whole = NDArray[np.int64]

WINDOWS = 1000
"""Windows of a long log, each shown by some of its rows, its extremes, and one row of every fate."""
EVEN = 10
"""Evenly spaced rows of a window that are shown."""
_REASONS = np.array([reason for reason, _ in sorted(CODE.items(), key=lambda item: item[1])])
_AT_ONCE = (CODE[MISSING], CODE[CLOCK])
_FATES = 64


def view(rows: LongRows, blocks: Blocks, fates: Screening, segments: Segments) -> tuple[Log, Screening]:
    """Return the rows of a long log that are shown, and what became of all rows.

    Parameters
    ----------
    rows : LongRows
        The log, screened.
    blocks : Blocks
        Its blocks.
    fates : Screening
        What became of the blocks.
    segments : Segments
        The rows of each plateau.

    Returns
    -------
    log : Log
        Some rows, in order.
    screening : Screening
        Their fates, and runs that hold every row.
    """
    width = max(-(-rows.store.rows // WINDOWS), 1)
    time_block = _time_blocks(rows, blocks, fates)
    by_block = _block_codes(rows, blocks, fates)
    counter = RunCounter()
    taken: list[dict[str, NDArray[np.generic]]] = []
    names = ("line", "time", *rows.channels, *(["temperature"] if rows.temperature else []))
    for first, stop in rows.store.spans(width):
        columns = {name: rows.store.read(name, first, stop) for name in names}
        code = rows.store.read("code", first, stop).astype(np.int64)
        good = code == 0
        code[good] = by_block[(first + np.flatnonzero(good)) // blocks.width]
        fate = code
        for part, number in segments.within(first, stop):
            inside = fate[part]
            inside[good[part]] = number * _FATES
        counter.add(fate, columns["line"], columns["time"])
        shown = _shown([columns[name] for name in rows.channels], fate, width)
        taken.append({name: values[shown] for name, values in columns.items()} | {"fate": fate[shown]})
        taken[-1]["block"] = time_block[(first + shown) // blocks.width]
    table = {name: np.concatenate([part[name] for part in taken]) for name in taken[0]}
    screening = _screening(table, _runs(counter))
    return _log(rows, blocks, table), screening if fates.block is not None else replace(screening, block=None)


def _block_codes(rows: LongRows, blocks: Blocks, fates: Screening) -> Whole:
    """Return the code of good rows outside all plateaus, by their block."""
    codes = np.full(-(-rows.store.rows // blocks.width), CODE[UNSTEADY], dtype=np.int64)
    for place, reason in zip(blocks.place.tolist(), fates.reason.tolist(), strict=True):
        if reason:
            codes[place] = CODE[reason]
    return codes


def _time_blocks(rows: LongRows, blocks: Blocks, fates: Screening) -> Whole:
    """Return the time block of a service log that each block belongs to; 0 for none."""
    found = np.zeros(-(-rows.store.rows // blocks.width), dtype=np.int64)
    if fates.block is not None:
        found[blocks.place] = fates.block
    return found


def _shown(channels: list[NDArray[np.float64]], fate: Whole, width: int) -> Whole:
    """Return places of the rows that are shown: of each window some evenly spaced, the extremes, one of each fate."""
    places: list[Whole] = []
    for first in range(0, len(fate), width):
        part = slice(first, first + width)
        fates = fate[part]
        some = list(range(0, len(fates), -(-len(fates) // EVEN)))
        if fates.min() != fates.max():
            some += np.unique(fates, return_index=True)[1].tolist()
        for values in channels:
            window = values[part]
            low, high = int(window.argmin()), int(window.argmax())
            if np.isnan(window[low]) and np.any(np.isfinite(window)):
                low, high = int(np.nanargmin(window)), int(np.nanargmax(window))
            some += [low, high]
        places.append(first + np.unique(np.array(some, dtype=np.int64)))
    return np.concatenate(places)


def _runs(counter: RunCounter) -> RowRuns:
    """Return the runs with their fates in words."""
    return RowRuns(
        first_line=counter.lines[0],
        last_line=counter.lines[1],
        first_s=counter.times[0],
        last_s=counter.times[1],
        rows=counter.rows,
        plateau=counter.code // _FATES,
        reason=_REASONS[counter.code % _FATES],
    )


def _log(rows: LongRows, blocks: Blocks, table: dict[str, NDArray[np.generic]]) -> Log:
    """Return the shown rows as a log."""
    values = {
        name: np.asarray(column, dtype=np.float64)
        for name, column in table.items()
        if name not in {"line", "fate", "block"}
    }
    code = table["fate"].astype(np.int64) % _FATES
    return Log(
        file=blocks.log.file,
        sha256="",
        kind="logger",
        line=table["line"].astype(np.int64),
        start=rows.start,
        time_s=values["time"],
        flow_m3_s=values["flow"],
        pressure_pa=np.array([values[f"p{tap}"] for tap in range(rows.taps)]),
        temperature_degc=values.get("temperature"),
        flow_step_m3_s=float(rows.steps[0]),
        pressure_step_pa=rows.steps[1:],
        reason=_REASONS[np.where(np.isin(code, _AT_ONCE), code, 0)],
        rows_in_file=rows.store.rows,
    )


def _screening(table: dict[str, NDArray[np.generic]], runs: RowRuns) -> Screening:
    """Return the fates of the shown rows, with the runs of all."""
    fate = table["fate"].astype(np.int64)
    plateau = fate // _FATES
    return Screening(
        reason=_REASONS[fate % _FATES],
        plateau=plateau,
        counts=runs.counts,
        block=np.where(plateau > 0, table["block"].astype(np.int64), 0),
        runs=runs,
    )
