"""One sheet of paper: the same blocks as HTML for the screen and as PDF for the clipboard."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

TEMPLATES = Path(__file__).parent / "templates"


@dataclass(frozen=True, slots=True, kw_only=True)
class Heading:
    """A heading within the sheet."""

    text: str
    """The words."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Paragraph:
    """A paragraph."""

    text: str
    """The words."""
    kind: str = "plain"
    """Plain, verdict (large) or note (small and quiet)."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Table:
    """A table, or a form to fill in by hand where its cells are empty."""

    head: tuple[str, ...]
    """Column heads; none for a list of names and values."""
    rows: tuple[tuple[str, ...], ...]
    """Cells."""
    widths: tuple[float, ...]
    """Share of the width that each column takes [-]."""
    form: bool = False
    """Whether it is to be written in: taller rows, with lines around the cells."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Bullets:
    """A list."""

    items: tuple[str, ...]
    """Its items."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Places:
    """Places to sign, side by side."""

    labels: tuple[str, ...]
    """Who signs at each."""


Block = Heading | Paragraph | Table | Bullets | Places


@dataclass(frozen=True, slots=True, kw_only=True)
class Sheet:
    """What stands on the paper."""

    title: str
    """Its title."""
    subtitle: str
    """One line below it."""
    blocks: tuple[Block, ...]
    """What follows, from top to bottom."""
    footer: str = ""
    """One line at the foot."""


def sheet_html(sheet: Sheet) -> str:
    """Return the sheet as one HTML page that needs nothing else.

    Parameters
    ----------
    sheet : Sheet
        What stands on it.

    Returns
    -------
    str
        The page; every text is escaped.
    """
    from jinja2 import Environment, FileSystemLoader, StrictUndefined
    from markupsafe import Markup

    environment = Environment(
        loader=FileSystemLoader(TEMPLATES),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    css = Markup((TEMPLATES / "page.css").read_text(encoding="utf-8"))
    blocks = [(type(block).__name__, block) for block in sheet.blocks]
    return environment.get_template("sheet.html").render(sheet=sheet, blocks=blocks, css=css) + "\n"
