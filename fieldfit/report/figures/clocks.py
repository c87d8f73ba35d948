"""How far loggers' clocks were apart: the evidence, and the signals laid over one another."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.channel_values import flow_columns
from fieldfit.field.log import Log
from fieldfit.field.logger_clock import LoggerClock
from fieldfit.field.section import Section
from fieldfit.report.figures import style
from fieldfit.report.figures.clock import clock_ticks

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

Array = NDArray[np.float64]
PANEL_MM, SIGNALS_MM, FOOT_MM = 34.0, 40.0, 11.0
MOST = 1500
"""Points a signal is drawn with."""
AROUND = 8.0
"""Least length of the stretch that is shown, in lags and in the time the flow takes to change."""


def clocks(log: Log, section: Section) -> Figure | None:
    """Draw residual variance against lag for each logger that was asked, and the signals before and after.

    Parameters
    ----------
    log : Log
        A log of several loggers.
    section : Section
        Names the columns.

    Returns
    -------
    matplotlib.figure.Figure or None
        None where no logger's clock was looked for.
    """
    asked = [one for one in log.clocks if one.search is not None and len(one.search[0]) > 1]
    if not asked:
        return None
    height = len(asked) * (PANEL_MM + FOOT_MM) + SIGNALS_MM + FOOT_MM + 8.0
    figure = style.blank(height)
    for row, one in enumerate(asked):
        top = 7.0 + row * (PANEL_MM + FOOT_MM)
        bottom = height - top - PANEL_MM + 4.0
        _searched(style.axes(figure, 12.0, bottom, 92.0, top), one)
        _profile(style.axes(figure, 95.0, bottom, 6.0, top), one)
    _signals(style.axes(figure, 12.0, FOOT_MM, 40.0, height - SIGNALS_MM - FOOT_MM + 4.0), log, section)
    return figure


def _searched(ax: Axes, one: LoggerClock) -> None:
    """Draw what every lag of the search leaves over."""
    if one.search is None:
        return
    lags, share = one.search
    unit, name = (60.0, "min") if float(np.ptp(lags)) > 1200.0 else (1.0, "s")
    percent = 100.0 * np.minimum(share, 1.2)
    style.frame(ax, (float(lags[0]) / unit, float(lags[-1]) / unit), (0.0, float(np.max(percent)) * 1.05), (5, 4))
    ax.plot(lags / unit, percent, color=style.READING, linewidth=0.9)
    best = int(np.argmin(share))
    ax.plot([lags[best] / unit], [percent[best]], "o", color=style.NEW, markersize=4.6, zorder=5, clip_on=False)
    style.label(ax, f"lag of {style.shorten(one.file, 26)} [{name}]", "left over at any lag [%]")


def _profile(ax: Axes, one: LoggerClock) -> None:
    """Draw the residual variance about the best lag, with the interval."""
    if one.profile is None:
        ax.set_axis_off()
        return
    lags, rise = one.profile
    middle = (len(lags) - 1) // 2
    inside = rise <= max(4.0, 1.5 * float(rise[middle]))
    reach = np.flatnonzero(inside)
    first, last = max(int(reach[0]) - 1, 0), min(int(reach[-1]) + 1, len(lags) - 1)
    low, high = float(lags[first]), float(lags[last])
    if one.interval_s is not None:
        low, high = min(low, one.interval_s[0]), max(high, one.interval_s[1])
    top = float(np.max(rise[first : last + 1]))
    style.frame(ax, (low, high), (0.9, max(top, 1.2)), (5, 4))
    if one.interval_s is not None:
        ax.axvspan(*one.interval_s, color=style.WIDE_BAND, linewidth=0, zorder=0)
    ax.plot(lags, rise, color=style.READING, **style.STROKES["line"])
    ax.axvline(one.best_s, color=style.NEW, **style.STROKES["dots"])
    if low <= 0.0 <= high:
        ax.axvline(0.0, color=style.QUIET, **style.STROKES["edge"])
    style.label(ax, "lag about the best one [s], 95 % in the band", "residual variance over the least [–]")


def _signals(ax: Axes, log: Log, section: Section) -> None:
    """Draw flow and pressures over the greatest change of flow, as logged and as laid over one another."""
    first, last = _stretch(log)
    show = np.flatnonzero((log.time_s >= first) & (log.time_s <= last))
    show = show[:: max(1, len(show) // MOST)]
    names = [section.meter.column, *_names(section)]
    flow = log.flow_m3_s * np.abs(log.flow_m3_s)
    channels = [flow, *(-log.pressure_pa[: len(names) - 1])] if not section.differential else [flow, log.pressure_pa[0]]
    shades = [
        style.NEW,
        *(style.blend(style.READING, style.OWN_BAND, s) for s in np.linspace(0.0, 1.0, len(names) - 1)),
    ]
    ends = []
    for name, values, colour in zip(names, channels, shades, strict=True):
        scaled = _scaled(values[show])
        offset = _offset(log, section, name)
        if offset:
            ax.plot(log.time_s[show] + offset, scaled, color=style.ASIDE, linewidth=0.8, zorder=2)
        ax.plot(log.time_s[show], scaled, color=colour, linewidth=1.1, zorder=3)
        known = scaled[np.isfinite(scaled)]
        ends.append((float(known[-1]) if known.size else 0.0, style.shorten(name, 18), colour))
    style.ticks(ax, "y", [], [])
    ax.set_ylim(-0.08, 1.08)
    name = clock_ticks(ax, log, first, last)
    style.side_labels(ax, ends)
    style.label(ax, name, "flow² and pressures (upside down), each over its range; grey: as logged")


def _names(section: Section) -> list[str]:
    """Return the names of the pressure channels."""
    return [section.differential.column] if section.differential else [tap.column for tap in section.taps]


def _offset(log: Log, section: Section, name: str) -> float:
    """Return what was taken off the clock of a channel [s]."""
    wanted = flow_columns(section)[0] if name == section.meter.column else name
    return next((one.offset_s for one in log.clocks if wanted in one.columns), 0.0)


def _stretch(log: Log) -> tuple[float, float]:
    """Return a stretch about the greatest change of flow, long enough to see the lags in it [s]."""
    known = np.flatnonzero(np.isfinite(log.flow_m3_s) & np.isfinite(log.time_s))
    time, flow = log.time_s[known], log.flow_m3_s[known]
    few = max(len(known) // 60, 2)
    change = np.abs(flow[few:] - flow[:-few])
    centre = float(time[int(np.argmax(change)) + few // 2])
    lags = [abs(one.offset_s) for one in log.clocks if abs(one.offset_s) < 0.25 * (time[-1] - time[0])]
    half = max(AROUND / 2.0 * max(lags, default=0.0), AROUND * float(time[few] - time[0]), 30.0)
    return max(float(time[0]), centre - half), min(float(time[-1]), centre + half)


def _scaled(values: Array) -> Array:
    """Return values over their range, from 0 to 1."""
    low, high = np.nanpercentile(values, [1.0, 99.0]) if np.any(np.isfinite(values)) else (0.0, 1.0)
    return np.clip((values - low) / max(float(high - low), 1e-300), -0.05, 1.05)
