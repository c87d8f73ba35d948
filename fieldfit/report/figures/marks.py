"""What several figures draw alike: the bands of the fit over new pipe, and the key to them."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from fieldfit.report.digits import limit, significant
from fieldfit.report.figures import style
from fieldfit.report.figures.curves import Array, Curves
from fieldfit.report.finding import ReachFinding

if TYPE_CHECKING:
    from matplotlib.axes import Axes


def found_words(reach: ReachFinding) -> str:
    """Return what the fit found of the wall, in a few words for a figure."""
    band = reach.wall.roughness_m
    if band.best is not None:
        return f"fit, {significant(band.best * 1e3, 2)} mm rough"
    return f"not rougher than {limit(band.with_correlation[1] * 1e3)} mm" if band.with_correlation else "no estimate"


def key(curves: Curves) -> list[tuple[str, str, str]]:
    """Return the key of readings, fit, bands and new pipe that the figures share."""
    used, reach = curves.points.used, curves.reach
    entries = [("reading", style.READING, "reading, with its 95 % bar")] if used.any() else []
    entries += [("aside", style.ASIDE, "reading set aside")] if not used.all() else []
    if curves.chart.fit is not None:
        entries.append(("line", style.READING, found_words(reach)))
    if curves.chart.wide is not None:
        entries.append(("band", style.OWN_BAND, "95 %, by these readings alone"))
        entries.append(("band", style.WIDE_BAND, "95 %, with the limit of friction formulas"))
    if reach.new_pipe is not None:
        entries.append(("dashes", style.NEW, f"new {reach.new_pipe.material}"))
    return entries


def draw_bands(ax: Axes, x: Array, bands: tuple[Array | None, Array | None], new: Array | None, off: float) -> None:
    """Draw both bands of the fit over new pipe's, whose edges stay in sight."""
    new_band = None if new is None else np.array([new * (1.0 - off), new * (1.0 + off)])
    for band, colour in ((new_band, style.NEW_BAND), (bands[1], style.WIDE_BAND), (bands[0], style.OWN_BAND)):
        if band is not None:
            ax.fill_between(x, *band, color=colour, linewidth=0)
    if new_band is not None and new is not None:
        ax.plot(x, new_band.T, color=style.NEW, **style.STROKES["edge"])
        ax.plot(x, new, color=style.NEW, **style.STROKES["dashes"])
