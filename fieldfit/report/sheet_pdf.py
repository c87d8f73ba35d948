"""A sheet as PDF: blocks set from the top down, at the largest type that fits the page."""

from __future__ import annotations

import io
from collections.abc import Callable
from typing import TYPE_CHECKING

from fieldfit.report.figures.style import HAIR, INCH_MM, INK, QUIET, READING
from fieldfit.report.sheet import Block, Bullets, Heading, Paragraph, Places, Sheet, Table

if TYPE_CHECKING:
    from matplotlib.figure import Figure

A4_MM = (210.0, 297.0)
MARGIN_MM = (19.0, 16.0)
"""Margins at the sides and at top and bottom [mm]; the text also fits a Letter page of the same width."""
LETTER_HEIGHT_MM = 279.4
SIZES = (10.0, 9.5, 9.0, 8.5, 8.0, 7.5, 7.0, 6.5, 6.0)
"""Type sizes that are tried [pt]."""
LEADING = 1.38
POINT_MM = INCH_MM / 72.0


def sheet_pdf(sheet: Sheet) -> bytes:
    """Return the sheet as a PDF of one page, byte for byte the same for the same sheet.

    Parameters
    ----------
    sheet : Sheet
        What stands on it.

    Returns
    -------
    bytes
        The file. What does not fit even at the smallest type goes on to further pages.
    """
    from matplotlib import rc_context
    from matplotlib.backends.backend_pdf import PdfPages

    with rc_context({"pdf.fonttype": 42, "font.family": "sans-serif", "font.sans-serif": ["DejaVu Sans"]}):
        pages = next((pages for size in SIZES if len(pages := _set(sheet, size)) == 1), None) or _set(sheet, SIZES[-1])
        target = io.BytesIO()
        with PdfPages(target, metadata={"CreationDate": None, "Creator": "fieldfit", "Title": sheet.title}) as file:
            for page in pages:
                file.savefig(page)
    return target.getvalue()


def _set(sheet: Sheet, size: float) -> list[Figure]:
    """Set the sheet at one type size and return its pages."""
    pen = _Pen(size)
    pen.text(sheet.title, 1.9, weight="bold")
    pen.text(sheet.subtitle, 1.0, colour=QUIET)
    pen.rule(READING, 1.2)
    for block in sheet.blocks:
        _SETTERS[type(block)](pen, block)
    if sheet.footer:
        pen.skip(0.6)
        pen.rule(HAIR, 0.6)
        pen.text(sheet.footer, 0.82, colour=QUIET)
    return pen.pages


class _Pen:
    """Writes down a page, and takes a new one when it is full."""

    def __init__(self, size: float) -> None:
        self.size = size
        self.pages: list[Figure] = []
        self.left, self.right = MARGIN_MM[0], A4_MM[0] - MARGIN_MM[0]
        self._new_page()

    def _new_page(self) -> None:
        from matplotlib.figure import Figure

        self.pages.append(Figure(figsize=(A4_MM[0] / INCH_MM, A4_MM[1] / INCH_MM)))
        # A Letter page is shorter: what ends above its foot prints on both.
        self.y = A4_MM[1] - MARGIN_MM[1]

    @property
    def line_mm(self) -> float:
        """Height of a line of normal type [mm]."""
        return self.size * LEADING * POINT_MM

    def room(self, height_mm: float) -> None:
        """Make sure that so much fits below, on a new page if need be."""
        if self.y - height_mm < A4_MM[1] - LETTER_HEIGHT_MM + MARGIN_MM[1]:
            self._new_page()

    def skip(self, lines: float) -> None:
        """Leave so many lines free."""
        self.y -= lines * self.line_mm

    def rule(self, colour: str, width: float) -> None:
        """Draw a line across the page."""
        self.stroke((self.left, self.y), (self.right, self.y), colour, width)
        self.skip(0.5)

    def stroke(self, start: tuple[float, float], end: tuple[float, float], colour: str, width: float) -> None:
        """Draw a line between two points [mm]."""
        from matplotlib.lines import Line2D

        xs, ys = (start[0] / A4_MM[0], end[0] / A4_MM[0]), (start[1] / A4_MM[1], end[1] / A4_MM[1])
        self.pages[-1].add_artist(Line2D(xs, ys, color=colour, linewidth=width))

    def text(self, words: str, scale: float, *, weight: str = "normal", colour: str = INK, indent: float = 0.0) -> None:
        """Write a paragraph over the whole width."""
        lines = wrapped(words, self.size * scale, self.right - self.left - indent, weight)
        height = self.line_mm * scale
        for line in lines:
            self.room(height)
            self.put(line, (self.left + indent, self.y), scale, weight=weight, colour=colour)
            self.y -= height
        self.skip(0.25)

    def put(
        self, line: str, at: tuple[float, float], scale: float, *, weight: str = "normal", colour: str = INK
    ) -> None:
        """Write one line with its top left at a point [mm]."""
        self.pages[-1].text(
            at[0] / A4_MM[0],
            at[1] / A4_MM[1],
            line,
            fontsize=self.size * scale,
            fontweight=weight,
            color=colour,
            va="top",
            ha="left",
            parse_math=False,
        )


