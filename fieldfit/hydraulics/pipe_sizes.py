"""Pipe called by its trade name, such as "NPS 6 schedule 40": which standard it is of, and its bore."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass, field
from fractions import Fraction

from fieldfit.errors import InputError, near_miss
from fieldfit.hydraulics import metal_pipe, plastic_pipe
from fieldfit.hydraulics.bores import PipeSize

__all__ = ["EXAMPLES", "PipeSize", "pipe_size"]

EXAMPLES = (
    "NPS 6 schedule 40",
    "NPS 12 STD",
    "DN 150 schedule 40",
    "DN 50 EN 10255 medium",
    "DN 200 PE100 SDR 11",
    "DN 110 PVC-U SDR 21",
    "6 in PVC schedule 40",
    "6 in PVC C900 DR 18",
    "ductile iron 6 in PC350 cement-lined",
    "ductile iron 8 in class 52 cement-lined",
    "DN 150 ductile iron K9 cement-lined",
    "ASTM B88 type L 1 in",
)
"""One of each form that is understood."""


@dataclass(slots=True)
class _Words:
    """What is left of the text, and what was taken out of it."""

    text: str
    """As the user wrote it."""
    rest: str
    """Words not understood yet."""
    said: dict[str, str] = field(default_factory=dict)
    """Words understood, by meaning."""


_NUMBER = r"(\d{1,2} \d{1,2}/\d{1,2}|\d{1,2}/\d{1,2}|\d{1,3}(?:\.\d{1,3})?)"
_MEANINGS: tuple[tuple[str, str], ...] = (
    ("grade", r"\b(?:pe ?-?(100|80)(?: ?rc)?|hdpe|mdpe|polyethylene|pe)\b"),
    ("c900", r"\b(?:awwa )?c ?90[05]\b"),
    ("pvc", r"\b(?:pvc ?u|u ?pvc|pvc)\b"),
    ("en10255", r"\b(?:en ?10255|bs ?1387)\b"),
    ("series", r"\b(medium|heavy)\b"),
    ("copper", r"\b(?:astm )?b ?88\b|\bcopper\b"),
    ("type", r"\btype ?([klm])\b"),
    ("ductile", r"\bductile(?: iron)?\b|\bdi\b"),
    ("lining", r"\b(double cement|cement|un)(?: mortar)? ?(?:lined|lining)\b"),
    ("pressure_class", r"\b(?:pc|(?:pressure )?class) ?([1-3][05]0)\b"),
    ("thickness_class", r"\b(?:thickness )?class ?(5[0-6])\b"),
    ("metric_class", r"\b(?:class )?(k ?9|c ?40)\b"),
    ("metal", r"\b((?:carbon|black|mild|commercial|galvani[sz]ed|stainless) steel)\b"),
    ("standard", r"\b(?:asme |ansi )?b ?36[. ]?1[09] ?m?\b|\bastm [ad] ?\d+\b|\b(?:en )?iso \d+(?: 2)?\b|\ben ?545\b"),
    ("sdr", r"\bs?dr ?(\d{1,3}(?:\.\d{1,2})?)\b"),
    ("pressure", r"\bpn ?(\d{1,3}(?:\.\d{1,2})?)\b"),
    ("schedule", r"\bschedule ?(std|xxs|xs|\d{1,3}s?)\b|\b(std|xxs|xs)\b"),
    ("dn", r"\b(?:dn|od|de) ?(\d{1,4})(?: ?mm)?\b|\b(\d{1,4}) ?mm\b"),
    ("inch", rf"\bnps ?{_NUMBER}(?: in\b)?|\b{_NUMBER} ?in\b"),
)
"""Meaning and pattern, the specific before the general; what a pattern takes is gone for those after it."""
_KEY_WORDS = ("schedule", "ductile", "cement-lined", "unlined", "copper", "medium", "heavy", "PVC-U", "class", "type")
_SPOKEN = {"sdr": "an SDR", "inch": "a size in inches", "dn": "a DN", "pvc": "PVC", "c900": "C900", "grade": "PE"}
_SPOKEN |= {"pressure": "a PN", "metric_class": "a class of EN 545", "pressure_class": "a pressure class"}
_SPOKEN |= {"schedule": "a schedule", "thickness_class": "a thickness class", "metal": "steel", "type": "a type"}
_SPOKEN |= {"en10255": "EN 10255", "series": "medium or heavy", "copper": "copper", "lining": "a lining"}
_SILENT = {"pipe", "tube", "tubing", "steel", "iron", "seamless", "welded", "nominal", "water", "main", "awwa", "c151"}
"""Words that say nothing more."""


def pipe_size(text: str) -> PipeSize:
    """Return the bore of a pipe called by its trade name, and how far the standard lets it be off.

    The order of the words, capitals and hyphens do not matter; "sch", "6 in", '6"', "1-1/2" and a decimal comma are
    understood. Every word must be: a size is looked up, never guessed.

    Parameters
    ----------
    text : str
        Such as "NPS 6 schedule 40", "DN 200 PE100 SDR 11" or "ductile iron 6 in PC350 cement-lined".

    Raises
    ------
    InputError
        When the text is not of a known form, or its standard has no such pipe; the message lists what there is.

    Examples
    --------
    >>> pipe_size("2 in sch. 40").name
    'NPS 2 schedule 40'
    >>> round(pipe_size("DN 200 PE100 SDR 11").bore_m, 4)
    0.1622
    """
    words = _understood(text)
    family = next((known for known in _FAMILIES if known.marks & words.said.keys()), None)
    if family is None:
        raise _not_understood(text)
    odd = [meaning for meaning in words.said if meaning not in family.words | family.marks | {"standard"}]
    if odd:
        raise InputError(
            f"the pipe size {text!r:.60} mixes {family.name} with {_SPOKEN.get(odd[0], odd[0])}",
            "Say one or the other: no pipe is both.",
        )
    return family.look_up(words)


def _understood(text: str) -> _Words:
    """Return the words by meaning, or refuse those that have none."""
    words = _Words(text, _plain(text))
    for meaning, pattern in _MEANINGS:
        match = re.search(pattern, words.rest)
        if match:
            words.said[meaning] = next((part for part in match.groups() if part), "")
            words.rest = f"{words.rest[: match.start()]} {words.rest[match.end() :]}"
    strange = [word for word in words.rest.split() if word not in _SILENT]
    if not words.said:
        raise _not_understood(text)
    if strange:
        raise InputError(
            f"the pipe size {text!r:.60} says {' '.join(strange)!r:.60}, which is not understood",
            f"{near_miss(strange[0], _KEY_WORDS)}Write it such as {_quoted(EXAMPLES)}; or give the bore itself.",
        )
    return words


def _plain(text: str) -> str:
    """Return the text in small letters, one way of writing each thing."""
    plain = text.casefold().replace("½", " 1/2").replace("¼", " 1/4").replace("¾", " 3/4")
    plain = re.sub(r"(?<=\d)\s*(?:\"|″|”|'')|(?<=\d)[\s\-]*inch(?:es)?\b", " in ", plain)
    plain = re.sub(r"\bsch(?:edule|ed|d)?\b\.?", " schedule ", plain)
    plain = re.sub(r"\bsch(?=\d)", " schedule ", plain)
    plain = re.sub(r"(?<=\d),(?=\d)", ".", plain)
    return " ".join(re.sub(r"[\s,;()\-‐‑–_]+", " ", plain).split())


def _not_understood(text: str) -> InputError:
    """Return the error for a text of no known form."""
    return InputError(
        f"the pipe size {text!r:.60} is not understood",
        f"{near_miss(text, EXAMPLES)}Write it such as {_quoted(EXAMPLES)}; or give the bore itself.",
    )


def _quoted(examples: tuple[str, ...]) -> str:
    """Return examples in quotes."""
    return ", ".join(f"'{example}'" for example in examples)


def _asked(words: _Words, meaning: str, choices: str) -> str:
    """Return a word that this kind of pipe cannot do without."""
    if meaning not in words.said:
        raise InputError(f"the pipe size {words.text!r:.60} does not say {choices}", f"Add {choices}.")
    return words.said[meaning]


def _inch(words: _Words) -> float:
    """Return the nominal size [in]."""
    size = _asked(words, "inch", "the size in inches, such as '6 in'")
    try:
        return float(sum(Fraction(part) for part in size.split()))
    except ZeroDivisionError:
        raise _not_understood(words.text) from None


def _dn(words: _Words) -> int:
    """Return the nominal size DN."""
    return int(_asked(words, "dn", "the size, such as 'DN 150'"))


def _nps(words: _Words) -> float:
    """Return the NPS [in] of steel pipe, given in inches or as DN."""
    if "dn" not in words.said:
        return _inch(words)
    dn = _dn(words)
    if "inch" in words.said and metal_pipe.NPS_BY_DN.get(dn) != _inch(words):
        raise InputError(f"the pipe size {words.text!r:.60} gives two sizes that differ", "Give one, DN or NPS.")
    if dn not in metal_pipe.NPS_BY_DN:
        nearest = sorted(sorted(metal_pipe.NPS_BY_DN, key=lambda known: abs(known - dn))[:3])
        raise InputError(
            f"no steel pipe DN {dn}", f"Sizes near it are DN {', '.join(str(known) for known in nearest)}."
        )
    return metal_pipe.NPS_BY_DN[dn]


def _metal(said: dict[str, str]) -> str | None:
    """Return the new-pipe table's name for the steel that was named."""
    named = said.get("metal", "").split(" ")[0].replace("galvanised", "galvanized")
    if not named:
        return None
    return f"{named} steel" if named in {"galvanized", "stainless"} else "carbon steel"


