"""Friction along the flows of one reach: the lines that several figures share."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldfit.hydraulics.friction import STANDARD_GRAVITY, colebrook_white, laminar
from fieldfit.hydraulics.regime import LAMINAR_LIMIT, TURBULENT_LIMIT
from fieldfit.inference.wall import Band
from fieldfit.report.digits import COVERAGE
from fieldfit.report.finding import ReachFinding

Array = NDArray[np.float64]
FAMILY = (0.05, 0.03, 0.02, 0.01, 0.005, 0.002, 0.001, 0.0005, 0.0002, 0.0001, 0.00005, 0.00001)
"""Relative roughnesses of the friction-factor chart [-]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Points:
    """Readings of one reach by the definition of friction factor; K plateaus."""

    number: NDArray[np.int64]
    """(K,) plateau numbers."""
    used: NDArray[np.bool_]
    """(K,) whether the fit used it."""
    flow_m3_s: Array
    """(K,) flow [m³/s]."""
    reynolds: Array
    """(K,) Reynolds number [-]."""
    loss_m: Array
    """(K,) head lost to friction [m]."""
    loss_standard_m: Array
    """(K,) its standard uncertainty [m]; the random part alone where the fit used nothing."""
    friction_factor: Array
    """(K,) Darcy friction factor [-]."""
    friction_factor_relative: Array
    """(K,) its relative standard uncertainty [-]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Lines:
    """Friction factors along a row of Reynolds numbers [-]; NaN in the critical zone."""

    reynolds: Array
    """(N,) Reynolds numbers [-]."""
    smooth: Array
    """(N,) a smooth wall."""
    fit: Array | None
    """(N,) the best roughness; None unless it was measured."""
    own: Array | None
    """(2, N) 95 % band by the readings alone."""
    wide: Array | None
    """(2, N) 95 % band with the limit of friction formulas."""
    new: Array | None
    """(N,) typical new pipe; None when it is unknown."""
    new_limit: float
    """How far new pipe may lie off that, as a ratio less one [-]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Curves:
    """One reach, with its readings and lines worked out once for all its figures."""

    reach: ReachFinding
    """What was found."""
    points: Points
    """Its readings."""
    flow_m3_s: Array
    """(N,) flows of `by_flow` [m³/s]."""
    by_flow: Lines
    """Lines along the flow, from rest to a little above the largest."""
    chart: Lines
    """Lines along the chart's Reynolds numbers, evenly by decades."""
    family: Array
    """(len(FAMILY), N) the chart's friction factors of the relative roughnesses in FAMILY [-]."""

    def loss_m(self, friction_factor: Array) -> Array:
        """Return the head lost to friction at `flow_m3_s` [m] for friction factors of the same shape."""
        bore, length = self.reach.readings.bore.value, self.reach.readings.length.value
        velocity = self.flow_m3_s / (math.pi / 4.0 * bore**2)
        return friction_factor * length / bore * velocity**2 / (2.0 * STANDARD_GRAVITY)


def curves(reach: ReachFinding) -> Curves:
    """Return the readings and lines of one reach.

    Parameters
    ----------
    reach : ReachFinding
        What was found between two taps.

    Returns
    -------
    Curves
        Shared by the figures of head loss, friction factor and C.
    """
    found = _points(reach)
    bore, viscosity = reach.readings.bore.value, reach.wall.viscosity_m2_s
    if not math.isfinite(viscosity):
        viscosity = float(np.mean(reach.readings.viscosity_m2_s))
    flow = np.linspace(0.0, 1.08 * float(np.max(np.abs(found.flow_m3_s))), 73)[1:]
    along = flow / (math.pi / 4.0 * bore * viscosity)
    top = max(6.0, math.ceil(math.log10(max(3.0 * along[-1], 1.0))))
    chart = np.geomspace(TURBULENT_LIMIT, 10.0**top, 56)
    turbulent = along >= TURBULENT_LIMIT
    walls = _walls(reach)
    relative = np.array([0.0, *FAMILY, *(w for w, _ in walls)])
    # One solution serves every line of every figure.
    both = colebrook_white(np.concatenate([along[turbulent], chart])[None, :], relative[:, None])
    scale = np.array([1.0] * (1 + len(FAMILY)) + [s for _, s in walls])
    both = both * scale[:, None]
    count = int(turbulent.sum())
    by_flow = np.full((relative.size, flow.size), np.nan)
    by_flow[:, turbulent] = both[:, :count]
    slow = along <= LAMINAR_LIMIT
    by_flow[:, slow] = laminar(along[slow])
    return Curves(
        reach=reach,
        points=found,
        flow_m3_s=flow,
        by_flow=_lines(along, by_flow, reach),
        chart=_lines(chart, both[:, count:], reach),
        family=both[1 : 1 + len(FAMILY), count:],
    )


