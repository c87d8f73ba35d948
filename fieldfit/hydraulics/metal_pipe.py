"""Bores of metal pipe: steel by schedule, threaded tube, ductile iron with its lining, copper tube."""

from __future__ import annotations

from fieldfit.errors import InputError
from fieldfit.hydraulics.bores import INCH_MM, PipeSize, from_schedule, inches, toleranced

STEEL_SCHEDULES = ("5", "10", "20", "30", "40", "60", "80", "100", "120", "140", "160", "STD", "XS", "XXS")
STAINLESS_SCHEDULES = ("5S", "10S", "40S", "80S")
NPS_BY_DN = {6: 0.125, 8: 0.25, 10: 0.375, 15: 0.5, 20: 0.75, 25: 1.0, 32: 1.25, 40: 1.5, 50: 2.0, 65: 2.5, 80: 3.0}
NPS_BY_DN |= {90: 3.5, **{dn: dn / 25.0 for dn in (100, 125, 150, *range(200, 1250, 50))}}
"""NPS [in] of each DN of steel pipe."""
STEEL_WALL = 0.125
"""Mill tolerance of the wall of steel pipe over its nominal value [-], ASTM A53, A106 and A312."""

# EN 10255: outside diameter of ISO 4200, walls of the medium and the heavy series [mm].
_THREADED_MM = {15: (21.3, 2.6, 3.2), 20: (26.9, 2.6, 3.2), 25: (33.7, 3.2, 4.0), 32: (42.4, 3.2, 4.0)}
_THREADED_MM |= {40: (48.3, 3.2, 4.0), 50: (60.3, 3.6, 4.5), 65: (76.1, 3.6, 4.5), 80: (88.9, 4.0, 5.0)}
_THREADED_MM |= {100: (114.3, 4.5, 5.4), 125: (139.7, 5.0, 5.4), 150: (165.1, 5.0, 5.4)}
THREADED_WALL = 0.10
"""Tolerance of the wall of EN 10255 tube over its nominal value [-] (recalled)."""

# AWWA C151: outside diameter, wall of class 51, casting tolerance [in]; walls of the pressure classes [in].
_DUCTILE_IN = {3: (3.96, 0.25, 0.05), 4: (4.80, 0.26, 0.05), 6: (6.90, 0.28, 0.05), 8: (9.05, 0.30, 0.05)}
_DUCTILE_IN |= {10: (11.10, 0.32, 0.06), 12: (13.20, 0.34, 0.06), 14: (15.30, 0.36, 0.07), 16: (17.40, 0.37, 0.07)}
_DUCTILE_IN |= {18: (19.50, 0.38, 0.07), 20: (21.60, 0.39, 0.07), 24: (25.80, 0.41, 0.07)}
_PRESSURE_CLASS_IN = {3: {350: 0.25}, 4: {350: 0.25}, 6: {350: 0.25}, 8: {350: 0.25}, 10: {350: 0.26}, 12: {350: 0.28}}
_PRESSURE_CLASS_IN |= {14: {250: 0.28, 300: 0.30, 350: 0.31}, 16: {250: 0.30, 300: 0.32, 350: 0.34}}
_PRESSURE_CLASS_IN |= {18: {250: 0.31, 300: 0.34, 350: 0.36}, 20: {250: 0.33, 300: 0.36, 350: 0.38}}
_PRESSURE_CLASS_IN |= {24: {200: 0.33, 250: 0.37, 300: 0.40, 350: 0.43}}
LINING_PLUS_IN = 0.125
"""By how much a cement lining may exceed its least thickness [in], AWWA C104 (recalled)."""

# EN 545: outside diameter and its minus tolerance, least wall of class 40 [mm]; plus tolerance is 1 mm throughout.
_EN_545_MM = {80: (98, 2.7, 3.0), 100: (118, 2.8, 3.0), 125: (144, 2.8, 3.0), 150: (170, 2.9, 3.0)}
_EN_545_MM |= {200: (222, 3.0, 3.1), 250: (274, 3.1, 3.9), 300: (326, 3.3, 4.6), 350: (378, 3.4, 5.3)}
_EN_545_MM |= {400: (429, 3.5, 6.0), 500: (532, 3.8, 7.5), 600: (635, 4.0, 8.9)}

