"""How far the clocks of several loggers are apart, found from what they logged."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.lag_fit import LONG_S, ClockFit, Free, fit_clocks, leftover, look_around
from fieldfit.field.lag_interval import LagInterval, lag_interval
from fieldfit.field.lag_search import dearer, rough_lags
from fieldfit.field.signals import Clocks, Signals

Array = NDArray[np.float64]

WIDEST_SHARE = 0.05
"""Half an interval over the log's length beyond which it says nothing of the lag."""
WIDEST_ROWS = 6.0
"""Sampling intervals within which half an interval is good enough all the same."""
AMBIGUOUS = 9.0
"""Fall of the log-likelihood, twice over, by which one lag must beat every other."""
RESPONSE = 0.1
"""Share of the sampling interval to which a row's time can be trusted."""
APART = 6.0
"""Windows from the best lag within which another is none, but the same."""
BETTER = 0.8
"""Share of what the best fit leaves over below which another lag is clearly better."""
RESTARTS = 4
"""Fits from ever better lags."""
RIVALS = 3
"""Other valleys of the rough search that are looked at closely."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Lag:
    """How far one logger's clock is ahead of the reference."""

    seconds: float
    """Reading of this clock less the reference's, in the middle of the log [s]."""
    interval_s: tuple[float, float]
    """Its 95 % interval, the time a pressure wave needs between the taps included [s]."""
    drift: float = 0.0
    """How fast this clock gains on the reference [s/s]; zero where none was seen or looked for."""
    drift_standard: float | None = None
    """Standard uncertainty of the drift [s/s]; None where none was looked for."""
    effective_rows: float | None = None
    """Rows that count as independent for this lag [-]; None for a lag that was given or refused."""
    refused: str = ""
    """Why the readings cannot tell the lag; empty where they can, or where it was given."""
    profile: tuple[Array, Array] | None = None
    """Lags about the best one [s], and the residual variance at each over the least [-]."""
    search: tuple[Array, Array] | None = None
    """Every lag searched [s], and the share of the channels' variance left over at each [-]."""


def recover_lags(
    signals: Signals, known: Sequence[float | None], drifts: Sequence[float | None] | None = None
) -> tuple[Lag, ...]:
    """Find how far each logger's clock is ahead, from the one head-loss equation that all channels must obey.

    The pressure difference of each reach, its rigid-column inertia taken off, is held against a constant and friction
    between the powers 1.75 and 2 of the flow; clocks are right where the least variance is left over. A rough search
    takes every lag at which half of the shorter log still overlaps, so a whole hour is found as well as seconds; the
    fine one is Gauss–Newton on windows of two rows. The interval is where the residual variance has risen by what the
    effective number of rows allows: rows that remember one another, and the few moments at which the flow changes,
    count for what they are. The time of a pressure wave between the taps widens it.

    Parameters
    ----------
    signals : Signals
        All channels; L loggers.
    known : (L,) sequence of float or None
        How far a clock is known to be ahead [s]; None where it is to be found. At least one must be known.
    drifts : (L,) sequence of float or None, optional
        How fast a clock is known to gain [s/s]; None where it may be found.

    Returns
    -------
    tuple of Lag
        (L,) A known lag comes back as given; one that cannot be told has the reason in `refused`.
    """
    search = rough_lags(signals, known)
    given = [one or 0.0 for one in drifts or [0.0] * len(known)]
    found = [
        Lag(seconds=one, interval_s=(one, one), drift=gains, refused=why)
        for one, gains, why in zip(search.seconds, given, search.refused, strict=True)
    ]
    places = [place for place, one in enumerate(known) if one is None and not search.refused[place]]
    if not places:
        return tuple(found)
    clocks = Clocks(lag_s=np.array(search.seconds), drift=np.array(given))
    first, last = signals.overlap(clocks)
    may_drift = last - first >= LONG_S and (drifts is None or all(drifts[place] is None for place in places))
    fitted = _best_fit(signals, clocks, Free(places, may_drift), search.curves)
    for place, lag in _judge_all(signals, fitted, search.curves).items():
        found[place] = lag
    return tuple(found)


