"""A log too long for memory: read, screened and averaged from temporary files, in parts.

It ends in the same things as an ordinary log: the log itself (only some of its rows, for drawing), what became of
every row (in runs), and plateaus whose means and noise come from all rows.
"""

from __future__ import annotations

from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from dataclasses import replace
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.averages import difference_slopes, rest_difference, summarise
from fieldfit.field.log import Log
from fieldfit.field.log_form import log_form
from fieldfit.field.log_headings import find_headings
from fieldfit.field.log_source import log_source
from fieldfit.field.long_ends import mean_changes
from fieldfit.field.long_noise import noise_of_totals
from fieldfit.field.long_rows import LongRows, LongSource, long_rows
from fieldfit.field.long_screens import Blocks, blocks_of, screen_rows, witnesses
from fieldfit.field.long_segments import Segments, segments_of, set_outliers_aside
from fieldfit.field.long_sums import Pieces, Totals, pieces_of, totals_of
from fieldfit.field.long_view import view
from fieldfit.field.plateaus import screen
from fieldfit.field.readings import Plateaus, Screening
from fieldfit.field.row_noise import MeanNoise
from fieldfit.field.row_screens import still_below
from fieldfit.field.row_store import RowStore
from fieldfit.field.section import Section
from fieldfit.field.workbook import is_workbook

Array = NDArray[np.float64]
Tell = Callable[[float], None]

LONG_LOG_BYTES = 16 << 20
"""A file from this size on, some 300,000 rows, is read as a long log."""
READ_SHARE = 0.6
"""Share of the whole work that reading is."""


def open_long_log(path: Path, section: Section) -> LongSource | None:
    """Return a log that is to be read as a long one; None for one that is short, or must be read as a whole.

    Parameters
    ----------
    path : Path
        The file.
    section : Section
        Names the columns.

    Raises
    ------
    InputError
        When its beginning cannot be read.
    """
    if not path.is_file() or path.stat().st_size < LONG_LOG_BYTES or is_workbook(path) or section.loggers:
        return None
    if any(one.parts for one in section.campaigns if one.log.name == path.name):
        return None
    source = log_source(path, in_parts=True)
    said = list(source.remarks())
    form = log_form(source, section, find_headings, said)
    with path.open("rb") as file:
        lines = b"\n" in file.read(1 << 20)
    return LongSource(source=source, form=form, section=section, said=said) if form.blockwise and lines else None


def read_long_log(log: LongSource, weight_pa_m: float, tell: Tell | None = None) -> tuple[Log, Screening, Plateaus]:
    """Read a long log and part its rows into plateaus and rows set aside.

    Rows are judged by the ordinary screens. Plateaus are looked for on blocks of rows, their edges among the rows
    again, and everything that is said of a plateau comes from all its rows.

    Parameters
    ----------
    log : LongSource
        The log.
    weight_pa_m : float
        Weight of the liquid, ρg [Pa/m].
    tell : callable, optional
        Is told the share of the work that is done, from 0 to 1.

    Returns
    -------
    log : Log
        Some of its rows, the extremes of many short windows among them.
    screening : Screening
        Fates of these rows, and runs that hold every row.
    plateaus : Plateaus
        K plateaus, statics included.

    Raises
    ------
    InputError
        As for an ordinary log, or when there is no room for temporary files.
    """
    told = tell or (lambda share: None)
    with RowStore(_kinds(log), _bytes_needed(log)) as store:
        rows = long_rows(log, store, lambda share: told(READ_SHARE * share))
        found, screening, plateaus = _judged(rows, log, weight_pa_m, told)
        told(1.0)
    assumed = tuple(dict.fromkeys(log.said))
    return replace(found, sha256=log.source.sha256, assumed=assumed), screening, plateaus


def _kinds(log: LongSource) -> dict[str, type]:
    """Return the columns that are stored, with their types."""
    kinds: dict[str, type] = {"line": np.uint32, "time": np.float64, "code": np.uint8, "flow": np.float64}
    kinds |= {f"p{tap}": np.float64 for tap in range(len(log.section.taps))}
    return kinds | ({"temperature": np.float64} if log.form.columns.temperature else {})


def _bytes_needed(log: LongSource) -> int:
    """Return about how much room the stored columns will take."""
    with log.source.open() as file:
        lengths = [len(file.readline()) for _ in range(log.form.rows.headings.line + 50)]
    usual = float(np.median([length for length in lengths[log.form.rows.headings.line :] if length] or [1]))
    row = sum(np.dtype(kind).itemsize for kind in _kinds(log).values())
    return int(row * log.source.path.stat().st_size / max(usual, 1.0))


