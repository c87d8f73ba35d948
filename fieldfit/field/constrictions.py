"""Orifice plates, nozzles and venturis: flow from a pressure difference, by ISO 5167."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.raw_signal import RawSignal
from fieldfit.field.uncertain import Accuracy, Uncertain

Array = NDArray[np.float64]
Constriction = Literal[
    "orifice",
    "ISA 1932 nozzle",
    "long radius nozzle",
    "venturi nozzle",
    "venturi, as cast",
    "venturi, machined",
    "venturi, welded",
]
"""Kinds of constriction of ISO 5167."""
CONSTRICTIONS: dict[Constriction, str] = {
    "orifice": "ISO 5167 orifice",
    "ISA 1932 nozzle": "ISA 1932 nozzle",
    "long radius nozzle": "long radius nozzle",
    "venturi nozzle": "venturi nozzle",
    "venturi, as cast": "as cast convergent venturi tube",
    "venturi, machined": "machined convergent venturi tube",
    "venturi, welded": "rough welded convergent venturi tube",
}
"""What the `fluids` library calls each."""
Tappings = Literal["corner", "flange", "D and D/2"]
TAPPINGS: tuple[Tappings, ...] = ("corner", "flange", "D and D/2")
"""Pressure tappings of an orifice plate."""
TABLE_POINTS = 48


@dataclass(frozen=True, slots=True, kw_only=True)
class Throat:
    """A constriction whose pressure difference is logged: `[flow] device = "orifice"` and the like."""

    kind: Constriction
    """What it is."""
    throat: Uncertain
    """Diameter of the opening [m]."""
    pipe: Uncertain
    """Inside diameter of the pipe it sits in [m]."""
    tappings: Tappings
    """Where an orifice plate's pressures are taken."""
    accuracy: Accuracy
    """How far the transmitter of the pressure difference may be off [Pa]."""
    signal: RawSignal | None = None
    """Raw signal that its column holds; None for readings."""

    @property
    def ratio(self) -> float:
        """Throat over pipe diameter, β [-]."""
        return self.throat.value / self.pipe.value


def constriction_flow(difference_pa: Array, throat: Throat, density_kg_m3: float, viscosity_pa_s: float) -> Array:
    """Return the flow through an orifice, nozzle or venturi from its pressure difference, by ISO 5167.

    The discharge coefficient depends on the Reynolds number and so on the flow itself; both are solved together at a
    few dozen differences and the coefficient is read off between them. A liquid does not expand.

    Parameters
    ----------
    difference_pa : (N,) array
        Pressure difference [Pa]; what the transmitter cannot tell from none is no flow.
    throat : Throat
        The constriction.
    density_kg_m3, viscosity_pa_s : float
        Of the liquid.

    Returns
    -------
    (N,) array
        Flow [m³/s]; negative where the difference is, NaN where it is missing.

    References
    ----------
    .. [1] ISO 5167-2, -3 and -4:2003.
    """
    size = np.abs(difference_pa)
    blind = 2.0 * float(throat.accuracy.fixed_at(np.zeros(1))[0])
    seen = size > max(blind, 1e-3)
    if not np.any(seen):
        return np.where(np.isnan(difference_pa), np.nan, 0.0)
    least, most = float(np.min(size[seen])), float(np.max(size[seen])) * (1.0 + 1e-9)
    ladder = np.geomspace(least, most, TABLE_POINTS)
    coefficient = np.array([_discharge_coefficient(one, throat, density_kg_m3, viscosity_pa_s) for one in ladder])
    read = np.interp(np.log(np.where(seen, size, ladder[0])), np.log(ladder), coefficient)
    flow = read * _ideal_flow(size, throat, density_kg_m3)
    return np.where(np.isnan(difference_pa), np.nan, np.where(seen, np.sign(difference_pa) * flow, 0.0))


def _ideal_flow(difference_pa: Array, throat: Throat, density_kg_m3: float) -> Array:
    """Return the flow of a coefficient of one [m³/s]."""
    area = np.pi * throat.throat.value**2 / 4.0
    return np.asarray(area * np.sqrt(2.0 * difference_pa / density_kg_m3 / (1.0 - throat.ratio**4)))


def _discharge_coefficient(difference_pa: float, throat: Throat, density_kg_m3: float, viscosity_pa_s: float) -> float:
    """Return the discharge coefficient at one pressure difference [-], by the `fluids` library."""
    from fluids.flow_meter import differential_pressure_meter_C_epsilon

    ideal = float(_ideal_flow(np.array([difference_pa]), throat, density_kg_m3)[0]) * density_kg_m3
    coefficient = 0.6
    for _ in range(30):
        before = coefficient
        # So high a pressure and exponent make the expansibility one, as it is for a liquid.
        coefficient = differential_pressure_meter_C_epsilon(
            D=throat.pipe.value, D2=throat.throat.value, m=coefficient * ideal, P1=1e9, P2=1e9 - difference_pa,
            rho=density_kg_m3, mu=viscosity_pa_s, k=1e9, meter_type=CONSTRICTIONS[throat.kind],
            taps=throat.tappings if throat.kind == "orifice" else None,
        )[0]  # fmt: skip
        if abs(coefficient - before) < 1e-12:
            break
    return float(coefficient)


def coefficient_standard(throat: Throat) -> float:
    """Return the relative standard uncertainty of a constriction's discharge coefficient [-].

    The standard states it with a coverage factor of two [1]_.

    References
    ----------
    .. [1] ISO 5167-2:2003, 5.3.3.1; ISO 5167-3:2003, 5.1.7, 5.2.7, 5.3.5; ISO 5167-4:2003, 5.7.

    Examples
    --------
    >>> exact = Accuracy(text="0")
    >>> plate = Throat(kind="orifice", throat=Uncertain(value=0.05, standard=0.0), tappings="corner",
    ...                pipe=Uncertain(value=0.1, standard=0.0), accuracy=exact)
    >>> coefficient_standard(plate)
    0.0025
    """
    beta = throat.ratio
    if throat.kind == "orifice":
        percent = 0.7 - beta if beta < 0.2 else 0.5 if beta <= 0.6 else 1.667 * beta - 0.5
        small = 0.9 * (0.75 - beta) * (2.8 - throat.pipe.value / 0.0254) if throat.pipe.value < 0.07112 else 0.0
        return (percent + max(small, 0.0)) / 200.0
    percents = {
        "ISA 1932 nozzle": 0.8 if beta <= 0.6 else 2.0 * beta - 0.4,
        "long radius nozzle": 2.0,
        "venturi nozzle": 1.2 + 1.5 * beta**4,
        "venturi, as cast": 0.7,
        "venturi, machined": 1.0,
        "venturi, welded": 1.5,
    }
    return percents[throat.kind] / 200.0


def constriction_accuracy(throat: Throat, density_kg_m3: float) -> Accuracy:
    """Return how far the flow through a constriction may be off: coefficient, diameters and transmitter together."""
    beta4 = throat.ratio**4
    gain = np.sqrt(
        coefficient_standard(throat) ** 2
        + (2.0 / (1.0 - beta4) * throat.throat.relative) ** 2
        + (2.0 * beta4 / (1.0 - beta4) * throat.pipe.relative) ** 2
        + (throat.accuracy.gain / 2.0) ** 2
    )
    usual = 0.6 if throat.kind == "orifice" else 0.98
    factor = usual * float(_ideal_flow(np.ones(1), throat, density_kg_m3)[0])
    return Accuracy(
        text=f"{throat.kind}: {throat.accuracy.text}",
        gain=float(gain),
        shape="normal",
        root=factor**2 * throat.accuracy.fixed / 2.0,
    )
