"""A long text file as blocks of whole lines, read one after the other."""

from __future__ import annotations

import codecs
import io
from collections.abc import Iterator
from dataclasses import dataclass
from typing import TextIO

from fieldfit.errors import InputError
from fieldfit.field.log_source import LogSource

BLOCK_BYTES = 2 << 20
"""Size of a block."""
LONGEST_LINE = 1 << 22
"""Characters from which a line is none of a log."""
FIRST_BYTES = 1 << 16
"""Size of the first block, which is read with more care."""


@dataclass(frozen=True, slots=True, kw_only=True)
class LineBlock:
    """Some lines of a file that follow each other."""

    text: bytes
    """The lines in UTF-8, the last one ended like the others."""
    share: float
    """Share of the file that is read when this block is."""


@dataclass(frozen=True, slots=True, kw_only=True)
class BlockSource(LogSource):
    """A block that can be read as if it were a file."""

    block: LineBlock
    """The block."""

    def open(self) -> TextIO:
        """Open the text, line ends as they stand."""
        return io.StringIO(self.block.text.decode("utf-8"), newline="")


def line_blocks(source: LogSource, skip: int) -> Iterator[LineBlock]:
    """Yield a file's lines in blocks.

    Parameters
    ----------
    source : LogSource
        The file.
    skip : int
        Lines to leave out at the beginning.

    Yields
    ------
    LineBlock

    Raises
    ------
    InputError
        When a block holds bytes that are not text, or a line that never ends.
    """
    size = max(source.path.stat().st_size, 1)
    left = b""
    for piece, read in _pieces(source, skip):
        cut = piece.rfind(b"\n") + 1
        if cut:
            whole = not left and cut == len(piece)
            yield LineBlock(text=piece if whole else left + piece[:cut], share=min(read / size, 1.0))
            left = b"" if whole else piece[cut:]
            continue
        left += piece
        if len(left) > LONGEST_LINE:
            seen, advice = f"a line has more than {LONGEST_LINE} characters", "Export one row of readings in a line."
            raise InputError(seen, advice, source.path.name)
    if left:
        yield LineBlock(text=left + b"\n", share=1.0)


def _pieces(source: LogSource, skip: int) -> Iterator[tuple[bytes, int]]:
    """Yield the text in UTF-8 below the lines to skip, as it comes, and how many bytes of the file were read."""
    start = _encoded_length(source, skip)
    left = source.length if source.length is not None else source.path.stat().st_size
    decoder = None if source.encoding.startswith("utf-8") else codecs.getincrementaldecoder(source.encoding)()
    with source.path.open("rb") as file:
        if decoder is None:
            file.seek(start)
            left, start = left - start, 0
        wanted = FIRST_BYTES
        while piece := file.read(min(wanted, max(left, 0))):
            if decoder is None:
                # To the end of the line, so that nothing need be put together afterwards.
                piece += file.readline(min(LONGEST_LINE, left - len(piece)))
            left -= len(piece)
            wanted = BLOCK_BYTES
            if decoder is not None:
                try:
                    piece = decoder.decode(piece).encode("utf-8")
                except UnicodeError:
                    raise source.undecodable() from None
            text, start = piece[start:], max(start - len(piece), 0)
            if text:
                yield text, file.tell()


def _encoded_length(source: LogSource, lines: int) -> int:
    """Return how many bytes of UTF-8 the first lines take, a mark at the beginning of the file included."""
    mark = len(codecs.BOM_UTF8) if source.encoding == "utf-8-sig" else 0
    with source.open() as file:
        return mark + sum(len(file.readline().encode("utf-8")) for _ in range(lines))