def _judged(signals: Signals, interval: LagInterval, search: tuple[Array, Array], rival: float | None) -> Lag:
    """Return a lag with its interval, or refused where it is too wide or another lag fits as well."""
    half = (interval.ends_s[1] - interval.ends_s[0]) / 2.0
    length = signals.flow.time_s[-1] - signals.flow.time_s[0]
    refused = ""
    if not half <= max(WIDEST_SHARE * length, WIDEST_ROWS * signals.interval_s):
        refused = f"the signals are so flat that any lag within ±{half:.0f} s fits"
    elif rival is not None:
        refused = f"a lag of {rival:+.0f} s fits as well as one of {interval.seconds:+.0f} s"
    below, above = (
        float(np.hypot(end - interval.seconds, RESPONSE * signals.interval_s)) + signals.travel_s
        for end in interval.ends_s
    )
    return Lag(
        seconds=interval.seconds,
        interval_s=(interval.seconds - below, interval.seconds + above),
        effective_rows=interval.effective_rows,
        refused=refused,
        profile=interval.profile,
        search=search,
    )


def _judge_all(
    signals: Signals, fitted: tuple[ClockFit, Free, list[float]], curves: Sequence[tuple[Array, Array]]
) -> dict[int, Lag]:
    """Return each free lag with its interval, or with the reason why it cannot be told."""
    fit, free, spread = fitted
    found = {}
    for index, place in enumerate(free.places):
        interval = lag_interval(leftover(signals, fit, free), free.theta(fit.clocks), index, (fit.variance, fit.grid))
        rows = max(interval.independent_rows, 4.0)
        # Another lag lays other rows over one another, and a variance of so many rows is itself not sure.
        rise = float(np.exp(AMBIGUOUS / rows + 2.0 * np.sqrt(2.0 / rows)))
        allowed = rise * signals.unexplained(fit.clocks, fit.grid)
        rival = next((lag for lag, left in _rivals(signals, fit, place, curves[place]) if left <= allowed), None)
        found[place] = replace(
            _judged(signals, interval, curves[place], rival),
            drift=float(fit.clocks.drift[place]),
            drift_standard=spread[index] if spread else None,
        )
    return found


def _best_fit(
    signals: Signals, clocks: Clocks, free: Free, curves: Sequence[tuple[Array, Array]]
) -> tuple[ClockFit, Free, list[float]]:
    """Fit the clocks, and again from any lag of the rough search that turns out to be clearly better."""
    first, last = signals.overlap(clocks)
    for _ in range(RESTARTS):
        start = replace(clocks, middle_s=(first + last) / 2.0)
        fit, kept, spread = fit_clocks(signals, start, free, last - first)
        left = signals.unexplained(fit.clocks, fit.grid)
        better = [
            (share, place, lag)
            for place in free.places
            for lag, share in _rivals(signals, fit, place, curves[place])
            if share < BETTER * left
        ]
        if not better:
            break
        lags = fit.clocks.lag_s.copy()
        _, place, lags[place] = min(better)
        clocks = replace(clocks, lag_s=lags)
    return fit, kept, spread


def _rivals(signals: Signals, fit: ClockFit, place: int, curve: tuple[Array, Array]) -> Iterator[tuple[float, float]]:
    """Yield lags out of the best one's valley, with the share of variance that each leaves over at a close look."""
    near = APART * fit.grid.width_s
    for rough in _valleys(*curve, (float(fit.clocks.lag_s[place]), near))[:RIVALS]:
        lag, left = _closely(signals, fit, place, rough)
        if abs(lag - fit.clocks.lag_s[place]) > near / 2.0:
            yield lag, left


def _closely(signals: Signals, fit: ClockFit, place: int, rough: float) -> tuple[float, float]:
    """Return the best lag near one of the rough search, with what it leaves over, held against the overlap."""
    alone = Free([place], False)
    theta = np.array([rough])
    at = alone.clocks(fit.clocks, theta)
    grid = signals.grid(at, fit.grid.width_s)
    if not np.any(grid.keep):
        return rough, float("inf")

    def residual(one: Array) -> Array:
        return signals.residual(alone.clocks(at, one), grid)

    for _ in range(2):
        theta = look_around(residual, theta, 0, grid.width_s)
    common = float(np.count_nonzero(grid.keep)) / max(float(np.count_nonzero(fit.grid.keep)), 1.0)
    return float(theta[0]), signals.unexplained(alone.clocks(at, theta), grid) * dearer(common)


def _valleys(lags: Array, share: Array, but: tuple[float, float]) -> list[float]:
    """Return the lags at which the rough share has a low of its own, deepest first, but those near the best one."""
    padded = np.concatenate([[np.inf], share, [np.inf]])
    low = np.flatnonzero((share <= padded[:-2]) & (share <= padded[2:]))
    step = lags[1] - lags[0] if len(lags) > 1 else 1.0
    low = low[np.abs(lags[low] - but[0]) > max(2.5 * step, but[1])]
    return [float(lags[one]) for one in low[np.argsort(share[low])]]