# ASTM B88: walls by nominal size [in]; the outside diameter is the size plus 1/8 in.
_COPPER_SIZES_IN = (0.25, 0.375, 0.5, 0.625, 0.75, 1.0, 1.25, 1.5, 2.0, 2.5, 3.0, 3.5, 4.0, 5.0, 6.0, 8.0, 10.0, 12.0)
_COPPER_WALLS_IN = {
    "K": "0.035 0.049 0.049 0.049 0.065 0.065 0.065 0.072 0.083 0.095 0.109 0.120 0.134 0.160 0.192 0.271 0.338 0.405",
    "L": "0.030 0.035 0.040 0.042 0.045 0.050 0.055 0.060 0.070 0.080 0.090 0.100 0.114 0.125 0.140 0.200 0.250 0.280",
    "M": "- 0.025 0.028 - 0.032 0.035 0.042 0.049 0.058 0.065 0.072 0.083 0.095 0.109 0.122 0.170 0.212 0.254",
}
COPPER_WALL = 0.10
"""Tolerance of the wall of copper tube over its nominal value [-], ASTM B88."""
COPPER_OUTSIDE_IN = 0.005
"""Greatest tolerance of the mean outside diameter of copper tube [in], ASTM B88."""


def steel(size_in: float, schedule: str, material: str | None = None) -> PipeSize:
    """Return the bore of steel pipe by schedule, from the tables of the `fluids` library.

    The mill tolerance of the wall counts, ±12.5 %. The ±1 % that the outside diameter may be off at any one point is
    mostly roundness, which leaves the area as it is, and the weight of the pipe, ±10 %, holds the mean: not counted.

    Parameters
    ----------
    size_in : float
        Nominal pipe size [in].
    schedule : str
        Such as "40", "STD" or "10S".
    material : str, optional
        What the user called the pipe; a plain schedule does not tell black from galvanized.

    Raises
    ------
    InputError
        When the standard has no such pipe.

    References
    ----------
    ASME B36.10M and B36.19M; ASTM A53/A53M, Section 10 on dimensions and weight.

    Examples
    --------
    >>> steel(2.0, "40").bore_m
    0.05248
    """
    found = from_schedule(size_in, schedule)
    if found is None:
        every = STEEL_SCHEDULES + STAINLESS_SCHEDULES
        choices = [option for option in every if from_schedule(size_in, option)]
        raise InputError(
            f"no NPS {inches(size_in)} schedule {schedule}",
            f"Schedules of NPS {inches(size_in)}: {', '.join(choices)}."
            if choices
            else "Sizes go from NPS 1/8 to NPS 48, such as NPS 6.",
        )
    outside, wall = found
    stainless = schedule in STAINLESS_SCHEDULES
    called = schedule if schedule in {"STD", "XS", "XXS"} else f"schedule {schedule}"
    return toleranced(
        f"NPS {inches(size_in)} {called}",
        outside - 2.0 * wall,
        (2.0 * STEEL_WALL * wall,),
        f"ASME {'B36.19M' if stainless else 'B36.10M'}: wall ±12.5 % as {'ASTM A312' if stainless else 'ASTM A53'}",
        material or ("stainless steel" if stainless else None),
    )


def threaded_steel(dn: int, series: str, material: str | None = None) -> PipeSize:
    """Return the bore of steel tube for threading to EN 10255 (once BS 1387).

    Parameters
    ----------
    dn : int
        Nominal size, DN.
    series : str
        "medium" or "heavy".
    material : str, optional
        What the user called the pipe.

    Raises
    ------
    InputError
        When the standard has no such tube.
    """
    if dn not in _THREADED_MM:
        raise InputError(
            f"no EN 10255 tube DN {dn}", f"Its sizes are DN {', '.join(str(known) for known in _THREADED_MM)}."
        )
    outside, medium, heavy = _THREADED_MM[dn]
    wall = medium if series == "medium" else heavy
    return toleranced(
        f"DN {dn} EN 10255 {series}",
        outside - 2.0 * wall,
        (2.0 * THREADED_WALL * wall,),
        "EN 10255: wall ±10 % (recalled)",
        material,
    )


