"""A log as a file of text: whether it can be read at all, its encoding and its hash."""

from __future__ import annotations

import hashlib
from dataclasses import dataclass
from pathlib import Path
from typing import TextIO

from fieldfit.errors import InputError

LARGEST_LOG_BYTES = 4 * 1024**3
"""A log beyond this size is not read: it would not fit the memory of an ordinary computer."""

_BLOCK = 1 << 20
_UTF_16 = (b"\xff\xfe", b"\xfe\xff")
_UTF_8 = b"\xef\xbb\xbf"


@dataclass(frozen=True, slots=True, kw_only=True)
class LogSource:
    """A file that is fit to be read as a log."""

    path: Path
    """The file."""
    sha256: str
    """Hash of its bytes."""
    encoding: str
    """What Python calls its encoding."""

    def open(self) -> TextIO:
        """Open the text, line ends as they stand."""
        return self.path.open(encoding=self.encoding, newline="")

    def undecodable(self) -> InputError:
        """Return the error for bytes that are not text, with the first line that has them."""
        advice = 'Save the log as UTF-8 text; spreadsheets call it "CSV UTF-8".'
        seen = f"the file is not {self.encoding.removesuffix('-sig').upper()} text"
        if self.encoding == "utf-16":
            return InputError(seen, advice, self.path.name)
        with self.path.open("rb") as file:
            for number, line in enumerate(file, start=1):
                try:
                    line.decode("utf-8")
                except UnicodeDecodeError:
                    return InputError(seen, advice, f"{self.path.name}:{number}")
        return InputError(seen, advice, self.path.name)


def log_source(path: Path) -> LogSource:
    """Look at a file's size and bytes.

    Parameters
    ----------
    path : Path
        The file.

    Raises
    ------
    InputError
        When it is missing, a folder, empty, too large, or not text.
    """
    if path.is_dir():
        raise InputError("this is a folder, not a log", "Name the CSV file in it.", str(path))
    if not path.is_file():
        raise InputError("there is no such log", "Check its name and place.", str(path))
    size = path.stat().st_size
    if size > LARGEST_LOG_BYTES:
        raise InputError(
            f"the log has {size / 1024**3:.1f} GiB, and {LARGEST_LOG_BYTES / 1024**3:.0f} GiB is the most that is read",
            "Cut it to the hours of the test, or keep every tenth row.",
            path.name,
        )
    try:
        return _looked_at(path)
    except OSError as error:
        reason = error.strerror or "it cannot be opened"
        raise InputError(f"the log cannot be read: {reason}", "Check its name and rights.", str(path)) from None


def _looked_at(path: Path) -> LogSource:
    """Read the bytes once, for the hash and for signs of a binary file."""
    digest = hashlib.sha256()
    with path.open("rb") as file:
        head = file.read(_BLOCK)
        encoding = "utf-16" if head[:2] in _UTF_16 else "utf-8-sig" if head[:3] == _UTF_8 else "utf-8"
        if not head.removeprefix(_UTF_8).strip():
            raise InputError("the log is empty", "Export it again.", path.name)
        block = head
        while block:
            if encoding != "utf-16" and b"\0" in block:
                advice = "Export the log as CSV text; a spreadsheet or a logger's own file cannot be read."
                raise InputError("this is a binary file, not text", advice, path.name)
            digest.update(block)
            block = file.read(_BLOCK)
    return LogSource(path=path, sha256=digest.hexdigest(), encoding=encoding)
