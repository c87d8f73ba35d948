"""How much of the loss is deposit: three readings of one evidence, and what a deposit would weigh."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.readings import ReachReadings
from fieldfit.field.section import BoreEvidence, Section
from fieldfit.field.uncertain import Uncertain
from fieldfit.hydraulics.friction import colebrook_white
from fieldfit.hydraulics.materials import material
from fieldfit.inference.bore_evidence import unevenness
from fieldfit.inference.bore_or_roughness import SMOOTHEST_M, BoreMap, bore_map, quantiles
from fieldfit.inference.fit import NORMAL_95
from fieldfit.inference.head_model import head_model
from fieldfit.inference.wall import Band, Span, Wall

Array = NDArray[np.float64]

SHARES = (0.5, 0.025, 0.975)
SUBSTITUTIONS = 60
"""Steps after which the bore of a new wall stands still; each leaves a tenth of the error."""
NODES = 25
"""Points over a stated error where a result is worked out for all of them."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Interval:
    """A value with its 95 % interval, the limit of friction correlations included."""

    best: float
    """Middle: as likely too low as too high."""
    ends: Span
    """95 % interval."""


@dataclass(frozen=True, slots=True, kw_only=True)
class DepositFinding:
    """Bore or roughness of one reach."""

    map: BoreMap
    """What readings and evidence say of both at once."""
    all_roughness_m: Band
    """Roughness if the bore were as laid [m]."""
    all_bore_m: Interval
    """Bore that a wall as new would need to lose what was lost at the flow of the results [m]."""
    new_wall: str
    """What "as new" means there: a material, or a smooth wall where it is unknown."""
    bore_m: Interval
    """Bore of today, over all mixtures [m]."""
    roughness_m: Interval
    """Roughness of today, over all mixtures [m]."""
    thickness_m: Interval
    """Mean thickness of deposit on the wall [m]."""
    volume_m3_m: Interval
    """Volume of deposit per metre of pipe [m³/m]."""
    mass_kg_m: Interval | None
    """Mass of deposit per metre of pipe [kg/m]; None where no density is given."""


def deposit(
    readings: ReachReadings, wall: Wall, section: Section, evidence: tuple[BoreEvidence, ...]
) -> DepositFinding | None:
    """Read the loss of one reach as roughness, as bore, and as every mixture of the two.

    Parameters
    ----------
    readings : ReachReadings
        What the plateaus say.
    wall : Wall
        What was found with the bore as laid.
    section : Section
        The test section, with the bore and material of this reach.
    evidence : tuple of BoreEvidence
        What something other than friction says of its bore.

    Returns
    -------
    DepositFinding or None
        None when nothing was fitted.
    """
    if wall.friction_factor.best is None and wall.plateaus is None:
        return None
    model = head_model(readings, section.correlation)
    ln_friction = _ln_friction(wall)
    if ln_friction is None:
        return None
    variation = section.deposit.variation
    found = bore_map(model, ln_friction, section.correlation, evidence, variation)
    new = material(section.material) if section.material else None
    parts = _deposit(found, readings.bore, variation)
    return DepositFinding(
        map=found,
        all_roughness_m=wall.roughness_m,
        all_bore_m=_all_bore(readings, wall, new.roughness_m if new else (SMOOTHEST_M,) * 3),
        new_wall=f"new {new.name}" if new else "a smooth wall",
        bore_m=_interval(found.bore_m, found.bores()),
        roughness_m=_wall_interval(found),
        thickness_m=_interval(parts[0], parts[2]),
        volume_m3_m=_interval(parts[1], parts[2]),
        mass_kg_m=_mass(parts[1], parts[2], section.deposit.density_kg_m3),
    )


