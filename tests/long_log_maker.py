"""Long logs made quickly: a stepped test at a logger's full speed, its flow wandering and its gauges noisy.

The digits of whole columns are worked out at once, which is about as fast as the disk takes them.
"""

from __future__ import annotations

import numpy as np
from scipy.signal import lfilter

BORE_M, LENGTH_M, ROUGHNESS_M, GRAVITY, DENSITY, VISCOSITY = 0.150, 300.0, 0.4e-3, 9.80665, 999.1, 1.1386e-6
LEVELS_M_S = (0.0, 0.5, 1.0, 1.5, 2.0, 2.5, 1.2, 0.0)
"""Velocities of the steps."""
ROWS_AT_ONCE = 500_000
SECTION = """
name = "Long main"
bore = "150 mm ± 0.5 %"
temperature = "15 degC ± 0.5 degC"
[flow]
column = "flow"
accuracy = "0.5 % of reading"
[[tap]]
column = "upstream"
station = "0 m ± 0.1 m"
elevation = "10.00 m ± 0.02 m"
accuracy = "0.1 % of 10 bar"
[[tap]]
column = "downstream"
station = "300 m ± 0.1 m"
elevation = "10.40 m ± 0.02 m"
accuracy = "0.1 % of 10 bar"
"""


class Memory:
    """First-order noise that goes on from block to block."""

    def __init__(self, rng, rows):
        self.rng, self.keep, self.state = rng, np.exp(-1.0 / rows), None

    def __call__(self, size):
        """The next values, of unit standard deviation."""
        if self.state is None:
            self.state = [self.keep * self.rng.standard_normal()]
        fresh = self.rng.standard_normal(size) * np.sqrt(1.0 - self.keep**2)
        values, self.state = lfilter([1.0], [1.0, -self.keep], fresh, zi=self.state)
        return values


def head_loss_m(velocity):
    """Head loss of the true pipe, by Haaland's formula, which is near enough for a log."""
    reynolds = np.maximum(np.abs(velocity) * BORE_M / VISCOSITY, 1.0)
    root = -1.8 * np.log10((ROUGHNESS_M / BORE_M / 3.7) ** 1.11 + 6.9 / reynolds)
    return LENGTH_M / BORE_M / root**2 * velocity * np.abs(velocity) / (2.0 * GRAVITY)


def velocity_set(row, rows):
    """The valve's setting at each row: steps joined by smooth moves of a fiftieth of a step."""
    place = row / rows * len(LEVELS_M_S)
    step = np.minimum(place.astype(np.int64), len(LEVELS_M_S) - 1)
    share = np.clip((place - step) * 50.0, 0.0, 1.0)
    levels = np.array(LEVELS_M_S)
    return levels[np.maximum(step - 1, 0)] + (levels[step] - levels[np.maximum(step - 1, 0)]) * (
        0.5 - 0.5 * np.cos(np.pi * share)
    )


def digits(values, places, decimals):
    """Values as an (N, places) array of characters; `values` are whole numbers of the last decimal."""
    out = np.empty((values.size, places + bool(decimals)), dtype=np.uint8)
    rest = values.astype(np.int64)
    for column in range(places - 1, -1, -1):
        at = column + (decimals > 0 and column >= places - decimals)
        rest, digit = np.divmod(rest, 10)
        out[:, at] = digit + 48
    if decimals:
        out[:, places - decimals] = ord(".")
    return out


def clock(row, interval_ms):
    """ISO times from 2026-03-02T00:00:00.000 on, without a library."""
    ms = row * interval_ms
    days, ms = np.divmod(ms, 86_400_000)
    date = np.datetime64("2026-03-02") + days.astype("timedelta64[D]")
    month = date.astype("datetime64[M]")
    year = date.astype("datetime64[Y]")
    parts = (
        (year.astype(np.int64) + 1970, 4, "-"),
        (month.astype(np.int64) % 12 + 1, 2, "-"),
        ((date - month).astype(np.int64) + 1, 2, "T"),
        (ms // 3_600_000, 2, ":"),
        (ms // 60_000 % 60, 2, ":"),
        (ms // 1000 % 60, 2, "."),
        (ms % 1000, 3, ","),
    )
    return [part for value, places, mark in parts for part in (digits(value, places, 0), mark)]


def blocks(rows, seed, interval_ms=50, wander=0.03):
    """Yield flow [0.001 L/s], pressures [0.01 kPa] and temperature [0.01 °C] as whole numbers, block by block."""
    rng = np.random.default_rng(seed)
    slow, quick, supply, upper, lower, warm = (Memory(rng, n) for n in (3.0, 3.0, 900.0, 25.0, 25.0, 1e5))
    for first in range(0, rows, ROWS_AT_ONCE):
        row = np.arange(first, min(rows, first + ROWS_AT_ONCE))
        velocity = velocity_set(row, rows)
        velocity = velocity * (1.0 + wander * slow(row.size))
        area = np.pi / 4.0 * BORE_M**2
        flow = np.where(velocity == 0.0, 0.0, velocity * area * (1.0 + 0.004 * quick(row.size)))
        top = 600e3 - 20e3 * (velocity / 2.5) ** 2 + 2e3 * supply(row.size)
        bottom = top - DENSITY * GRAVITY * (head_loss_m(velocity) + 0.40)
        values = (
            flow * 1e6,
            (top + 250.0 * upper(row.size)) / 10.0,
            (bottom + 250.0 * lower(row.size)) / 10.0,
            1500.0 + 20.0 * warm(row.size),
        )
        yield row, interval_ms, [np.maximum(np.rint(value), 0.0).astype(np.int64) for value in values]


def write_long_log(folder, rows, seed=11, wander=0.03, spoil=None):
    """Write section.toml and log.csv; `spoil` may change the (N, width) characters of a block; return the log."""
    folder.mkdir(parents=True, exist_ok=True)
    (folder / "section.toml").write_text(SECTION, encoding="utf-8")
    path = folder / "log.csv"
    with path.open("wb") as file:
        file.write(b"time,flow [L/s],upstream [kPa],downstream [kPa],temperature [degC]\n")
        for row, interval_ms, (flow, top, bottom, warm) in blocks(rows, seed, wander=wander):
            parts = [*clock(row, interval_ms), digits(flow, 5, 3), ",", digits(top, 5, 2), ",", digits(bottom, 5, 2)]
            parts += [",", digits(warm, 4, 2), "\n"]
            table = np.hstack(
                [np.full((row.size, 1), ord(part), np.uint8) if isinstance(part, str) else part for part in parts]
            )
            if spoil is not None:
                spoil(row, table)
            file.write(table[written(table)].tobytes())
    return path


def written(table):
    """Which characters are written: all but a zero that leads a number and is not its last figure before the point."""
    after_comma = np.roll(table, 1, axis=1) == ord(",")
    leading = after_comma & (table == ord("0")) & (np.roll(table, -1, axis=1) != ord("."))
    return ~leading
