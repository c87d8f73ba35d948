"""Bores of plastic pipe: polyethylene and PVC, metric by SDR and American by schedule or DR."""

from __future__ import annotations

import math

from fieldfit.errors import InputError
from fieldfit.hydraulics.bores import PipeSize, from_schedule, inches, toleranced

_OUTSIDE_MM = (
    *(20, 25, 32, 40, 50, 63, 75, 90, 110, 125, 140, 160),
    *(180, 200, 225, 250, 280, 315, 355, 400, 450, 500, 560, 630),
)
# Least wall of each outside diameter by ISO 4065, as used by ISO 4427-2 and ISO 1452-2. Read in tables after ISO 4427-2
# up to 560 mm; recalled from there on and for SDR 21 from 450 mm. All follow the standard's rule, which a test repeats.
_WALLS_MM = {
    7.4: "3.0 3.5 4.4 5.5 6.9 8.6 10.3 12.3 15.1 17.1 19.2 21.9 24.6 27.4 30.8 34.2 38.3 43.1 48.5 54.7 61.5 - - -",
    9.0: "2.3 3.0 3.6 4.5 5.6 7.1 8.4 10.1 12.3 14.0 15.7 17.9 20.1 22.4 25.2 27.9 31.3 35.2 39.7 44.7 50.3 55.8 - -",
    11.0: "2.0 2.3 3.0 3.7 4.6 5.8 6.8 8.2 10.0 11.4 12.7 14.6"
    " 16.4 18.2 20.5 22.7 25.4 28.6 32.2 36.3 40.9 45.4 50.8 57.2",
    13.6: "- 2.0 2.4 3.0 3.7 4.7 5.6 6.7 8.1 9.2 10.3 11.8 13.3 14.7 16.6 18.4 20.6 23.2 26.1 29.4 33.1 36.8 41.2 46.3",
    17.0: "- - 2.0 2.4 3.0 3.8 4.5 5.4 6.6 7.4 8.3 9.5 10.7 11.9 13.4 14.8 16.6 18.7 21.1 23.7 26.7 29.7 33.2 37.4",
    21.0: "- - - 2.0 2.4 3.0 3.6 4.3 5.3 6.0 6.7 7.7 8.6 9.6 10.8 11.9 13.4 15.0 16.9 19.1 21.5 23.9 26.7 30.0",
    26.0: "- - - - 2.0 2.5 2.9 3.5 4.2 4.8 5.4 6.2 6.9 7.7 8.6 9.6 10.7 12.1 13.6 15.3 17.2 19.1 21.4 24.1",
}
LEAST_WALL_MM = {
    (outside, sdr): float(wall)
    for sdr, walls in _WALLS_MM.items()
    for outside, wall in zip(_OUTSIDE_MM, walls.split(), strict=True)
    if wall != "-"
}
"""Least wall [mm] by outside diameter [mm] and SDR."""

PE_SDR_BY_PRESSURE = {
    "PE100": {6.0: 26.0, 8.0: 21.0, 10.0: 17.0, 12.5: 13.6, 16.0: 11.0, 20.0: 9.0, 25.0: 7.4},
    "PE80": {5.0: 26.0, 6.0: 21.0, 8.0: 17.0, 10.0: 13.6, 12.5: 11.0, 16.0: 9.0, 20.0: 7.4},
}
"""SDR of each nominal pressure [bar], ISO 4427-2 with design coefficient 1.25."""

PVC_SDR = (13.6, 17.0, 21.0, 26.0)
"""Ratios of PVC-U pressure pipe that are looked up."""
PVC_LEAST_OUTSIDE_MM = 63
"""Smallest PVC-U pipe looked up [mm]: below it PVC-U may be thinner than PE, whose wall is never under 2 mm."""
PVC_INCH_WALL_RANGE = 0.12
PVC_INCH_LEAST_RANGE_MM = 0.51
"""American PVC: the wall may exceed its least value by 12 % or 0.020 in (recalled)."""


def polyethylene(outside_mm: int, sdr: float, grade: str) -> PipeSize:
    """Return the bore of PE pipe to ISO 4427-2.

    Outside diameter and wall each lie between a least and a greatest value, set together on one extrusion line; the
    bore is taken as rectangular between its extremes. At 95 % that leaves about 2 % of the bore and 5 % of C open.

    Parameters
    ----------
    outside_mm : int
        Nominal outside diameter [mm], the DN of plastic pipe.
    sdr : float
        Outside diameter over least wall [-].
    grade : str
        "PE100", "PE80" or "PE".

    Raises
    ------
    InputError
        When the standard has no such pipe.

    References
    ----------
    ISO 4427-2:2019, Tables 1 and 2; ISO 11922-1, grades B and V.

    Examples
    --------
    >>> round(polyethylene(110, 11.0, "PE100").bore_m, 5)
    0.08925
    """
    wall = _least_wall(outside_mm, sdr, "PE")
    outside_range = min(max(_up(0.006 * outside_mm), 0.3), 4.0)
    name = f"DN {outside_mm} {grade} SDR {sdr:g}"
    source = "ISO 4427-2: outside diameter grade B, wall grade V"
    return _between_extremes(name, (outside_mm, outside_range), (wall, _up(0.1 * wall + 0.1)), source, "polyethylene")


