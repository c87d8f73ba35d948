"""Bringing the clocks of several loggers together: what is stated, what the readings tell, and what must be assumed."""

from __future__ import annotations

import re
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from fieldfit.errors import InputError
from fieldfit.field.channel_values import flow_columns, flow_of, pressure_columns
from fieldfit.field.channels import Channels
from fieldfit.field.clock import repeated_or_backwards
from fieldfit.field.lag import Lag, recover_lags
from fieldfit.field.logger_clock import Logger, LoggerClock
from fieldfit.field.section import Section
from fieldfit.field.signals import Clocks, Signals
from fieldfit.field.track import Track, track

Array = NDArray[np.float64]
Mask = NDArray[np.bool_]

WAVE_SPEED_M_S = {"plastic": 300.0, "other": 1000.0}
"""Speed of a pressure wave in water in a pipe of this wall, on the slow side [m/s]."""
PLASTICS = {"pe", "pvc", "hdpe", "pp", "abs", "polyethylene", "polypropylene", "grp", "fibreglass", "plastic"}
"""Words in the names of materials whose walls give way to a pressure wave."""


@dataclass(frozen=True, slots=True, kw_only=True)
class LoggerPart:
    """The columns of one logger; n rows."""

    channels: Channels
    """Its file."""
    columns: tuple[str, ...]
    """Those of the file's columns that it logged."""
    time_s: Array
    """(n,) its clock, counted from the earliest row of all files [s]; NaN where missing."""
    stated: Logger | None
    """What the section file says of it."""
    in_order: Mask = field(init=False)
    """(n,) rows whose clock goes forward."""
    interval_s: float = field(init=False)
    """Usual time between rows [s]."""

    def __post_init__(self) -> None:
        """Work out what follows from the clock."""
        order = np.isfinite(self.time_s) & ~repeated_or_backwards(self.time_s)
        times = self.time_s[order]
        object.__setattr__(self, "in_order", order)
        object.__setattr__(self, "interval_s", float(np.median(np.diff(times))) if len(times) > 1 else 1.0)


def settle_clocks(parts: list[LoggerPart], section: Section, *, dated: bool) -> tuple[Clocks, tuple[LoggerClock, ...]]:
    """Find how far each logger's clock is ahead of the reference's.

    The reference is a clock whose offset the section file states, else the flow meter's. An offset that is not stated
    is found from the readings; where they cannot tell it, clocks with a date are taken as equal if their logs overlap,
    and that is said.

    Parameters
    ----------
    parts : list of LoggerPart
        L loggers.
    section : Section
        The test section.
    dated : bool
        Whether all clocks know the day, so that they can be compared without the readings.

    Returns
    -------
    clocks : Clocks
        The L clocks.
    found : tuple of LoggerClock
        What was found of each.

    Raises
    ------
    InputError
        When an offset is needed that neither the readings nor the section file tell.
    """
    stated = [one.stated.offset_s if one.stated else None for one in parts]
    drifts = [one.stated.drift if one.stated else None for one in parts]
    meter = next(k for k, one in enumerate(parts) if flow_columns(section)[0] in one.columns)
    reference = next((k for k, one in enumerate(stated) if one is not None), meter)
    known = [0.0 if k == reference and one is None else one for k, one in enumerate(stated)]
    lags = recover_lags(_signals(parts, section), known, drifts) if None in known else _as_stated(known, drifts)
    found = tuple(
        _clock(one, lag, stated=stated[k] is not None, reference=k == reference)
        for k, (one, lag) in enumerate(zip(parts, lags, strict=True))
    )
    clocks = Clocks(
        lag_s=np.array([one.offset_s for one in found]),
        drift=np.array([one.drift for one in found]),
        middle_s=_middle(parts, found),
    )
    _check_overlap(parts, clocks, found, dated)
    return clocks, found


def _signals(parts: list[LoggerPart], section: Section) -> Signals:
    """Return the channels as tracks, each with its logger."""
    logger = {column: place for place, one in enumerate(parts) for column in one.columns}
    meter = {logger[column] for column in flow_columns(section)}
    if len(meter) > 1:
        files = ", ".join(parts[place].channels.file for place in sorted(meter))
        advice = 'Write a [[logger]] table with offset = "0 s", or what it is, for each of them.'
        raise InputError(
            "the pitots were logged apart, and their clocks cannot be found from one another", advice, files
        )
    place = meter.pop()
    flow = _track(parts[place], flow_of(section, parts[place].channels.values), section.meter.column)
    pressures = [
        _track(parts[logger[name]], parts[logger[name]].channels.values[name], name)
        for name in pressure_columns(section)
    ]
    stations = [tap.station.value for tap in section.taps]
    area = np.pi * section.bore.value**2 / 4.0
    temperature = section.temperature.value if section.temperature else 15.0
    density = float(section.liquid.density_kg_m3(np.array([temperature]))[0])
    lengths = np.diff(stations)
    return Signals(
        flow=flow,
        square=track(flow.time_s, flow.value * np.abs(flow.value)),
        pressures=tuple(pressures),
        loggers=(place, *(logger[name] for name in pressure_columns(section))),
        inertia=tuple((density * lengths / area).tolist()),
        travel_s=float(np.max(lengths)) / wave_speed(section),
    )


