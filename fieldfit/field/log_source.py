"""A log as a file of text: whether it can be read at all, its encoding and its hash."""

from __future__ import annotations

import codecs
import hashlib
import io
from dataclasses import dataclass
from pathlib import Path
from typing import TextIO

from fieldfit.errors import InputError

LARGEST_LOG_BYTES = 4 * 1024**3
"""A log beyond this size is not read in one piece: it would not fit the memory of an ordinary computer."""
ENCODINGS = {"utf-8": "UTF-8", "utf-8-sig": "UTF-8", "cp1252": "Windows-1252"}
"""Encodings as they are called."""

_BLOCK = 1 << 20
_MARKS = {b"\xff\xfe": "utf-16", b"\xfe\xff": "utf-16", b"\xef\xbb": "utf-8-sig"}
_UTF_32 = (b"\xff\xfe\0\0", b"\0\0\xfe\xff")
_UTF_8 = b"\xef\xbb\xbf"
_LINE_ENDS = (b"\n", b"\r")


@dataclass(frozen=True, slots=True, kw_only=True)
class LogSource:
    """A file that is fit to be read as a log."""

    path: Path
    """The file."""
    sha256: str
    """Hash of its bytes."""
    encoding: str
    """What Python calls its encoding."""
    length: int | None = None
    """Bytes that hold text, where zeros fill the rest of the file."""
    cut_off: bool = False
    """Whether the last line ends in the middle of being written."""
    text: str | None = None
    """The text itself, where the file holds it in another form, such as a workbook."""

    def open(self) -> TextIO:
        """Open the text, line ends as they stand."""
        if self.text is not None:
            return io.StringIO(self.text, newline="")
        if self.length is None:
            return self.path.open(encoding=self.encoding, newline="")
        with self.path.open("rb") as file:
            return io.TextIOWrapper(io.BytesIO(file.read(self.length)), encoding=self.encoding, newline="")

    def remarks(self) -> list[str]:
        """Return sentences on what was assumed about the file's bytes."""
        said = []
        if self.encoding == "cp1252":
            said.append("The file is not UTF-8; its letters were read as Windows-1252 (ISO 8859-1).")
        if self.encoding in {"utf-16-le", "utf-16-be"}:
            said.append("The file has no mark of its encoding; it was read as UTF-16.")
        if self.length is not None:
            said.append("Zero bytes fill the end of the file, as when a logger loses its power; they were not read.")
        if self.cut_off:
            said.append("The last line was cut off while it was written; its row was set aside.")
        return said

    def undecodable(self) -> InputError:
        """Return the error for bytes that are not text, with the first line that has them."""
        advice = 'Save the log as UTF-8 text; spreadsheets call it "CSV UTF-8".'
        if self.encoding.startswith("utf-16"):
            return InputError("the file is not UTF-16 text", advice, self.path.name)
        with self.path.open("rb") as file:
            for number, line in enumerate(file, start=1):
                try:
                    line.decode(self.encoding)
                except UnicodeDecodeError:
                    seen = f"the file is neither UTF-8 nor {ENCODINGS['cp1252']} text"
                    return InputError(seen, advice, f"{self.path.name}:{number}")
        return InputError("the file is no text", advice, self.path.name)


def log_source(path: Path, in_parts: bool = False) -> LogSource:
    """Look at a file's size and bytes.

    UTF-8 is read, UTF-16 with its mark or where its zeros show it, and Windows-1252 (of which ISO 8859-1's letters are
    a part) where the bytes are not UTF-8. Zeros that fill the end of a file are left out.

    Parameters
    ----------
    path : Path
        The file.
    in_parts : bool
        Whether it will be read in parts, so that its size does not matter.

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
    if size > LARGEST_LOG_BYTES and not in_parts:
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
    """Read the bytes once, for the hash, the encoding and signs of a binary file."""
    digest = hashlib.sha256()
    with path.open("rb") as file:
        head = file.read(_BLOCK)
        encoding = _encoding(head, path.name)
        look = _Look(path.name, encoding)
        block = head
        while block:
            digest.update(block)
            look.at(block)
            block = file.read(_BLOCK)
    return LogSource(
        path=path,
        sha256=digest.hexdigest(),
        encoding=look.encoding(),
        length=look.length if look.filled else None,
        cut_off=look.filled and look.last not in _LINE_ENDS,
    )


def _encoding(head: bytes, file: str) -> str:
    """Return the encoding that the first bytes show; UTF-8 is only a guess."""
    if not head.removeprefix(_UTF_8).strip(b" \t\r\n\0"):
        raise InputError("the log is empty", "Export it again.", file)
    if head[:4] in _UTF_32:
        raise InputError("the file is UTF-32 text", 'Save it as UTF-8 text; spreadsheets call it "CSV UTF-8".', file)
    if head[:2] in _MARKS and (head[:2] != _UTF_8[:2] or head[:3] == _UTF_8):
        return _MARKS[head[:2]]
    pairs = head[: len(head) // 2 * 2][:4096]
    for encoding, zeros in (("utf-16-le", pairs[1::2]), ("utf-16-be", pairs[0::2])):
        others = pairs.count(0) - zeros.count(0)
        if len(zeros) > 4 and zeros.count(0) > 0.9 * len(zeros) and others == 0:
            return encoding
    return "utf-8"


class _Look:
    """A look at the bytes of a file, block by block."""

    def __init__(self, file: str, guess: str) -> None:
        self.file = file
        self.wide = guess.startswith("utf-16")
        self.guess = guess
        self.decoder = codecs.getincrementaldecoder("utf-8")()
        self.length = 0
        self.filled = False
        self.last = b""

    def at(self, block: bytes) -> None:
        """Look at the next block."""
        if self.wide:
            return
        text = block.rstrip(b"\0")
        if (self.filled and text) or b"\0" in text:
            advice = "Export the log as CSV text; a logger's own file cannot be read."
            raise InputError("this is a binary file, not text", advice, self.file)
        self.length += len(text)
        self.filled = self.filled or len(text) < len(block)
        self.last = text[-1:] or self.last
        if not text.isascii():
            self._decode(text)

    def encoding(self) -> str:
        """Return the encoding of what was seen."""
        self._decode(b"", final=True)
        return self.guess

    def _decode(self, text: bytes, final: bool = False) -> None:
        """Try bytes as UTF-8, as long as that is the guess."""
        if self.guess.startswith("utf-8"):
            try:
                self.decoder.decode(text, final)
            except UnicodeDecodeError:
                self.guess = "cp1252"
