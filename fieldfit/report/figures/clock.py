"""Ticks along a log's time."""

from __future__ import annotations

import datetime as dt
import math
from typing import TYPE_CHECKING

from fieldfit.field.log import Log
from fieldfit.report.figures import style

if TYPE_CHECKING:
    from matplotlib.axes import Axes

MINUTE, HOUR, DAY = 60.0, 3600.0, 86400.0
STEPS = (1.0, 2.0, 5.0, 10.0, 15.0, 30.0)
STEPS_S = (
    *STEPS,
    *(s * MINUTE for s in STEPS),
    *(s * HOUR for s in (1.0, 2.0, 3.0, 6.0, 12.0)),
    *(s * DAY for s in (1.0, 2.0, 5.0, 10.0, 20.0, 50.0, 100.0, 200.0, 500.0, 1000.0)),
)
"""Steps between ticks that people read easily [s]."""


def clock_ticks(ax: Axes, log: Log, first_s: float, last_s: float, wanted: int = 7) -> str:
    """Set ticks and range for times from first to last, and return the name of the axis.

    Parameters
    ----------
    ax : Axes
        Axes whose x is seconds since the log's first row, or the row of a sheet.
    log : Log
        Knows the clock, if there is one.
    first_s, last_s : float
        Ends of the range [s].
    wanted : int
        About how many ticks.

    Returns
    -------
    str
        Name of the axis with its unit.
    """
    room = 0.02 * (last_s - first_s) or 1.0
    low, high = first_s - room, last_s + room
    if log.kind == "sheet":
        name = _rows(ax, first_s, last_s)
    elif log.start is None:
        unit, name = next((u, n) for u, n in _UNITS if last_s - first_s > 2.0 * u or u == 1.0)
        marks = style.steps(low / unit, high / unit, wanted)
        style.ticks(ax, "x", marks * unit, [f"{mark:g}" for mark in marks + 0.0])
    else:
        name = _clock(ax, log.start, low, high, wanted)
    ax.set_xlim(low, high)
    return name


_UNITS = ((DAY, "time since the first row [days]"), (HOUR, "time since the first row [h]"),
          (MINUTE, "time since the first row [min]"), (1.0, "time since the first row [s]"))  # fmt: skip


def _rows(ax: Axes, first: float, last: float) -> str:
    step = max(1, math.ceil((last - first) / 10.0))
    rows = range(math.ceil(first), math.floor(last) + 1, step)
    style.ticks(ax, "x", list(rows), [str(r) for r in rows])
    return "reading, in the order of the sheet [–]"


def _clock(ax: Axes, start: dt.datetime, low: float, high: float, wanted: int) -> str:
    step = next((s for s in STEPS_S if (high - low) / s <= wanted), STEPS_S[-1])
    midnight = start.replace(hour=0, minute=0, second=0, microsecond=0)
    since = (start - midnight).total_seconds()
    marks = [k * step - since for k in range(math.ceil((low + since) / step), math.floor((high + since) / step) + 1)]
    times = [midnight + dt.timedelta(seconds=mark + since) for mark in marks]
    if step >= DAY:
        style.ticks(ax, "x", marks, [f"{t.day} {t:%b}" for t in times])
        return f"day [{start.year}]"
    form = "%H:%M:%S" if step < MINUTE else "%H:%M"
    texts = [f"{t.day} {t:%b}" if t.time() == dt.time() and high - low > DAY else f"{t:{form}}" for t in times]
    style.ticks(ax, "x", marks, texts)
    return f"clock time [{'h:min:s' if step < MINUTE else 'h:min'}]"