def _judged(rows: LongRows, log: LongSource, weight_pa_m: float, told: Tell) -> tuple[Log, Screening, Plateaus]:
    """Screen the rows, find the plateaus and average them."""
    name, section = log.source.path.name, log.section
    screen_rows(rows, section, name)
    told(0.7)
    blocks = blocks_of(rows, name)
    fates = screen(blocks.log, section)
    segments = segments_of(rows, blocks, fates)
    if fates.block is None:
        set_outliers_aside(rows, segments, section)
    told(0.8)
    with ThreadPoolExecutor(1) as beside:
        shown = beside.submit(view, rows, blocks, fates, segments)
        pieces = pieces_of(rows, segments, blocks.width)
        plateaus = _plateaus(rows, section, (blocks, fates, segments, pieces), weight_pa_m)
        return *shown.result(), plateaus


def _plateaus(
    rows: LongRows, section: Section, found: tuple[Blocks, Screening, Segments, Pieces], weight_pa_m: float
) -> Plateaus:
    """Return the plateaus: what changes slowly from pieces of them, means and noise from all rows."""
    blocks, fates, segments, pieces = found
    totals = totals_of(pieces)
    log = _pieces_log(rows, blocks.log, pieces)
    block = None
    if fates.block is not None:
        place = np.searchsorted(blocks.place, pieces.first // blocks.width)
        block = fates.block[place]
    parts = Screening(reason=log.reason, plateau=pieces.number, counts=(), block=block)
    rough = summarise(log, parts, section, weight_pa_m)
    static = np.abs(totals.flow_m3_s) < still_below(witnesses(rows, log.file), section)
    noise = [
        _noise(rows, section, (segments, totals, rough), (reach, static), weight_pa_m) for reach in range(rows.taps - 1)
    ]
    warm = totals.temperature_degc
    return replace(
        rough,
        static=static,
        start_s=totals.time_s[0],
        end_s=totals.time_s[1],
        rows=totals.rows.astype(np.int64),
        flow_m3_s=totals.flow_m3_s,
        flow_slope_m3_s2=rough.flow_slope_m3_s2 if block is not None else mean_changes(rows, segments, totals),
        pressure_pa=totals.pressure_pa,
        temperature_degc=np.where(np.isfinite(warm), warm, rough.temperature_degc),
        random_pa=np.array([part.standard_pa for part in noise]),
        independent_rows=np.array([part.independent_rows for part in noise]),
        curvature_pa=np.array([part.curvature_pa for part in noise]),
        middle_s=None if block is None else totals.time_s[2],
    )


def _noise(
    rows: LongRows,
    section: Section,
    found: tuple[Segments, Totals, Plateaus],
    which: tuple[int, NDArray[np.bool_]],
    weight_pa_m: float,
) -> MeanNoise:
    """Return the noise of one reach; a service log's groups keep the one that its time blocks show."""
    segments, totals, rough = found
    reach, static = which
    rest = rest_difference(section, reach, weight_pa_m)
    slopes = difference_slopes(totals.flow_m3_s, totals.pressure_pa, static, rest, reach)
    grouped = rough.middle_s is not None
    noise = noise_of_totals(rows, None if grouped else segments, totals, reach, slopes)
    if not grouped:
        return noise
    return MeanNoise(rough.random_pa[reach], rough.independent_rows[reach], noise.curvature_pa)


def _pieces_log(rows: LongRows, like: Log, pieces: Pieces) -> Log:
    """Return the means of the pieces as a log."""
    count = np.maximum(pieces.rows, 1)
    warm = pieces.sums["nT"]
    known = np.where(warm > 0.0, pieces.sums["T"] / np.maximum(warm, 1.0), np.nan)
    pressure = [pieces.about[f"p{tap}"] + pieces.sums[f"p{tap}"] / count for tap in range(rows.taps)]
    return replace(
        like,
        line=pieces.line,
        time_s=pieces.sums["t"] / count,
        flow_m3_s=pieces.about["flow"] + pieces.sums["f"] / count,
        pressure_pa=np.array(pressure),
        temperature_degc=known if rows.temperature else None,
        reason=np.zeros(len(count), dtype="<U1"),
    )
