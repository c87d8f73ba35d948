"""The rows of a long log in SI units, read block by block into temporary files."""

from __future__ import annotations

import datetime as dt
import re
from collections import deque
from collections.abc import Callable, Iterator
from concurrent.futures import Future, ThreadPoolExecutor
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from fieldfit.errors import InputError
from fieldfit.field.channel_values import flow_of, flow_step, pressure_steps, pressures_of
from fieldfit.field.even_sample import Sample
from fieldfit.field.line_blocks import BlockSource, LineBlock, line_blocks
from fieldfit.field.log_clock import log_clock
from fieldfit.field.log_form import LogForm, say_form
from fieldfit.field.log_rows import Rows, read_rows
from fieldfit.field.log_source import LogSource
from fieldfit.field.long_clock import LongClock
from fieldfit.field.plain_rows import PlainRows, plain_rows
from fieldfit.field.resolution import written_step
from fieldfit.field.row_store import RowStore
from fieldfit.field.section import Section
from fieldfit.field.units import shown

Array = NDArray[np.float64]
Whole = NDArray[np.int64]
Tell = Callable[[float], None]

MOST_LINES_TOLD = 10
"""Lines that are named one by one in sentences on what was assumed."""
READERS = 2
"""Blocks that are read at the same time; the parser leaves the interpreter to others meanwhile."""


@dataclass(frozen=True, slots=True, kw_only=True)
class LongSource:
    """A log that is to be read as a long one."""

    source: LogSource
    """The file."""
    form: LogForm
    """How it is written."""
    section: Section
    """Whose log it is."""
    said: list[str]
    """Sentences on what was assumed so far."""


@dataclass(frozen=True, slots=True, kw_only=True)
class LongRows:
    """The rows of a long log; T taps."""

    store: RowStore
    """Columns ``time`` [s], ``line``, ``flow`` [m³/s], ``p0`` to ``p(T−1)`` [Pa], ``temperature`` [°C], ``code``."""
    taps: int
    """Number of taps."""
    start: dt.datetime | None
    """Clock time of the first row that has one."""
    steps: Array
    """(1 + T,) resolution of flow and pressures [SI]."""
    flow_ends_m3_s: tuple[float, float]
    """Smallest and largest flow [m³/s]."""
    runs: tuple[int, ...]
    """(T,) runs of equal readings in each pressure column."""
    temperature: bool
    """Whether any row has a temperature."""

    @property
    def channels(self) -> tuple[str, ...]:
        """Names of the columns that a row cannot do without, flow first."""
        return ("flow", *(f"p{tap}" for tap in range(self.taps)))


def long_rows(log: LongSource, store: RowStore, tell: Tell) -> LongRows:
    """Read all rows of a log.

    Blocks whose rows are all alike are read at the parser's speed, two at a time; a block with anything else in it,
    such as a footer or a mistake, is read as an ordinary log is. Memory holds a few blocks.

    Parameters
    ----------
    log : LongSource
        The log; sentences on what was assumed are added to it.
    store : RowStore
        Takes the rows.
    tell : callable
        Is told the share of the file that was read.

    Returns
    -------
    LongRows

    Raises
    ------
    InputError
        As for an ordinary log, with the line of the file.
    """
    reader = _Reader(log, store)
    line = log.form.rows.headings.line + 1
    for block, plain in _read_ahead(log, reader):
        if plain is not None and reader.clock.begun:
            count = len(next(iter(plain.numbers.values())))
            reader.keep(np.arange(line, line + count), plain.numbers, reader.time_of(plain))
            line += count
        else:
            reader.carefully(block, line)
            line += block.text.count(b"\n")
        tell(block.share)
    return reader.outcome()


