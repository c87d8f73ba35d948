"""When thresholds are crossed: probability against the year."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from fieldfit.decisions.ageing import Ageing
from fieldfit.decisions.forecast import Crossing
from fieldfit.report.figures import style
from fieldfit.report.figures.timeline import year_of
from fieldfit.report.trend_words import threshold_words

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

Array = NDArray[np.float64]
COLOURS = {"c": style.READING, "head_loss": style.NEW, "capacity": style.QUIET}
STROKES = {"c": "line", "head_loss": "dashes", "capacity": "line"}
SHARES = (0.1, 0.5, 0.9)
LEAST_YEARS = 5.0


def crossings(ageing: Ageing) -> Figure:
    """Draw the probability that each threshold has been crossed by a year, marked at 10, 50 and 90 %.

    Parameters
    ----------
    ageing : Ageing
        How a reach ages, with one threshold or more.

    Returns
    -------
    matplotlib.figure.Figure
        The figure.
    """
    figure = style.blank(66.0)
    ax = style.axes(figure, 12.0, 11.0, 42.0, 8.0)
    last = year_of(ageing.visits[-1].date)
    reach = max(LEAST_YEARS, *(_until(crossing) for crossing in ageing.crossings))
    labels = []
    for crossing in ageing.crossings:
        years, share = _line(crossing, reach)
        colour = COLOURS[crossing.what]
        ax.plot(last + years, 100.0 * share, color=colour, **style.STROKES[STROKES[crossing.what]])
        _marks(ax, crossing, colour)
        name = threshold_words(crossing, ageing).replace(" at ", "\nat ", 1)
        labels.append((100.0 * float(np.interp(reach, years, share)), name, colour))
    style.frame(ax, (last, last + reach), (0.0, 100.0), (9, 5))
    ticks = style.steps(last, last + reach, 9)
    whole = ticks[ticks == np.round(ticks)]
    style.ticks(ax, "x", whole, [f"{year:.0f}" for year in whole])
    ax.set_ylim(-3.0, 103.0)
    by = ageing.crossings[0].by
    if by is not None and last < year_of(by) < last + reach:
        ax.axvline(year_of(by), color=style.QUIET, linewidth=0.8, dashes=(1, 1.6))
        style.write(ax, (year_of(by), 1.0), f" {by.isoformat()}", style.QUIET, va="bottom", fontsize=6.5)
    style.label(ax, "year", "probability that it has been reached [%]")
    style.side_labels(ax, labels, 4.2)
    return figure


def _line(crossing: Crossing, reach: float) -> tuple[Array, Array]:
    """Return years after the last test and probability, from the last test to the end of the figure."""
    curve = np.array([(0.0, crossing.already), *(pair for pair in crossing.curve if 0.0 < pair[0] < reach)])
    end = (
        float(np.mean([year <= reach for year, _ in crossing.curve])) * (1.0 - crossing.never)
        if crossing.curve
        else 0.0
    )
    return np.append(curve[:, 0], reach), np.append(curve[:, 1], max(end, float(curve[-1, 1])))


def _until(crossing: Crossing) -> float:
    """Return how many years the curve needs."""
    return min(1.1 * (max((year for year, _ in crossing.curve), default=0.0) + 1.0), 60.0)


def _marks(ax: Axes, crossing: Crossing, colour: str) -> None:
    """Mark the days of 10, 50 and 90 %."""
    found = [
        (year_of(day), 100.0 * share) for day, share in zip(crossing.dates, SHARES, strict=True) if day is not None
    ]
    if found:
        x, y = zip(*found, strict=True)
        ax.plot(x, y, "o", color=colour, markersize=4.4, markeredgecolor=style.PAPER, markeredgewidth=0.7, zorder=5)
