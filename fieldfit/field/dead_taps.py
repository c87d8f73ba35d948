"""A tap that is dead part of the time: with several others alive, the test goes on without it."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.log import Log
from fieldfit.field.readings import Plateaus, Screening
from fieldfit.field.row_screens import out_of_range, stuck
from fieldfit.field.screens import MISSING
from fieldfit.field.section import Section

Array = NDArray[np.float64]
Mask = NDArray[np.bool_]

DEAD_ROWS = 8
"""Rows without a reading in a row from which a tap of a logger's file counts as dead; fewer are single gaps."""
FEWEST_TAPS = 2
"""Taps alive without which a row says nothing."""


def bridge_dead_taps(log: Log, section: Section) -> tuple[Log, Mask]:
    """Find the stretches in which a tap was dead and keep their rows for the other taps.

    A tap is dead where it gave no value, repeated itself or read beyond its range for several rows together. Its place
    is filled from the nearest tap alive, so that rows can be judged and averaged as ever; the means are taken
    out again by `without_dead_taps`. With two taps nothing changes: without either one there is no reading.

    Parameters
    ----------
    log : Log
        N rows of T taps.
    section : Section
        The test section.

    Returns
    -------
    log : Log
        The log with dead readings filled in.
    dead : (T, N) bool array
        Where that was done.
    """
    silent = np.array([_silent(log, section, tap) for tap in range(len(section.taps))])
    known = np.isfinite(log.flow_m3_s) & np.isfinite(log.time_s)
    dead = np.array([_long_runs(row, 1 if log.kind == "sheet" else DEAD_ROWS) for row in silent])
    dead &= known & (np.count_nonzero(~silent, axis=0) >= FEWEST_TAPS)
    if len(section.taps) <= FEWEST_TAPS or not np.any(dead):
        return log, np.zeros_like(dead)
    reason = np.where((log.reason == MISSING) & known & ~np.any(silent & ~dead, axis=0), "", log.reason)
    pressure = _filled(log, silent, dead, np.array([tap.station.value for tap in section.taps]))
    for array in (reason, pressure):
        array.setflags(write=False)
    return replace(log, reason=reason, pressure_pa=pressure), dead


def without_dead_taps(plateaus: Plateaus, screening: Screening, dead: Mask) -> Plateaus:
    """Take the mean pressure of a tap out of every plateau in which it was dead for any row.

    Parameters
    ----------
    plateaus : Plateaus
        K plateaus of T taps.
    screening : Screening
        Which rows they are made of.
    dead : (T, N) bool array
        Where a tap was dead.

    Returns
    -------
    Plateaus
        With NaN for the dead.
    """
    if not np.any(dead):
        return plateaus
    pressure = plateaus.pressure_pa.copy()
    for index, number in enumerate(plateaus.number):
        pressure[np.any(dead[:, screening.plateau == number], axis=1), index] = np.nan
    pressure.setflags(write=False)
    return replace(plateaus, pressure_pa=pressure)


def alive_at(plateaus: Plateaus, taps: tuple[int, ...]) -> Mask:
    """Return the (K,) plateaus in which all of some taps were alive."""
    return np.asarray(np.all(np.isfinite(plateaus.pressure_pa[list(taps)]), axis=0))


def take_plateaus(plateaus: Plateaus, kept: Mask) -> Plateaus:
    """Return some of the plateaus, by a (K,) mask."""
    count = len(plateaus.number)
    values = {name: getattr(plateaus, name) for name in plateaus.__slots__}
    taken = {
        name: value[..., kept] if isinstance(value, np.ndarray) and value.shape[-1:] == (count,) else value
        for name, value in values.items()
    }
    return replace(plateaus, **taken)


def _silent(log: Log, section: Section, tap: int) -> Mask:
    """Return the (N,) rows in which one tap gave nothing that can be used."""
    one = replace(log, pressure_pa=log.pressure_pa[tap : tap + 1])
    alone = replace(section, taps=section.taps[tap : tap + 1])
    with np.errstate(invalid="ignore"):
        return np.asarray(np.isnan(log.pressure_pa[tap]) | out_of_range(one, alone) | stuck(one, alone))


def _long_runs(silent: Mask, fewest: int) -> Mask:
    """Return the rows that belong to a run of so many or more."""
    edges = np.flatnonzero(np.diff(np.concatenate([[False], silent, [False]]).astype(np.int8)))
    long = np.zeros(len(silent), dtype=np.bool_)
    for first, stop in zip(edges[::2], edges[1::2], strict=True):
        long[first:stop] = stop - first >= fewest
    return long


def _filled(log: Log, silent: Mask, dead: Mask, station: Array) -> Array:
    """Return the pressures with dead readings put where the nearest tap alive says they would have been.

    From that tap a reading lies off by a height and by a loss that goes with the flow squared; both are learnt from
    the rows in which the two were alive.
    """
    filled = log.pressure_pa.copy()
    square = log.flow_m3_s * np.abs(log.flow_m3_s)
    for tap in np.flatnonzero(np.any(dead, axis=1)):
        left = dead[tap].copy()
        for other in np.argsort(np.abs(station - station[tap]))[1:]:
            both = ~silent[tap] & ~silent[other] & np.isfinite(square)
            here = left & ~silent[other]
            terms = np.array([np.ones(len(square)), square])
            known = terms[:, both]
            difference = log.pressure_pa[tap, both] - log.pressure_pa[other, both]
            line = np.linalg.lstsq(known.T, difference, rcond=None)[0] if np.any(both) else np.zeros(2)
            filled[tap, here] = log.pressure_pa[other, here] + line @ terms[:, here]
            left &= silent[other]
    return filled
