"""Roughness and C over the years that were tested, with their bands and events."""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from fieldfit.decisions.ageing import Ageing
from fieldfit.decisions.forecast import Fan
from fieldfit.decisions.points import Point
from fieldfit.report.digits import litres
from fieldfit.report.figures import style

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

Array = NDArray[np.float64]
BAND_HALF, BAND_MOST = style.OWN_BAND, style.WIDE_BAND
EVENTS = {"laid": "laid", "first test": "", "cleaned": "cleaned", "lined": "lined", "unmarked": "better,\nunexplained"}


def year_of(day: dt.date) -> float:
    """Return a day as a year with its fraction.

    Examples
    --------
    >>> round(year_of(dt.date(2020, 7, 1)), 2)
    2020.5
    """
    start = dt.date(day.year, 1, 1).toordinal()
    return day.year + (day.toordinal() - start) / (dt.date(day.year + 1, 1, 1).toordinal() - start)


def timeline(ageing: Ageing) -> Figure:
    """Draw roughness above C over the past, with tests, events and the fitted growth.

    Parameters
    ----------
    ageing : Ageing
        How a reach ages.

    Returns
    -------
    matplotlib.figure.Figure
        The figure.
    """
    figure = style.blank(122.0)
    years = np.array([year_of(day) for day in ageing.forecast.dates])
    first, last = _ends(ageing)
    wall = style.axes(figure, 12.0, 68.0, 6.0, 14.0)
    c = style.axes(figure, 12.0, 11.0, 6.0, 67.0)
    points, forecast = ageing.points, ageing.forecast
    rough = [tuple(1e3 * value for value in (*point.roughness_m, *point.roughness_own_m)) for point in points]
    _panel(wall, (years, ageing), forecast.equivalent_m, 1e3, rough)
    _panel(c, (years, ageing), forecast.c, 1.0, [(*point.c, *point.c_own) for point in points])
    for ax, low in ((wall, 0.0), (c, None)):
        _frame(ax, (first, last), years, low)
        _events(ax, ageing, named=ax is wall)
    style.label(wall, "", "equivalent roughness [mm]")
    style.label(c, "year", f"Hazen–Williams C at {litres(ageing.duty.flow_m3_s)}")
    row_key(c, 1.10, (*FAN_KEY, ("reading", style.READING, "test, by all campaigns together")))
    return figure


FAN_KEY = (
    ("line", style.READING, "even odds"),
    ("band", BAND_HALF, "50 %"),
    ("band", BAND_MOST, "95 %"),
)


def row_key(ax: Axes, height: float, entries: Sequence[tuple[str, str, str]]) -> None:
    """Explain marks side by side above the right half of some axes."""
    width = ax.get_position().width * style.WIDTH_MM
    place = width + 3.0
    for mark, colour, text in reversed(entries):
        place -= 10.0 + 1.36 * len(text)
        style.key(ax, (place / width, height), [(mark, colour, text)])
        ax.lines[-1].set_clip_on(False)


def _ends(ageing: Ageing) -> tuple[float, float]:
    """Return the years shown: a little beyond the tests, from the laying when it lies near."""
    first, last = year_of(ageing.points[0].date), year_of(ageing.points[-1].date)
    start = year_of(ageing.stages[0].start)
    wide = max(last - first, 4.0)
    alone = len(ageing.points) == 1
    low = start if alone or first - start < 1.5 * wide else first - 0.15 * wide
    return low - 0.02 * wide, last + 0.06 * (last - low)


def _panel(ax: Axes, when: tuple[Array, Ageing], fan: Fan, scale: float, points: list[tuple[float, ...]]) -> None:
    """Draw one quantity's fan in each stage, and its tests."""
    years, ageing = when
    for number in range(len(ageing.stages)):
        here = ageing.forecast.stage == number
        draw_fan(ax, years[here], fan, scale, here)
    x = np.array([year_of(point.date) for point in ageing.points])
    values = np.array(points, dtype=np.float64)
    ax.vlines(x, values[:, 0], values[:, 2], colors=style.READING, linewidth=0.8, zorder=4)
    ax.vlines(x, values[:, 3], values[:, 4], colors=style.READING, linewidth=2.8, zorder=4)
    style.points(ax, x, values[:, 1])


def draw_fan(ax: Axes, years: Array, fan: Fan, scale: float, here: NDArray[np.bool_]) -> None:
    """Draw median, 50 % and 95 % band."""
    ax.fill_between(years, scale * fan.most[0][here], scale * fan.most[1][here], color=BAND_MOST, linewidth=0)
    ax.fill_between(years, scale * fan.half[0][here], scale * fan.half[1][here], color=BAND_HALF, linewidth=0)
    ax.plot(years, scale * fan.middle[here], color=style.READING, **style.STROKES["line"])


def _frame(ax: Axes, x: tuple[float, float], years: Array, low: float | None) -> None:
    """Set the ranges to what is in sight."""
    ends = []
    for collection in ax.collections:
        for path in collection.get_paths():
            corners = np.asarray(path.vertices, dtype=np.float64)
            inside = corners[(corners[:, 0] >= x[0]) & (corners[:, 0] <= x[1]), 1]
            ends += [float(inside.min()), float(inside.max())] if inside.size else []
    bottom, top = min(ends), max(ends)
    room = 0.06 * (top - bottom)
    style.frame(ax, x, (bottom - room if low is None else low, top + room), (9, 5))
    ticks = style.steps(*x, 9)
    whole = ticks[ticks == np.round(ticks)]
    style.ticks(ax, "x", whole, [f"{year:.0f}" for year in whole])


def _events(ax: Axes, ageing: Ageing, named: bool) -> None:
    """Mark what began each stage, and instruments that were replaced."""
    low, high = ax.get_xlim()
    marks = [(year_of(stage.start), EVENTS[stage.event]) for stage in ageing.stages]
    marks += [(year_of(point.date), text) for point in ageing.points for text in _replaced(point)]
    for place, text in marks:
        if text and low <= place <= high:
            ax.axvline(place, color=style.NEW, linewidth=0.8, dashes=(2, 2), zorder=1)
    shown = sorted((place, text) for place, text in marks if text and low <= place <= high)
    if named and shown:
        width = ax.get_position().width * style.WIDTH_MM
        places = style.spread([(place - low) / (high - low) for place, _ in shown], 25.0 / width, 0.0, 1.0)
        for share, (_, text) in zip(places, shown, strict=True):
            style.write(
                ax, (share, 1.14), text, style.NEW, transform=ax.transAxes, ha="center", va="bottom", linespacing=1.1
            )


def _replaced(point: Point) -> list[str]:
    """Return words on new instruments, each once."""
    return [text.replace(" at ", "\nat ") for text in point.events if text.startswith(("meter ", "gauge "))]
