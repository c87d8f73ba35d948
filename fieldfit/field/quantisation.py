"""What the steps of a display do to a mean, and what is left of them when the reading trembles over several."""

from __future__ import annotations

import functools
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.log import Log
from fieldfit.field.readings import Screening
from fieldfit.field.section import Section

Array = NDArray[np.float64]
Rows = NDArray[np.int64]

FEW = 8
"""Rows beyond one per plateau from which the trembling of a channel can be judged."""
TERMS = 400
"""Terms of the series that are summed."""


def step_standard(variance: float, step: float) -> float:
    r"""Return the standard error that a display's step leaves in the mean of many rows.

    A reading that stands still is off by anything up to half a step: ``step/√12``. One that trembles by more than
    half a step shows its mean between the steps, and the step's error averages out. In between, with normal
    trembling of standard deviation s steps and a true mean anywhere between two steps, the mean of very many rows is
    off with the variance ``B(s) = Σ exp(−(2πks)²) / (2π²k²)`` steps². The trembling is found from the variance of the
    shown values, which is ``s² + 1/12 − B(s)`` on average.

    Parameters
    ----------
    variance : float
        Variance of the shown values about their mean [unit of the step, squared].
    step : float
        Step of the display; 0 for none.

    Returns
    -------
    float
        Standard error [same unit].

    References
    ----------
    B. Widrow and I. Kollár, Quantization Noise, Cambridge 2008, ch. 4 and 5 (normal input of a uniform quantiser).

    Examples
    --------
    >>> round(step_standard(0.0, 1.0), 4), step_standard(4.0, 1.0) < 1e-6
    (0.2887, True)
    """
    if step <= 0.0:
        return 0.0
    shown, left = _curve()
    return step * float(np.sqrt(np.interp(variance / step**2, shown, left)))


@functools.cache
def _curve() -> tuple[Array, Array]:
    """Return variance shown and variance left in the mean [steps²], for more and more trembling."""
    trembling = np.append(np.linspace(0.0, 1.2, 241), 1e6)
    order = np.arange(1.0, TERMS + 1.0)
    left = np.exp(-((2.0 * np.pi * trembling[:, None] * order) ** 2)) @ (1.0 / (2.0 * np.pi**2 * order**2))
    left[0] = 1.0 / 12.0
    return trembling**2 + 1.0 / 12.0 - left, left


def steps_left(values: Array, members: list[Rows], step: float) -> Array:
    """Return the standard error that a channel's step leaves in the mean of each plateau; K plateaus.

    A plateau counts as trembling no more than it does itself, and no more than the plateaus do on average: one that
    stands still may be off by half a step however much the others tremble, and one that happens to lie on the edge
    between two steps shows more trembling than there is.

    Parameters
    ----------
    values : (N,) array
        The channel.
    members : list of (n,) int arrays
        Rows of each plateau.
    step : float
        Its step [same unit].

    Returns
    -------
    (K,) array
        Standard errors [same unit].
    """
    squares = np.array([float(np.sum((values[rows] - np.mean(values[rows])) ** 2)) for rows in members])
    return steps_left_by(squares, np.array([len(rows) - 1.0 for rows in members]), step)


def steps_left_by(squares: Array, free: Array, step: float) -> Array:
    """Return the same from the (K,) sums of squares about each plateau's mean and their (K,) degrees of freedom."""
    if np.sum(free) < FEW:
        return np.full(len(free), step / np.sqrt(12.0))
    variance = np.minimum(squares / np.maximum(free, 1.0), np.sum(squares) / np.sum(free))
    return np.array([step_standard(float(own), step) for own in variance])


@dataclass(frozen=True, slots=True, kw_only=True)
class ChannelSteps:
    """How finely one column of a log was written, and what that does to plateau means."""

    column: str
    """Heading."""
    step: float
    """Smallest step seen [SI]; 0 where none can be seen."""
    values: int
    """Different values that occur."""
    trembling: float
    """Standard deviation of the used rows about their plateaus' means [steps]; NaN where no step is seen."""
    standard: float
    """Largest standard error that the step leaves in a plateau's mean [SI]."""

    @property
    def constant(self) -> bool:
        """Whether the column never changes, so that its step can only be told from how it is written."""
        return self.values == 1


def channel_steps(log: Log, screening: Screening, section: Section) -> tuple[ChannelSteps, ...]:
    """Return how finely flow and pressures were written, flow first.

    Parameters
    ----------
    log : Log
        N rows.
    screening : Screening
        Which rows make plateaus.
    section : Section
        Names the columns.

    Returns
    -------
    tuple of ChannelSteps
    """
    numbers = np.unique(screening.plateau[screening.plateau > 0])
    members = [np.flatnonzero(screening.plateau == number) for number in numbers]
    channels = [(section.meter.column, log.flow_m3_s, log.flow_step_m3_s)]
    steps = log.pressure_step_pa.tolist()
    if section.differential:
        channels.append((section.differential.column, log.pressure_pa[0], steps[0]))
    else:
        channels += [(tap.column, log.pressure_pa[k], steps[k]) for k, tap in enumerate(section.taps)]
    return tuple(_channel(*channel, members) for channel in channels)


def _channel(column: str, values: Array, step: float, members: list[Rows]) -> ChannelSteps:
    """Judge one column."""
    free = sum(len(rows) - 1 for rows in members)
    squares = sum(float(np.sum((values[rows] - np.mean(values[rows])) ** 2)) for rows in members)
    known = step > 0.0 and free > 0
    return ChannelSteps(
        column=column,
        step=step,
        values=int(np.unique(values[np.isfinite(values)]).size),
        trembling=float(np.sqrt(squares / free)) / step if known else float("nan"),
        standard=float(np.max(steps_left(values, members, step), initial=0.0)),
    )
