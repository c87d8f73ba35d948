"""The hydraulic grade line of a survey, to scale, over the pipe's profile."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from fieldfit.inference.survey_finding import Survey
from fieldfit.report.figures import style

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

MARGIN = 0.03
"""Room left and right of the outer taps, as a share of the length."""


def grade_line(found: Survey) -> Figure:
    """Draw heads along the pipe at the largest flow: profile, readings with 95 % bars, fit, one wall, new pipe.

    Below, on a scale of its own, the readings and the fit against one wall for all: there a step looks like a step.

    Parameters
    ----------
    found : Survey
        What the survey found.

    Returns
    -------
    matplotlib.figure.Figure
        The figure.
    """
    figure = style.blank(112.0)
    above = style.axes(figure, 12.0, 49.0, 31.0, 8.0)
    below = style.axes(figure, 12.0, 11.0, 31.0, 75.0)
    grade = found.grade
    first, last = float(grade.tap_station_m[0]), float(grade.tap_station_m[-1])
    across = (first - MARGIN * (last - first), last + MARGIN * (last - first))
    _heads(above, found, across)
    _leftover(below, found, across)
    return figure


def _heads(ax: Axes, found: Survey, across: tuple[float, float]) -> None:
    """Draw the heads and the pipe under them, to one scale."""
    grade = found.grade
    lines = [grade.fitted_m, grade.head_m + grade.bar_m]
    if grade.new_pipe_m is not None:
        lines.append(grade.new_pipe_m)
    top = max(float(np.max(line)) for line in lines)
    heads = [grade.fitted_m, grade.head_m - grade.bar_m]
    low = min(float(np.min(line)) for line in heads)
    if grade.profile_m is not None:
        low = min(low, float(np.min(grade.profile_m)))
    room = 0.08 * (top - low)
    style.frame(ax, across, (low - room, top + room), (8, 6))
    ax.tick_params(labelbottom=False)
    _suspects(ax, found)
    labels = []
    if grade.profile_m is not None:
        ax.fill_between(grade.tap_station_m, low - room, grade.profile_m, color="#eef1f3", linewidth=0)
        ax.plot(grade.tap_station_m, grade.profile_m, color=style.QUIET, linewidth=2.2, solid_capstyle="round")
        labels.append((float(grade.profile_m[-1]), "pipe", style.QUIET))
    if grade.new_pipe_m is not None:
        ax.plot(grade.line_station_m, grade.new_pipe_m, color=style.NEW, **style.STROKES["dashes"])
        labels.append((float(grade.new_pipe_m[-1]), "new pipe", style.NEW))
    ax.plot(grade.line_station_m, grade.fitted_m, color=style.READING, **style.STROKES["line"])
    labels.append((float(grade.fitted_m[-1]), "fit", style.READING))
    style.points(ax, grade.station_m, grade.head_m, np.array([grade.head_m - grade.bar_m, grade.head_m + grade.bar_m]))
    style.side_labels(ax, labels)
    style.label(ax, "", "head over the datum of the survey [m]" if grade.profile_m is not None else "head [m]")


def _leftover(ax: Axes, found: Survey, across: tuple[float, float]) -> None:
    """Draw readings and fit against one wall for all."""
    grade = found.grade
    base = np.interp(grade.station_m, grade.line_station_m, grade.one_wall_m)
    points, fit = grade.head_m - base, grade.fitted_m - grade.one_wall_m
    bars = np.array([points - grade.bar_m, points + grade.bar_m])
    half = 1.2 * max(float(np.max(np.abs(bars))), float(np.max(np.abs(fit))), 1e-3)
    style.frame(ax, across, (-half, half), (8, 4))
    _suspects(ax, found)
    ax.axhline(0.0, color=style.QUIET, linewidth=0.9)
    ax.plot(grade.line_station_m, fit, color=style.READING, **style.STROKES["line"])
    style.points(ax, grade.station_m, points, bars)
    names = [reach.upper for reach in found.reaches] + [found.reaches[-1].lower]
    close = len(names) > 9
    for index, (station, name) in enumerate(zip(grade.tap_station_m, names, strict=True)):
        if not close or index in {0, len(names) - 1}:
            style.write(
                ax, (float(station), 1.12 * half), style.shorten(name, 14), style.QUIET, ha="center", va="bottom"
            )
    style.side_labels(ax, [(0.0, "one wall\nfor all", style.QUIET), *_fit_label(fit)])
    style.label(ax, "distance along the pipe [m]", "")
    style.write(
        ax, (0.0, 1.2), "head against one wall for all [m]", style.QUIET, transform=ax.transAxes, fontsize=style.NORMAL
    )


def _fit_label(fit: np.ndarray) -> list[tuple[float, str, str]]:
    """Return the label of the fit where it stands clear of one wall."""
    return [(float(fit[-1]), "fit", style.READING)] if float(np.max(np.abs(fit))) > 1e-9 else []


def _suspects(ax: Axes, found: Survey) -> None:
    """Shade where the likeliest explanation puts the fault."""
    one = found.likely[0]
    if one.cause in {"one wall", "uneven wall"}:
        return
    stations = found.grade.tap_station_m
    for reach in one.reaches:
        ax.axvspan(float(stations[reach]), float(stations[reach + 1]), color=style.NEW_BAND, linewidth=0, zorder=0)