def _track(part: LoggerPart, values: Array, name: str) -> Track:
    """Return one channel on its logger's clock."""
    try:
        return track(part.time_s, np.where(part.in_order, values, np.nan))
    except ValueError:
        advice = "Check the file; a logger's file needs a clock and more readings than that."
        raise InputError(f"the column '{name}' has fewer than two readings", advice, part.channels.file) from None


def wave_speed(section: Section) -> float:
    """Return the speed of a pressure wave in a section [m/s]: the file's word, else a slow one for its material."""
    if section.wave_speed_m_s is not None:
        return section.wave_speed_m_s
    words = set(re.split(r"[^a-z]+", (section.material or "").casefold()))
    return WAVE_SPEED_M_S["plastic" if words & PLASTICS else "other"]


def _as_stated(known: list[float | None], drifts: list[float | None]) -> tuple[Lag, ...]:
    """Return clocks that are all stated."""
    return tuple(
        Lag(seconds=one or 0.0, interval_s=(one or 0.0, one or 0.0), drift=gains or 0.0)
        for one, gains in zip(known, drifts, strict=True)
    )


def _clock(part: LoggerPart, lag: Lag, *, stated: bool, reference: bool) -> LoggerClock:
    """Return what was found of one clock; a lag that may be none leaves the clock as it stood."""
    how = "given" if stated else "reference" if reference else "recovered"
    offset, drift = lag.seconds, lag.drift
    asked = how == "recovered"
    if asked and lag.refused:
        how, offset, drift = "taken as equal", 0.0, 0.0
    elif asked and drift == 0.0 and _may_agree(lag):
        how, offset = "agrees", 0.0
    return LoggerClock(
        file=part.channels.file,
        sha256=part.channels.sha256,
        columns=part.columns,
        rows=len(part.time_s),
        how=how,  # type: ignore[arg-type]
        offset_s=offset,
        best_s=lag.seconds if asked else offset,
        interval_s=lag.interval_s if asked and not lag.refused else None,
        drift=drift,
        drift_standard=lag.drift_standard,
        because=lag.refused,
        profile=lag.profile,
        search=lag.search,
    )


def _may_agree(lag: Lag) -> bool:
    """Return whether a clock may be left as it stood: no lag at all lies well within the interval."""
    low, high = lag.interval_s
    half = 0.5 * ((high if lag.seconds < 0.0 else low) - lag.seconds)
    return abs(lag.seconds) <= abs(half)


def _middle(parts: list[LoggerPart], found: tuple[LoggerClock, ...]) -> float:
    """Return the middle of what the logs have in common [s]."""
    first, last = _common(parts, np.array([one.offset_s for one in found]))
    return (first + last) / 2.0


def _common(parts: list[LoggerPart], lag: Array) -> tuple[float, float]:
    """Return first and last moment that all logs cover [s]."""
    ends = [one.time_s[one.in_order][[0, -1]] - its for one, its in zip(parts, lag, strict=True)]
    return max(float(first) for first, _ in ends), min(float(last) for _, last in ends)


def _check_overlap(parts: list[LoggerPart], clocks: Clocks, found: tuple[LoggerClock, ...], dated: bool) -> None:
    """Refuse clocks that had to be taken as equal and cannot be."""
    first, last = _common(parts, clocks.lag_s)
    guessed = [one for one in found if one.how == "taken as equal"]
    if guessed and not dated:
        seen = f"the clock does not know the day, and the readings cannot tell how far it is off ({guessed[0].because})"
        raise InputError(seen, _say_offset(guessed[0]), guessed[0].file)
    if last <= first:
        why = f", and the readings cannot tell how far their clocks are apart ({guessed[0].because})" if guessed else ""
        advice = _say_offset((guessed or list(found))[0])
        raise InputError(f"the logs have no time in common{why}", advice, ", ".join(one.file for one in found))
    for one in guessed:
        if _contradicted(one):
            seen = f"with clocks as they stand the readings do not fit together, and {one.because}"
            raise InputError(seen, _say_offset(one), one.file)


def _say_offset(clock: LoggerClock) -> str:
    """Return how an offset is stated."""
    return f'Say how far its clock is ahead of the others: [[logger]] file = "{clock.file}", offset = "+3600 s".'


def _contradicted(clock: LoggerClock) -> bool:
    """Return whether equal clocks fit far worse than the best lags do."""
    if clock.search is None or not len(clock.search[0]):
        return False
    lags, share = clock.search
    step = float(lags[1] - lags[0]) if len(lags) > 1 else 1.0
    near = np.abs(lags) <= 1.5 * step
    return not np.any(near) or float(np.min(share[near])) > 3.0 * float(np.min(share)) + 0.02
