"""Hazen-Williams C against flow."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from fieldfit.hydraulics.hazen_williams import SLOPE_EXPONENT, c_from_friction_factor
from fieldfit.hydraulics.regime import TURBULENT_LIMIT
from fieldfit.report.figures import style
from fieldfit.report.figures.curves import Curves, interval
from fieldfit.report.figures.marks import draw_bands

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

Array = NDArray[np.float64]


def hazen_williams(curves: Curves) -> Figure:
    """Draw C against flow: readings with 95 % bars, the fit with its bands, and new pipe.

    Parameters
    ----------
    curves : Curves
        Readings and lines of one reach.

    Returns
    -------
    matplotlib.figure.Figure
        The figure.
    """
    figure = style.blank(58.0)
    ax = style.axes(figure, 12.0, 11.0, 31.0, 8.0)
    flow, bore = curves.flow_m3_s, curves.reach.readings.bore.value
    turbulent = curves.by_flow.reynolds >= TURBULENT_LIMIT
    lines = {name: c_from_friction_factor(f, flow, bore)[..., turbulent] for name, f in _factors(curves).items()}
    values = curves.reach.wall.plateaus
    off = SLOPE_EXPONENT * curves.by_flow.new_limit  # a head loss off by x moves C by 0.54 x the other way
    tested = flow[turbulent] >= 0.9 * float(curves.points.flow_m3_s.min())
    held = [line[..., tested] for name, line in lines.items() if name != "smooth"]
    held += [lines["new"][tested] * (1.0 + side * off) for side in (-1.0, 1.0) if "new" in lines]
    if values is not None:
        c, bars = values.hazen_williams_c, interval(values.hazen_williams_c, values.hazen_williams_relative)
        held += [c, np.clip(bars, 0.75 * c, 1.3 * c)]
    style.frame(ax, (0.0, float(flow[-1]) * 1e3), _range(held), (8, 5))
    _draw(ax, flow[turbulent] * 1e3, lines, off)
    if values is not None:
        style.points(ax, values.flow_m3_s * 1e3, c, np.clip(bars, *ax.get_ylim()))
    style.label(ax, "flow [L/s]", "Hazen–Williams C [–]")
    return figure


def _range(held: list[Array]) -> tuple[float, float]:
    """Return a range with a little room about everything that must be seen."""
    parts = [part for part in held if part.size]
    if not parts:
        return 60.0, 160.0
    low, high = (float(end(np.concatenate([np.ravel(part) for part in parts]))) for end in (np.min, np.max))
    room = 0.06 * (high - low) + 1.0
    return low - room, high + room


def _factors(curves: Curves) -> dict[str, Array]:
    """Return the friction factors of the lines to draw, by name."""
    lines = curves.by_flow
    factors = {"smooth": lines.smooth, "fit": lines.fit, "own": lines.own, "wide": lines.wide, "new": lines.new}
    return {name: f for name, f in factors.items() if f is not None}


def _draw(ax: Axes, flow: Array, lines: dict[str, Array], off: float) -> None:
    """Draw the lines, named at their right ends."""
    if not flow.size:
        return
    labels = []
    draw_bands(ax, flow, (lines.get("own"), lines.get("wide")), lines.get("new"), off)
    if "new" in lines:
        text = f"new pipe\n± {100 * off:.0f} %"
        labels.append((float(lines["new"][-1]), text, style.NEW))
    ax.plot(flow, lines["smooth"], color=style.QUIET, **style.STROKES["dots"])
    labels.append((float(lines["smooth"][-1]), "smooth", style.QUIET))
    if "fit" in lines:
        ax.plot(flow, lines["fit"], color=style.READING, **style.STROKES["line"])
        labels.append((float(lines["fit"][-1]), "fit", style.READING))
    low, high = ax.get_ylim()
    style.side_labels(ax, [entry for entry in labels if low <= entry[0] <= high])
