"""The log itself: every row, and what became of it."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.readings import Screening
from fieldfit.field.section import Section
from fieldfit.report.figures import style
from fieldfit.report.figures.clock import clock_ticks
from fieldfit.report.finding import ScreenedLog

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

Array = NDArray[np.float64]
BUCKETS = 700
"""Pieces a long log is drawn in, each by its lowest and highest value."""
LANE_MM = 4.6
"""Height of one lane."""


def rows(campaign: ScreenedLog, section: Section) -> Figure:
    """Draw flow and pressures over time, with a lane for the plateaus and one for each reason of set-aside rows.

    Parameters
    ----------
    campaign : ScreenedLog
        A log and what became of its rows.
    section : Section
        Names the taps.

    Returns
    -------
    matplotlib.figure.Figure
        The figure; a long log is thinned to its envelope.
    """
    lanes = 1 + len(campaign.screening.counts)
    foot = 11.0 + LANE_MM * lanes + 2.0
    figure = style.blank(foot + 54.0)
    flow = style.axes(figure, 12.0, foot + 32.0, 31.0, 6.0)
    pressure = style.axes(figure, 12.0, foot, 31.0, 30.0)
    strip = style.axes(figure, 12.0, 11.0, 31.0, 56.0)
    time = campaign.log.time_s
    if campaign.log.kind == "sheet":
        time = np.arange(1.0, time.size + 1.0)
    for ax in (flow, pressure):
        ax.tick_params(labelbottom=False)
        ax.spines["bottom"].set_visible(False)
    _flow(flow, campaign, time)
    _pressures(pressure, campaign, section, time)
    first, last = float(np.nanmin(time)), float(np.nanmax(time))
    name = clock_ticks(strip, campaign.log, first, last)
    _lanes(strip, campaign, time)
    for ax in (flow, pressure):
        ax.set_xlim(*strip.get_xlim())
    style.label(strip, name, "")
    return figure


def _flow(ax: Axes, campaign: ScreenedLog, time: Array) -> None:
    """Draw the flow, the used rows darker."""
    flow = campaign.log.flow_m3_s * 1e3
    style.frame(ax, (0.0, 1.0), _range(flow, campaign.screening), (6, 4))
    _line(ax, time, flow, style.READING, campaign.log.kind == "sheet")
    style.label(ax, "", "flow [L/s]")


def _pressures(ax: Axes, campaign: ScreenedLog, section: Section, time: Array) -> None:
    """Draw the pressures, each named at its last value."""
    kilopascals = campaign.log.pressure_pa * 1e-3
    style.frame(ax, (0.0, 1.0), _range(kilopascals, campaign.screening), (6, 4))
    between = section.differential
    names = [between.column] if between else [tap.column for tap in section.taps]
    shades = np.linspace(0.0, 1.0, len(names))
    labels = []
    for column, values, shade in zip(names, kilopascals, shades, strict=False):
        colour = style.READING if shade == 0.0 else style.blend(style.READING, style.OWN_BAND, float(shade))
        _line(ax, time, values, colour, campaign.log.kind == "sheet")
        finite = values[np.isfinite(values)]
        if finite.size:
            labels.append((float(finite[-1]), style.shorten(column, 18), colour))
    style.side_labels(ax, labels)
    style.label(ax, "", "pressure difference [kPa]" if between else "gauge pressure [kPa]")


def _line(ax: Axes, time: Array, values: Array, colour: str, dots: bool) -> None:
    """Draw one channel: dots for a sheet, an envelope for a long log."""
    if dots:
        ax.plot(time, values, "o", color=colour, markersize=3.6)
        return
    _off_scale(ax, time, values)
    if time.size > 2 * BUCKETS:
        time, values = thinned(time, values)
    ax.plot(time, values, color=colour, linewidth=0.9)


def thinned(time: Array, values: Array) -> tuple[Array, Array]:
    """Return lowest and highest value of each of many pieces, so that the envelope stays as it was.

    Examples
    --------
    >>> t, v = thinned(np.arange(14_000.0), np.sin(np.arange(14_000.0)))
    >>> t.size, bool(v.max() > 0.999)
    (1400, True)
    """
    edges = np.linspace(0, time.size, BUCKETS, endpoint=False).astype(np.int64)
    pair = np.empty(2 * BUCKETS)
    pair[0::2], pair[1::2] = np.fmin.reduceat(values, edges), np.fmax.reduceat(values, edges)
    return np.repeat(np.fmin.reduceat(time, edges), 2), pair


def _range(values: Array, screening: Screening) -> tuple[float, float]:
    """Return a range that holds the steady and unsteady rows; a spike that was set aside may leave it."""
    sound = values[..., np.isin(screening.reason, ("", "unsteady"))]
    finite = sound[np.isfinite(sound)]
    if not finite.size:
        finite = values[np.isfinite(values)]
    if not finite.size:
        return 0.0, 1.0
    low, high = float(finite.min()), float(finite.max())
    room = 0.06 * (high - low) or 0.05 * abs(high) or 1.0
    return low - room, high + room


def _off_scale(ax: Axes, time: Array, values: Array) -> None:
    """Mark where values leave the scale."""
    low, high = ax.get_ylim()
    for off, edge, mark in ((values > high, high, "^"), (values < low, low, "v")):
        if off.any():
            start, _, _ = runs(time, off.astype(np.int64), 0.005 * float(np.nanmax(time) - np.nanmin(time)))
            edges = np.full(start.size, edge)
            ax.plot(start, edges, mark, color=style.ASIDE, markersize=4.0, clip_on=False)


def _lanes(ax: Axes, campaign: ScreenedLog, time: Array) -> None:
    """Draw plateaus and set-aside rows, one lane each, with their number of rows."""
    screening, plateaus = campaign.screening, campaign.plateaus
    names = [reason for reason, _ in screening.counts]
    ax.set_ylim(len(names) + 0.55, -0.55)
    style.ticks(ax, "y", [], [])
    join = 0.0015 * (ax.get_xlim()[1] - ax.get_xlim()[0])
    static = plateaus.number[plateaus.static]
    still = np.isin(screening.plateau, static) & (screening.plateau > 0)
    flowing = (screening.plateau > 0) & ~still
    for kind, colour in ((flowing, style.READING), (still, style.OWN_BAND)):
        _blocks(ax, 0, runs(time, np.where(kind, screening.plateau, 0), join)[:2], colour)
    _numbers(ax, runs(time, screening.plateau, join), set(static.tolist()))
    labels = [(0.0, f"{screening.used} rows used", style.READING)]
    for lane, (reason, count) in enumerate(screening.counts, start=1):
        _blocks(ax, lane, runs(time, (screening.reason == reason).astype(np.int64), join)[:2], style.ASIDE)
        labels.append((float(lane), style.shorten(f"{count} {reason}", 21), style.QUIET))
    for height, text, colour in labels:
        style.write(ax, (1.012, height), text, colour, transform=ax.get_yaxis_transform(), va="center", fontsize=7.0)


def runs(time: Array, code: NDArray[np.int64], join: float) -> tuple[Array, Array, NDArray[np.int64]]:
    """Return start, end and code of the stretches where code is not zero, near ones of one code joined.

    Examples
    --------
    >>> runs(np.arange(6.0), np.array([1, 1, 0, 2, 2, 2]), 0.0)
    (array([0., 3.]), array([1., 5.]), array([1, 2]))
    """
    known = np.flatnonzero((code != 0) & np.isfinite(time))
    if not known.size:
        return np.empty(0), np.empty(0), np.empty(0, dtype=np.int64)
    breaks = (np.diff(known) > 1) | (np.diff(code[known]) != 0)
    breaks &= (np.diff(time[known]) > join) | (np.diff(code[known]) != 0)
    starts = known[np.concatenate([[True], breaks])]
    ends = known[np.concatenate([breaks, [True]])]
    return time[starts], time[ends], code[starts]


def _blocks(ax: Axes, lane: int, stretches: tuple[Array, Array], colour: str) -> None:
    """Draw the stretches of one lane, none too thin to see."""
    start, end = stretches
    if start.size:
        width = np.maximum(end - start, 0.003 * (ax.get_xlim()[1] - ax.get_xlim()[0]))
        ax.broken_barh(list(zip(start.tolist(), width.tolist(), strict=True)), (lane - 0.32, 0.64), color=colour, lw=0)


def _numbers(ax: Axes, stretches: tuple[Array, Array, NDArray[np.int64]], static: set[int]) -> None:
    """Write the numbers of plateaus whose longest stretch has room for it."""
    start, end, code = stretches
    room = 0.022 * (ax.get_xlim()[1] - ax.get_xlim()[0])
    for number in np.unique(code)[:60]:
        own = np.flatnonzero(code == number)
        longest = own[np.argmax(end[own] - start[own])]
        if end[longest] - start[longest] < room:
            continue
        text = f"{number}" if int(number) not in static else "static"
        middle = 0.5 * (start[longest] + end[longest])
        colour = style.PAPER if int(number) not in static else style.INK
        style.write(ax, (middle, 0.02), text, colour, ha="center", va="center", fontsize=6.5)
