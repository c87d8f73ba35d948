"""What the gauges differ by at rest, static by static."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from fieldfit.report.digits import COVERAGE
from fieldfit.report.figures import style
from fieldfit.report.figures.clock import clock_ticks
from fieldfit.report.screening.finding import CampaignScreen

if TYPE_CHECKING:
    from matplotlib.figure import Figure


def statics(campaign: CampaignScreen, reach: int) -> Figure | None:
    """Draw the apparent head loss of each static over time, on the band that survey and gauges allow.

    Parameters
    ----------
    campaign : CampaignScreen
        What screening found in one log.
    reach : int
        The reach from tap `reach` to the next.

    Returns
    -------
    matplotlib.figure.Figure or None
        None without a static.
    """
    heads = campaign.reaches[reach].heads
    level, plateaus = heads.levelling, heads.plateaus
    if level is None:
        return None
    figure = style.blank(42.0)
    ax = style.axes(figure, 12.0, 11.0, 40.0, 8.0)
    static = plateaus.static
    at_rest = heads.unlevelled_m[static]
    bars = COVERAGE * heads.random_m[static]
    middle = ((plateaus.start_s + plateaus.end_s) / 2.0)[static]
    if campaign.log.kind == "sheet":
        middle = plateaus.number[static].astype(np.float64)
    allowed = COVERAGE * level.expected_m if heads.elevation_drop is not None else 0.0
    top = max(allowed, float(np.max(np.abs(at_rest) + bars))) * 1.15 or 0.1
    centre = 0.0 if heads.elevation_drop is not None else float(np.mean(at_rest))
    if heads.elevation_drop is None:
        top = max(1.6 * float(np.ptp(at_rest)), 4.0 * float(np.max(bars)), 0.02)
    style.frame(ax, (0.0, 1.0), (centre - top, centre + top), (6, 4))
    last = plateaus.number.size if campaign.log.kind == "sheet" else float(np.nanmax(campaign.log.time_s))
    first = 1.0 if campaign.log.kind == "sheet" else float(np.nanmin(campaign.log.time_s))
    name = clock_ticks(ax, campaign.log, first, float(last))
    if allowed:
        ax.axhspan(-allowed, allowed, color=style.WIDE_BAND, linewidth=0, zorder=0)
        style.side_labels(ax, [(0.0, "survey, with its limit\nand the gauges', 95 %", style.QUIET)])
    ax.plot(middle, at_rest, color=style.READING, **style.STROKES["line"])
    style.points(ax, middle, at_rest, np.array([at_rest - bars, at_rest + bars]))
    style.label(ax, name, "apparent head loss at rest [m]")
    return figure
