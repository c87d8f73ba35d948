"""Sums over all rows of each plateau of a long log: what its averages and their noise are worked out from."""

from __future__ import annotations

import itertools
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.long_rows import LongRows
from fieldfit.field.long_segments import Segments
from fieldfit.field.row_noise import RowSums

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class Pieces:
    """Rows of plateaus in pieces of at most one block, in order of rows; P pieces, T taps, R = T − 1 reaches.

    Squares and products are taken about the plateau's first kept values, so that they lose no digits.
    """

    first: NDArray[np.int64]
    """(P,) first row."""
    number: NDArray[np.int64]
    """(P,) plateau."""
    rows: NDArray[np.int64]
    """(P,) rows that count."""
    time: Array
    """(2, P) first and last time of rows that count [s]."""
    line: NDArray[np.int64]
    """(P,) line of the file of the piece's first row."""
    sums: dict[str, Array]
    """(P,) sums, by name: ``t``, ``f``, ``p0``…, ``T``, ``nT``, ``ff``, ``fd0``…, ``dd0``…, ``pp0``…"""
    about: dict[str, Array]
    """(P,) value that each of ``f`` and ``p0``… was taken about."""


def pieces_of(rows: LongRows, segments: Segments, width: int) -> Pieces:
    """Add up the rows of each plateau that count.

    Parameters
    ----------
    rows : LongRows
        The log, screened.
    segments : Segments
        The rows of each plateau.
    width : int
        Rows in a block.

    Returns
    -------
    Pieces
    """
    about = {name: _about(rows, segments, name) for name in rows.channels}
    parts: list[dict[str, NDArray[np.generic]]] = []
    for first, stop in rows.store.spans(width):
        inside = segments.within(first, stop)
        if inside:
            parts.append(_part(rows, (first, stop, width), inside, about))
    keys = parts[0].keys() if parts else _keys(rows)
    table = {key: np.concatenate([part[key] for part in parts]) if parts else np.empty(0) for key in keys}
    table = {key: values[table["rows"] > 0] for key, values in table.items()}
    return Pieces(
        first=table["first"].astype(np.int64),
        number=table["number"].astype(np.int64),
        rows=table["rows"].astype(np.int64),
        time=np.array([table["begin"], table["end"]], dtype=np.float64),
        line=table["line"].astype(np.int64),
        sums={key: np.asarray(table[key], dtype=np.float64) for key in _sum_names(rows)},
        about={name: about[name][table["number"].astype(np.int64)] for name in rows.channels},
    )


def _sum_names(rows: LongRows) -> tuple[str, ...]:
    taps = [f"{kind}{tap}" for kind in ("p", "pp") for tap in range(rows.taps)]
    reaches = [f"{kind}{reach}" for kind in ("fd", "dd") for reach in range(rows.taps - 1)]
    return ("t", "f", "ff", "T", "nT", *taps, *reaches)


def _keys(rows: LongRows) -> tuple[str, ...]:
    return ("first", "number", "rows", "begin", "end", "line", *_sum_names(rows))


def _about(rows: LongRows, segments: Segments, name: str) -> Array:
    """Return a typical value of each plateau, by its number."""
    about = np.zeros(int(np.max(segments.number, initial=0)) + 1)
    for first, stop, number in zip(segments.first, segments.stop, segments.number, strict=True):
        values = rows.store.read(name, int(first), min(int(first) + 50, int(stop)))
        known = values[np.isfinite(values)]
        about[number] = float(known[0]) if known.size else 0.0
    return about


