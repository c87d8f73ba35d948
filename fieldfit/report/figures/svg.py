"""Figures as SVG that can stand inside a page."""

from __future__ import annotations

import io
import re
from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from matplotlib.figure import Figure

# Letters become outlines: the figure then prints alike on every machine, and a hostile name stays a drawing.
SETTINGS: Any = {"svg.fonttype": "path", "svg.hashsalt": "fieldfit", "path.simplify_threshold": 0.3}
NO_METADATA = dict.fromkeys(("Date", "Creator", "Format", "Type"))
_OUTLINE = re.compile(r'<path id="([^"]+)" d="([^"]+)" transform="scale\(0\.015625\)"/> ?')
_LETTER = re.compile(r'<use xlink:href="#([^"]+)"(?: transform="translate\(([-\d.]+) 0\)")?/> ?')


def svg(figures: Mapping[str, Figure]) -> dict[str, str]:
    """Return each figure as an SVG element, the same bytes every time.

    Parameters
    ----------
    figures : mapping of str to Figure
        Figures by a name that is unique on the page; it begins the identifiers inside.

    Returns
    -------
    dict of str to str
        SVG elements by the same names, as wide as the room they are given. They belong on one page: the outline of
        a letter stands in the first figure that uses it.
    """
    import matplotlib
    from matplotlib.backends.backend_svg import FigureCanvasSVG

    drawn = {}
    outlines: dict[str, str] = {}
    with matplotlib.rc_context(SETTINGS):
        for name, figure in figures.items():
            out = io.StringIO()
            FigureCanvasSVG(figure).print_svg(out, metadata=NO_METADATA)  # type: ignore[no-untyped-call]
            drawn[name] = _with_shared_letters(_for_page(out.getvalue(), name), name, outlines)
    return drawn


def _for_page(text: str, name: str) -> str:
    """Strip what a page does not need, and keep this figure's identifiers apart from another's."""
    text = text[text.index("<svg") :]
    text = re.sub(r"<!--.*?-->\s*", "", text, flags=re.DOTALL)
    text = re.sub(r"<defs>\s*<style.*?</style>\s*</defs>\s*", "", text, count=1, flags=re.DOTALL)
    text = re.sub(r' (?:width|height)="[\d.]+pt"', "", text, count=2)
    text = re.sub(r'<g id="[^"]*"', "<g", text)
    # Two decimals of a point are enough; numbers below one are left, for they may be scales.
    text = re.sub(r"([1-9]\d*\.\d\d)\d+", r"\1", text)
    text = re.sub(r'( id="|href="#|url\(#)', rf"\g<1>{name}-", text)
    text = re.sub(r"\s*\n\s*", " ", text)
    return text.replace("<svg ", '<svg aria-hidden="true" ', 1)


def _with_shared_letters(text: str, name: str, outlines: dict[str, str]) -> str:
    """Keep only the outlines of letters that no figure before has; they are half of a page otherwise."""
    called: dict[str, str] = {}

    def define(found: re.Match[str]) -> str:
        new = found[2] not in outlines
        called[found[1]] = outlines.setdefault(found[2], f"{name}-{len(outlines)}")
        return f'<path id="{called[found[1]]}" d="{found[2]}" transform="scale(.015625)"/>' if new else ""

    text = _OUTLINE.sub(define, text)
    # A letter on the line needs no more than its place; one that is raised or lowered keeps its long form.
    text = _LETTER.sub(lambda found: f'<use href="#{found[1]}" x="{found[2] or 0}"/>', text)
    text = re.sub(r'href="#([^"]+)"', lambda found: f'href="#{called.get(found[1], found[1])}"', text)
    return text.replace("<defs> </defs> ", "")