def _read_ahead(log: LongSource, reader: _Reader) -> Iterator[tuple[LineBlock, PlainRows | None]]:
    """Yield the blocks in order, each read at full speed where it can be, while the next ones are being read."""
    import pandas as pd  # noqa: F401  a first import in two threads at once would wait for itself

    form = log.form
    clock = form.columns.time.position if form.columns.time and form.columns.time.unit is None else None
    gaps = False
    waiting: deque[tuple[LineBlock, Future[PlainRows | None]]] = deque()
    with ThreadPoolExecutor(READERS) as pool:
        try:
            for block in line_blocks(log.source, form.rows.headings.line):
                waiting.append((block, pool.submit(plain_rows, block, reader.form.rows, clock, gaps)))
                if len(waiting) > READERS + 1:
                    ready, result = waiting.popleft()
                    plain = result.result()
                    gaps = plain is not None and plain.gaps
                    yield ready, plain
            while waiting:
                ready, result = waiting.popleft()
                yield ready, result.result()
        finally:
            for _, result in waiting:
                result.cancel()


class _Reader:
    """Takes blocks in order and keeps note of what the screens need to know of the whole log."""

    def __init__(self, log: LongSource, store: RowStore) -> None:
        self._log, self._store, self.form = log, store, log.form
        self._lines_told = 0
        self._columns = log.form.columns.instruments
        self.clock = LongClock(log.form.columns.time, log.source.path.name, log.said)
        self._samples = {name: Sample() for name in self._columns}
        self._ends = [np.inf, -np.inf]
        self._runs: list[int] = [0] * len(log.section.taps)
        self._last = [np.nan] * len(log.section.taps)
        self._absent = 0

    def time_of(self, plain: PlainRows) -> Array:
        """Return the time of plain rows [s since the log's first row]."""
        if plain.stamp is not None:
            return self.clock.of_stamps(plain.stamp, plain.universal)
        return self.clock.of_numbers(plain.numbers)

    def carefully(self, block: LineBlock, line: int) -> None:
        """Read and keep a block as an ordinary log is read; `line` is its first line."""
        source, form, said = self._log.source, self.form.rows, list[str]()
        here = replace(form, headings=replace(form.headings, line=0))
        one = BlockSource(path=source.path, sha256=source.sha256, encoding="utf-8", block=block)
        try:
            rows, decimal = read_rows(one, here, said)
            self._take_mark(decimal, source.path.name)
            time = self._clock(rows, said)
        except InputError as error:
            raise moved(error, source.path.name, line - 1) from None
        self._say([moved_sentence(sentence, line - 1) for sentence in said])
        self.keep(rows.line + line - 1, dict(rows.numbers), time)

    def _take_mark(self, decimal: str, file: str) -> None:
        """Go on with the decimal mark that was found, unless rows before were written with the other one."""
        if decimal == self.form.rows.decimal:
            return
        if any(np.any(sample.values % 1.0) for sample in self._samples.values()):
            seen = "rows from here on have another decimal mark than those above"
            advice = "Export the log with one decimal mark throughout and no thousands separators."
            raise InputError(seen, advice, f"{file}:1")
        self.form = replace(self.form, rows=replace(self.form.rows, decimal=decimal))

    def _say(self, said: list[str]) -> None:
        """Keep sentences on what was assumed, of those on single lines only the first ones."""
        lines = [sentence for sentence in said if sentence.startswith("Line ")]
        for one in said:
            sentence = one
            if one in lines and self._lines_told >= MOST_LINES_TOLD:
                sentence = "More such lines follow further down."
            self._lines_told += sentence in lines
            if sentence not in self._log.said:
                self._log.said.append(sentence)

    def _clock(self, rows: Rows, said: list[str]) -> Array:
        """Return the time of carefully read rows [s since the log's first row]."""
        column = self.form.columns.time
        if rows.line.size == 0 or column is None:
            return np.full(rows.line.size, np.nan)
        if not self.clock.begun:
            known = (Path(self._log.source.path), self._log.section)
            clock, _ = log_clock(rows, column, self.form.above, known, said)
            self.clock.begin(clock.start)
        if column.unit is not None:
            return self.clock.of_numbers(rows.numbers)
        return self.clock.of_texts(rows.texts[column.position], rows.line, said)

    def keep(self, line: Whole, numbers: dict[int, Array], time: Array) -> None:
        """Store rows in SI units."""
        if line.size == 0:
            return
        values = {}
        for name, column in self._columns.items():
            self._samples[name].add(numbers[column.position])
            values[name] = numbers[column.position] * column.unit.factor + column.unit.offset
        warm = self._temperature(numbers)
        flow, pressure = flow_of(self._log.section, values), pressures_of(self._log.section, values, warm)
        self._ends = [min(self._ends[0], np.fmin.reduce(flow)), max(self._ends[1], np.fmax.reduce(flow))]
        columns: dict[str, NDArray[Any]] = {"line": line, "time": time, "flow": flow}
        for tap, one in enumerate(pressure):
            self._runs[tap] += int(np.count_nonzero(one[1:] != one[:-1])) + int(one[0] != self._last[tap])
            self._last[tap] = float(one[-1])
            columns[f"p{tap}"] = one
        self._store.append(columns | ({} if warm is None else {"temperature": warm}))

    def _temperature(self, numbers: dict[int, Array]) -> Array | None:
        """Return the liquid's temperature [°C], None for a log without."""
        column = self.form.columns.temperature
        if column is None:
            return None
        warm = numbers[column.position] * column.unit.factor + column.unit.offset
        self._absent += int(np.count_nonzero(np.isnan(warm)))
        return warm

    def outcome(self) -> LongRows:
        """Check the columns as wholes and return the rows."""
        form, file, section = self.form, self._log.source.path.name, self._log.section
        if self._store.rows == 0:
            where = f"{file}:{form.rows.headings.line}"
            raise InputError("no rows stand below the headings", "Export the log again.", where)
        say_form(form.rows.headings, form.rows.decimal, self._log.said)
        values, steps = {}, {}
        for name, column in self._columns.items():
            sample = self._samples[name].values
            if sample.size == 0:
                where = f"{file}, column '{shown(column.heading)}'"
                raise InputError("no row has a value", "Check that the section file names the right column.", where)
            values[name] = sample * column.unit.factor + column.unit.offset
            steps[name] = written_step(sample) * column.unit.factor
        return LongRows(
            store=self._store,
            taps=len(section.taps),
            start=self.clock.start,
            steps=np.append(flow_step(section, values, steps), pressure_steps(section, steps)),
            flow_ends_m3_s=(float(self._ends[0]), float(self._ends[1])),
            runs=tuple(self._runs),
            temperature=self._has_temperature(),
        )

    def _has_temperature(self) -> bool:
        """Return whether any row has a temperature, and say where it is missing."""
        column, rows = self.form.columns.temperature, self._store.rows
        if column is None or not self._absent:
            return column is not None
        if self._absent == rows:
            self._log.said.append(f"The column '{shown(column.heading)}' is empty and was not used.")
            return False
        self._log.said.append(
            f"The temperature is missing in {self._absent} of {rows} rows; the others stand for them."
        )
        return True


def moved(error: InputError, file: str, lines: int) -> InputError:
    """Return an error on a block of a file with the line of the file.

    Examples
    --------
    >>> str(moved(InputError("this", "Do.", "a.csv:3, column 'p'"), "a.csv", 100))
    "a.csv:103, column 'p': this. Do."
    """
    found = re.match(rf"{re.escape(file)}:(\d+)", error.where)
    if not found:
        return error
    return InputError(error.seen, error.do, f"{file}:{int(found[1]) + lines}{error.where[found.end() :]}")


def moved_sentence(sentence: str, lines: int) -> str:
    """Return a sentence on a line of a block with the line of the file.

    Examples
    --------
    >>> moved_sentence("Line 3 ('Average') is no reading and was left out.", 100)
    "Line 103 ('Average') is no reading and was left out."
    """
    return re.sub(r"^Line (\d+) ", lambda found: f"Line {int(found[1]) + lines} ", sentence)
