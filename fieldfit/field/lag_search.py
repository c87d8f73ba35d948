"""A rough look for clocks that are apart: every lag at which the logs still have enough in common."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.signals import Signals

Array = NDArray[np.float64]

STEPS = 1500
"""Pieces the longest log is cut in for the search."""
COMMON_SHARE = 0.5
"""Share of the shorter log that must overlap."""
FEWEST = 12
"""Pieces that must overlap."""
ENOUGH = 0.75
"""Share of the shorter log from which more overlap speaks no more for a lag."""
UNEXPLAINED = 0.7
"""Share of the variance left over at the best lag from which the channels have nothing to do with one another."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Search:
    """Outcome of the rough search; L loggers."""

    seconds: tuple[float, ...]
    """(L,) best lag of each logger's clock [s]; as known, or zero where it could not be told."""
    refused: tuple[str, ...]
    """(L,) why a lag could not be told; empty where it could."""
    curves: tuple[tuple[Array, Array], ...]
    """(L,) lags tried [s] and the share of variance left over at each [-]; empty where nothing was to be found."""


def rough_lags(signals: Signals, known: Sequence[float | None]) -> Search:
    """Find each unknown clock in turn, the surest first, against those that are settled already.

    Parameters
    ----------
    signals : Signals
        All channels; L loggers.
    known : (L,) sequence of float or None
        Lags that are known [s]; at least one.

    Returns
    -------
    Search
    """
    step = _step(signals)
    pieces = [_pieces(one.time_s, one.value, step) for one, _ in signals.tracks()]
    seconds: list[float | None] = list(known)
    refused = [""] * len(seconds)
    curves: list[tuple[Array, Array]] = [(np.empty(0), np.empty(0))] * len(seconds)
    while None in seconds:
        tried = {
            logger: _curve(signals, pieces, (seconds, logger), step)
            for logger, one in enumerate(seconds)
            if one is None
        }
        best = {logger: float(np.min(curve[1], initial=np.inf)) for logger, curve in tried.items()}
        logger = min(best, key=lambda one: best[one])
        if best[logger] > UNEXPLAINED:
            refused[logger] = _why_not(best[logger])
            seconds[logger] = 0.0
        else:
            lags, share = tried[logger]
            seconds[logger] = float(lags[int(np.argmin(share))])
    for logger in [place for place, one in enumerate(known) if one is None and not refused[place]]:
        # The first ones were found by pairs of channels; now the whole equation can be asked.
        lags, share = curves[logger] = _curve(signals, pieces, (seconds, logger), step)
        seconds[logger] = float(lags[int(np.argmin(share))])
    return Search(seconds=tuple(one or 0.0 for one in seconds), refused=tuple(refused), curves=tuple(curves))


def dearer(share: float) -> float:
    """Return the factor on what a lag leaves over when only a share of the log overlaps.

    To leave part of a log without partner is a poor way of fitting it: staircases shifted by several steps fit one
    another where they still meet.

    Examples
    --------
    >>> dearer(0.9), round(dearer(0.5), 2)
    (1.0, 5.06)
    """
    return min(1.0, share / ENOUGH) ** -4


def _why_not(best: float) -> str:
    """Return why a logger was not found."""
    if not np.isfinite(best):
        return "the logs are too short, or at rest, to be laid over one another"
    return (
        f"even the best lag leaves {100.0 * best:.0f} % of the changes unexplained: the signals are flat, or have "
        "nothing to do with one another"
    )


def _step(signals: Signals) -> float:
    """Return the length of a piece [s]."""
    longest = max(one.time_s[-1] - one.time_s[0] for one, _ in signals.tracks())
    return float(max(signals.interval_s, longest / STEPS))


def _pieces(time: Array, value: Array, step: float) -> tuple[float, Array]:
    """Return a channel as means of pieces: time of the first one and a value each, lines across gaps."""
    first, last = np.ceil(time[0] / step) * step, time[-1]
    middles = first + step * np.arange(max(int((last - first) / step) + 1, 2))
    place = np.rint((time - first) / step).astype(np.int64)
    inside = (place >= 0) & (place < len(middles))
    count = np.bincount(place[inside], minlength=len(middles))
    total = np.bincount(place[inside], weights=value[inside], minlength=len(middles))
    filled = count > 0
    means = np.interp(middles, middles[filled], total[filled] / count[filled]) if np.any(filled) else middles * np.nan
    return float(first), means


