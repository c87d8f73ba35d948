"""Loss coefficients of pipe fittings by their trade name."""

from __future__ import annotations

import math
import re
from collections.abc import Callable
from dataclasses import dataclass

from fieldfit.errors import InputError, near_miss

RELATIVE_STANDARD = 0.30 / math.sqrt(3.0)
"""Relative standard uncertainty of a handbook K [-]: such values scatter by ±30 %, read as a rectangular limit."""
CRANE = "Crane TP-410 (2009)"
DARBY = "Darby 3-K method, Chem. Eng. 106(7) (1999), fully turbulent"
MITRE = "Rennels and Hudson, Pipe Flow (2012)"


@dataclass(frozen=True, slots=True, kw_only=True)
class FittingLoss:
    """The local loss of one fitting."""

    k: float
    """Loss coefficient on the velocity in the pipe, at fully turbulent flow [-]."""
    relative_standard: float
    """Its relative standard uncertainty [-]."""
    source: str
    """Where it comes from."""


def _crane(name: str, **styles: float) -> Callable[[float], float]:
    """Return a Crane method of the `fluids` library that takes the line size alone."""

    def k_at(bore_m: float) -> float:
        from fluids import fittings

        return float(getattr(fittings, name)(bore_m, **styles))

    return k_at


def _crane_full_bore(name: str, **styles: float) -> Callable[[float], float]:
    """Return a Crane method for a valve whose seat is as wide as the pipe."""

    def k_at(bore_m: float) -> float:
        from fluids import fittings

        return float(getattr(fittings, name)(bore_m, bore_m, **styles))

    return k_at


def _darby(name: str) -> Callable[[float], float]:
    """Return Darby's K at a Reynolds number so high that it no longer matters."""

    def k_at(bore_m: float) -> float:
        from fluids import fittings

        return float(fittings.Darby3K(NPS=bore_m / 0.0254, Re=1.0e12, name=name))

    return k_at


def _mitre(angle: float) -> Callable[[float], float]:
    """Return the K of a bend of one weld."""

    def k_at(bore_m: float) -> float:
        from fluids import fittings

        return float(fittings.bend_miter(angle))

    return k_at


def _fixed(k: float) -> Callable[[float], float]:
    """Return a K that does not depend on the bore."""
    return lambda bore_m: k


_KINDS: dict[str, tuple[Callable[[float], float], str]] = {
    "90 degree long-radius bend": (_crane("bend_rounded_Crane", angle=90.0, bend_diameters=1.5), CRANE),
    "90 degree short-radius bend": (_crane("bend_rounded_Crane", angle=90.0, bend_diameters=1.0), CRANE),
    "45 degree long-radius bend": (_crane("bend_rounded_Crane", angle=45.0, bend_diameters=1.5), CRANE),
    "90 degree threaded elbow": (_darby("Elbow, 90°, threaded, standard, (r/D = 1)"), DARBY),
    "45 degree threaded elbow": (_darby("Elbow, 45°, threaded standard, (r/D = 1)"), DARBY),
    "180 degree return bend": (_darby("Elbow, 180°, flanged, (r/D = 1)"), DARBY),
    "180 degree threaded return bend": (_darby("Elbow, 180°, threaded, close-return bend, (r/D = 1)"), DARBY),
    "90 degree mitre bend": (_mitre(90.0), MITRE),
    "45 degree mitre bend": (_mitre(45.0), MITRE),
    "tee, flow through the run": (_darby("Tee, Run-through, flanged, (r/D = 1)"), DARBY),
    "tee, flow through the branch": (_darby("Tee, Through-branch, (as elbow), flanged, (r/D = 1)"), DARBY),
    "threaded tee, flow through the run": (_darby("Tee, Run-through, threaded, (r/D = 1)"), DARBY),
    "threaded tee, flow through the branch": (_darby("Tee, Through-branch, (as elbow), threaded, (r/D = 1)"), DARBY),
    "gate valve, open": (_crane_full_bore("K_gate_valve_Crane", angle=0.0), CRANE),
    "ball valve, open": (_crane_full_bore("K_ball_valve_Crane", angle=0.0), CRANE),
    "plug valve, open": (_crane_full_bore("K_plug_valve_Crane", angle=0.0), CRANE),
    "globe valve, open": (_crane_full_bore("K_globe_valve_Crane"), CRANE),
    "angle valve, open": (_darby("Valve, Angle valve, 90°, full line size, β = 1"), DARBY),
    "butterfly valve, open": (_crane("K_butterfly_valve_Crane"), CRANE),
    "diaphragm valve, open": (_darby("Valve, Diaphragm, dam type"), DARBY),
    "swing check valve": (_crane("K_swing_check_valve_Crane"), CRANE),
    "lift check valve": (_darby("Valve, Lift check"), DARBY),
    "tilting-disc check valve": (_crane("K_tilting_disk_check_valve_Crane", angle=5.0), CRANE),
    "foot valve with strainer": (_crane("K_foot_valve_Crane"), CRANE),
    "entrance, sharp-edged": (_fixed(0.5), CRANE),
    "entrance, projecting": (_fixed(0.78), CRANE),
    "exit into a tank": (_fixed(1.0), CRANE),
}

