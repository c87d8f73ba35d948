"""Rival explanations: each one's curve through the readings, and where they would part."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from fieldfit.inference.beliefs import NOTHING
from fieldfit.inference.conditions import noise_of
from fieldfit.inference.explanations import Explanation, Explanations
from fieldfit.inference.telling_apart import CLOSE, HIGH_FLOW, LOW_FLOW, apart
from fieldfit.report.digits import COVERAGE
from fieldfit.report.figures import style

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

Array = NDArray[np.float64]
MOST = 5
"""Most curves drawn."""
LEAST = 0.01
"""Probability from which a cause's curve is drawn [-]."""
LOOKS = (
    (style.READING, "line"),
    (style.NEW, "dashes"),
    ("#3f7d5a", "line"),
    ("#7a4b8c", "dashes"),
    (style.QUIET, "dots"),
)
"""Colour and stroke of each curve, the most probable first."""
HIGHEST = 12.0
"""Largest difference drawn [standard errors]."""


def explanations(found: Explanations) -> Figure:
    """Draw the leading explanations through the readings, and their differences from the first.

    Parameters
    ----------
    found : Explanations
        What was weighed.

    Returns
    -------
    matplotlib.figure.Figure
        Left: head loss as read against flow. Right: each curve less the first's, in combined standard errors, on to
        flows that were not tested.
    """
    figure = style.blank(84.0)
    left = style.axes(figure, 12.0, 19.0, 92.0, 8.0)
    right = style.axes(figure, 96.0, 19.0, 3.0, 8.0)
    shown = drawn(found)
    _curves(left, found, shown)
    _differences(right, found, shown)
    _names(left, shown)
    return figure


def drawn(found: Explanations) -> list[Explanation]:
    """Return the explanations whose curves are drawn, most probable first; at least two, so that there is one to miss."""
    first = [one for index, one in enumerate(found.ranked) if index < 2 or one.probability >= LEAST]
    return first[:MOST]


def _flows(found: Explanations) -> Array:
    """Return flows from below the smallest to above the largest tested [m³/s]."""
    tested = np.abs(found.conditions.flow_m3_s)
    return np.linspace(LOW_FLOW * float(np.min(tested)), HIGH_FLOW * float(np.max(tested)), 60)


def _curves(ax: Axes, found: Explanations, shown: list[Explanation]) -> None:
    """Draw readings and curves over the flows tested."""
    tested, head = found.conditions.flow_m3_s, found.readings.head_loss_m
    flow = _flows(found)
    flow = flow[flow <= 1.1 * np.max(tested)]
    conditions = found.conditions.at(flow)
    lines = [one.fitted.predict(conditions)[0] for one in shown]
    bars = head + COVERAGE * np.array([[-1.0], [1.0]]) * found.noise_scale * noise_of(found.readings)
    low = min(0.0, float(np.min(bars)))
    style.frame(ax, (0.0, 1e3 * float(flow[-1])), (1.05 * low, 1.08 * max(float(np.max(bars)), 1e-6)), (6, 6))
    for line, (colour, stroke) in reversed(list(zip(lines, LOOKS, strict=False))):
        ax.plot(1e3 * flow, line, color=colour, **style.STROKES[stroke])
    style.points(ax, 1e3 * tested, head, bars)
    style.label(ax, "flow [L/s]", "head loss as read, fittings included [m]")


def _differences(ax: Axes, found: Explanations, shown: list[Explanation]) -> None:
    """Draw each curve less the first's, in combined standard errors."""
    flow = _flows(found)
    noise = np.full(flow.size, found.noise_scale * float(np.median(noise_of(found.readings))))
    conditions = found.conditions.at(flow)
    first, *others = shown
    lines = [apart(one.fitted, first.fitted, conditions, noise) for one in others]
    largest = max((float(np.max(np.abs(line))) for line in lines), default=0.0)
    half = min(max(1.15 * largest, 3.0), HIGHEST)
    style.frame(ax, (0.0, 1e3 * float(flow[-1])), (-half, half), (6, 6))
    tested = found.conditions.flow_m3_s
    ax.axvspan(1e3 * float(np.min(tested)), 1e3 * float(np.max(tested)), color="#f1f4f6", linewidth=0, zorder=0)
    for edge in (-CLOSE, CLOSE):
        ax.axhline(edge, color=style.QUIET, linewidth=0.6, dashes=(2, 2))
    ax.axhline(0.0, color=LOOKS[0][0], linewidth=1.2)
    for line, (colour, stroke) in zip(lines, LOOKS[1:], strict=False):
        ax.plot(1e3 * flow, line, color=colour, **style.STROKES[stroke])
    style.label(ax, "flow [L/s]; grey where it was tested", "less the first [combined standard errors]")


def _names(ax: Axes, shown: list[Explanation]) -> None:
    """Name the curves in a row beneath."""
    figure = ax.figure
    width = figure.get_figwidth() * style.INCH_MM  # type: ignore[union-attr]
    height = figure.get_figheight() * style.INCH_MM  # type: ignore[union-attr]
    x = 12.0
    for one, (colour, stroke) in zip(shown, LOOKS, strict=False):
        name = "nothing unusual" if one.causes == (NOTHING,) else " with ".join(one.causes)
        from matplotlib.lines import Line2D

        at = (x / width, (x + 6.0) / width)
        figure.add_artist(Line2D(at, (4.0 / height,) * 2, color=colour, **style.STROKES[stroke]))
        figure.text(
            (x + 7.5) / width, 4.0 / height, name, fontsize=style.SMALL, color=style.INK, va="center", parse_math=False
        )
        x += 10.5 + 1.32 * len(name)
