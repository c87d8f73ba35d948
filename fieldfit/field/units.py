"""Units as the trade writes them, each with its factor to SI; pint does the arithmetic, once per unit."""

from __future__ import annotations

import re
from dataclasses import dataclass
from functools import lru_cache
from typing import TYPE_CHECKING, Any

from fieldfit.errors import InputError, near_miss
from fieldfit.field.unit_spellings import ABSOLUTE, DEFINITIONS, OFFERED, SI, SIGNS, TRAPS, Dimension, spellings

if TYPE_CHECKING:
    from pint import UnitRegistry

_GALLONS_OF = re.compile(r"(?i)^(gal\w*|gpm|gph|gpd|mgd)(/\w+)?\(?(us|imp|imperial|uk)\)?$")


@dataclass(frozen=True, slots=True, kw_only=True)
class Unit:
    """A unit of one dimension: SI value = factor × number + offset."""

    spelling: str
    """As the user wrote it."""
    factor: float
    """SI units in one of it; for temperature, kelvins in one degree."""
    offset: float
    """SI value of zero; not zero for temperatures only, which come out in °C."""
    absolute: bool = False
    """Whether it counts a pressure from the void, not from the air around."""
    remark: str = ""
    """Sentence on what was taken for granted; empty when the spelling leaves nothing open."""


def unit(text: str, dimension: Dimension) -> Unit:
    """Return the unit that a text spells.

    Spaces, superscripts and dots between factors do not matter; capitals matter only where they change the unit.

    Parameters
    ----------
    text : str
        Spelling, such as "L/s", "m³/h", "psig" or "imperial gpm".
    dimension : Dimension
        What the unit must measure.

    Raises
    ------
    InputError
        When it is no unit of that dimension, or may be read in two ways.

    Examples
    --------
    >>> unit("m³/h", "flow").factor * 3600.0
    1.0
    >>> unit("gpm", "flow").remark
    "'gpm' was taken as US gallons (3.785 L); write imperial gpm or UK gal for the other."
    """
    key = _folded_signs(text)
    trap = TRAPS.get(dimension, {}).get(key)
    if trap:
        raise InputError(f"unit '{shown(text)}' {trap[0]}", f"{trap[1]}.")
    gauge = _gauge_key(key) if dimension == "pressure" else None
    expression = _expression(gauge or key, dimension)
    if expression is None:
        raise _no_such_unit(text, key, dimension)
    factor, offset = _to_si(expression, dimension)
    bare_gallon = "gallon" in expression.replace("us_gallon", "").replace("imperial_gallon", "")
    remark = f"'{text.strip()}' was taken as US gallons (3.785 L); write imperial gpm or UK gal for the other."
    return Unit(
        spelling=text.strip(),
        factor=factor,
        offset=offset,
        absolute=gauge is not None,
        remark=remark if bare_gallon else "",
    )


def is_unit(text: str, dimension: Dimension) -> bool:
    """Return whether a text spells a unit of a dimension, or one that `unit` has advice on.

    Examples
    --------
    >>> is_unit("gpm", "flow"), is_unit("up", "pressure")
    (True, False)
    """
    key = _folded_signs(text)
    if dimension == "pressure" and _gauge_key(key) is not None:
        return True
    return key in TRAPS.get(dimension, {}) or _expression(key, dimension) is not None


def _gauge_key(key: str) -> str | None:
    """Return the spelling of the gauge pressure in a unit of absolute pressure, None for any other unit."""
    if _expression(key, "pressure") is not None:
        return None
    found = ABSOLUTE.fullmatch(key)
    plain = found is not None and not re.search(r"(?i)g$|gauge", found[1].removesuffix("Hg"))
    return found[1] if found and plain and _expression(found[1], "pressure") is not None else None


def _folded_signs(text: str) -> str:
    """Return a spelling without spaces, superscripts and product dots."""
    key = text.strip().replace(" per ", "/").translate(SIGNS)
    key = re.sub(r"(?i)(?:\(g\)|\(?gauge\)?)$", "g", key)
    key = re.sub(r"(?i)\b(imp|cu|deg)\.", r"\1", key)
    key = _GALLONS_OF.sub(r"\3\1\2", key)
    for time in ("s", "min", "h", "d"):
        if key.endswith(f"{time}-1"):
            key = f"{key.removesuffix(f'{time}-1')}/{time}"
    return key


def _expression(key: str, dimension: Dimension) -> str | None:
    """Return what pint calls a spelling, or None; capitals are forgiven where only one unit fits."""
    exact, folded = _lookup(dimension)
    if key in exact:
        return exact[key]
    fits = folded.get(key.casefold(), frozenset())
    return next(iter(fits)) if len(fits) == 1 else None


@lru_cache
def _lookup(dimension: Dimension) -> tuple[dict[str, str], dict[str, frozenset[str]]]:
    """Return the spellings of a dimension as written, and without their capitals."""
    exact = {key: expression for expression, keys in spellings(dimension).items() for key in keys.split()}
    folded: dict[str, frozenset[str]] = {}
    for key, expression in exact.items():
        folded[key.casefold()] = folded.get(key.casefold(), frozenset()) | {expression}
    return exact, folded


def _no_such_unit(text: str, key: str, dimension: Dimension) -> InputError:
    """Return the error for a text that is no unit of the dimension."""
    exact = list(_lookup(dimension)[0])
    offered = ", ".join(OFFERED[dimension])
    for other in SI:
        if _expression(key, other) is not None and dimension != "ratio":
            seen = f"unit '{shown(text)}' measures {other}, where {dimension} is wanted"
            return InputError(seen, f"Units of {dimension} are {offered}.")
    advice = f"{near_miss(key, exact)}Units of {dimension} are {offered}."
    return InputError(f"'{shown(text)}' is no unit of {dimension} that fieldfit knows", advice)


def shown(text: str) -> str:
    """Return a text fit to be quoted in a message: printable, and not too long."""
    text = "".join(sign if sign.isprintable() else " " for sign in text.strip())
    return text if len(text) <= 60 else f"{text[:57]}..."


@lru_cache
def _to_si(expression: str, dimension: Dimension) -> tuple[float, float]:
    """Return SI units in one unit, and the SI value of its zero."""
    registry = _registry()
    if dimension != "temperature":
        one_unit = registry.Quantity(1.0, "") * registry.parse_expression(expression)
        return float(one_unit.to(SI[dimension]).magnitude), 0.0
    zero, one = (float(registry.Quantity(number, expression).to("celsius").magnitude) for number in (0.0, 180.0))
    return (one - zero) / 180.0, zero


@lru_cache
def _registry() -> UnitRegistry[Any]:
    """Return the one registry, built at first use."""
    import pint

    registry: UnitRegistry[Any] = pint.UnitRegistry(None)
    registry.load_definitions(DEFINITIONS.strip().splitlines())
    return registry