FITTING_KINDS: tuple[str, ...] = tuple(_KINDS)
"""Fittings known by name."""


def fitting_k(kind: str, bore_m: float) -> FittingLoss:
    """Return the loss coefficient of a fitting of the pipe's own size.

    The coefficient is on the velocity in the pipe and holds at fully turbulent flow; at low Reynolds number it is
    higher. A handbook value is a mean over makes that scatter by ±30 % (trade practice), which is its uncertainty here.

    Parameters
    ----------
    kind : str
        One of `FITTING_KINDS`; capitals, hyphens, commas and the order of the words do not matter.
    bore_m : float
        Inside diameter of the pipe [m].

    Raises
    ------
    InputError
        For an unknown fitting or a bore that is not above zero.

    References
    ----------
    Crane Co., Flow of Fluids through Valves, Fittings and Pipe, TP-410 (2009). Darby, R. (1999), "Correlate pressure
    drops through fittings", Chem. Eng. 106(7), 101–104. Rennels, D. C. and Hudson, H. M. (2012), Pipe Flow. Computed
    by the `fluids` library.

    Examples
    --------
    >>> round(fitting_k("gate valve, open", 0.154).k, 2)
    0.12
    >>> round(fitting_k("Open gate valve", 0.154).relative_standard, 3)
    0.173
    """
    if not 0.0 < bore_m < math.inf:
        raise InputError(f"a bore of {bore_m:g} m", "Give a bore above zero, such as 52.5 mm.")
    name = _BY_WORDS.get(_words(kind))
    if name is None:
        raise InputError(
            f"the fitting {kind!r:.60} is not known",
            f"{near_miss(kind, FITTING_KINDS)}Known: {'; '.join(FITTING_KINDS)}. Or give its loss coefficient as k.",
        )
    k_at, source = _KINDS[name]
    return FittingLoss(k=k_at(bore_m), relative_standard=RELATIVE_STANDARD, source=f"{source}, {name}")


_SAME = {"deg": "degree", "degrees": "degree", "miter": "mitre", "disk": "disc", "screwed": "threaded"}
_SILENT = {"the", "a", "into", "through", "fully", "with", "flow", "radius"}


def _words(kind: str) -> frozenset[str]:
    """Return the words of a name that matter, one way of writing each."""
    plain = kind.casefold().replace("°", " degree ").replace("non-return", "check")
    found = {_SAME.get(word, word) for word in re.findall(r"[a-z]+|\d+", plain)} - _SILENT
    if found & {"long", "short"}:
        found = {"bend" if word == "elbow" else word for word in found}
    return frozenset(found)


_BY_WORDS = {_words(kind): kind for kind in FITTING_KINDS}
