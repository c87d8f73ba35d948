"""How far long work has come, for whoever wants to show it."""

from __future__ import annotations

import sys
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from contextvars import ContextVar
from typing import Any

PATIENCE_S = 1.0
"""Work that takes less is done before a bar is worth drawing [s]."""
Listener = Callable[[str, float], None]

_listener: ContextVar[Listener | None] = ContextVar("listener", default=None)


def tell(what: str, share: float) -> None:
    """Say what is being done and which share of it is behind, to whoever listens.

    Parameters
    ----------
    what : str
        The work, in two or three words.
    share : float
        Share that is done, from 0 to 1.
    """
    listener = _listener.get()
    if listener is not None:
        listener(what, share)


@contextmanager
def told_to(listener: Listener) -> Iterator[None]:
    """Let a function know of all progress within.

    Examples
    --------
    >>> with told_to(lambda what, share: print(f"{what} {share:.0%}")):
    ...     tell("Reading log.csv", 0.5)
    Reading log.csv 50%
    """
    before = _listener.set(listener)
    try:
        yield
    finally:
        _listener.reset(before)


@contextmanager
def bar_on_terminal() -> Iterator[None]:
    """Show a bar on standard error for work within that takes longer than a second; none where it is no terminal."""
    if not sys.stderr.isatty():
        yield
        return
    bar = _Bar()
    try:
        with told_to(bar.show):
            yield
    finally:
        bar.close()


class _Bar:
    """A bar that appears when its work has taken long enough."""

    def __init__(self) -> None:
        self._begun = time.monotonic()
        self._drawn: Any = None
        self._tasks: dict[str, Any] = {}

    def show(self, what: str, share: float) -> None:
        """Move the bar of one piece of work; one that is done is taken away."""
        if share >= 1.0:
            self.close()
            return
        if self._drawn is None:
            if time.monotonic() - self._begun < PATIENCE_S:
                return
            from rich.console import Console
            from rich.progress import Progress

            self._drawn = Progress(console=Console(stderr=True), transient=True)
            self._drawn.start()
        if what not in self._tasks:
            self._tasks[what] = self._drawn.add_task(what.replace("[", "\\["), total=1.0)
        self._drawn.update(self._tasks[what], completed=share)

    def close(self) -> None:
        """Take the bar off the terminal."""
        if self._drawn is not None:
            self._drawn.stop()
        self._drawn, self._tasks = None, {}
