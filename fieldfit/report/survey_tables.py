"""Tables of a gradient survey."""

from __future__ import annotations

from fieldfit.inference.survey_finding import Survey
from fieldfit.inference.survey_wall import SurveyWall
from fieldfit.report.digits import fixed, limit, percent, significant, value_with_band
from fieldfit.report.finding import ReachFinding
from fieldfit.report.survey_words import short, size
from fieldfit.report.tables import Table


def reach_by_reach(found: Survey, reaches: tuple[ReachFinding, ...]) -> Table:
    """Return C of every reach on its own beside that of all taps together, and what could have been seen there."""
    head = (
        "reach", "length [m]", "C on its own", "C, all together", "roughness, all together [mm]",
        "smallest local loss seen: K", "the same [m]",
    )  # fmt: skip
    rows = []
    for one, alone in zip(found.reaches, reaches, strict=True):
        c = alone.wall.hazen_williams_c
        own = value_with_band(c.best, c.measurement) if c.best is not None and c.measurement else "no estimate"
        rows.append(
            (
                f"{one.upper} to {one.lower}",
                fixed(alone.readings.length.value, 1 if alone.readings.length.value < 100.0 else 0),
                own,
                _either(_c(one.explained), None if one.rival is None else _c(one.rival)),
                _either(_roughness(one.explained), None if one.rival is None else _roughness(one.rival)),
                "none" if one.smallest_k is None else significant(one.smallest_k, 2),
                "–" if one.smallest_m is None else significant(one.smallest_m, 2),
            )
        )
    return Table(head=head, rows=tuple(rows))


def ranking(found: Survey) -> Table:
    """Return the explanations of some probability, likeliest first."""
    rows = [(_capital(short(found, one)), percent(one.probability), size(one)) for one in found.likely]
    return Table(head=("explanation", "probability", "size, with its 95 % range"), rows=tuple(rows))


def _either(first: str, rival: str | None) -> str:
    """Return a value, or two where the taps leave both open."""
    return first if rival is None else f"{first} or {rival}"


def _capital(text: str) -> str:
    return text[0].upper() + text[1:]


def _c(wall: SurveyWall) -> str:
    band = wall.hazen_williams_c
    return value_with_band(band.best, band.measurement) if band.best is not None and band.measurement else "no estimate"


def _roughness(wall: SurveyWall) -> str:
    band = wall.roughness_m
    if band.with_correlation is None:
        return "no estimate"
    low, high = band.with_correlation[0] * 1e3, band.with_correlation[1] * 1e3
    return f"under {limit(high)}" if band.best is None else value_with_band(band.best * 1e3, (low, high))
