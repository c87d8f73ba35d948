"""One look for every figure: colours that survive grey printing and colour blindness, few lines, labels in place."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

INK = "#23313d"
"""Text."""
QUIET = "#64717c"
"""Axis labels, and the smooth limit."""
HAIR = "#dfe4e8"
"""Grid."""
READING = "#0e4a66"
"""What was measured, and the fit to it."""
OWN_BAND = "#7db0c8"
"""95 % band of the readings alone."""
WIDE_BAND = "#cfe2eb"
"""95 % band with the limit of friction formulas."""
NEW = "#b05e12"
"""New pipe."""
NEW_BAND = "#f6e3cf"
"""New pipe within its own limit."""
ASIDE = "#98a2aa"
"""Rows and readings set aside."""
PAPER = "#ffffff"
"""Ground."""

WIDTH_MM = 172.0
"""Width of every figure: the text width of A4 and Letter."""
STROKES: dict[str, dict[str, Any]] = {
    "line": {"linewidth": 1.4},
    "dashes": {"linewidth": 1.3, "dashes": (5, 2)},
    "dots": {"linewidth": 1.0, "dashes": (1, 1.6)},
    "edge": {"linewidth": 0.6},
}
"""Kinds of line."""
SMALL, NORMAL = 7.5, 8.0
"""Type sizes [pt]."""
INCH_MM = 25.4


def blank(height_mm: float) -> Figure:
    """Return an empty figure of the page's width."""
    from matplotlib.figure import Figure

    return Figure(figsize=(WIDTH_MM / INCH_MM, height_mm / INCH_MM), facecolor=PAPER)


def axes(figure: Figure, left: float, bottom: float, right: float, top: float) -> Axes:
    """Return plain axes at these margins [mm, from the figure's own edges]."""
    width, height = figure.get_figwidth() * INCH_MM, figure.get_figheight() * INCH_MM
    ax = figure.add_axes(
        (left / width, bottom / height, (width - left - right) / width, (height - bottom - top) / height)
    )
    for side in ("top", "right", "left"):
        ax.spines[side].set_visible(False)
    ax.spines["bottom"].set(color=QUIET, linewidth=0.7)
    ax.tick_params(length=0, labelsize=SMALL, labelcolor=INK, pad=3)
    ax.set_axisbelow(True)
    ax.grid(axis="y", color=HAIR, linewidth=0.6)
    return ax


def label(ax: Axes, x: str, y: str) -> None:
    """Name both axes: the upright one's name lies flat above it, where it can be read."""
    ax.set_xlabel(x, fontsize=NORMAL, color=QUIET, labelpad=3)
    ax.set_ylabel(y, fontsize=NORMAL, color=QUIET, rotation=0, ha="left", va="bottom")
    ax.yaxis.set_label_coords(0.0, 1.025)


def steps(low: float, high: float, wanted: int = 6) -> NDArray[np.float64]:
    """Return round tick values between two ends.

    Examples
    --------
    >>> steps(0.0, 5.4).tolist()
    [0.0, 1.0, 2.0, 3.0, 4.0, 5.0]
    """
    raw = max(high - low, 1e-300) / wanted
    power = 10.0 ** math.floor(math.log10(raw))
    step = next(s * power for s in (1.0, 2.0, 2.5, 5.0, 10.0) if s * power >= raw * 0.999)
    first = math.ceil(low / step - 1e-9)
    return np.arange(first, math.floor(high / step + 1e-9) + 1, dtype=np.float64) * step


def ticks(
    ax: Axes, axis: str, values: Sequence[float] | NDArray[np.float64], texts: Sequence[str] | None = None
) -> None:
    """Set tick values, in plain numbers unless their texts are given."""
    values = np.asarray(values, dtype=np.float64)
    if texts is None:
        step = float(np.min(np.diff(values))) if values.size > 1 else 1.0
        places = max(0, -math.floor(math.log10(step) + 1e-9))
        places += 0 if abs(round(step, places) - step) < 1e-9 * step else 1
        texts = [f"{value + 0.0:.{places}f}".replace("-", "−") for value in values]
    (ax.set_xticks if axis == "x" else ax.set_yticks)(values, labels=list(texts))


def frame(ax: Axes, x: tuple[float, float], y: tuple[float, float], wanted: tuple[int, int] = (8, 6)) -> None:
    """Set both ranges with round ticks."""
    ticks(ax, "x", steps(*x, wanted[0]))
    ticks(ax, "y", steps(*y, wanted[1]))
    ax.set_xlim(*x)
    ax.set_ylim(*y)


