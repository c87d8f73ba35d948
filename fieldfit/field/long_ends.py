"""How the flow changes over each plateau of a long log, from the rows at its ends."""

from __future__ import annotations

from collections.abc import Iterable

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.long_rows import LongRows
from fieldfit.field.long_segments import Segments
from fieldfit.field.long_sums import Totals
from fieldfit.field.stretches import end_rows

Array = NDArray[np.float64]


def mean_changes(rows: LongRows, segments: Segments, totals: Totals) -> Array:
    """Return the mean rate of change of the flow over each plateau [m³/s²], as `stretches.mean_change` has it.

    Parameters
    ----------
    rows : LongRows
        The log, screened.
    segments : Segments
        The rows of each plateau, one range for each.
    totals : Totals
        Sums over the K plateaus.

    Returns
    -------
    (K,) array
    """
    found = np.zeros(len(totals.number))
    place = {int(number): index for index, number in enumerate(totals.number)}
    for first, stop, number in zip(segments.first, segments.stop, segments.number, strict=True):
        index = place.get(int(number))
        if index is None:
            continue
        few = end_rows(int(totals.rows[index]))
        spans = list(rows.store.spans(1, int(first), int(stop)))
        head, tail = _mean_of(rows, spans, few), _mean_of(rows, reversed(spans), few, from_end=True)
        time, flow = tail - head
        found[index] = flow / time if time > 0.0 else 0.0
    return found


def _mean_of(rows: LongRows, spans: Iterable[tuple[int, int]], few: int, from_end: bool = False) -> Array:
    """Return mean time and flow of the first rows that count, or of the last ones."""
    total, left = np.zeros(2), few
    for first, stop in spans:
        good = np.flatnonzero(rows.store.read("code", first, stop) == 0)
        taken = good[-left:] if from_end else good[:left]
        total += [float(np.sum(rows.store.read(name, first, stop)[taken])) for name in ("time", "flow")]
        left -= len(taken)
        if left == 0:
            break
    return np.asarray(total / few)
