"""The years ahead: C, head loss and capacity at the duty, each with its bands and threshold."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from fieldfit.decisions.ageing import Ageing
from fieldfit.decisions.forecast import Fan
from fieldfit.report.digits import litres
from fieldfit.report.figures import style
from fieldfit.report.figures.timeline import FAN_KEY, draw_fan, row_key, year_of

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

Array = NDArray[np.float64]
Panel = tuple[str, Fan, float, float | None]


def forecast(ageing: Ageing) -> Figure:
    """Draw what the present stage brings, from its start to the end of the forecast.

    Parameters
    ----------
    ageing : Ageing
        How a reach ages.

    Returns
    -------
    matplotlib.figure.Figure
        The figure.
    """
    panels = _panels(ageing)
    tall, gap = 34.0, 14.0
    height = 13.0 + len(panels) * (tall + gap)
    figure = style.blank(height)
    for number, panel in enumerate(panels):
        top = 13.0 + number * (tall + gap)
        ax = style.axes(figure, 12.0, height - top - tall, 31.0, top)
        _draw(ax, ageing, panel)
        style.label(ax, "year" if number == len(panels) - 1 else "", panel[0])
        if number == 0:
            row_key(ax, 1.09, FAN_KEY)
    return figure


def _panels(ageing: Ageing) -> list[Panel]:
    """Return name, fan, scale and threshold of each quantity."""
    found, duty = ageing.forecast, ageing.duty
    limits = {crossing.what: crossing.limit for crossing in ageing.crossings}
    flow = litres(duty.flow_m3_s)
    panels: list[Panel] = [
        (f"C at {flow}", found.c, 1.0, limits.get("c")),
        (f"head loss at {flow} [m]", found.head_loss_m, 1.0, limits.get("head_loss")),
    ]
    if found.capacity_m3_s is not None and duty.head_m is not None:
        name = f"flow at {duty.head_m:g} m of head [L/s]"
        panels.append((name, found.capacity_m3_s, 1e3, limits.get("capacity")))
    return panels


def _draw(ax: Axes, ageing: Ageing, panel: Panel) -> None:
    """Draw one quantity over the present stage."""
    _, fan, scale, limit = panel
    here = ageing.forecast.stage == len(ageing.stages) - 1
    years = np.array([year_of(day) for day in ageing.forecast.dates])[here]
    shown = years >= max(float(years[0]), year_of(ageing.visits[-1].date) - 0.5 * _ahead(ageing))
    part = np.zeros_like(here)
    part[np.flatnonzero(here)[shown]] = True
    draw_fan(ax, years[shown], fan, scale, part)
    low, high = scale * float(np.min(fan.most[0][part])), scale * float(np.max(fan.most[1][part]))
    labels = [(scale * float(fan.middle[part][-1]), "even odds", style.READING)]
    if limit is not None:
        low, high = min(low, scale * limit), max(high, scale * limit)
        ax.axhline(scale * limit, color=style.NEW, **style.STROKES["dashes"])
        labels.append((scale * limit, f"threshold {scale * limit:g}", style.NEW))
    room = 0.08 * (high - low)
    style.frame(ax, (float(years[shown][0]), float(years[-1])), (low - room, high + room), (9, 5))
    ticks = style.steps(float(years[shown][0]), float(years[-1]), 9)
    whole = ticks[ticks == np.round(ticks)]
    style.ticks(ax, "x", whole, [f"{year:.0f}" for year in whole])
    ax.axvline(year_of(ageing.visits[-1].date), color=style.QUIET, linewidth=0.8, dashes=(1, 1.6))
    style.write(ax, (year_of(ageing.visits[-1].date), high + room), " last test", style.QUIET, va="top", fontsize=6.5)
    style.side_labels(ax, labels)


def _ahead(ageing: Ageing) -> float:
    """Return the years from the last test to the end of the forecast."""
    return year_of(ageing.forecast.dates[-1]) - year_of(ageing.visits[-1].date)
