"""A bore from a pipe standard, with the uncertainty the standard's tolerances leave."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

MM = 1.0e-3
INCH_MM = 25.4


@dataclass(frozen=True, slots=True, kw_only=True)
class PipeSize:
    """As-new inside diameter of a pipe called by its trade name."""

    name: str
    """The size, written one way, such as "NPS 6 schedule 40"."""
    bore_m: float
    """As-new inside diameter [m]."""
    bore_standard_m: float
    """Its standard uncertainty from the standard's tolerances [m]."""
    source: str
    """The standard, and which tolerances were counted."""
    material: str | None
    """Material in the new-pipe table, where the size settles it; None where it does not."""


def toleranced(
    name: str, bore_mm: float, tolerances_mm: tuple[float, ...], source: str, material: str | None
) -> PipeSize:
    """Return a size whose bore may be off by independent tolerances.

    Parameters
    ----------
    name : str
        The size.
    bore_mm : float
        Middle bore [mm].
    tolerances_mm : tuple of float
        By how much each independent tolerance moves the bore at most [mm]: each is a rectangular distribution.
    source : str
        The standard, and which tolerances were counted.
    material : str or None
        Material in the new-pipe table.

    References
    ----------
    JCGM 100:2008 (GUM), 4.3.7.

    Examples
    --------
    >>> round(toleranced("sleeve", 100.0, (3.0, 4.0), "", None).bore_standard_m, 6)
    0.002887
    """
    return PipeSize(
        name=name,
        bore_m=round(bore_mm * MM, 9),
        bore_standard_m=math.hypot(*tolerances_mm) / math.sqrt(3.0) * MM,
        source=source,
        material=material,
    )


def from_schedule(size_in: float, schedule: str) -> tuple[float, float] | None:
    """Return outside diameter and wall [mm] from the `fluids` library's tables, or None when it has no such pipe.

    Examples
    --------
    >>> from_schedule(6.0, "40"), from_schedule(6.0, "45")
    ((168.3, 7.11), None)
    """
    from fluids import piping

    look_up: Callable[..., tuple[float, float, float, float]] = piping.nearest_pipe
    try:
        _, _, outside_m, wall_m = look_up(NPS=size_in, schedule=schedule)
    except ValueError:
        return None
    return round(outside_m / MM, 4), round(wall_m / MM, 4)


def inches(size: float) -> str:
    """Return a nominal size in inches as the trade writes it.

    Examples
    --------
    >>> inches(1.5), inches(0.75), inches(6.0)
    ('1-1/2', '3/4', '6')
    """
    whole, eighths = divmod(round(size * 8), 8)
    if not eighths or size * 8 != round(size * 8):
        return f"{size:g}"
    divisor = math.gcd(eighths, 8)
    fraction = f"{eighths // divisor}/{8 // divisor}"
    return f"{whole}-{fraction}" if whole else fraction
