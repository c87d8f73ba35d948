"""Dates and times that all have the same length and form, read at once."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

if TYPE_CHECKING:
    from pandas import Series

MANY = 1000
"""Impossible dates from which an order of day and month is given up."""
_ZERO = ord("0")


def fixed_dates(texts: Series[Any], model: re.Match[str], order: str) -> NDArray[np.datetime64] | None:
    """Return stamps of texts that are all written alike, figure under figure.

    Parameters
    ----------
    texts : Series
        (N,) texts.
    model : Match
        The first text, its groups 1, 3 and 5 the parts of the date, 6, 8, 9 and 10 those of the time.
    order : str
        What the parts of the date are: a permutation of "dmy".

    Returns
    -------
    ndarray or None
        (N,) stamps, all of them NaT where the order gives many impossible dates; None where texts are not alike.
    """
    width = len(model[0])
    if texts.isna().any() or model.span()[1] != width:
        return None
    array = texts.to_numpy(dtype=object).astype(f"U{width + 1}")
    codes = array.view(np.uint32).reshape(len(array), width + 1)
    like = np.array([ord(sign) for sign in model[0]], dtype=np.uint32)
    figure = (like >= _ZERO) & (like <= _ZERO + 9)
    others, figures = codes[:, :width][:, ~figure], codes[:, :width][:, figure]
    if codes[:, width].any() or not (others == like[~figure]).all():
        return None
    if figures.min() < _ZERO or figures.max() > _ZERO + 9:
        return None

    def number(group: int) -> NDArray[np.int64]:
        """Return one part of every text."""
        start, stop = model.span(group)
        if start < 0:
            return np.zeros(len(array), dtype=np.int64)
        powers = 10 ** np.arange(stop - start - 1, -1, -1)
        return np.asarray((codes[:, start:stop].astype(np.int64) - _ZERO) @ powers)

    parts = {part: number(group) for part, group in zip(order, (1, 3, 5), strict=True)}
    if len(model[1]) < 3 and len(model[5]) == 2:
        parts["y"] = parts["y"] + np.where(parts["y"] < 69, 2000, 1900)
    return _stamps(parts, (number(6), number(8), number(9)), _fraction(model, codes))


def _fraction(model: re.Match[str], codes: NDArray[np.uint32]) -> NDArray[np.int64]:
    """Return the fractions of a second [ns]."""
    start, stop = model.span(10)
    if start < 0:
        return np.zeros(len(codes), dtype=np.int64)
    powers = 10 ** np.arange(8, 8 - (stop - start - 1), -1)
    return np.asarray((codes[:, start + 1 : stop].astype(np.int64) - _ZERO) @ powers)


def _stamps(
    parts: dict[str, NDArray[np.int64]], time: tuple[NDArray[np.int64], ...], fraction: NDArray[np.int64]
) -> NDArray[np.datetime64] | None:
    """Return stamps of their parts; None where a few are impossible."""
    month = (parts["y"] - 1970) * 12 + parts["m"] - 1
    first = month.astype("datetime64[M]").astype("datetime64[D]")
    days = first + (parts["d"] - 1)
    hours, minutes, seconds = time
    wrong = (
        (parts["m"] < 1)
        | (parts["m"] > 12)
        | (parts["d"] < 1)
        | (days.astype("datetime64[M]") != month.astype("datetime64[M]"))
    )
    wrong |= (hours > 23) | (minutes > 59) | (seconds > 59) | (parts["y"] < 1900)
    if np.count_nonzero(wrong) > MANY:
        return np.full(len(month), np.datetime64("NaT"), dtype="datetime64[ns]")
    if wrong.any():
        return None
    since = ((hours * 60 + minutes) * 60 + seconds) * 1_000_000_000 + fraction
    return np.asarray(days.astype("datetime64[ns]") + since)