def ductile_iron_inch(size_in: int, wall_class: str, lining: str) -> PipeSize:
    """Return the bore of American ductile iron pipe, by pressure class or thickness class.

    The lining is taken at its least thickness, as published bores are; it may be up to 1/8 in more, counted as ±1/16.

    Parameters
    ----------
    size_in : int
        Nominal size [in].
    wall_class : str
        Pressure class "PC350" or thickness class "class 52".
    lining : str
        "cement-lined", "double cement-lined" or "unlined".

    Raises
    ------
    InputError
        When the standard has no such pipe.

    References
    ----------
    ANSI/AWWA C151/A21.51, pressure and special thickness classes; ANSI/AWWA C104/A21.4, thickness of lining.

    Examples
    --------
    >>> round(ductile_iron_inch(6, "PC350", "cement-lined").bore_m / 0.0254, 3)
    6.275
    """
    if size_in not in _DUCTILE_IN:
        raise InputError(
            f"no ductile iron pipe of {size_in} in here", f"Sizes are {', '.join(map(str, _DUCTILE_IN))} in."
        )
    outside, class_51, casting = _DUCTILE_IN[size_in]
    number = int(wall_class.removeprefix("PC").removeprefix("class "))
    walls = {f"PC{pressure}": wall for pressure, wall in _PRESSURE_CLASS_IN[size_in].items()}
    first = 51 if size_in <= 4 else 50
    walls |= {f"class {step}": class_51 + 0.03 * (step - 51) for step in range(first, 57)}
    if wall_class not in walls:
        raise InputError(
            f"no {size_in} in ductile iron pipe {'PC' if number > 56 else 'class '}{number}",
            f"For {size_in} in there is {', '.join(walls)}.",
        )
    least = (0.0625 if size_in <= 12 else 0.09375) * {"unlined": 0, "cement-lined": 1}.get(lining, 2)
    return toleranced(
        f"ductile iron {size_in} in {wall_class} {lining}",
        (outside - 2.0 * walls[wall_class] - 2.0 * least) * INCH_MM,
        (2.0 * casting * INCH_MM, LINING_PLUS_IN * INCH_MM if least else 0.0),
        f"AWWA C151: casting tolerance ±{casting:g} in on the wall"
        + (f"; AWWA C104: lining {least:g} in, up to 1/8 in more (recalled)" if least else ""),
        "cement-lined ductile iron" if least else None,
    )


def ductile_iron_metric(dn: int, wall_class: str, lining: str) -> PipeSize:
    """Return the bore of ductile iron pipe to EN 545 or ISO 2531.

    Parameters
    ----------
    dn : int
        Nominal size, DN.
    wall_class : str
        "K9" or "C40".
    lining : str
        "cement-lined" or "unlined".

    Raises
    ------
    InputError
        When the standard has no such pipe.

    References
    ----------
    EN 545:2006 (K9) and EN 545:2010 (C40); the tolerances of wall and lining are minus only and counted both ways.

    Examples
    --------
    >>> ductile_iron_metric(200, "K9", "cement-lined").bore_m
    0.2014
    """
    if dn not in _EN_545_MM:
        raise InputError(f"no ductile iron pipe DN {dn} here", f"Sizes are DN {', '.join(map(str, _EN_545_MM))}.")
    outside, minus, least_c40 = _EN_545_MM[dn]
    nominal_k9 = max(6.0, round(9.0 * (0.5 + 0.001 * dn) + 1e-9, 1))
    wall_range = 1.3 + (0.0 if wall_class == "K9" and nominal_k9 <= 6.0 else 0.001 * dn)
    wall = nominal_k9 if wall_class == "K9" else least_c40 + wall_range
    mortar, mortar_range = (4.0, 1.5) if dn <= 300 else (5.0, 2.0)
    if lining == "unlined":
        mortar = mortar_range = 0.0
    return toleranced(
        f"DN {dn} ductile iron {wall_class} {lining}",
        outside - 2.0 * wall - 2.0 * mortar,
        ((1.0 + minus) / 2.0, 2.0 * wall_range, 2.0 * mortar_range),
        f"EN 545: outside diameter +1/-{minus:g} mm, wall ±{wall_range:.2g} mm"
        + (f", cement mortar {mortar:g} ±{mortar_range:g} mm" if mortar else ""),
        "cement-lined ductile iron" if mortar else None,
    )


def copper(size_in: float, kind: str) -> PipeSize:
    """Return the bore of copper water tube to ASTM B88.

    Parameters
    ----------
    size_in : float
        Nominal size [in].
    kind : str
        "K", "L" or "M".

    Raises
    ------
    InputError
        When the standard has no such tube.

    Examples
    --------
    >>> round(copper(0.5, "L").bore_m, 5)
    0.01384
    """
    walls = dict(zip(_COPPER_SIZES_IN, _COPPER_WALLS_IN[kind].split(), strict=True))
    if walls.get(size_in, "-") == "-":
        sizes = ", ".join(inches(size) for size, wall in walls.items() if wall != "-")
        raise InputError(f"no copper tube type {kind} of {inches(size_in)} in", f"Sizes of type {kind}: {sizes} in.")
    wall = float(walls[size_in])
    return toleranced(
        f"ASTM B88 type {kind} {inches(size_in)} in",
        (size_in + 0.125 - 2.0 * wall) * INCH_MM,
        (2.0 * COPPER_WALL * wall * INCH_MM, COPPER_OUTSIDE_IN * INCH_MM),
        "ASTM B88: wall ±10 %, outside diameter ±0.005 in",
        "copper or brass",
    )
