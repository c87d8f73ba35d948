"""What a wall means at the duty: C, head loss, capacity, and the deposit it would be if it were all bore."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldfit.hydraulics.friction import STANDARD_GRAVITY, colebrook_white, relative_roughness
from fieldfit.hydraulics.hazen_williams import c_from_friction_factor, friction_factor_from_c
from fieldfit.inference.friction_curve import ROUGHEST

Array = NDArray[np.float64]

LEAST_REYNOLDS = 4000.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Duty:
    """The flow that a forecast is for, and the reach it goes through."""

    flow_m3_s: float
    """Flow [m³/s]."""
    given: bool
    """Whether it is the user's; else the flow at which the tests know the wall best."""
    temperature_degc: float
    """Temperature of the liquid [°C]."""
    viscosity_m2_s: float
    """Its kinematic viscosity [m²/s]."""
    density_kg_m3: float
    """Its density [kg/m³]."""
    bore_m: float
    """Bore [m]."""
    length_m: float
    """Length of the reach [m]."""
    fitting_k: float
    """Sum of loss coefficients [-]."""
    head_m: float | None
    """Head available over the reach [m]."""

    @property
    def reynolds(self) -> float:
        """Reynolds number at the duty [-]."""
        return 4.0 * self.flow_m3_s / (np.pi * self.bore_m * self.viscosity_m2_s)

    def _loss_per_k(self, flow_m3_s: float | Array) -> Array:
        """Return the velocity head [m]."""
        return np.asarray(8.0 * np.square(flow_m3_s) / (np.pi**2 * STANDARD_GRAVITY * self.bore_m**4))

    def ln_friction(self, roughness_m: Array) -> Array:
        """Return ln f by Colebrook–White at the duty [-]."""
        relative = np.minimum(roughness_m / self.bore_m, ROUGHEST)
        return np.asarray(np.log(colebrook_white(max(self.reynolds, LEAST_REYNOLDS), relative)))

    def c(self, ln_friction: Array) -> Array:
        """Return Hazen–Williams C [-] from ln f at the duty."""
        return np.asarray(c_from_friction_factor(np.exp(ln_friction), self.flow_m3_s, self.bore_m))

    def head_loss_m(self, ln_friction: Array) -> Array:
        """Return the head loss, fittings included [m], from ln f at the duty."""
        along = np.exp(ln_friction) * self.length_m / self.bore_m + self.fitting_k
        return along * self._loss_per_k(self.flow_m3_s)

    def capacity_m3_s(self, roughness_m: Array, excess: Array) -> Array:
        """Return the flow that the available head drives [m³/s]; `excess` is ln of the pipe's f over the law's [-]."""
        assert self.head_m is not None  # the caller looked
        relative = np.minimum(roughness_m / self.bore_m, ROUGHEST)
        flow = np.full(np.broadcast_shapes(np.shape(relative), np.shape(excess)), self.flow_m3_s)
        for _ in range(12):
            reynolds = np.maximum(4.0 * flow / (np.pi * self.bore_m * self.viscosity_m2_s), LEAST_REYNOLDS)
            factor = colebrook_white(reynolds, relative) * np.exp(excess)
            per_flow = self._loss_per_k(1.0) * (factor * self.length_m / self.bore_m + self.fitting_k)
            flow = np.sqrt(self.head_m / per_flow)
        return np.asarray(flow)

    def deposit_m(self, roughness_m: Array, new_m: float) -> Array:
        """Return the thickness of a deposit, as rough as new pipe, that loses the same head [m]."""
        table = np.concatenate([[0.0], np.geomspace(1e-7, ROUGHEST, 300) * self.bore_m])
        loss = self.ln_friction(table) - 5.0 * np.log(self.bore_m)
        bore = np.full(len(table), self.bore_m)
        for _ in range(30):
            reynolds = np.maximum(4.0 * self.flow_m3_s / (np.pi * bore * self.viscosity_m2_s), LEAST_REYNOLDS)
            bore = np.exp((np.log(colebrook_white(reynolds, np.minimum(new_m / bore, ROUGHEST))) - loss) / 5.0)
        return np.interp(roughness_m, table, (self.bore_m - bore) / 2.0)

    def roughness_at(self, ln_friction: Array) -> Array:
        """Return the roughness that ln f means at the duty [m]; negative below smooth."""
        return np.asarray(relative_roughness(np.exp(ln_friction), self.reynolds) * self.bore_m)

    def ln_friction_of_c(self, c: float) -> float:
        """Return ln f that a C means at the duty [-]."""
        return float(np.log(friction_factor_from_c(c, self.flow_m3_s, self.bore_m)))

    def ln_friction_of_loss(self, head_loss_m: float) -> float:
        """Return ln f that a head loss at the duty means [-]; −inf when fittings alone lose as much."""
        along = head_loss_m / float(self._loss_per_k(self.flow_m3_s)) - self.fitting_k
        return float(np.log(along * self.bore_m / self.length_m)) if along > 0.0 else -np.inf
