"""Long service logs without plateaus: rows in time blocks, blocks of like flow in groups."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.log import Log
from fieldfit.field.row_screens import still_below
from fieldfit.field.screens import limit
from fieldfit.field.section import Section
from fieldfit.field.stretches import change, drifts, outliers

Array = NDArray[np.float64]
Rows = NDArray[np.int64]

HOUR_S = 3600.0
SMALLEST_STEP, VISIBLE_STEP = 0.5, 3.0
"""Steps between plateaus that part two flows a crew has set, in smallest steps: no step at all, or one that is seen."""
GROUPS = 12
"""Most groups of flow."""
NARROWEST = 0.03
"""Relative width of a group under which no more groups are made."""
FEWEST = 4
"""Blocks that a group needs to stand on its own; a smaller one joins its neighbour."""


def is_service_log(log: Log, section: Section, plateau: Rows) -> bool:
    """Return whether a log is better read in time blocks than by the plateaus that were found in it.

    A test is stepped: the flow stands still most of the time. Service flow wanders with demand, and what passes for
    plateaus are pieces of its slow rise and fall. So a long log counts as a service log when less than half of its
    flowing rows lie on plateaus whose flow stays put and stands apart from the flow before and after.

    Parameters
    ----------
    log : Log
        N rows.
    section : Section
        Says how the log is to be read, if it says so, and gives the limits.
    plateau : (N,) array
        Plateau of each row, 0 for none.
    """
    if section.screen_mode is not None or log.kind == "sheet":
        return section.screen_mode == "service" and log.kind == "logger"
    known = np.isfinite(log.time_s)
    if not np.any(known) or float(np.ptp(log.time_s[known])) < limit(section, "service_hours") * HOUR_S:
        return False
    moving = (np.abs(log.flow_m3_s) >= still_below(log, section)) & (log.reason == "")
    members = [np.flatnonzero(plateau == number) for number in np.unique(plateau[(plateau > 0) & moving])]
    steady = sum(
        len(rows)
        for rows, wanders in zip(members, _wanders(log, section, members), strict=True)
        if not wanders
        and change(log, rows) < limit(section, "flow_step") / 2.0 * abs(float(np.mean(log.flow_m3_s[rows])))
    )
    return bool(steady < limit(section, "service_steady") * np.count_nonzero(moving))


def _wanders(log: Log, section: Section, members: list[Rows]) -> NDArray[np.bool_]:
    """Return which plateaus lie a small step from one beside them.

    A crew steps the flow so that one sees it, or comes back to the same flow; what is a little off the flow before
    is a piece of a wandering one, however steady a noisy meter makes it look.
    """
    if not members:
        return np.zeros(0, dtype=np.bool_)
    level = np.log([max(abs(float(np.mean(log.flow_m3_s[rows]))), 1e-300) for rows in members])
    apart = np.abs(np.diff(level)) / limit(section, "flow_step")
    small = (apart > SMALLEST_STEP) & (apart < VISIBLE_STEP)
    return np.asarray(np.append(small, False) | np.append(False, small))


def group_service_log(log: Log, section: Section, good: Rows) -> tuple[Rows, Rows, Rows]:
    """Cut a service log into time blocks and group the blocks by flow.

    Blocks are cut by the clock and not by flow, so the meter's noise has no say in which rows they hold, and a block's
    mean holds little of it. Groups are made by the mean flow of the blocks *next to* each block: a block whose own
    mean is high by chance does not get into a higher group for it. Without that, the slope of head loss against flow
    would come out too flat.

    Parameters
    ----------
    log : Log
        N rows.
    section : Section
        Gives the limits.
    good : (n,) int array
        Rows that passed the screens for single rows.

    Returns
    -------
    plateau : (N,) int array
        Group or static of each row, from 1 in order of flow; 0 for rows of no group.
    block : (N,) int array
        Time block of each row, from 1; 0 for rows of no group.
    far : (k,) int array
        Rows set aside as outliers.
    """
    plateau, block = np.zeros((2, len(log.reason)), dtype=np.int64)
    still = np.abs(log.flow_m3_s[good]) < still_below(log, section)
    statics = _statics(log, section, good, still)
    for number, rows in enumerate(statics, start=1):
        plateau[rows] = number
    places, members, far = _blocks(log, section, good[~still])
    for number, (place, rows) in enumerate(zip(places, members, strict=True)):
        block[rows] = place
        plateau[rows] = -1 - number
    flow = np.array([float(np.mean(log.flow_m3_s[rows])) for rows in members])
    group = _groups(_neighbours(np.array(places, dtype=np.int64), flow)) if len(flow) else np.empty(0, dtype=np.int64)
    held = plateau < 0
    plateau[held] = len(statics) + 1 + group[-1 - plateau[held]]
    return plateau, block, far


def block_seconds(log: Log, section: Section) -> float:
    """Return the length of a time block [s]: the limit's, or as many rows as a plateau needs where these take longer."""
    steps = np.diff(log.time_s[np.isfinite(log.time_s)])
    usual = float(np.median(steps[steps > 0.0])) if np.any(steps > 0.0) else 1.0
    return max(limit(section, "block"), limit(section, "plateau_rows") * usual)