def _part(
    rows: LongRows, where: tuple[int, int, int], inside: list[tuple[slice, int]], about: dict[str, Array]
) -> dict[str, NDArray[np.generic]]:
    """Return the sums of the pieces in a range of rows."""
    first, stop, width = where
    good = np.zeros(stop - first, dtype=np.bool_)
    starts: list[NDArray[np.int64]] = []
    ends: list[NDArray[np.int64]] = []
    numbers: list[NDArray[np.int64]] = []
    for part, number in inside:
        good[part] = True
        cuts = np.arange(-(-(part.start + 1) // width) * width, part.stop, width)
        starts.append(np.append(part.start, cuts))
        ends.append(np.append(cuts, part.stop))
        numbers.append(np.full(len(cuts) + 1, number))
    level = [(part, {name: float(values[number]) for name, values in about.items()}) for part, number in inside]
    good &= rows.store.read("code", first, stop) == 0
    begin, end = np.concatenate(starts), np.concatenate(ends)
    add = _Adder(begin, end, good)
    found: dict[str, NDArray[np.generic]] = {
        "first": begin + first,
        "number": np.concatenate(numbers),
        "rows": add.count(good),
        "line": rows.store.read("line", first, stop)[begin],
    }
    found |= _sums(rows, (first, stop), level, add)
    time = rows.store.read("time", first, stop)
    found["t"] = add(time)
    found["begin"], found["end"] = add.ends(time)
    return found


def _sums(
    rows: LongRows, span: tuple[int, int], level: list[tuple[slice, dict[str, float]]], add: _Adder
) -> dict[str, NDArray[np.generic]]:
    """Return the sums of channels, squares and products."""
    read = {name: rows.store.read(name, *span) for name in rows.channels}
    for part, about in level:
        for name, values in read.items():
            values[part] -= about[name]
    flow, *pressure = read.values()
    found: dict[str, NDArray[np.generic]] = {"f": add(flow), "ff": add(flow * flow)}
    for tap, values in enumerate(pressure):
        found[f"p{tap}"], found[f"pp{tap}"] = add(values), add(values * values)
    for reach, (upper, lower) in enumerate(itertools.pairwise(pressure)):
        difference = upper - lower
        found[f"fd{reach}"], found[f"dd{reach}"] = add(flow * difference), add(difference * difference)
    if rows.temperature:
        warm = rows.store.read("temperature", *span)
        known = np.isfinite(warm)
        found["T"], found["nT"] = add(np.where(known, warm, 0.0)), add(known.astype(np.float64))
    else:
        found["T"] = found["nT"] = np.zeros(len(add.begin))
    return found


class _Adder:
    """Adds up rows that count between given edges."""

    def __init__(self, begin: NDArray[np.int64], end: NDArray[np.int64], good: NDArray[np.bool_]) -> None:
        self.begin, self._good = begin, good
        # Edges in pairs: what reduceat adds up between an end and the next begin is thrown away.
        self._edges = np.column_stack([begin, end]).ravel()
        self._whole = bool(good.all())

    def __call__(self, values: Array) -> Array:
        """Return the sum over each piece."""
        shown = values if self._whole else np.where(self._good, values, 0.0)
        return np.asarray(np.add.reduceat(np.append(shown, 0.0), self._edges)[::2])

    def count(self, good: NDArray[np.bool_]) -> NDArray[np.int64]:
        """Return the rows of each piece that count."""
        return np.add.reduceat(np.append(good, False), self._edges, dtype=np.int64)[::2]

    def ends(self, values: Array) -> tuple[Array, Array]:
        """Return the first and the last value of each piece's rows."""
        place = np.flatnonzero(self._good)
        if place.size == 0:
            return np.zeros(len(self.begin)), np.zeros(len(self.begin))
        after = np.minimum(np.searchsorted(place, self.begin), place.size - 1)
        before = np.maximum(np.searchsorted(place, self._edges[1::2]) - 1, 0)
        return values[place[after]], values[place[before]]


@dataclass(frozen=True, slots=True, kw_only=True)
class Totals:
    """What all rows of each plateau say together; K plateaus, T taps, R = T − 1 reaches."""

    number: NDArray[np.int64]
    """(K,) number of each plateau."""
    rows: Array
    """(K,) rows that count."""
    time_s: Array
    """(3, K) first, last and mean time [s]."""
    flow_m3_s: Array
    """(K,) mean flow [m³/s]."""
    pressure_pa: Array
    """(T, K) mean pressures [Pa]."""
    temperature_degc: Array
    """(K,) mean temperature [°C]; NaN where no row has one."""
    flow_squares: Array
    """(K,) sum of squares of the flow about its mean."""
    pressure_squares: Array
    """(T, K) the same of each pressure."""
    products: Array
    """(R, K) sum of products of flow and pressure difference about their means."""
    difference_squares: Array
    """(R, K) sum of squares of the pressure difference about its mean."""

    def of_reach(self, reach: int) -> RowSums:
        """Return what the noise of a reach is worked out from."""
        return RowSums(
            self.rows, self.flow_m3_s, self.flow_squares, self.products[reach], self.difference_squares[reach]
        )

    def line(self, place: int, reach: int, slopes: Array) -> tuple[float, float]:
        """Return slope and level of a plateau's pressure difference against flow [Pa s/m³, Pa]."""
        difference = self.pressure_pa[reach, place] - self.pressure_pa[reach + 1, place]
        return float(slopes[place]), float(difference - slopes[place] * self.flow_m3_s[place])


def totals_of(pieces: Pieces) -> Totals:
    """Return the sums over whole plateaus.

    Parameters
    ----------
    pieces : Pieces
        Sums over parts of them.

    Returns
    -------
    Totals
    """
    number, place = np.unique(pieces.number, return_inverse=True)

    def total(name: str) -> Array:
        return np.bincount(place, weights=pieces.sums[name], minlength=len(number)).astype(np.float64)

    def level(name: str) -> Array:
        out = np.zeros(len(number))
        out[place] = pieces.about[name]
        return out

    taps = len(pieces.about) - 1
    rows = np.bincount(place, weights=pieces.rows, minlength=len(number)).astype(np.float64)
    flow = total("f")
    pressure = [total(f"p{tap}") for tap in range(taps)]
    difference = [upper - lower for upper, lower in itertools.pairwise(pressure)]
    reaches = range(taps - 1)
    first, last = np.full(len(number), np.inf), np.full(len(number), -np.inf)
    np.minimum.at(first, place, pieces.time[0])
    np.maximum.at(last, place, pieces.time[1])
    warm = total("nT")
    return Totals(
        number=number,
        rows=rows,
        time_s=np.array([first, last, total("t") / rows]),
        flow_m3_s=level("flow") + flow / rows,
        pressure_pa=np.array([level(f"p{tap}") + pressure[tap] / rows for tap in range(taps)]),
        temperature_degc=np.where(warm > 0.0, total("T") / np.maximum(warm, 1.0), np.nan),
        flow_squares=total("ff") - flow**2 / rows,
        pressure_squares=np.array([total(f"pp{tap}") - pressure[tap] ** 2 / rows for tap in range(taps)]),
        products=np.array([total(f"fd{r}") - flow * difference[r] / rows for r in reaches]),
        difference_squares=np.array([total(f"dd{r}") - difference[r] ** 2 / rows for r in reaches]),
    )