def spread(places: Sequence[float], gap: float, low: float, high: float) -> list[float]:
    """Return places moved as little as need be so that labels keep a gap, within two ends.

    Examples
    --------
    >>> spread([0.0, 0.1, 5.0], 1.0, 0.0, 10.0)
    [0.0, 1.0, 5.0]
    """
    order = sorted(range(len(places)), key=lambda i: places[i])
    moved = [min(max(places[i], low), high) for i in order]
    for k in range(1, len(moved)):
        moved[k] = max(moved[k], moved[k - 1] + gap)
    for k in reversed(range(len(moved))):
        top = high if k == len(moved) - 1 else moved[k + 1] - gap
        moved[k] = min(moved[k], top)
    result = [0.0] * len(places)
    for index, place in zip(order, moved, strict=True):
        result[index] = place
    return result


def side_labels(ax: Axes, labels: Sequence[tuple[float, str, str]], gap_mm: float = 3.6) -> None:
    """Write labels (height in data, text, colour) outside the right edge, none upon another."""
    if not labels:
        return
    height_mm = ax.get_position().height * ax.figure.get_figheight() * INCH_MM  # type: ignore[union-attr]
    transform = ax.transData + ax.transAxes.inverted()
    middle = ax.get_xlim()[1]
    heights = [float(transform.transform((middle, y))[1]) for y, _, _ in labels]
    lines = [text.count("\n") for _, text, _ in labels]
    gap = gap_mm * (1.0 + 0.95 * max(lines)) / height_mm
    for place, (_, text, colour) in zip(spread(heights, gap, 0.0, 1.0), labels, strict=True):
        write(ax, (1.012, place), text, colour, transform=ax.transAxes, va="center", linespacing=1.15)


def write(ax: Axes, place: tuple[float, float], text: str, colour: str = INK, **how: Any) -> None:
    """Write small text; a dollar sign is a dollar sign."""
    ax.text(*place, text, color=colour, parse_math=False, clip_on=False, **({"fontsize": SMALL} | how))


def key(ax: Axes, place: tuple[float, float], entries: Sequence[tuple[str, str, str]], row_mm: float = 4.1) -> None:
    """Explain marks in an empty corner, downwards from a place in axes shares.

    Each entry is its mark ("band", "line", "dashes", "dots", "reading", "aside"), colour and text.
    """
    from matplotlib.patches import Rectangle

    box, figure = ax.get_position(), ax.figure
    width_mm = box.width * figure.get_figwidth() * INCH_MM  # type: ignore[union-attr]
    height_mm = box.height * figure.get_figheight() * INCH_MM  # type: ignore[union-attr]
    left, wide = place[0], 6.0 / width_mm
    if len(entries) > 1:
        top, tall = place[1] + 0.6 * row_mm / height_mm, (len(entries) + 0.2) * row_mm / height_mm
        ground = Rectangle((left, top - tall), 66.0 / width_mm, tall, color=PAPER, linewidth=0, transform=ax.transAxes)
        # Above the grid, below every line.
        ax.add_patch(ground).set_zorder(0.6)
    for index, (mark, colour, text) in enumerate(entries):
        middle = place[1] - index * row_mm / height_mm
        if mark == "band":
            corner = (left, middle - 1.2 / height_mm)
            block = Rectangle(corner, wide, 2.4 / height_mm, color=colour, linewidth=0, transform=ax.transAxes)
            ax.add_patch(block).set_clip_on(False)
        elif mark in ("reading", "aside"):
            shape = "o" if mark == "reading" else "x"
            ax.plot([left + wide / 2], [middle], shape, color=colour, markersize=4.2, transform=ax.transAxes)
        else:
            ax.plot([left, left + wide], [middle] * 2, color=colour, transform=ax.transAxes, **STROKES[mark])
        write(ax, (left + wide + 2.0 / width_mm, middle), text, INK, transform=ax.transAxes, va="center")


def points(ax: Axes, x: NDArray[np.float64], y: NDArray[np.float64], bars: NDArray[np.float64] | None = None) -> None:
    """Draw readings, with the ends of their 95 % bars (2, N) when these are known."""
    if bars is not None:
        ax.vlines(x, bars[0], bars[1], colors=READING, linewidth=1.0)
    ax.plot(x, y, "o", color=READING, markersize=4.4, markeredgecolor=PAPER, markeredgewidth=0.7, zorder=5)


def crosses(ax: Axes, x: NDArray[np.float64], y: NDArray[np.float64]) -> None:
    """Draw readings that were set aside."""
    ax.plot(x, y, "x", color=ASIDE, markersize=4.6, markeredgewidth=1.2, zorder=4)


def blend(first: str, second: str, share: float) -> str:
    """Return the colour that lies between two.

    Examples
    --------
    >>> blend("#000000", "#ffffff", 0.5)
    '#808080'
    """
    pairs = ((int(first[k : k + 2], 16), int(second[k : k + 2], 16)) for k in (1, 3, 5))
    return "#" + "".join(f"{round(a + share * (b - a)):02x}" for a, b in pairs)


def shorten(text: str, most: int) -> str:
    """Return text cut to so many letters.

    Examples
    --------
    >>> shorten("the hydrant by the old mill", 12)
    'the hydrant…'
    """
    return text if len(text) <= most else text[: most - 1].rstrip() + "…"