def _steel(words: _Words) -> PipeSize:
    """Return steel pipe by schedule."""
    return metal_pipe.steel(_nps(words), words.said["schedule"].upper(), _metal(words.said))


def _threaded(words: _Words) -> PipeSize:
    """Return threaded steel tube."""
    return metal_pipe.threaded_steel(_dn(words), _asked(words, "series", "medium or heavy"), _metal(words.said))


def _copper(words: _Words) -> PipeSize:
    """Return copper tube."""
    return metal_pipe.copper(_inch(words), _asked(words, "type", "type K, L or M").upper())


def _polyethylene(words: _Words) -> PipeSize:
    """Return PE pipe by SDR, or by nominal pressure where the grade is known."""
    grade = f"PE{words.said['grade']}"
    if "sdr" not in words.said and "pressure" in words.said and grade in plastic_pipe.PE_SDR_BY_PRESSURE:
        ratios = plastic_pipe.PE_SDR_BY_PRESSURE[grade]
        pressure = float(words.said["pressure"])
        if pressure not in ratios:
            raise InputError(f"no {grade} pipe PN {pressure:g}", f"Say PN {', '.join(f'{pn:g}' for pn in ratios)}.")
        return plastic_pipe.polyethylene(_dn(words), ratios[pressure], grade)
    return plastic_pipe.polyethylene(_dn(words), float(_asked(words, "sdr", "its SDR, such as 'SDR 11'")), grade)


