"""The noise of the plateau means of a long log, from sums and spectra over all its rows."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.long_rows import LongRows
from fieldfit.field.long_segments import Segments
from fieldfit.field.long_sums import Totals
from fieldfit.field.quantisation import steps_left_by
from fieldfit.field.row_noise import MeanNoise, integrated_time, noise_from_sums

Array = NDArray[np.float64]

FIRST_LAGS = 1 << 12
"""Distances in rows up to which autocorrelations are worked out at first."""
MOST_LAGS = 1 << 18
"""Distances beyond which nothing is looked for."""
PIECE = 1 << 17
"""Rows that are transformed together."""


def noise_of_totals(rows: LongRows, segments: Segments | None, totals: Totals, reach: int, slopes: Array) -> MeanNoise:
    """Find the standard error of each plateau's mean pressure difference from all its rows.

    The same numbers as `row_noise.noise_of_mean` gives, but for rounding.

    Parameters
    ----------
    rows : LongRows
        The log.
    segments : Segments or None
        The rows of each plateau; None to take rows as independent.
    totals : Totals
        Sums over each plateau; K of them.
    reach : int
        Which pair of neighbouring taps.
    slopes : (K,) array
        Change of the pressure difference with flow at each plateau [Pa s/m³].

    Returns
    -------
    MeanNoise
    """
    steps = (slopes * steps_left_by(totals.flow_squares, totals.rows - 1.0, float(rows.steps[0]))) ** 2
    for tap in (reach, reach + 1):
        squares = totals.pressure_squares[tap]
        steps += steps_left_by(squares, totals.rows - 1.0, float(rows.steps[1 + tap])) ** 2
    memory = _memory(rows, segments, totals, reach, slopes) if segments else 1.0
    return noise_from_sums(totals.of_reach(reach), slopes, memory, steps)


def _memory(rows: LongRows, segments: Segments, totals: Totals, reach: int, slopes: Array) -> float:
    """Return how many rows are worth one independent row, pooled over all plateaus."""
    parts = [
        _Residual(rows, (int(first), int(stop)), reach, totals.line(int(k), reach, slopes), int(totals.rows[k]))
        for first, stop, number in zip(segments.first, segments.stop, segments.number, strict=True)
        for k in np.flatnonzero(totals.number == number)
        if totals.rows[k] > 2
    ]
    lengths = np.array([part.count for part in parts], dtype=np.int64)
    if lengths.size == 0:
        return 1.0
    return _Alikeness(parts, int(np.max(lengths))).time(lengths)


class _Residual:
    """The rows of one plateau less what the flow explains, read part by part."""

    def __init__(
        self, rows: LongRows, span: tuple[int, int], reach: int, line: tuple[float, float], count: int
    ) -> None:
        self._rows, self._span, self._reach, self._line, self.count = rows, span, reach, line, count

    def parts(self) -> Iterator[Array]:
        """Yield the residuals in order, [Pa]."""
        store, slope, level = self._rows.store, self._line[0], self._line[1]
        for first, stop in store.spans(1, *self._span):
            good = store.read("code", first, stop) == 0
            left = store.read(f"p{self._reach}", first, stop) - store.read(f"p{self._reach + 1}", first, stop)
            if slope:
                left -= slope * store.read("flow", first, stop)
            left -= level
            yield left if good.all() else left[good]

    def products(self, lags: int) -> Array:
        """Return the sums of products of rows 0 to `lags` − 1 apart [Pa²]."""
        from scipy.fft import irfft, next_fast_len, rfft

        size = max(lags, min(PIECE, self.count))
        length = next_fast_len(size + 2 * lags, real=True)
        spectrum = np.zeros(length // 2 + 1, dtype=np.complex128)
        tail = np.empty(0)
        for part in self._in_pieces(size):
            # Each row of the piece with itself and the rows before it, those of the piece before included.
            behind = np.append(tail, part)
            before = rfft(behind, length)
            here = rfft(np.append(np.zeros(tail.size), part), length) if tail.size else before
            spectrum += here * before.conj()
            tail = behind[-lags:].copy()
        return np.asarray(irfft(spectrum, length)[:lags])

    def _in_pieces(self, size: int) -> Iterator[Array]:
        """Yield the residuals in pieces of one size, the last one shorter."""
        left = np.empty(0)
        for part in self.parts():
            left = np.append(left, part)
            while left.size >= size:
                yield left[:size]
                left = left[size:]
        if left.size:
            yield left


class _Alikeness:
    """Pooled autocorrelations of some plateaus' residuals, as far as they are asked for."""

    def __init__(self, parts: list[_Residual], longest: int) -> None:
        self._parts, self._longest = parts, longest
        self._found = np.empty(0)

    def time(self, lengths: NDArray[np.int64]) -> float:
        """Return the integrated autocorrelation time [rows]."""
        self._work_out(FIRST_LAGS)
        return integrated_time(self.at, lengths) if self._found.size else 1.0

    def at(self, lag: int) -> float:
        """Return the autocorrelation of rows so far apart; none beyond what is looked for."""
        while lag >= self._found.size:
            if self._found.size >= MOST_LAGS:
                return 0.0
            self._work_out(8 * self._found.size)
        return float(self._found[lag])

    def _work_out(self, lags: int) -> None:
        """Work out autocorrelations of rows up to so many apart."""
        pooled = np.zeros(lags)
        for part in self._parts:
            here = min(lags, part.count)
            products = part.products(here)
            pooled[:here] += products * part.count / (part.count - np.arange(here))
        self._found = pooled / pooled[0] if pooled[0] > 0.0 else np.empty(0)
