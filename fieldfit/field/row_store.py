"""The rows of a long log, column by column, in temporary files instead of memory."""

from __future__ import annotations

import contextlib
import errno
import shutil
import tempfile
import threading
from collections.abc import Iterator, Mapping
from types import TracebackType
from typing import IO, Any

import numpy as np
from numpy.typing import NDArray

from fieldfit.errors import InputError

ROWS_AT_ONCE = 200_000
"""Rows that are looked at together: a few megabytes a column, whatever the length of the log."""
_WIDE = {np.dtype(np.float32): np.dtype(np.float64), np.dtype(np.uint32): np.dtype(np.int64)}
_ADVICE = "Free some room there, or name a larger place in the environment variable TMPDIR."


class RowStore:
    """Columns of numbers on disk, one temporary file each; they vanish with the store.

    Parameters
    ----------
    kinds : mapping
        Type of each column, by its name.
    bytes_needed : int
        Room that will be needed, about.

    Raises
    ------
    InputError
        When the place for temporary files has too little room.

    Examples
    --------
    >>> with RowStore({"flow": np.float64}, 80) as store:
    ...     store.append({"flow": np.arange(10.0)})
    ...     store.read("flow", 2, 4)
    array([2., 3.])
    """

    def __init__(self, kinds: Mapping[str, Any], bytes_needed: int) -> None:
        place = tempfile.gettempdir()
        free = shutil.disk_usage(place).free
        if free < bytes_needed:
            raise InputError(
                f"the log needs about {bytes_needed / 1024**3:.1f} GiB for temporary files, and {place} has "
                f"{free / 1024**3:.1f} GiB free",
                _ADVICE,
            )
        self.rows = 0
        self._reading = threading.Lock()
        self._kinds = {name: np.dtype(kind) for name, kind in kinds.items()}
        self._files: dict[str, IO[bytes]] = {}
        with contextlib.ExitStack() as files:
            for name in kinds:
                self._files[name] = files.enter_context(tempfile.TemporaryFile(prefix="fieldfit-"))
            self._open = files.pop_all()

    def __enter__(self) -> RowStore:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self._open.close()

    def append(self, columns: Mapping[str, NDArray[Any]]) -> None:
        """Add rows to every column, of (n,) values each."""
        for name, values in columns.items():
            self._put(name, self.rows, values)
        self.rows += len(next(iter(columns.values())))

    def overwrite(self, name: str, first: int, values: NDArray[Any]) -> None:
        """Write values over those of a column from a row on."""
        self._put(name, first, values)

    def _put(self, name: str, first: int, values: NDArray[Any]) -> None:
        file, kind = self._files[name], self._kinds[name]
        try:
            file.seek(first * kind.itemsize)
            file.write(np.ascontiguousarray(values, dtype=kind).data)
        except OSError as error:
            if error.errno != errno.ENOSPC:
                raise
            seen = f"{tempfile.gettempdir()} has no room left for the log's temporary files"
            raise InputError(seen, _ADVICE) from None

    def read(self, name: str, first: int, stop: int) -> NDArray[Any]:
        """Return the values of a column from row `first` up to `stop`; what was stored narrow comes back wide."""
        kind = self._kinds[name]
        values = np.empty(max(min(stop, self.rows) - first, 0), dtype=kind)
        file = self._files[name]
        wanted = values.data.cast("B") if values.size else memoryview(b"")
        with self._reading:
            file.seek(first * kind.itemsize)
            while len(wanted):
                wanted = wanted[file.readinto(wanted) :]  # type: ignore[attr-defined]
        return values.astype(_WIDE.get(kind, kind), copy=False)

    def spans(self, multiple: int = 1, first: int = 0, stop: int | None = None) -> Iterator[tuple[int, int]]:
        """Yield row ranges that cover the store, or a part of it, each a whole number of `multiple` rows but the last."""
        end = self.rows if stop is None else stop
        step = max(ROWS_AT_ONCE // multiple, 1) * multiple
        for start in range(first, end, step):
            yield start, min(start + step, end)
