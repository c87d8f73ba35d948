"""Head lost to friction against flow."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from fieldfit.report.digits import COVERAGE
from fieldfit.report.figures import style
from fieldfit.report.figures.curves import Array, Curves
from fieldfit.report.figures.marks import draw_bands, key

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure


def head_loss(curves: Curves) -> Figure:
    """Draw head loss against flow: readings with 95 % bars, fit, both bands, new pipe and the smooth limit.

    Parameters
    ----------
    curves : Curves
        Readings and lines of one reach.

    Returns
    -------
    matplotlib.figure.Figure
        The figure.
    """
    figure = style.blank(80.0)
    ax = style.axes(figure, 12.0, 11.0, 31.0, 8.0)
    points = curves.points
    flow = points.flow_m3_s * 1e3
    bars = points.loss_m + COVERAGE * np.array([[-1.0], [1.0]]) * points.loss_standard_m
    highest = max(float(np.max(bars)), _top(curves), 1e-6)
    lowest = min(0.0, 1.05 * float(np.min(bars)))
    style.frame(ax, (0.0, float(curves.flow_m3_s[-1]) * 1e3), (lowest, 1.04 * highest))
    _lines(ax, curves)
    style.crosses(ax, flow[~points.used], points.loss_m[~points.used])
    style.points(ax, flow[points.used], points.loss_m[points.used], bars[:, points.used])
    style.key(ax, (0.025, 0.945), key(curves))
    style.label(ax, "flow [L/s]", "head lost to friction [m]")
    return figure


def _top(curves: Curves) -> float:
    """Return the highest line at the largest flow [m]."""
    lines = curves.by_flow
    ends = [line[..., -1].max() for line in (lines.fit, lines.new, lines.smooth, lines.wide) if line is not None]
    known = [end for end in ends if np.isfinite(end)]
    return float(curves.loss_m(np.array([max(known)]))[-1]) if known else 0.0


def _lines(ax: Axes, curves: Curves) -> None:
    """Draw the lines, named at their right ends."""
    lines, flow, reach = curves.by_flow, curves.flow_m3_s * 1e3, curves.reach

    def loss(factor: Array | None) -> Array | None:
        return None if factor is None else curves.loss_m(factor)

    smooth, fit, new, wide = loss(lines.smooth), loss(lines.fit), loss(lines.new), loss(lines.wide)
    draw_bands(ax, flow, (loss(lines.own), wide), new, lines.new_limit)
    labels = []
    if new is not None and reach.new_pipe is not None:
        labels.append((float(new[-1]), f"new pipe\n± {100 * lines.new_limit:.0f} %", style.NEW))
    if smooth is not None:
        ax.plot(flow, smooth, color=style.QUIET, **style.STROKES["dots"])
        labels.append((float(smooth[-1]), "smooth", style.QUIET))
    if fit is not None:
        ax.plot(flow, fit, color=style.READING, **style.STROKES["line"])
        labels.append((float(fit[-1]), "fit", style.READING))
    elif wide is not None:
        labels.append((float(wide[1, -1]), "highest that\nfits, 95 %", style.READING))
    style.side_labels(ax, [entry for entry in labels if np.isfinite(entry[0])])
