"""Flow from what a totaliser or a pulse counter shows."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldfit.errors import InputError
from fieldfit.field.log_columns import Column
from fieldfit.field.resolution import written_step

Array = NDArray[np.float64]

LONGEST_GAP = 3.0
"""Times the usual interval after which the mean flow over a gap is no longer that of its last row."""
FEW_MOVES = 10
"""Changes of a count from which it shows whether it runs on."""
FEW_DROPS = 2
"""Drops of a count that a rollover or a reset may explain."""
ROLLOVER_INCREASE = 3.0
"""Times the largest ordinary increase that a rollover may leave."""
SETTLE = (
    "Write totaliser = true under [flow] for a count that runs on, or totaliser = false for the volume of each row."
)


@dataclass(frozen=True, slots=True, kw_only=True)
class CountedFlow:
    """Flow worked out from counts; N rows."""

    flow_m3_s: Array
    """(N,) mean flow since the row before [m³/s]; NaN where there is none."""
    step_m3_s: float
    """Resolution: what one step of the count is worth over the usual interval, both ends together [m³/s]."""


def counted_flow(counts: Array, time_s: Array, column: Column, runs_on: bool | None, said: list[str]) -> CountedFlow:
    """Return the flow from a running count, or from the volume of each row.

    The flow of a row is what passed since the row before, over the time between; so the first row has none, nor has one
    behind a long gap. A count that falls to near nothing from the top of its figures has rolled over; any other fall
    that is larger than ordinary flow is a reset, and its row has no flow.

    Parameters
    ----------
    counts : ndarray
        (N,) what the column shows, in its own unit; NaN where missing.
    time_s : ndarray
        (N,) clock [s]; NaN where missing.
    column : Column
        What is counted, and the volume of one.
    runs_on : bool or None
        Whether the count runs on from row to row; None to tell by the counts.
    said : list of str
        Sentences on what was assumed are added here.

    Raises
    ------
    InputError
        When it cannot be told whether the count runs on.

    Notes
    -----
    The step is √2 times that of one count: both ends of a difference are rounded, so that its variance is twice that of
    one rounded reading.

    Examples
    --------
    >>> from fieldfit.field.units import unit
    >>> litres = Column(heading="V [L]", position=1, unit=unit("L", "volume"), counts="volume")
    >>> counted_flow(np.array([9990.0, 0.0, 10.0]), np.array([0.0, 10.0, 20.0]), litres, True, []).flow_m3_s
    array([  nan, 0.001, 0.001])
    """
    good = np.flatnonzero(np.isfinite(counts) & np.isfinite(time_s))
    latest = np.maximum.accumulate(time_s[good]) if good.size else time_s[:0]
    forward = np.append(True, time_s[good][1:] > latest[:-1])[: good.size]
    rows = good[forward]
    values, times = counts[rows], time_s[rows]
    between = np.diff(times)
    flow = np.full(len(counts), np.nan)
    if between.size == 0:
        return CountedFlow(flow_m3_s=flow, step_m3_s=0.0)
    running = _runs_on(values, column.counts == "pulses", said) if runs_on is None else runs_on
    usual = float(np.median(between))
    volumes = _increases(values, between, said) if running else values[1:]
    mean = np.where(between <= LONGEST_GAP * usual, volumes / between, np.nan)
    factor = column.unit.factor
    flow[rows[1:]] = mean * factor
    said.append(
        "The flow of a row was taken as what passed since the row before, over the time between; the first has none."
    )
    both_ends = np.sqrt(2.0) if running else 1.0
    return CountedFlow(flow_m3_s=flow, step_m3_s=float(written_step(values) * factor * both_ends / usual))


def _runs_on(values: Array, pulses: bool, said: list[str]) -> bool:
    """Return whether a count runs on from row to row, where the counts themselves show it."""
    changes = np.diff(values)
    drops, moves = int(np.count_nonzero(changes < 0.0)), int(np.count_nonzero(changes))
    if moves >= FEW_MOVES and (drops == 0 or (drops <= FEW_DROPS and moves > 25 * drops)):
        said.append("The count of the flow column runs on from row to row.")
        return True
    if pulses and moves >= FEW_MOVES and drops > 0.1 * moves:
        said.append("The flow column was taken as the pulses of each row: they do not run on from row to row.")
        return False
    # A volume that goes up and down may as well be a flow whose unit was written without its time.
    unit = "" if pulses else " Where the column is a flow, write its unit with the time, such as m3/h."
    raise InputError("it is not clear whether the count runs on from row to row", f"{SETTLE}{unit}")


def _increases(values: Array, between: Array, said: list[str]) -> Array:
    """Return how much a running count grew from row to row; NaN at a reset."""
    changes = np.diff(values)
    rising = changes[changes > 0.0] / between[changes > 0.0]
    most = float(np.max(rising, initial=0.0))
    drops = np.flatnonzero(changes < -most * between)
    if drops.size == 0:
        return changes
    top = 10.0 ** np.ceil(np.log10(max(float(np.max(values)), 1e-9) * (1.0 + 1e-12)))
    rolled = changes[drops] + top
    rollover = rolled <= ROLLOVER_INCREASE * most * between[drops]
    changes[drops] = np.where(rollover, rolled, np.nan)
    if rollover.any():
        said.append(f"The count rolled over at {top:.15g}; what passed was counted through.")
    if not rollover.all():
        said.append(f"The count was reset {int(np.count_nonzero(~rollover))} times; the rows there have no flow.")
    return changes
