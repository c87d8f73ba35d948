"""The one kind of error a user can put right."""

from __future__ import annotations

import difflib
from collections.abc import Iterable


class InputError(ValueError):
    """What the user gave cannot be used, and here is what to do.

    It reads ``where: what was seen. What to do.``; whoever knows the place adds it with `at`.

    Parameters
    ----------
    seen : str
        What was found, with the offending value quoted. No final stop.
    do : str
        What the user should do, as a sentence.
    where : str, optional
        Place, such as ``section.toml:12, key 'bore'``.
    """

    def __init__(self, seen: str, do: str, where: str = "") -> None:
        self.seen = seen
        self.do = do
        self.where = where
        super().__init__(f"{where}: {seen}. {do}" if where else f"{seen}. {do}")

    def at(self, where: str) -> InputError:
        """Return the same error, placed; a place already known is kept behind the new one."""
        return InputError(self.seen, self.do, f"{where}, {self.where}" if self.where else where)


def near_miss(name: str, allowed: Iterable[str]) -> str:
    """Return ``Did you mean 'x'? `` for the closest allowed name, or an empty text.

    Examples
    --------
    >>> near_miss("tempreature", ["temperature", "bore"])
    "Did you mean 'temperature'? "
    >>> near_miss("qqq", ["temperature", "bore"])
    ''
    """
    by_folded = {option.casefold(): option for option in allowed}
    close = difflib.get_close_matches(name.casefold(), by_folded, n=1, cutoff=0.6)
    return f"Did you mean '{by_folded[close[0]]}'? " if close else ""
