"""What the fit leaves over, by plateau and over time."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from fieldfit.report.figures import style
from fieldfit.report.figures.clock import clock_ticks
from fieldfit.report.finding import CampaignFinding, ReachFinding

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

Array = NDArray[np.float64]


def residuals(campaign: CampaignFinding, reach: ReachFinding) -> Figure:
    """Draw reading less fit, in standard errors, against flow and against time.

    Parameters
    ----------
    campaign : CampaignFinding
        The campaign, for its clock.
    reach : ReachFinding
        What was found between two taps; its wall has values at each plateau.

    Returns
    -------
    matplotlib.figure.Figure
        The figure, points numbered by plateau.
    """
    figure = style.blank(46.0)
    left = style.axes(figure, 12.0, 11.0, 92.0, 8.0)
    right = style.axes(figure, 96.0, 11.0, 3.0, 8.0)
    values, plateaus = reach.wall.plateaus, campaign.plateaus
    if values is None:
        return figure
    half = 1.25 * max(3.0, float(np.max(np.abs(values.residual), initial=0.0)))
    flow = values.flow_m3_s * 1e3
    style.frame(left, (0.0, 1.08 * float(flow.max())), (-half, half), (6, 5))
    row = np.searchsorted(plateaus.number, values.number)
    middle = 0.5 * (plateaus.start_s + plateaus.end_s)
    if campaign.log.kind == "sheet":
        middle = plateaus.number.astype(np.float64)
    style.frame(right, (0.0, 1.0), (-half, half), (6, 5))
    right.tick_params(labelleft=False)
    name = clock_ticks(right, campaign.log, float(middle.min()), float(middle.max()))
    for ax, x in ((left, flow), (right, middle[row])):
        _points(ax, x, values.residual, values.number)
    style.label(left, "flow [L/s]", "reading less fit [standard errors], by flow")
    style.label(right, name, "the same over time")
    return figure


def _points(ax: Axes, x: Array, residual: Array, number: NDArray[np.int64]) -> None:
    """Draw numbered points with stems, on the band where 95 % of sound readings fall."""
    ax.axhspan(-1.96, 1.96, color="#f1f4f6", linewidth=0, zorder=0)
    ax.axhline(0.0, color=style.QUIET, linewidth=0.7)
    ax.vlines(x, 0.0, residual, colors=style.OWN_BAND, linewidth=1.2)
    ax.plot(x, residual, "o", color=style.READING, markersize=4.4)
    if number.size > 24:
        return
    for place, height, n in zip(x, residual, number, strict=True):
        above = height >= 0.0
        offset = (0, 4) if above else (0, -4)
        ax.annotate(
            str(int(n)),
            (place, height),
            xytext=offset,
            textcoords="offset points",
            fontsize=6.5,
            color=style.QUIET,
            ha="center",
            va="bottom" if above else "top",
        )
