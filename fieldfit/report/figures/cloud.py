"""Head loss against flow of every row of a log, before any fit."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.section import Section
from fieldfit.hydraulics.friction import STANDARD_GRAVITY
from fieldfit.report.digits import COVERAGE
from fieldfit.report.figures import style
from fieldfit.report.screening.finding import CampaignScreen, ReachScreen

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

Array = NDArray[np.float64]
Mask = NDArray[np.bool_]

MOST = 1200
"""Dots drawn of one kind; more are thinned evenly."""
MARKS = (("+", "#8a949d"), ("x", "#8a949d"), ("^", "#a58a6a"), ("v", "#a58a6a"), ("s", "#8a949d"), ("d", "#a58a6a"))
"""Marks of set-aside rows, most frequent reason first."""


def row_heads(campaign: CampaignScreen, reach: int, section: Section) -> Array:
    """Return the head loss that each row shows [m], (N,): levelled on the statics' mean, else by the survey.

    What drifts between statics and what inertia makes is left in, for single rows are only looked at.
    """
    heads = campaign.reaches[reach].heads
    log = campaign.log
    temperature = float(np.mean(heads.plateaus.temperature_degc)) if heads.plateaus.number.size else 15.0
    weight = float(section.liquid.density_kg_m3(np.array([temperature]))[0]) * STANDARD_GRAVITY
    head = (log.pressure_pa[reach] - log.pressure_pa[reach + 1]) / weight
    head = head + (heads.elevation_drop.value if heads.elevation_drop else 0.0)
    return np.asarray(head - (heads.levelling.offset_m if heads.levelling else 0.0))


def cloud(campaign: CampaignScreen, reach: int, section: Section) -> Figure:
    """Draw the head loss of every row against its flow, plateaus ringed, rows set aside marked by reason.

    Parameters
    ----------
    campaign : CampaignScreen
        What screening found in one log.
    reach : int
        The reach from tap `reach` to the next.
    section : Section
        The test section.

    Returns
    -------
    matplotlib.figure.Figure
        The figure; many rows are thinned, and rows beyond the frame are marked at its edge.
    """
    figure = style.blank(78.0)
    ax = style.axes(figure, 12.0, 11.0, 46.0, 8.0)
    flow, head = campaign.log.flow_m3_s * 1e3, row_heads(campaign, reach, section)
    known = np.isfinite(flow) & np.isfinite(head)
    sound = known & np.isin(campaign.screening.reason, ("", "unsteady"))
    if not np.any(sound):
        sound = known
    style.frame(ax, _range(flow[sound]), _range(head[sound]))
    labels = _aside(ax, campaign, (flow, head), known)
    used = known & (campaign.screening.plateau > 0)
    _dots(ax, flow[used], head[used], (".", style.OWN_BAND), 3.0)
    _plateaus(ax, campaign.reaches[reach])
    _key(ax, [(f"{np.count_nonzero(used)} rows used", (".", style.OWN_BAND)), *labels], campaign)
    style.label(ax, "flow [L/s]", "head loss that each row shows [m]")
    return figure


def _range(values: Array) -> tuple[float, float]:
    """Return a range with room at both ends that holds zero."""
    low = min(0.0, float(np.min(values, initial=0.0)))
    high = max(0.0, float(np.max(values, initial=0.0)))
    room = 0.05 * (high - low) or 1.0
    return low - room, high + room


def _aside(
    ax: Axes, campaign: CampaignScreen, rows: tuple[Array, Array], known: Mask
) -> list[tuple[str, tuple[str, str]]]:
    """Draw the rows set aside, a mark for each reason; return the key to them."""
    flow, head = rows
    (left, right), (low, high) = ax.get_xlim(), ax.get_ylim()
    labels = []
    for index, (reason, count) in enumerate(campaign.screening.counts):
        mark = MARKS[min(index, len(MARKS) - 1)]
        here = known & (campaign.screening.reason == reason)
        # Beyond the frame a row is drawn at its edge, so that none is lost.
        _dots(ax, np.clip(flow[here], left, right), np.clip(head[here], low, high), mark, 3.2)
        unseen = count - np.count_nonzero(here)
        hidden = "" if not unseen else ", unseen" if unseen == count else f", {unseen} unseen"
        labels.append((f"{count} {reason}{hidden}", mark))
    return labels


def _dots(ax: Axes, x: Array, y: Array, mark: tuple[str, str], size: float) -> None:
    """Draw rows, thinned evenly where they are many."""
    step = -(-x.size // MOST) if x.size else 1
    ax.plot(
        x[::step],
        y[::step],
        mark[0],
        color=mark[1],
        markersize=size,
        markeredgewidth=0.7,
        clip_on=False,
        linestyle="none",
    )


def _plateaus(ax: Axes, reach: ReachScreen) -> None:
    """Draw the plateaus' means with their 95 % bars; open rings carry no roughness."""
    heads = reach.heads
    flow, head = heads.plateaus.flow_m3_s * 1e3, heads.head_loss_m
    used = ~heads.plateaus.static & (heads.reason == "")
    bars = np.where(np.isfinite(heads.standard_m), COVERAGE * heads.standard_m, 0.0)
    ax.vlines(flow[used], (head - bars)[used], (head + bars)[used], colors=style.READING, linewidth=1.0)
    for chosen, face in ((used, style.READING), (~used, style.PAPER)):
        ax.plot(
            flow[chosen],
            head[chosen],
            "o",
            color=style.READING,
            markerfacecolor=face,
            markersize=4.6,
            zorder=5,
            clip_on=False,
        )


def _key(ax: Axes, entries: list[tuple[str, tuple[str, str]]], campaign: CampaignScreen) -> None:
    """Explain the marks beside the frame."""
    name = "group" if campaign.screening.block is not None else "plateau"
    rings = [
        (f"{name} that counts", ("o", style.READING, style.READING)),
        (f"static, or {name} set aside", ("o", style.READING, style.PAPER)),
    ]
    all_entries = [*rings, *((text, (*mark, mark[1])) for text, mark in entries)]
    for index, (text, (mark, colour, face)) in enumerate(all_entries):
        place = 0.97 - 0.074 * index
        ax.plot(
            [1.03],
            [place],
            mark,
            color=colour,
            markerfacecolor=face,
            markersize=4.2,
            transform=ax.transAxes,
            clip_on=False,
        )
        style.write(
            ax, (1.055, place), style.shorten(text, 31), style.INK, transform=ax.transAxes, va="center", fontsize=7.0
        )
