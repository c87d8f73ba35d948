"""The three results at the top of a page, each as a number and a strip that shows its ranges."""

from __future__ import annotations

from dataclasses import dataclass

from fieldfit.report.digits import fixed, limit, significant, span, stated, value_with_band
from fieldfit.report.finding import ReachFinding

Span = tuple[float, float]


@dataclass(frozen=True, slots=True, kw_only=True)
class Bar:
    """One block of a strip."""

    left: float
    """Left end [%]."""
    width: float
    """Width [%]."""
    top: float
    """Upper edge [px]."""
    height: float
    """Height [px]."""
    colour: str
    """Colour."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Strip:
    """One result."""

    title: str
    """What it is."""
    value: str
    """The number."""
    own: str
    """Range by the readings alone, in words."""
    wide: str
    """Range with the limit of friction formulas, in words; may be empty."""
    new: str
    """New pipe, in words; may be empty."""
    bars: tuple[Bar, ...]
    """The drawing."""


def strips(reach: ReachFinding) -> list[Strip]:
    """Return roughness, C and head loss against new pipe, as far as they are known."""
    found = [_roughness(reach), _hazen_williams(reach), _ratio(reach)]
    return [strip for strip in found if strip is not None]


def _roughness(reach: ReachFinding) -> Strip | None:
    band = reach.wall.roughness_m
    if band.measurement is None or band.with_correlation is None:
        return None
    own, wide = _scaled(band.measurement, 1e3), _scaled(band.with_correlation, 1e3)
    new = _scaled(reach.new_pipe.roughness_m[::2], 1e3) if reach.new_pipe else None
    best = None if band.best is None else band.best * 1e3
    measured = best is not None
    return Strip(
        title="Roughness of the wall",
        value=f"{_value(best, own)} mm" if best is not None else f"under {limit(wide[1])} mm",
        own=f"{span(*own)} by these readings" if measured else f"under {limit(own[1])} by these readings",
        wide=f"{span(*wide)} with the formula's limit"
        if measured
        else f"under {limit(wide[1])} with the formula's limit",
        new=f"new: {stated(new[0])} to {stated(new[1])}" if new else "",
        bars=_bars(best, own, wide, new, from_zero=True),
    )


def _hazen_williams(reach: ReachFinding) -> Strip | None:
    band = reach.wall.hazen_williams_c
    if band.best is None or band.measurement is None or band.with_correlation is None:
        return None
    new = reach.new_pipe.hazen_williams_c[::2] if reach.new_pipe else None
    return Strip(
        title="Hazen–Williams C at the tested flow",
        value=_value(band.best, band.measurement),
        own=f"{span(*band.measurement)} by these readings",
        wide=f"{span(*band.with_correlation)} with the formula's limit",
        new=f"new: {significant(new[0])} to {significant(new[1])}" if new else "",
        bars=_bars(band.best, band.measurement, band.with_correlation, new, from_zero=False),
    )


def _ratio(reach: ReachFinding) -> Strip | None:
    new = reach.new_pipe
    if new is None:
        return None
    low, best, high = new.head_loss_ratio
    off = new.limit - 1.0
    return Strip(
        title="Head loss against new pipe",
        value=f"{_value(best, (low, high))} times",
        own="",
        wide=f"{span(low, high)}, formula's limit included",
        new=f"new: {fixed(1.0 - off, 2)} to {fixed(1.0 + off, 2)}",
        bars=_bars(best, None, (low, high), (1.0 - off, 1.0 + off), from_zero=False),
    )


def _scaled(pair: tuple[float, ...], scale: float) -> Span:
    return pair[0] * scale, pair[1] * scale


def _value(best: float, band: Span) -> str:
    """Return the number alone, to the digits its range deserves."""
    return value_with_band(best, band).split(" (")[0]


def _bars(best: float | None, own: Span | None, wide: Span, new: Span | None, from_zero: bool) -> tuple[Bar, ...]:
    """Return the drawing on a scale that holds everything."""
    ends = [*wide, *(own or ()), *(new or ())]
    low, high = min(ends), max(ends)
    low, high = (0.0, 1.04 * high) if from_zero else (low - 0.06 * (high - low), high + 0.06 * (high - low))

    def bar(left: float, right: float, top: float, height: float, colour: str) -> Bar:
        start, width = 100.0 * (left - low) / (high - low), 100.0 * (right - left) / (high - low)
        return Bar(left=round(start, 2), width=round(max(width, 0.6), 2), top=top, height=height, colour=colour)

    bars = [bar(*wide, 6.0, 14.0, "var(--wide)")]
    if own:
        bars.append(bar(*own, 6.0, 14.0, "var(--own)"))
    if new:
        bars.append(bar(*new, 21.0, 3.0, "var(--new)"))
    if best is not None:
        bars.append(bar(best, best, 3.0, 20.0, "var(--reading)"))
    return tuple(bars)