def pvc_metric(outside_mm: int, sdr: float) -> PipeSize:
    """Return the bore of PVC-U pressure pipe to ISO 1452-2, as `polyethylene` does.

    Raises
    ------
    InputError
        When the standard has no such pipe.

    References
    ----------
    ISO 1452-2:2009; ISO 11922-1, grades C and W (W recalled).
    """
    wall = _least_wall(outside_mm, sdr, "PVC-U", PVC_LEAST_OUTSIDE_MM, PVC_SDR)
    outside_range = max(_up(0.003 * outside_mm), 0.3)
    name = f"DN {outside_mm} PVC-U SDR {sdr:g}"
    source = "ISO 1452-2: outside diameter grade C, wall grade W (recalled)"
    return _between_extremes(name, (outside_mm, outside_range), (wall, _up(0.1 * wall + 0.2)), source, "PVC")


def pvc_inch(size_in: float, kind: str, number: float) -> PipeSize:
    """Return the bore of American PVC pipe, from the tables of the `fluids` library.

    Parameters
    ----------
    size_in : float
        Nominal size [in].
    kind : str
        "schedule" (ASTM D1785), "SDR" (ASTM D2241) or "C900 DR" (AWWA C900, C905).
    number : float
        The schedule, SDR or DR.

    Raises
    ------
    InputError
        When the standard has no such pipe.
    """
    found = _inch_table(kind, number, size_in)
    standard = {"schedule": "ASTM D1785", "SDR": "ASTM D2241"}.get(kind, "AWWA C900")
    if found is None:
        choices = [f"{value:g}" for value in _INCH_KINDS[kind] if _inch_table(kind, value, size_in)]
        raise InputError(
            f"no {inches(size_in)} in PVC {kind} {number:g} in {standard}",
            f"For {inches(size_in)} in there is {kind} {', '.join(choices)}." if choices else "Check the size.",
        )
    outside, wall = found
    # The library keeps the least wall; pipe is made between that and the plus tolerance.
    wall_range = max(PVC_INCH_WALL_RANGE * wall, PVC_INCH_LEAST_RANGE_MM)
    outside_range = 2.0 * max(0.002 * outside, 0.1)
    return _between_extremes(
        f"{inches(size_in)} in PVC {kind} {number:g}",
        (outside - outside_range / 2.0, outside_range),
        (wall, wall_range),
        f"{standard}: wall from its least value to 12 % above, outside diameter ±0.2 % (recalled)",
        "PVC",
    )


_INCH_KINDS: dict[str, tuple[float, ...]] = {
    "schedule": (40, 80, 120),
    "SDR": (13.5, 17, 21, 26, 32.5, 41, 64),
    "C900 DR": (14, 18, 21, 25, 32.5, 41, 51),
}


def _inch_table(kind: str, number: float, size_in: float) -> tuple[float, float] | None:
    """Return outside diameter and least wall [mm] from the library, or None."""
    digits = f"{number:g}".replace(".", "")
    large = "CIDR{}C905" if size_in > 12 else "DR{}C900"
    schedule = {"schedule": "{}D1785", "SDR": "DR{}D2241"}.get(kind, large).format(digits)
    return from_schedule(size_in, schedule)


def _between_extremes(
    name: str, outside: tuple[float, float], wall: tuple[float, float], source: str, material: str
) -> PipeSize:
    """Return the size midway between its extremes; outside diameter and wall as (least, range) in mm."""
    middle = outside[0] + outside[1] / 2.0 - 2.0 * wall[0] - wall[1]
    return toleranced(name, middle, (outside[1] / 2.0 + wall[1],), source, material)


def _least_wall(
    outside_mm: int, sdr: float, kind: str, least_outside_mm: int = 0, made: tuple[float, ...] = tuple(_WALLS_MM)
) -> float:
    """Return the least wall [mm] of a metric plastic pipe, of the sizes and ratios its standard has."""
    sizes = [size for size in _OUTSIDE_MM if size >= least_outside_mm]
    ratios = [ratio for ratio in made if outside_mm in sizes and (outside_mm, ratio) in LEAST_WALL_MM]
    if sdr in ratios:
        return LEAST_WALL_MM[outside_mm, sdr]
    raise InputError(
        f"no {kind} pipe DN {outside_mm} SDR {sdr:g}",
        f"DN {outside_mm} is made in SDR {', '.join(f'{ratio:g}' for ratio in ratios)}."
        if ratios
        else f"DN of plastic pipe is its outside diameter: {', '.join(map(str, sizes))}.",
    )


def _up(value_mm: float) -> float:
    """Round up to the next 0.1 mm, as the tolerance standards do."""
    return math.ceil(round(value_mm * 10.0, 6)) / 10.0
