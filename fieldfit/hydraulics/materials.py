"""New pipe: its roughness and its C by material, each with its source."""

from __future__ import annotations

import re
from dataclasses import dataclass

from fieldfit.errors import InputError, near_miss

Range = tuple[float, float, float]

ASHRAE = "ASHRAE Handbook – Fundamentals (2021), ch. 3"
IDELCHIK = "Idelchik, Handbook of Hydraulic Resistance, 4th ed. (2007), ch. 2"
FARSHAD = "Farshad and Rieke, Surface roughness design values for modern pipes, SPE Drill. & Compl. 21(3) (2006)"
WALLINGFORD = (
    "HR Wallingford, Tables for the Hydraulic Design of Pipes, Sewers and Channels, recommended roughness values"
)
FAIR = "Fair, Geyer and Okun, Water and Wastewater Engineering, Table 5.1"
CAMERON = "Cameron Hydraulic Data, table of C by pipe (recalled)"
PRACTICE = "usual design values, no single source"


@dataclass(frozen=True, slots=True, kw_only=True)
class Material:
    """What new pipe of one material is like, before it has carried water for years."""

    name: str
    """As the report calls it."""
    aliases: tuple[str, ...]
    """Other names it is known by."""
    roughness_m: Range
    """Equivalent sand-grain roughness, new: low, typical, high [m]."""
    hazen_williams_c: Range
    """Hazen–Williams C, new, at about 1 m/s: low, typical, high [-]."""
    source: str
    """Where the roughness comes from."""
    c_source: str
    """Where C comes from."""


def material(name: str) -> Material:
    """Return the new-pipe values of a material.

    The name must be one of the table or one of its aliases; capitals, spaces and hyphens do not matter. Nothing is
    guessed: plain "steel" could be off by a factor of a hundred, so it is refused with the choices.

    Parameters
    ----------
    name : str
        Such as "carbon steel" or "PVC".

    Raises
    ------
    InputError
        When the name is not in the table, or means several materials.

    Examples
    --------
    >>> material("Carbon-Steel").roughness_m
    (2e-05, 4.6e-05, 0.0001)
    >>> material("HDPE").name
    'polyethylene'
    """
    folded = _fold(name)
    if folded in _BY_NAME:
        return _BY_NAME[folded]
    if folded in _TOO_GENERAL:
        choices = ", ".join(f"'{choice}'" for choice in _TOO_GENERAL[folded])
        raise InputError(f"the material {name!r:.60} means several kinds of pipe", f"Say which: {choices}.")
    every = [option for row in MATERIALS for option in (row.name, *row.aliases)] + list(_TOO_GENERAL)
    raise InputError(
        f"the material {name!r:.60} is not in the new-pipe table",
        f"{near_miss(name, every)}Known: {', '.join(row.name for row in MATERIALS)}."
        " Leave it out if it is none of these: there is then no comparison with new pipe.",
    )


def _fold(name: str) -> str:
    """Return a name without capitals, spaces, hyphens and commas."""
    return re.sub(r"[\s\-‐‑–_,]+", "", name.casefold())


def _row(name: str, aliases: str, roughness_mm: Range, source: str, c: tuple[Range, str]) -> Material:
    """Build a row from millimetres and comma-separated aliases."""
    low, typical, high = (round(value * 1e-3, 12) for value in roughness_mm)
    return Material(
        name=name,
        aliases=tuple(alias.strip() for alias in aliases.split(",")),
        roughness_m=(low, typical, high),
        hazen_williams_c=c[0],
        source=source,
        c_source=c[1],
    )


