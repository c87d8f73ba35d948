"""A simulated day as several loggers bring it home: each with its own channels, sampling and clock."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass

import numpy as np
from crew import PLANT, heading, rounded

CHANNELS = ("flow", "upstream", "downstream", "temperature")


@dataclass(frozen=True, slots=True, kw_only=True)
class Logger:
    """What one logger holds and how its clock stands."""

    file: str
    channels: tuple[str, ...]
    ahead_s: float = 0.0
    drift: float = 0.0
    every: int = 1
    """Rows of the simulation per row of the logger."""
    phase: int = 0
    """First row it takes."""


def clock_of(day, logger):
    """What the logger's clock shows at its rows [s], and which rows these are."""
    rows = np.arange(logger.phase, day.rows.time_s.size, logger.every)
    time = day.rows.time_s[rows]
    middle = day.rows.time_s[-1] / 2.0
    return time + logger.ahead_s + logger.drift * (time - middle), rows


def values_of(day, channel, rows):
    """Unrounded readings of one channel at some rows [SI]."""
    every = {
        "flow": day.rows.flow_m3_s,
        "upstream": day.rows.pressure_pa[0],
        "downstream": day.rows.pressure_pa[1],
        "temperature": day.rows.temperature_degc,
    }
    return every[channel][rows]


def steps_of(day, units):
    """Resolution of each channel in the crew's units."""
    flow = day.kit.meter.step_m3_s / units.flow[1]
    pressure = day.kit.gauge.step_pa / units.pressure[1]
    return {"flow": flow, "upstream": pressure, "downstream": pressure, "temperature": 0.1}


def logger_text(day, logger, units=PLANT, start=dt.datetime(2026, 5, 12, 8)):
    """The file of one logger."""
    clock, rows = clock_of(day, logger)
    scale = {"flow": units.flow[1], "temperature": 1.0}
    names = dict(zip(CHANNELS, heading(units), strict=True))
    columns = [
        rounded(values_of(day, one, rows) / scale.get(one, units.pressure[1]), steps_of(day, units)[one])
        for one in logger.channels
    ]
    stamps = [(start + dt.timedelta(seconds=round(float(t), 3))).isoformat() for t in clock]
    table = [["time", *(names[one] for one in logger.channels)], *zip(stamps, *columns, strict=True)]
    return "\n".join(",".join(row) for row in table) + "\n"
