"""How the trade writes units: every spelling fieldfit knows, by dimension, in terms of a few defined units."""

from __future__ import annotations

import re
from collections.abc import Mapping
from itertools import product
from typing import Literal

Dimension = Literal[
    "length",
    "pressure",
    "flow",
    "volume",
    "temperature",
    "density",
    "dynamic viscosity",
    "kinematic viscosity",
    "ratio",
    "duration",
    "velocity",
]

# A registry of only the units below loads fifty times faster than pint's own list.
DEFINITIONS = """
meter = [length] = m
kilogram = [mass] = kg
second = [time] = s
kelvin = [temperature]; offset: 0 = K
celsius = kelvin; offset: 273.15
fahrenheit = 5 / 9 * kelvin; offset: 233.15 + 200 / 9
gravity = 9.80665 * meter / second ** 2
inch = 0.0254 * meter
foot = 12 * inch
mile = 5280 * foot
liter = 0.001 * meter ** 3
gallon = 231 * inch ** 3
us_gallon = 231 * inch ** 3
imperial_gallon = 4.54609 * liter
minute = 60 * second
hour = 60 * minute
day = 24 * hour
pound = 0.45359237 * kilogram
pascal = kilogram / meter / second ** 2
bar = 100000 * pascal
psi = pound * gravity / inch ** 2
water = 1000 * kilogram / meter ** 3 * gravity
mercury = 13595.1 * kilogram / meter ** 3 * gravity
stokes = 0.0001 * meter ** 2 / second
poise = 0.1 * pascal * second
"""

SI: Mapping[Dimension, str] = {
    "length": "meter",
    "pressure": "pascal",
    "flow": "meter ** 3 / second",
    "volume": "meter ** 3",
    "temperature": "celsius",
    "density": "kilogram / meter ** 3",
    "dynamic viscosity": "pascal * second",
    "kinematic viscosity": "meter ** 2 / second",
    "ratio": "",
    "duration": "second",
    "velocity": "meter / second",
}

_TIMES = {
    "second": "s sec secs second seconds",
    "minute": "min mins minute minutes",
    "hour": "h hr hrs hour hours",
    "day": "d day days",
}
_VOLUMES = {
    "liter": "L l litre litres liter liters ltr lt lit",
    "meter ** 3": "m3 cum cbm cubicmetres cubicmeters",
    "foot ** 3": "ft3 cuft cf cubicfeet",
    "gallon": "gal gals gallon gallons",
    "1000 * gallon": "kgal",
    "us_gallon": "USgal USG USgals USgallon USgallons",
    "imperial_gallon": "impgal imp.gal imperialgallon imperialgallons imperialgal impgals impgallon impgallons UKgal UKgals igal",
    "1000 * liter": "kL kl KL kilolitre kilolitres",
    "1e6 * liter": "ML Ml megalitre megalitres",
    "1e6 * gallon": "Mgal milliongallons",
    "0.001 * liter": "mL ml cm3 cc",
}
_LENGTHS = {
    "meter": "m metre metres meter meters",
    "0.001 * meter": "mm millimetre millimetres millimeter millimeters",
    "0.01 * meter": "cm centimetre centimetres centimeter centimeters",
    "1000 * meter": "km kilometre kilometres kilometer kilometers",
    "1e-6 * meter": "µm um micron microns",
    "inch": "in in. inch inches \" ''",
    "foot": "ft ft. foot feet '",
    "mile": "mi mile miles",
}
_PRESSURES = {
    "psi": "psi psig lb/in2 lbf/in2 lbs/in2 lb/sqin lbf/sqin p.s.i.",
    "bar": "bar barg bars",
    "0.001 * bar": "mbar mbarg",
    "pascal": "Pa",
    "100 * pascal": "hPa",
    "1000 * pascal": "kPa kPag",
    "1e6 * pascal": "MPa MPag",
    "kilogram * gravity / (0.01 * meter) ** 2": "kg/cm2 kgf/cm2 kp/cm2 kg/sqcm kgf/sqcm kg/cm2g kgf/cm2g at",
    "101325 * pascal": "atm",
    "meter * water": "mH2O mWC mWG mofwater m.w.c. m.w.g. mwatercolumn mhead mCE mCA mWS mwater",
    "0.01 * meter * water": "cmH2O cmWC",
    "0.001 * meter * water": "mmH2O mmWC mmWG",
    "foot * water": "ftH2O ftWC ftofwater feetofwater fthead ftwater ftofhead",
    "inch * water": "inH2O inWC inWG inchesofwater",
    "inch * mercury": "inHg inHgg inofmercury inchesofmercury",
    "0.001 * meter * mercury": "mmHg mmHgg torr",
}
_FLOW_SHORT = {
    "liter / second": "lps l.p.s.",
    "liter / minute": "lpm l.p.m.",
    "liter / hour": "lph",
    "meter ** 3 / hour": "cmh m3ph",
    "foot ** 3 / second": "cfs cusec cusecs",
    "foot ** 3 / minute": "cfm",
    "gallon / minute": "gpm galpm g.p.m.",
    "gallon / hour": "gph",
    "gallon / day": "gpd",
    "1e6 * gallon / day": "MGD",
    "us_gallon / minute": "USgpm gpm(US) gpmUS",
    "us_gallon / hour": "USgph",
    "us_gallon / day": "USgpd",
    "1e6 * us_gallon / day": "USMGD MGD(US)",
    "imperial_gallon / minute": "igpm imperialgpm impgpm UKgpm gpm(imperial) gpm(imp) gpm(UK)",
    "imperial_gallon / hour": "igph imperialgph impgph UKgph",
    "imperial_gallon / day": "igpd imperialgpd impgpd UKgpd",
    "1e6 * imperial_gallon / day": "IMGD imperialMGD impMGD UKMGD MIGD",
    "1e6 * liter / day": "MLD",
    "1000 * liter / day": "kLD",
}
_OTHERS: Mapping[Dimension, Mapping[str, str]] = {
    "temperature": {
        "celsius": "degC °C C celsius degreeC degreesC degreescelsius oC",
        "fahrenheit": "degF °F F fahrenheit degreeF degreesF degreesfahrenheit oF",
        "kelvin": "K kelvin kelvins degK",
    },
    "density": {
        "kilogram / meter ** 3": "kg/m3 g/L g/l kg/cum",
        "1000 * kilogram / meter ** 3": "g/cm3 g/mL g/ml g/cc kg/L kg/l t/m3",
        "pound / foot ** 3": "lb/ft3 lbm/ft3 lb/cuft pcf",
        "pound / us_gallon": "lb/USgal",
        "pound / gallon": "lb/gal",
    },
    "dynamic viscosity": {
        "pascal * second": "Pas Pasec kg/ms kg/(ms) Ns/m2",
        "0.001 * pascal * second": "mPas",
        "1e-6 * pascal * second": "µPas uPas",
        "0.01 * poise": "cP centipoise",
        "poise": "P poise",
        "pound / foot / second": "lb/fts lbm/fts lb/(fts) lbm/(fts)",
    },
    "kinematic viscosity": {
        "0.01 * stokes": "cSt centistokes centistoke mm2/s",
        "stokes": "St stokes cm2/s",
        "meter ** 2 / second": "m2/s",
        "foot ** 2 / second": "ft2/s sqft/s",
    },
    "ratio": {"0.01": "% percent", "0.001": "‰", "1": "-"},
    "velocity": {
        "meter / second": "m/s mps",
        "0.001 * meter / second": "mm/s",
        "0.01 * meter / second": "cm/s",
        "foot / second": "ft/s fps ft/sec",
        "foot / minute": "ft/min fpm",
        "1000 * meter / hour": "km/h",
    },
}

