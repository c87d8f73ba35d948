"""What limits the certainty."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from fieldfit.inference.wall import BudgetEntry
from fieldfit.report.digits import percent
from fieldfit.report.figures import style
from fieldfit.report.finding import ReachFinding
from fieldfit.report.tables import HARDLY

if TYPE_CHECKING:
    from matplotlib.figure import Figure

ROW_MM = 5.6
"""Height of one error with its two bars."""
MOST = 8
"""Most errors drawn by name."""


def budget(reach: ReachFinding) -> Figure:
    """Draw each error's share in the variance of roughness and of C, largest first.

    Parameters
    ----------
    reach : ReachFinding
        What was found between two taps.

    Returns
    -------
    matplotlib.figure.Figure
        The figure.
    """
    shares = _shares(reach.wall.budget)
    highest = 100.0 * max((max(wide, own) for _, wide, own in shares), default=1.0)
    figure = style.blank(19.0 + ROW_MM * len(shares))
    ax = style.axes(figure, 52.0, 11.0, 12.0, 8.0)
    place = np.arange(len(shares), dtype=np.float64)
    for offset, parts, colour in (
        (-0.19, [share for _, share, _ in shares], style.OWN_BAND),
        (0.19, [share for _, _, share in shares], style.READING),
    ):
        ax.barh(place + offset, [100.0 * part for part in parts], height=0.36, color=colour)
        for at, part in zip(place + offset, parts, strict=True):
            if part >= HARDLY or part == 0.0:
                text = percent(part) if part else "none"
                style.write(ax, (100.0 * part + 0.008 * highest, at + 0.02), text, va="center", fontsize=6.5)
    ax.grid(visible=False, axis="y")
    ax.grid(axis="x", color=style.HAIR, linewidth=0.6)
    style.ticks(ax, "y", place, [share[0] for share in shares])
    style.ticks(ax, "x", style.steps(0.0, highest, 6))
    ax.set_xlim(0.0, 1.02 * highest)
    ax.set_ylim(len(shares) - 0.4, -0.6)
    style.label(ax, "share of the variance [%]", "")
    above = 1.0 + 3.6 / (ROW_MM * len(shares))
    style.key(ax, (0.0, above), [("band", style.OWN_BAND, "of the roughness, with the formula's limit")])
    style.key(ax, (66.0 / (style.WIDTH_MM - 64.0), above), [("band", style.READING, "of C, by the readings alone")])
    return figure


def _shares(entries: tuple[BudgetEntry, ...]) -> list[tuple[str, float, float]]:
    """Return name and both shares, the smallest errors together."""
    shares = [(entry.error, entry.share, entry.measurement_share) for entry in entries]
    named = [share for share in shares if max(share[1:]) >= HARDLY][:MOST]
    rest = [share for share in shares if share not in named]
    if len(rest) < 2:
        return shares
    return [*named, (f"{len(rest)} smaller ones", sum(s[1] for s in rest), sum(s[2] for s in rest))]