MATERIALS: tuple[Material, ...] = (
    _row(
        "carbon steel",
        "commercial steel, mild steel, black steel, bare steel, uncoated steel, unlined steel, welded steel,"
        " seamless steel, carbon steel pipe, steel (carbon)",
        (0.02, 0.046, 0.10),
        f"{ASHRAE}: commercial steel 0.046 mm; {IDELCHIK}: new seamless 0.02–0.10, welded in good condition 0.04–0.10",
        ((130.0, 140.0, 150.0), f"{FAIR}: welded steel 140 when new; low and high are {PRACTICE}"),
    ),
    _row(
        "galvanized steel",
        "galvanised steel, galvanized iron, galvanised iron, zinc-coated steel, GI",
        (0.07, 0.15, 0.30),
        f"{ASHRAE}: 0.15 mm; {IDELCHIK}: bright 0.07–0.10, ordinary 0.10–0.15; {WALLINGFORD}: poor 0.3",
        ((110.0, 120.0, 130.0), PRACTICE),
    ),
    _row(
        "stainless steel",
        "stainless, stainless steel pipe, 304 stainless steel, 316 stainless steel, inox",
        (0.0015, 0.015, 0.055),
        f"low {ASHRAE}: drawn tube 0.0015 mm; high {FARSHAD}: bare 13 % chromium steel 0.055; 0.015 is a usual design"
        " value",
        ((130.0, 140.0, 150.0), PRACTICE),
    ),
    _row(
        "copper or brass",
        "copper, brass, drawn copper, drawn brass, copper tube, brass tube, drawn tubing, drawn copper or brass",
        (0.0015, 0.0015, 0.010),
        f"{ASHRAE}: drawn tube 0.0015 mm; {IDELCHIK}: commercially smooth brass and copper 0.0015–0.010",
        ((130.0, 150.0, 155.0), PRACTICE),
    ),
    _row(
        "PVC",
        "PVC-U, uPVC, PVC-O, PVC-C, CPVC, polyvinyl chloride, rigid PVC",
        (0.0015, 0.0015, 0.06),
        f"{ASHRAE}: plastic 0.0015 mm; {WALLINGFORD}: 0.03 with cemented joints, 0.06 with sockets every 6 to 9 m",
        ((140.0, 150.0, 160.0), f"{CAMERON}: plastic 150–160; low is {PRACTICE}"),
    ),
    _row(
        "polyethylene",
        "PE, HDPE, MDPE, LDPE, PE-HD, PE80, PE100, PE-X, polythene",
        (0.0015, 0.0015, 0.015),
        f"{ASHRAE}: plastic 0.0015 mm; high AS 2200 (2006): plastics up to 0.015 mm (recalled)",
        ((140.0, 150.0, 160.0), f"{CAMERON}: polyethylene 150–160; low is {PRACTICE}"),
    ),
    _row(
        "polypropylene",
        "PP, PP-R, PP-RCT, PP-H",
        (0.0015, 0.0015, 0.015),
        f"{ASHRAE}: plastic 0.0015 mm; high AS 2200 (2006): plastics up to 0.015 mm (recalled)",
        ((140.0, 150.0, 160.0), f"{CAMERON}: plastic 150–160; low is {PRACTICE}"),
    ),
    _row(
        "GRP",
        "glass-reinforced plastic, glass fibre reinforced plastic, fibreglass, fiberglass, FRP, GFRP, RTRP",
        (0.005, 0.038, 0.06),
        f"{FARSHAD}: fiberglass lining 0.038 mm; low and high are {PRACTICE}",
        ((140.0, 150.0, 160.0), PRACTICE),
    ),
    _row(
        "uncoated cast iron",
        "cast iron, unlined cast iron, bare cast iron, grey cast iron, gray cast iron, cast iron (uncoated),"
        " cast iron uncoated, cast iron unlined, CI",
        (0.15, 0.26, 0.60),
        f"{ASHRAE}: cast iron 0.26 mm; {WALLINGFORD}: uncoated, good to poor 0.15–0.6",
        ((120.0, 130.0, 135.0), "Lamont, J. AWWA 73(5) (1981): new, 121 at 75 mm to 134 at 1200 mm (recalled)"),
    ),
    _row(
        "asphalt-dipped cast iron",
        "asphalted cast iron, coated cast iron, bitumen-coated cast iron, bitumen-dipped cast iron, tar-coated cast iron,"
        " cast iron (coated), cast iron coated, cast iron asphalt-dipped",
        (0.10, 0.12, 0.30),
        f"{ASHRAE}: asphalted 0.12 mm; {IDELCHIK}: new bituminized 0.10–0.15, coated with asphalt 0.12–0.30",
        ((120.0, 130.0, 140.0), f"{FAIR}: coated 130 when new; low and high are {PRACTICE}"),
    ),
    _row(
        "wrought iron",
        "wrought iron pipe",
        (0.03, 0.046, 0.15),
        f"{WALLINGFORD}: good to poor 0.03–0.15 mm; typical as commercial steel, {ASHRAE}",
        ((120.0, 130.0, 140.0), PRACTICE),
    ),
    _row(
        "cement-lined ductile iron",
        "ductile iron cement-lined, ductile iron (cement-lined), ductile iron cement-mortar-lined, DICL, CLDI,"
        " cement-mortar-lined ductile iron, cement-lined iron, cement-lined cast iron, concrete-lined ductile iron",
        (0.01, 0.033, 0.10),
        f"{FARSHAD}: cement lining 0.033 mm; {WALLINGFORD}: spun concrete lining 0.03; low and high are {PRACTICE}",
        (
            (130.0, 140.0, 150.0),
            "Ductile Iron Pipe Research Association, Hydraulic analysis of ductile iron pipe (2015): mean of tests 144"
            f" new, 140 in service; range {CAMERON}",
        ),
    ),
    _row(
        "cement-lined steel",
        "cement-mortar lining, cement-mortar-lined steel, mortar-lined steel, cement mortar, cement lining,"
        " steel cement-lined, CML steel, MSCL",
        (0.01, 0.033, 0.22),
        f"{FARSHAD}: cement lining 0.033 mm; high {IDELCHIK}: cement plaster with smoothed joints 0.05–0.22",
        ((130.0, 145.0, 160.0), f"AWWA M11: 140 + 0.17 d, d in inches; range {CAMERON}"),
    ),
    _row(
        "polyurethane-lined ductile iron",
        "epoxy-lined ductile iron, epoxy-lined iron, epoxy-lined cast iron, ductile iron polyurethane-lined,"
        " ductile iron epoxy-lined, PU-lined ductile iron",
        (0.015, 0.03, 0.06),
        f"{WALLINGFORD}: polyurethane lining, good, normal, poor; epoxy lining 0.015–0.03 mm",
        ((135.0, 145.0, 155.0), PRACTICE),
    ),
    _row(
        "epoxy-lined steel",
        "steel epoxy-lined, epoxy-coated steel, fusion-bonded epoxy steel, FBE steel, plastic-coated steel",
        (0.005, 0.03, 0.15),
        f"low {FARSHAD}: plastic coated 0.005 mm; {WALLINGFORD}: epoxy lining, good 0.03, poor 0.15 with push-fit joints",
        ((130.0, 145.0, 155.0), PRACTICE),
    ),
    _row(
        "bitumen-lined steel",
        "bituminized steel, bitumen-coated steel, coal-tar-lined steel, coal-tar-enamel-lined steel, enamel-lined steel",
        (0.014, 0.05, 0.20),
        f"{IDELCHIK}: new, covered with bitumen 0.05 mm; from 0.014 without to 0.20 with transverse welded joints",
        ((130.0, 145.0, 160.0), f"{CAMERON}: bituminous enamel lining 130–160"),
    ),
    _row(
        "spun concrete",
        "smooth concrete, concrete (smooth), precast concrete, prestressed concrete, centrifugally cast concrete, PCCP",
        (0.06, 0.15, 0.60),
        f"{WALLINGFORD}: spun precast 0.06, 0.15, 0.3 mm; precast with ring joints, poor 0.6",
        ((120.0, 135.0, 145.0), PRACTICE),
    ),
    _row(
        "cast concrete",
        "in-situ concrete, monolithic concrete, poured concrete, concrete (cast), rough concrete, concrete (rough)",
        (0.30, 0.60, 3.0),
        f"{ASHRAE}: concrete 0.3–3 mm; {WALLINGFORD}: monolithic against steel forms, normal 0.6",
        ((100.0, 120.0, 140.0), PRACTICE),
    ),
    _row(
        "asbestos cement",
        "AC, fibre cement, fiber cement, asbestos-cement pipe",
        (0.015, 0.05, 0.10),
        f"{IDELCHIK}: new 0.05–0.10 mm; low {WALLINGFORD}: good 0.015 (recalled)",
        ((135.0, 140.0, 150.0), f"{FAIR}: 140 when new; low and high are {PRACTICE}"),
    ),
    _row(
        "riveted steel",
        "riveted steel pipe",
        (0.9, 3.0, 9.0),
        f"{ASHRAE}: 0.9–9 mm; the typical value is their geometric mean",
        ((90.0, 110.0, 115.0), f"{FAIR}: riveted joints 110 when new; low and high are {PRACTICE}"),
    ),
    _row(
        "wood stave",
        "wood-stave pipe, wooden stave",
        (0.18, 0.6, 1.5),
        f"{IDELCHIK}: staved 0.6 mm; {WALLINGFORD}: normal 0.6, poor 1.5; low Moody (1944): 0.18",
        ((110.0, 120.0, 145.0), CAMERON),
    ),
)
"""The new-pipe table."""

_BY_NAME = {_fold(option): row for row in MATERIALS for option in (row.name, *row.aliases)}
_TOO_GENERAL = {
    "steel": ("carbon steel", "galvanized steel", "stainless steel", "cement-lined steel", "epoxy-lined steel"),
    "linedsteel": ("cement-lined steel", "epoxy-lined steel", "bitumen-lined steel"),
    "coatedsteel": ("galvanized steel", "epoxy-lined steel", "bitumen-lined steel"),
    "iron": ("uncoated cast iron", "asphalt-dipped cast iron", "cement-lined ductile iron", "wrought iron"),
    "ductileiron": ("cement-lined ductile iron", "polyurethane-lined ductile iron"),
    "di": ("cement-lined ductile iron", "polyurethane-lined ductile iron"),
    "linedductileiron": ("cement-lined ductile iron", "polyurethane-lined ductile iron"),
    "plastic": ("PVC", "polyethylene", "polypropylene", "GRP"),
    "concrete": ("spun concrete", "cast concrete"),
}