def _walls(reach: ReachFinding) -> list[tuple[float, float]]:
    """Return relative roughness and a factor on f: fit, both ends of both bands, new pipe; smooth where unknown."""
    wall, bore = reach.wall, reach.readings.bore.value
    best = wall.roughness_m.best
    found = [(best / bore if best else 0.0, 1.0)]
    found += _ends(wall.roughness_m, "measurement", reach) + _ends(wall.roughness_m, "with_correlation", reach)
    found.append((reach.new_pipe.roughness_m[1] / bore if reach.new_pipe else 0.0, 1.0))
    return found


def _ends(roughness: Band, name: str, reach: ReachFinding) -> list[tuple[float, float]]:
    """Return both ends of a band; below smooth no roughness is left, and the friction factor itself goes on."""
    walls = getattr(roughness, name) or (0.0, 0.0)
    factors = getattr(reach.wall.friction_factor, name)
    smooth = reach.wall.smooth_friction_factor
    ends = []
    for index, wall in enumerate(walls):
        below = factors[index] / smooth if factors and wall <= 0.0 else 1.0
        ends.append((wall / reach.readings.bore.value, min(1.0, below)))
    return ends


def _lines(reynolds: Array, rows: Array, reach: ReachFinding) -> Lines:
    """Name the rows of the common solution."""
    fit, own_low, own_high, wide_low, wide_high, new = rows[1 + len(FAMILY) :]
    wall = reach.wall
    known = wall.roughness_m.with_correlation is not None
    return Lines(
        reynolds=reynolds,
        smooth=rows[0],
        fit=fit if wall.roughness_m.best is not None else None,
        own=np.array([own_low, own_high]) if known else None,
        wide=np.array([wide_low, wide_high]) if known else None,
        new=new if reach.new_pipe else None,
        new_limit=reach.new_pipe.limit - 1.0 if reach.new_pipe else 0.0,
    )


def _points(reach: ReachFinding) -> Points:
    """Return all flowing plateaus, used or not; the used ones with the fit's own values."""
    readings, values = reach.readings, reach.wall.plateaus
    bore, length = readings.bore.value, readings.length.value
    flow = np.abs(readings.flow_m3_s)
    velocity = flow / (math.pi / 4.0 * bore**2)
    dynamic = velocity**2 / (2.0 * STANDARD_GRAVITY)
    loss = readings.head_loss_m - readings.fitting_k.value * dynamic
    standard = readings.random_m.copy()
    used = np.isin(readings.number, values.number) if values else np.zeros(flow.size, dtype=bool)
    if values:
        order = np.searchsorted(values.number, readings.number[used])
        loss[used] = values.friction_loss_m[order]
        standard[used] = values.friction_loss_standard_m[order]
    with np.errstate(divide="ignore", invalid="ignore"):
        factor = loss * bore / (length * dynamic)
        relative = np.abs(standard / loss)
    if values:
        factor[used], relative[used] = values.friction_factor[order], values.friction_factor_relative[order]
    return Points(
        number=readings.number,
        used=used,
        flow_m3_s=flow,
        reynolds=velocity * bore / readings.viscosity_m2_s,
        loss_m=loss,
        loss_standard_m=standard,
        friction_factor=factor,
        friction_factor_relative=relative,
    )


def interval(values: Array, relative: Array) -> Array:
    """Return the ends (2, N) of 95 % intervals around values, evenly by ratio."""
    wide = np.exp(COVERAGE * np.minimum(relative, 3.0))
    return np.array([values / wide, values * wide])
