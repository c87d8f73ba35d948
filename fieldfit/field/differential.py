"""One transmitter of the pressure difference between two taps, with impulse lines or a parallel hose."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.raw_signal import RawSignal
from fieldfit.field.uncertain import Accuracy, Uncertain
from fieldfit.hydraulics.friction import STANDARD_GRAVITY

if TYPE_CHECKING:
    from fieldfit.field.section import Section, Tap

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class Differential:
    """The `[differential]` table: upper tap's pressure less the lower one's, as one instrument reads it."""

    column: str
    """Heading in the log, without its unit."""
    accuracy: Accuracy
    """How far the transmitter may be off [Pa]."""
    serial: str | None = None
    """Serial of the transmitter."""
    unit: str | None = None
    """Unit that overrules the heading."""
    signal: RawSignal | None = None
    """Raw signal that its column holds; None for readings."""
    rise: Uncertain | None = None
    """Lower tap's elevation less the upper one's [m]; None when not surveyed."""
    hose_temperature: Uncertain | None = None
    """Temperature of the water in impulse lines or hose [°C]; None for that of the main."""
    hose_density: Uncertain | None = None
    """Density of that water [kg/m³]; None for that of the main."""


def hose_head(rise_m: float, main_kg_m3: float, hose_kg_m3: float) -> float:
    """Return the head that columns of water at different temperature feign between two taps.

    A transmitter joined to both taps by lines full of other water than the main's sees that water's weight. The true
    loss is ``h = Δp/(ρ_main g) − Δz (ρ_main − ρ_hose)/ρ_main`` with Δz the rise from the upper to the lower tap [1]_;
    this is the last term, to be taken off.

    Parameters
    ----------
    rise_m : float
        Lower (downstream) tap's elevation less the upper one's [m].
    main_kg_m3, hose_kg_m3 : float
        Density of the water in the main and in the lines [kg/m³].

    Returns
    -------
    float
        Head [m].

    References
    ----------
    .. [1] The principle after T. M. Walski (1985), who tests mains with a parallel hose.

    Examples
    --------
    >>> round(hose_head(30.0, 999.702, 997.047), 3)
    0.08
    """
    return rise_m * (main_kg_m3 - hose_kg_m3) / main_kg_m3


def as_gauges(differential: Differential, taps: tuple[Tap, ...]) -> tuple[Tap, ...]:
    """Return the taps as a pair of gauges that together read what the transmitter does.

    The upper one has the transmitter's accuracy and serial, the lower one reads zero and is exact: so one instrument
    has one zero, one span and one gain. Both stand at one height, for the lines carry the elevations; how well that
    holds is on the upper one.

    Parameters
    ----------
    differential : Differential
        The transmitter.
    taps : tuple of Tap
        The two taps.

    Returns
    -------
    tuple of Tap
    """
    upper, lower = taps
    level = Uncertain(value=0.0, standard=_level_standard(differential))
    return (
        replace(
            upper, elevation=level, accuracy=differential.accuracy, gauge=differential.serial or differential.column
        ),
        replace(lower, elevation=Uncertain(value=0.0, standard=0.0), accuracy=Accuracy(text="0"), gauge=None),
    )


def _level_standard(differential: Differential) -> float:
    """Return how well the head of the lines' water is known [m]."""
    rise, hose = differential.rise, differential.hose_density
    if rise is None or hose is None:
        return 0.0
    lighter = abs(1.0 - hose.value / 999.1)
    return float(np.hypot(rise.value * hose.standard / hose.value, rise.standard * lighter))


def log_pressures(section: Section, pressures: Array, temperature_degc: Array | None) -> Array:
    """Return the gauge pressures of a log from the columns it has.

    Parameters
    ----------
    section : Section
        The test section.
    pressures : (P, N) array
        Its pressure columns: one per tap, or the transmitter's alone [Pa].
    temperature_degc : (N,) array or None
        Temperature of the liquid, where the log has it [°C].

    Returns
    -------
    (T, N) array
        Pressures by tap; of a transmitter, the difference levelled for its lines' water, and zero [Pa].
    """
    differential = section.differential
    if differential is None:
        return pressures
    difference = pressures[0] - STANDARD_GRAVITY * _excess(section, pressures.shape[1], temperature_degc)
    return np.array([difference, np.where(np.isnan(difference), np.nan, 0.0)])


def _excess(section: Section, count: int, temperature_degc: Array | None) -> Array:
    """Return rise times how much heavier the main's water is than the lines' at each row [kg/m²]."""
    differential = section.differential
    if differential is None or differential.rise is None or differential.hose_density is None:
        return np.zeros(count)
    usual = section.temperature.value if section.temperature else None
    if temperature_degc is None:
        temperature_degc = np.full(count, np.nan)
    if usual is None:
        usual = float(np.nanmean(temperature_degc)) if np.any(np.isfinite(temperature_degc)) else 15.0
    degrees = np.where(np.isfinite(temperature_degc), temperature_degc, usual)
    # Density is asked at a few temperatures only: a long log holds the same ones over and over.
    ladder = np.linspace(float(np.min(degrees)) - 0.1, float(np.max(degrees)) + 0.1, 16)
    density = np.interp(degrees, ladder, section.liquid.density_kg_m3(ladder))
    return np.asarray(differential.rise.value * (density - differential.hose_density.value))


def log_steps(section: Section, steps: Array) -> Array:
    """Return the resolution by tap from those of the columns [Pa]."""
    return steps if section.differential is None else np.array([float(steps[0]), 0.0])
