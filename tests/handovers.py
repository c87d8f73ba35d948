"""Hand-overs with known truth, at plateau level: what is built, what is tested, what is read."""

from __future__ import annotations

from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np
from readings_maker import GRAVITY, colebrook, exact, make_readings

from fieldfit.field.contract import Contract
from fieldfit.field.section import Correlation, Section
from fieldfit.field.uncertain import Accuracy, Uncertain
from fieldfit.hydraulics.liquids import Liquid

VISCOSITY = 1.0e-6
METER = Accuracy(text="0.5 % of reading", gain=0.005 / np.sqrt(3.0))
BORE_LIMIT, LENGTH_LIMIT, LEVEL_SD, K_LIMIT, NOISE_M = 0.006, 0.003, 0.01, 0.3, 0.01
WATER = Liquid(
    name="water",
    source="constant, for tests",
    density_kg_m3=lambda t: np.full(np.shape(t), 998.2),
    viscosity_m2_s=lambda t: np.full(np.shape(t), VISCOSITY),
    viscosity_standard=0.005,
)


@dataclass(frozen=True, kw_only=True)
class Truth:
    """A pipe as it really was built."""

    bore_m: float
    length_m: float
    roughness_m: float
    level: float
    fitting_k: float

    def friction(self, velocity):
        """Darcy friction factor, the correlation's own error included."""
        reynolds = velocity * self.bore_m / VISCOSITY
        return colebrook(reynolds, self.roughness_m / self.bore_m) * (1.0 + self.level)

    def head_loss(self, flow, *, fittings=True):
        """Head loss [m]."""
        velocity = flow / (np.pi * self.bore_m**2 / 4.0)
        k = self.fitting_k if fittings else 0.0
        return (self.friction(velocity) * self.length_m / self.bore_m + k) * velocity**2 / (2.0 * GRAVITY)

    def c(self, flow, bore=None):
        """Hazen–Williams C by its definition, on the true bore or another."""
        bore = bore or self.bore_m
        slope = self.head_loss(flow, fittings=False) / self.length_m
        return flow / (np.pi * bore**2 / 4.0) / (0.849182 * (bore / 4.0) ** 0.63 * slope**0.54)


def build(rng, *, bore=0.2, length=400.0, roughness=1e-4, correlation=0.05):
    """One pipe, drawn within its limits."""
    return Truth(
        bore_m=bore * (1.0 + rng.uniform(-BORE_LIMIT, BORE_LIMIT)),
        length_m=length * (1.0 + rng.uniform(-LENGTH_LIMIT, LENGTH_LIMIT)),
        roughness_m=roughness,
        level=rng.normal(0.0, correlation),
        fitting_k=3.0 * (1.0 + rng.uniform(-K_LIMIT, K_LIMIT)),
    )


def read(rng, truth, *, bore=0.2, length=400.0, velocities=(0.6, 0.9, 1.2, 1.6, 2.0), seed_free=True):
    """What the crew's instruments give of it."""
    metered = np.asarray(velocities) * np.pi * bore**2 / 4.0
    flow = metered * (1.0 + rng.uniform(-0.005, 0.005))
    head = np.array([truth.head_loss(q) for q in flow]) + rng.normal(0.0, LEVEL_SD)
    head = head + rng.normal(0.0, NOISE_M, len(head))
    readings = make_readings(
        bore=bore,
        length=length,
        velocities=velocities,
        viscosity=VISCOSITY,
        noise=NOISE_M,
        bore_relative=BORE_LIMIT / np.sqrt(3.0),
        length_relative=LENGTH_LIMIT / np.sqrt(3.0),
        meter=METER,
        gauge_pa=0.0,
        fitting_k=(3.0, 3.0 * K_LIMIT / np.sqrt(3.0)),
        head=head,
    )
    return replace(readings, viscosity_standard=0.005)


def section_of(contract, *, bore=0.2, length=400.0, material="PVC"):
    """The section that goes with the readings."""
    readings = make_readings(bore=bore, length=length)
    return Section(
        name="Invented main",
        path=Path("section.toml"),
        material=material,
        installed=None,
        bore=Uncertain(value=bore, standard=bore * BORE_LIMIT / np.sqrt(3.0)),
        bore_source="given",
        liquid=WATER,
        temperature=exact(20.0),
        temperature_standard=0.1,
        meter=readings.meter,
        taps=(readings.upstream, readings.downstream),
        correlation=Correlation(),
        contract=contract,
    )


def contract_of(**changes):
    """A contract on C at a tested flow, guarded at 5 %."""
    known = Contract(
        subject="c",
        limit=140.0,
        flow_m3_s=0.045,
        temperature_degc=20.0,
        bore_m=None,
        fittings=False,
        rule="guarded acceptance",
        risk=0.05,
        built=None,
    )
    return replace(known, **changes)