def _all_bore(readings: ReachReadings, wall: Wall, new_m: tuple[float, float, float]) -> Interval:
    """Return the bore in which a new wall would lose what was lost at the flow of the results.

    The loss goes with f/D⁵, or with f/D where the meter senses velocity and its flow with D². The laid bore's own
    error drops out; the spread of new walls and the correlation's limit stay in.
    """
    laid = readings.bore.value
    power = 1.0 if readings.meter.senses == "velocity" else 5.0
    ends = wall.friction_factor.with_correlation or (0.0, 0.0)
    whole = float(np.log(ends[1] / ends[0])) / (2.0 * NORMAL_95)
    of_bore = sum(entry.standard**2 for entry in wall.budget if entry.error == "bore")
    own = np.sqrt(max(whole**2 - of_bore, 1e-12)) / power
    low, best, high = (_new_bore(wall, laid, roughness, power) for roughness in new_m)
    below = np.hypot(NORMAL_95 * own, np.log(best / low))
    above = np.hypot(NORMAL_95 * own, np.log(high / best))
    return Interval(best=best, ends=(float(best * np.exp(-below)), float(best * np.exp(above))))


def _new_bore(wall: Wall, laid_m: float, roughness_m: float, power: float) -> float:
    """Return the bore that loses as much with a given roughness [m], by substitution."""
    factor, bore = wall.friction_factor.best or 1.0, laid_m
    for _ in range(SUBSTITUTIONS):
        reynolds = wall.reynolds * (laid_m / bore if power > 1.0 else bore / laid_m)
        now = float(colebrook_white(reynolds, min(roughness_m / bore, 0.5)))
        bore = laid_m * (now / factor) ** (1.0 / power)
    return bore


def _ln_friction(wall: Wall) -> float | None:
    """Return ln f of the best fit in the laid bore; None without one."""
    best = wall.friction_factor.best
    return float(np.log(best)) if best is not None and best > 0.0 else None


def _interval(values: Array, probability: Array) -> Interval:
    """Return middle and 95 % interval of weighted values."""
    best, low, high = quantiles(values, probability, SHARES)
    return Interval(best=best, ends=(low, high))


def _wall_interval(found: BoreMap) -> Interval:
    """Return the roughness over all mixtures; the map's first one stands for all smoother walls."""
    logs = _interval(np.log(found.roughness_m), found.walls())
    low = float(np.exp(logs.ends[0]))
    return Interval(
        best=float(np.exp(logs.best)),
        ends=(0.0 if low <= 1.2 * found.roughness_m[0] else low, float(np.exp(logs.ends[1]))),
    )


def _deposit(found: BoreMap, laid: Uncertain, variation: float) -> tuple[Array, Array, Array]:
    """Return thickness [m], volume [m³/m] and probability over bores and what the laid bore may truly have been."""
    clean = _nodes(laid)
    bore = found.bore_m[:, None]
    possible = (clean >= bore).astype(np.float64)
    weight = found.bores()[:, None] * possible / np.maximum(np.sum(possible, axis=1, keepdims=True), 1.0)
    s = unevenness(bore, laid.value, variation)
    volume_bore = np.minimum(bore * (1.0 + 3.5 * s**2), clean)
    thickness = np.maximum(clean - bore * (1.0 + 3.0 * s**2), 0.0) / 2.0
    volume = np.pi / 4.0 * (clean**2 - volume_bore**2)
    return thickness.ravel(), volume.ravel(), (weight / np.sum(weight)).ravel()


def _mass(volume: Array, probability: Array, density: Uncertain | None) -> Interval | None:
    """Return the mass per metre."""
    if density is None:
        return None
    nodes = _nodes(density)
    return _interval(np.outer(volume, nodes).ravel(), np.repeat(probability, len(nodes)) / len(nodes))


def _nodes(known: Uncertain) -> Array:
    """Return equally likely values of a stated quantity, (NODES,)."""
    from scipy.special import ndtri

    share = (np.arange(NODES) + 0.5) / NODES
    away = np.sqrt(3.0) * (2.0 * share - 1.0) if known.shape == "rectangular" else ndtri(share)
    return np.asarray(known.value + known.standard * away)