ABSOLUTE = re.compile(r"(?i)(.+?)(?:\(a\)|[-,]?\(?abs(?:olute)?\.?\)?|a)")
"""A spelling of an absolute pressure: that of the gauge pressure, and what stands behind it."""
TRAPS: Mapping[Dimension, Mapping[str, tuple[str, str]]] = {
    "pressure": {
        "mPa": ("is thousandths of a pascal", "Write MPa for millions of pascals, or kPa"),
        "mpa": ("may be millions or thousandths of a pascal", "Write MPa for millions of pascals, or kPa"),
        "m": ("is a length", "Write mH2O for metres of water"),
        "ft": ("is a length", "Write ftH2O for feet of water"),
    },
    "flow": {
        f"{litres}/{day}": ("may be millions or thousandths of a litre", "Write ML/d for megalitres a day")
        for litres in ("ml", "mL")
        for day in ("d", "day")
    },
    "volume": {"ml": ("may be millions or thousandths of a litre", "Write ML for megalitres")},
}

OFFERED: Mapping[Dimension, tuple[str, ...]] = {
    "length": ("mm", "cm", "m", "km", "in", "ft"),
    "pressure": ("psi", "bar", "kPa", "MPa", "kg/cm2", "mH2O", "ftH2O", "inHg"),
    "flow": ("L/s", "L/min", "m3/h", "ML/d", "gpm", "imperial gpm", "MGD", "ft3/s"),
    "volume": ("L", "m3", "kL", "ML", "gal", "imperial gal", "ft3"),
    "temperature": ("degC", "degF", "K"),
    "density": ("kg/m3", "g/cm3", "lb/ft3"),
    "dynamic viscosity": ("cP", "mPa s", "Pa s"),
    "kinematic viscosity": ("cSt", "mm2/s", "m2/s", "ft2/s"),
    "ratio": ("%",),
    "duration": ("s", "min", "h", "d"),
    "velocity": ("m/s", "ft/s"),
}

SIGNS = str.maketrans(
    {" ": "", "\u00a0": "", "\t": "", "·": "", "⋅": "", "*": "", "^": "", "²": "2", "³": "3", "₂": "2", "¹": "1"}
    | {"⁻": "-", "−": "-", "μ": "µ", "º": "°", "℃": "°C", "℉": "°F", "Â": "", "”": '"', "″": '"', "’": "'", "′": "'"}
)

LARGEST: Mapping[Dimension, float] = {
    "length": 1e7,
    "pressure": 1e10,
    "flow": 1e6,
    "volume": 1e12,
    "temperature": 2000.0,
    "density": 1e5,
    "dynamic viscosity": 1e6,
    "kinematic viscosity": 1e3,
    "ratio": 1e9,
    "duration": 1e10,
    "velocity": 1e4,
}
"""Size beyond which a value must be a slip [SI]."""


def spellings(dimension: Dimension) -> Mapping[str, str]:
    """Return the spellings of a dimension by what pint calls them."""
    if dimension == "flow":
        pairs = product(_VOLUMES.items(), _TIMES.items())
        built = {
            f"{volume} / {time}": " ".join(f"{v}/{t}" for v, t in product(volumes.split(), times.split()))
            for (volume, volumes), (time, times) in pairs
        }
        return {key: f"{built.get(key, '')} {_FLOW_SHORT.get(key, '')}" for key in [*built, *_FLOW_SHORT]}
    simple: Mapping[Dimension, Mapping[str, str]] = {
        "length": _LENGTHS,
        "pressure": _PRESSURES,
        "duration": _TIMES,
        "volume": _VOLUMES,
    }
    return simple.get(dimension) or _OTHERS[dimension]