def _statics(log: Log, section: Section, good: Rows, still: NDArray[np.bool_]) -> list[Rows]:
    """Return the rows of each stretch without flow that is long enough for a static."""
    rows = np.flatnonzero(still)
    pieces = np.split(rows, np.flatnonzero(np.diff(rows) > 1) + 1)
    kept = []
    for piece in pieces:
        found = good[piece]
        if len(found) >= limit(section, "plateau_rows"):
            kept.append(found[~outliers(log, found, limit(section, "outlier"))])
    return kept


def _blocks(log: Log, section: Section, rows: Rows) -> tuple[list[int], list[Rows], Rows]:
    """Return number and rows of each time block that is full and steady enough, and the outliers among them."""
    if len(rows) == 0:
        return [], [], rows
    span = block_seconds(log, section)
    number = np.floor((log.time_s[rows] - log.time_s[rows[0]]) / span).astype(np.int64) + 1
    full = np.median(np.bincount(number)[1:][np.bincount(number)[1:] > 0])
    places, members, far = [], [], [np.empty(0, dtype=np.int64)]
    for part in np.split(np.arange(len(rows)), np.flatnonzero(np.diff(number)) + 1):
        inside = rows[part]
        out = outliers(log, inside, limit(section, "outlier"))
        kept = inside[~out]
        if len(kept) < max(limit(section, "plateau_rows"), full / 2.0) or drifts(log, section, kept):
            continue
        places.append(int(number[part[0]]))
        members.append(kept)
        far.append(inside[out])
    return places, members, np.concatenate(far)


def _neighbours(place: Rows, flow: Array) -> Array:
    """Return the mean flow of the blocks just before and after each; its own where it has neither.

    Examples
    --------
    >>> _neighbours(np.array([1, 2, 3, 9]), np.array([1.0, 5.0, 3.0, 7.0]))
    array([5., 2., 5., 7.])
    """
    total, count = np.zeros(len(flow)), np.zeros(len(flow))
    beside = np.flatnonzero(np.diff(place) == 1)
    total[beside] += flow[beside + 1]
    count[beside] += 1.0
    total[beside + 1] += flow[beside]
    count[beside + 1] += 1.0
    return np.where(count > 0.0, total / np.maximum(count, 1.0), flow)


def _groups(key: Array) -> Rows:
    """Return the group of each block, from 0 in order of flow: bins of equal relative width, small ones joined."""
    level = np.log(np.maximum(np.abs(key), 1e-300))
    low, high = np.quantile(level, [0.02, 0.98])
    bins = max(1, min(GROUPS, int((high - low) / NARROWEST), len(key) // FEWEST))
    group = np.clip(((level - low) / max(high - low, 1e-300) * bins).astype(np.int64), 0, bins - 1)
    count = np.bincount(group, minlength=bins)
    target = np.arange(bins)
    for here in range(bins - 1):
        if count[here] < FEWEST:
            # Upwards, so that nothing is left behind; the last one goes down below.
            target[target == here] = here + 1
            count[here + 1] += count[here]
    last = np.unique(target)
    if len(last) > 1 and count[last[-1]] < FEWEST:
        target[target == last[-1]] = last[-2]
    return np.asarray(np.searchsorted(np.unique(target), target)[group])
