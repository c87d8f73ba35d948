"""The map of bore and roughness: every mixture that the readings allow."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from fieldfit.decisions.deposit import DepositFinding
from fieldfit.inference.bore_evidence import average
from fieldfit.inference.bore_or_roughness import region_level
from fieldfit.report.digits import stated
from fieldfit.report.figures import style

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

Array = NDArray[np.float64]
Mask = NDArray[np.bool_]

INSIDE = 1e-6
"""Share of the largest probability under which a mixture is not shown."""


def deposit_map(found: DepositFinding, new_m: tuple[float, float] | None = None, variation: float = 0.3) -> Figure:
    """Draw bore against roughness with the regions that hold 50 and 95 % of the probability.

    Parameters
    ----------
    found : DepositFinding
        What was found of one reach.
    new_m : (float, float), optional
        Roughness of new pipe, low and high [m].
    variation : float
        How unevenly a deposit lies, for what bore evidence means [-].

    Returns
    -------
    matplotlib.figure.Figure
        The figure.
    """
    figure = style.blank(84.0)
    ax = style.axes(figure, 14.0, 11.0, 31.0, 8.0)
    bore, wall = found.map.bore_m * 1e3, np.log10(found.map.roughness_m * 1e3)
    rows, columns = _window(found)
    ax.set_xlim(float(wall[columns][0]), float(wall[columns][-1]))
    ax.set_ylim(float(bore[rows][0]), float(bore[rows][-1]))
    _ticks(ax)
    if new_m is not None:
        low, high = np.log10(np.maximum(np.array(new_m) * 1e3, 1e-9))
        ax.axvspan(float(low), float(high), color=style.NEW_BAND, linewidth=0, zorder=0.2)
    if any(one.used for one in found.map.evidence):
        _region(ax, (wall, bore), found.map.by_readings, lines=True)
    _region(ax, (wall, bore), found.map.probability, lines=False)
    ax.plot(wall, found.map.ridge_m * 1e3, color=style.READING, **style.STROKES["line"])
    laid = found.map.laid_m * 1e3
    ax.axhline(laid, color=style.QUIET, linewidth=0.9)
    style.side_labels(ax, [(laid, "bore as laid", style.QUIET), *_evidence(ax, found, variation)])
    _key(ax, found, new_m is not None)
    style.label(ax, "roughness of the wall [mm]", "bore [mm]")
    return figure


def _window(found: DepositFinding) -> tuple[Mask, Mask]:
    """Return which bores and roughnesses to show: all that is likely, the laid bore, and some room."""
    level = region_level(found.map.probability, 0.99)
    seen = (found.map.probability >= level) | (found.map.by_readings >= region_level(found.map.by_readings, 0.95))
    rows, columns = np.any(seen, axis=1), np.any(seen, axis=0)
    rows |= np.abs(found.map.bore_m - found.map.laid_m) == np.min(np.abs(found.map.bore_m - found.map.laid_m))
    return _stretched(rows, 4), _stretched(columns, 6)


def _stretched(chosen: Mask, room: int) -> Mask:
    """Return a mask from its first to its last true place, with some room on either side."""
    places = np.flatnonzero(chosen)
    whole = np.zeros(chosen.size, dtype=np.bool_)
    whole[max(places[0] - room, 0) : places[-1] + room + 1] = True
    return whole


def _ticks(ax: Axes) -> None:
    """Set round ticks: bores evenly, roughnesses by decades with 2 and 5 between."""
    low, high = ax.get_xlim()
    every = [s * 10.0**p for p in range(-4, 4) for s in (1.0, 2.0, 5.0)]
    shown = [value for value in every if low <= np.log10(value) <= high]
    style.ticks(ax, "x", [float(np.log10(value)) for value in shown], [stated(value) for value in shown])
    ends = ax.get_ylim()
    style.ticks(ax, "y", style.steps(*ends, 6))
    ax.set_ylim(*ends)
    ax.set_xlim(low, high)


def _region(ax: Axes, axes: tuple[Array, Array], probability: Array, lines: bool) -> None:
    """Fill the regions of 95 and 50 %, or draw their edges."""
    levels = sorted({region_level(probability, share) for share in (0.95, 0.5)})
    if len(levels) < 2:
        return
    if lines:
        ax.contour(*axes, probability, levels=levels[:1], colors=style.ASIDE, linewidths=0.9, linestyles="dashed")
        return
    top = float(np.max(probability)) * 1.01
    ax.contourf(*axes, probability, levels=[*levels, top], colors=[style.WIDE_BAND, style.OWN_BAND])


def _evidence(ax: Axes, found: DepositFinding, variation: float) -> list[tuple[float, str, str]]:
    """Draw what each piece of bore evidence says friction's bore is; return their labels."""
    labels = []
    low, high = ax.get_ylim()
    for one in found.map.evidence:
        would = average(one.evidence.kind, found.map.bore_m, found.map.laid_m, variation)
        at = float(np.interp(one.evidence.bore.value, would.mean_m, found.map.bore_m)) * 1e3
        colour = style.NEW if one.used else style.ASIDE
        if low <= at <= high:
            ax.axhline(at, color=colour, **style.STROKES["dashes"])
        words = one.evidence.kind if one.used else f"{one.evidence.kind},\ncontradicts"
        labels.append((min(max(at, low), high), words, colour))
    return labels


def _key(ax: Axes, found: DepositFinding, with_new: bool) -> None:
    """Explain the regions in the corner the ridge leaves free: rougher walls need less deposit, so the lower right is."""
    entries = [
        ("band", style.OWN_BAND, "holds 50 %"),
        ("band", style.WIDE_BAND, "holds 95 %"),
        ("line", style.READING, "mixtures that fit best"),
    ]
    if any(one.used for one in found.map.evidence):
        entries.append(("dashes", style.ASIDE, "95 % by the readings alone"))
    if with_new:
        entries.append(("band", style.NEW_BAND, "roughness of new pipe"))
    style.key(ax, (0.6, 0.07 + 0.058 * (len(entries) - 1)), entries)