def _curve(
    signals: Signals, pieces: list[tuple[float, Array]], loggers: tuple[list[float | None], int], step: float
) -> tuple[Array, Array]:
    """Return lags of one logger and the least share of variance that any relation with settled channels leaves."""
    seconds, logger = loggers
    settled = [one is not None for one in seconds]
    relations = _relations(signals, settled, logger)
    placed = [
        (first - (0.0 if its == logger else seconds[its] or 0.0), values)
        for (first, values), its in zip(pieces, signals.loggers, strict=True)
    ]
    curves: dict[int, float] = {}
    for relation in relations:
        own = [place for place in relation if signals.loggers[place] == logger]
        shares = _overlap_shares(placed, relation, own, step)
        for shift in shares:
            left = _left_over(placed, relation, (own, shift), step) * dearer(shares[shift])
            if np.isfinite(left):
                curves[shift] = min(curves.get(shift, np.inf), left)
    lags = np.array(sorted(curves), dtype=np.int64)
    return np.asarray(lags * step, dtype=np.float64), np.array([curves[shift] for shift in lags.tolist()])


def _relations(signals: Signals, settled: list[bool], logger: int) -> list[tuple[int, ...]]:
    """Return which channels to compare: whole reaches where the others are settled, else pairs."""
    last = len(signals.loggers) - 1
    reaches: list[tuple[int, ...]] = [(0, tap, tap + 1) for tap in range(1, last)] if last > 1 else [(0, 1)]
    usable = [
        reach
        for reach in reaches
        if any(signals.loggers[one] == logger for one in reach)
        and all(signals.loggers[one] == logger or settled[signals.loggers[one]] for one in reach)
    ]
    if usable:
        return usable
    own = [place for place, its in enumerate(signals.loggers) if its == logger]
    others = [place for place, its in enumerate(signals.loggers) if settled[its]]
    return [(other, one) if other < one else (one, other) for one in own for other in others]


def _overlap_shares(
    placed: list[tuple[float, Array]], relation: tuple[int, ...], own: list[int], step: float
) -> dict[int, float]:
    """Return the shifts in pieces at which the logger overlaps the others enough, with the share that it does."""
    rest = [place for place in relation if place not in own]
    if not rest:
        return {}
    mine, theirs = _common(placed, own, step), _common(placed, rest, step)
    shortest = min(mine[1] - mine[0], theirs[1] - theirs[0])
    need = max(COMMON_SHARE * shortest, FEWEST)
    first, last = int(np.floor(mine[0] - theirs[1] + need)), int(np.ceil(mine[1] - theirs[0] - need))
    overlap = {
        shift: min(mine[1] - shift, theirs[1]) - max(mine[0] - shift, theirs[0]) for shift in range(first, last + 1)
    }
    return {shift: common / shortest for shift, common in overlap.items() if common > 0}


def _common(placed: list[tuple[float, Array]], which: list[int], step: float) -> tuple[int, int]:
    """Return first piece and end that channels share."""
    starts = [round(placed[one][0] / step) for one in which]
    return max(starts), min(start + len(placed[one][1]) for start, one in zip(starts, which, strict=True))


def _left_over(
    placed: list[tuple[float, Array]], relation: tuple[int, ...], moved: tuple[list[int], int], step: float
) -> float:
    """Return the share of the channels' variance that their relation leaves over at one shift."""
    own, shift = moved
    starts = [round(placed[one][0] / step) - (shift if one in own else 0) for one in relation]
    first = max(starts)
    stop = min(start + len(placed[one][1]) for start, one in zip(starts, relation, strict=True))
    if stop - first < FEWEST:
        return float("inf")
    values = [placed[one][1][first - start : stop - start] for start, one in zip(starts, relation, strict=True)]
    centred = [one - np.mean(one) for one in values]
    target = centred[1] - centred[2] if len(centred) > 2 else centred[1]
    whole = sum(float(one @ one) for one in centred[1:])
    square = float(centred[0] @ centred[0])
    if whole <= 0.0 or square <= 0.0:
        return float("inf")
    return float(target @ target - (target @ centred[0]) ** 2 / square) / whole