def wrapped(words: str, size: float, width_mm: float, weight: str = "normal") -> list[str]:
    """Return a text as lines that fit a width.

    Parameters
    ----------
    words : str
        The text.
    size : float
        Type size [pt].
    width_mm : float
        Width of the column [mm].
    weight : str
        Normal or bold.

    Returns
    -------
    list of str
        At least one line.
    """
    lines = [""]
    for word in words.split(" "):
        longer = f"{lines[-1]} {word}" if lines[-1] else word
        if lines[-1] and _width_mm(longer, size, weight) > width_mm:
            lines.append(word)
        else:
            lines[-1] = longer
    return lines


def _width_mm(text: str, size: float, weight: str) -> float:
    """Return how wide a line of text is [mm]."""
    from matplotlib.font_manager import FontProperties
    from matplotlib.textpath import text_to_path

    width, _, _ = text_to_path.get_text_width_height_descent(
        text, FontProperties(family="DejaVu Sans", size=size, weight=weight), ismath=False
    )
    return float(width) * POINT_MM


def _heading(pen: _Pen, block: Heading) -> None:
    pen.skip(0.35)
    pen.room(4.0 * pen.line_mm)
    pen.text(block.text, 1.15, weight="bold", colour=READING)


def _paragraph(pen: _Pen, block: Paragraph) -> None:
    scale, weight, colour = {
        "plain": (1.0, "normal", INK),
        "verdict": (1.4, "bold", READING),
        "note": (0.86, "normal", QUIET),
    }[block.kind]
    pen.text(block.text, scale, weight=weight, colour=colour)


def _bullets(pen: _Pen, block: Bullets) -> None:
    for item in block.items:
        pen.room(pen.line_mm)
        pen.put("•", (pen.left, pen.y), 0.94)
        pen.text(item, 0.94, indent=3.5)
        pen.y += 0.2 * pen.line_mm
    pen.skip(0.2)


def _table(pen: _Pen, block: Table) -> None:
    if block.form:
        pen.stroke((pen.left, pen.y), (pen.right, pen.y), QUIET, 0.6)
    if block.head:
        _row(pen, block, block.head, colour=QUIET)
        pen.stroke((pen.left, pen.y), (pen.right, pen.y), QUIET, 0.7)
    for row in block.rows:
        _row(pen, block, row)
        pen.stroke((pen.left, pen.y), (pen.right, pen.y), QUIET if block.form else HAIR, 0.6)
    pen.skip(0.6)


def _row(pen: _Pen, block: Table, cells: tuple[str, ...], colour: str = INK) -> None:
    """Set one row of a table, as high as its highest cell."""
    scale, gap = 0.86, 1.6
    width = pen.right - pen.left
    lefts = [pen.left + width * sum(block.widths[:index]) for index in range(len(cells))]
    columns = [
        wrapped(cell, pen.size * scale, width * share - gap) for cell, share in zip(cells, block.widths, strict=True)
    ]
    height = pen.line_mm * scale * max(len(lines) for lines in columns) + 0.4 * pen.line_mm
    height = max(height, 1.75 * pen.line_mm) if block.form else height
    pen.room(height)
    for left, lines in zip(lefts, columns, strict=True):
        for number, line in enumerate(lines):
            at = (left + (0.8 if block.form else 0.0), pen.y - 0.3 * pen.line_mm - number * pen.line_mm * scale)
            pen.put(line, at, scale, colour=colour)
    if block.form:
        for x in (*lefts, pen.right):
            pen.stroke((x, pen.y), (x, pen.y - height), QUIET, 0.6)
    pen.y -= height


def _places(pen: _Pen, block: Places) -> None:
    pen.skip(2.6)
    pen.room(2.0 * pen.line_mm)
    gap = 6.0
    width = (pen.right - pen.left + gap) / len(block.labels)
    for index, label in enumerate(block.labels):
        left = pen.left + index * width
        pen.stroke((left, pen.y), (left + width - gap, pen.y), INK, 0.7)
        pen.put(label, (left, pen.y - 0.2 * pen.line_mm), 0.82, colour=QUIET)
    pen.skip(1.4)


_SETTERS: dict[type[Block], Callable[..., None]] = {
    Heading: _heading,
    Paragraph: _paragraph,
    Bullets: _bullets,
    Table: _table,
    Places: _places,
}