def _pvc(words: _Words) -> PipeSize:
    """Return PVC pipe: metric by SDR, American by schedule, SDR or DR."""
    if "dn" in words.said:
        return plastic_pipe.pvc_metric(_dn(words), float(_asked(words, "sdr", "its SDR, such as 'SDR 21'")))
    if "schedule" in words.said and words.said["schedule"].isdigit():
        return plastic_pipe.pvc_inch(_inch(words), "schedule", float(words.said["schedule"]))
    kind = "C900 DR" if "c900" in words.said else "SDR"
    return plastic_pipe.pvc_inch(_inch(words), kind, float(_asked(words, "sdr", f"its {kind}, such as '{kind} 18'")))


def _ductile_iron(words: _Words) -> PipeSize:
    """Return ductile iron pipe, American or metric."""
    said = words.said
    lining = f"{_asked(words, 'lining', 'cement-lined or unlined')} lined".replace("un lined", "unlined")
    lining = lining.replace("cement lined", "cement-lined")
    if "dn" in said:
        wall_class = _asked(words, "metric_class", "its class, K9 or C40").upper().replace(" ", "")
        return metal_pipe.ductile_iron_metric(_dn(words), wall_class, lining)
    size = _inch(words)
    if "pressure_class" in said:
        wall_class = f"PC{said['pressure_class']}"
    else:
        wall_class = f"class {_asked(words, 'thickness_class', 'its class, such as PC350 or class 52')}"
    if size != int(size):
        raise InputError(f"no ductile iron pipe of {size:g} in", "Sizes are whole inches, such as 6 in.")
    return metal_pipe.ductile_iron_inch(int(size), wall_class, lining)


@dataclass(frozen=True, slots=True)
class _Family:
    """One kind of pipe: what marks it, what else may be said of it, and how it is looked up."""

    name: str
    """As an error calls it."""
    marks: frozenset[str]
    """Meanings any of which mark it."""
    words: frozenset[str]
    """Other meanings that may be said of it."""
    look_up: Callable[[_Words], PipeSize]
    """Returns the size."""


_FAMILIES = (
    _Family(
        "ductile iron",
        frozenset({"ductile"}),
        frozenset({"lining", "dn", "inch", "pressure_class", "thickness_class", "metric_class"}),
        _ductile_iron,
    ),
    _Family("copper", frozenset({"copper"}), frozenset({"type", "inch"}), _copper),
    _Family("PE", frozenset({"grade"}), frozenset({"dn", "sdr", "pressure"}), _polyethylene),
    _Family("PVC", frozenset({"pvc", "c900"}), frozenset({"dn", "inch", "sdr", "schedule", "pressure"}), _pvc),
    _Family("EN 10255", frozenset({"en10255"}), frozenset({"dn", "series", "metal"}), _threaded),
    _Family("a schedule", frozenset({"schedule"}), frozenset({"dn", "inch", "metal"}), _steel),
)
"""Kinds of pipe, the more particular mark first."""
