"""The friction-factor chart with the readings in it."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

from fieldfit.hydraulics.friction import laminar
from fieldfit.hydraulics.regime import LAMINAR_LIMIT, TURBULENT_LIMIT
from fieldfit.report.figures import style
from fieldfit.report.figures.curves import FAMILY, Curves, interval
from fieldfit.report.figures.marks import key

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

LOWEST_REYNOLDS = 600.0
SUPERSCRIPTS = str.maketrans("0123456789", "⁰¹²³⁴⁵⁶⁷⁸⁹")
FACTORS = (0.006, 0.008, 0.01, 0.015, 0.02, 0.03, 0.04, 0.06, 0.08, 0.1, 0.15, 0.2, 0.3)


def friction_chart(curves: Curves) -> Figure:
    """Draw friction factor against Reynolds number, on logarithmic scales.

    Parameters
    ----------
    curves : Curves
        Readings and lines of one reach.

    Returns
    -------
    matplotlib.figure.Figure
        The figure.
    """
    figure = style.blank(88.0)
    ax = style.axes(figure, 12.0, 11.0, 31.0, 8.0)
    _scales(ax, curves)
    _family(ax, curves)
    _found(ax, curves)
    points = curves.points
    shown = points.friction_factor > 0.0
    aside, used = shown & ~points.used, shown & points.used
    style.crosses(ax, points.reynolds[aside], points.friction_factor[aside])
    style.points(
        ax,
        points.reynolds[used],
        points.friction_factor[used],
        interval(points.friction_factor[used], points.friction_factor_relative[used]),
    )
    entries = key(curves)
    # Below the smooth line the chart is always empty.
    left = 1.02 * math.log(TURBULENT_LIMIT / ax.get_xlim()[0]) / math.log(ax.get_xlim()[1] / ax.get_xlim()[0])
    style.key(ax, (left, 0.035 + 4.1 * (len(entries) - 1) / 69.0), entries)
    style.label(ax, "Reynolds number [–]", "Darcy friction factor [–]")
    return figure


def _scales(ax: Axes, curves: Curves) -> None:
    """Set the range: always the whole turbulent family, and what the readings need beyond it."""
    from matplotlib.ticker import NullLocator

    ax.set_xscale("log")
    ax.set_yscale("log")
    ax.xaxis.set_minor_locator(NullLocator())
    ax.yaxis.set_minor_locator(NullLocator())
    factors = curves.points.friction_factor
    factors = factors[factors > 0.0]
    low = min(0.0078, 0.85 * float(factors.min(initial=1.0)))
    high = max(0.11, 1.15 * float(factors.max(initial=0.0)))
    low, high = max(low, 0.002), min(high, 0.4)
    lowest = min(LOWEST_REYNOLDS, 0.8 * float(curves.points.reynolds.min(initial=LOWEST_REYNOLDS)))
    decades = range(math.ceil(math.log10(max(lowest, 1.0))), round(math.log10(curves.chart.reynolds[-1])) + 1)
    style.ticks(ax, "x", [10.0**d for d in decades], [f"10{str(d).translate(SUPERSCRIPTS)}" for d in decades])
    factor_ticks = [f for f in FACTORS if low <= f <= high]
    style.ticks(ax, "y", factor_ticks, [f"{f:g}" for f in factor_ticks])
    ax.set_xlim(max(lowest, 1.0), float(curves.chart.reynolds[-1]))
    ax.set_ylim(low, high)


def _family(ax: Axes, curves: Curves) -> None:
    """Draw laminar flow and the family of relative roughnesses, named at the right."""
    from matplotlib.collections import LineCollection

    reynolds = curves.chart.reynolds
    slow = np.geomspace(ax.get_xlim()[0], LAMINAR_LIMIT, 8)
    ax.plot(slow, laminar(slow), color=style.QUIET, linewidth=0.9)
    factor = min(0.85 * ax.get_ylim()[1], 0.09)
    style.write(ax, (1.06 * 64.0 / factor, factor), "laminar", style.QUIET, va="center")
    style.write(
        ax,
        (math.sqrt(LAMINAR_LIMIT * TURBULENT_LIMIT), 0.018),
        "critical zone",
        style.QUIET,
        ha="center",
        va="center",
        rotation=90,
    )
    lines = [np.column_stack([reynolds, row]) for row in curves.family]
    ax.add_collection(LineCollection(lines, colors="#b9c2c9", linewidths=0.6), autolim=False)
    ax.plot(reynolds, curves.chart.smooth, color=style.QUIET, **style.STROKES["dots"])
    labels = [(float(curves.chart.smooth[-1]), "smooth", style.QUIET)]
    for relative, row in zip(reversed(FAMILY), curves.family[::-1], strict=True):
        if row[-1] > labels[-1][0] * 1.11:
            labels.append((float(row[-1]), f"{relative:f}".rstrip("0"), style.QUIET))
    style.side_labels(ax, labels, gap_mm=2.6)
    style.write(ax, (1.012, 1.025), "relative roughness [–]", style.QUIET, transform=ax.transAxes, va="bottom")


def _found(ax: Axes, curves: Curves) -> None:
    """Draw the fitted line and bands over the whole turbulent range, and new pipe."""
    lines = curves.chart
    for band, colour in ((lines.wide, style.WIDE_BAND), (lines.own, style.OWN_BAND)):
        if band is not None:
            ax.fill_between(lines.reynolds, *band, color=colour, linewidth=0)
    if lines.new is not None:
        ax.plot(lines.reynolds, lines.new, color=style.NEW, **style.STROKES["dashes"])
    if lines.fit is not None:
        ax.plot(lines.reynolds, lines.fit, color=style.READING, **style.STROKES["line"])
