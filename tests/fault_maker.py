"""Readings of sections with one fault of known kind and size, with physics and errors of their own.

Friction is solved by the `fluids` library; nothing is computed by the program under test. Errors are drawn as the
instruments' makers state them, and the friction correlation is off by a level and a slope.
"""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
from fluids.friction import Colebrook
from simulator import GRAVITY, draw_line, water

from fieldfit.field.readings import Levelling, ReachReadings
from fieldfit.field.section import Meter, Tap
from fieldfit.field.uncertain import Accuracy, Uncertain


@dataclass(frozen=True, slots=True, kw_only=True)
class Place:
    """A kind of section and how it is tested."""

    bore_m: float
    length_m: float
    new_m: tuple[float, float]
    velocities: tuple[float, ...]
    drop_m: float
    fitting_k: float
    gauge_limit_pa: float
    span_pa: float
    supply_pa: float
    meter_limit: float
    noise_m: float
    bore_limit: float = 0.005
    correlation: float = 0.05

    @property
    def flows(self):
        """Flows of the plateaus [m³/s]."""
        return np.array(self.velocities) * np.pi / 4.0 * self.bore_m**2


PLACES = {
    "plant line": Place(
        bore_m=0.0525, length_m=38.2, new_m=(2e-5, 1e-4), velocities=(0.5, 0.8, 1.1, 1.4, 1.7, 2.0, 2.3, 2.6), drop_m=-1.25,
        fitting_k=0.5, gauge_limit_pa=2500.0, span_pa=1e6, supply_pa=4.1e5, meter_limit=0.005, noise_m=0.006,
    ),
    "street main": Place(
        bore_m=0.1524, length_m=300.0, new_m=(1.5e-4, 5e-4), velocities=(0.4, 0.6, 0.9, 1.2, 1.5, 1.8, 2.1), drop_m=2.4,
        fitting_k=1.5, gauge_limit_pa=2500.0, span_pa=1e6, supply_pa=4.6e5, meter_limit=0.01, noise_m=0.012,
    ),
    "trunk main": Place(
        bore_m=0.6, length_m=2000.0, new_m=(2e-5, 1e-4), velocities=(0.5, 0.75, 1.0, 1.25, 1.5, 1.8), drop_m=6.0,
        fitting_k=3.0, gauge_limit_pa=1600.0, span_pa=1.6e6, supply_pa=6.0e5, meter_limit=0.01, noise_m=0.01,
    ),
}  # fmt: skip


@dataclass(frozen=True, slots=True, kw_only=True)
class Fault:
    """What is wrong; the default is nothing."""

    roughness_m: float | None = None
    bore: float = 1.0
    k: float = 0.0
    offset_m: float = 0.0
    leak_m3_s: float = 0.0
    side: int = 0
    place: float = 0.5
    air_m: float = 0.0
    gain: float = 1.0
    zero_m3_s: float = 0.0
    gauges: tuple[float, float] = (1.0, 1.0)
    absolute: int | None = None
    swapped: bool = False
    flow_unit: float = 1.0


NOTHING = Fault()


@dataclass(slots=True)
class Draw:
    """Everything random of one run."""

    roughness_m: float
    bore: float
    length: float
    k: float
    meter: float
    viscosity: float
    drop: float
    level: float
    slope: float
    gauges: list
    noise: np.ndarray = field(repr=False)


def draw(rng, place):
    """One run's truth and errors."""
    working = place.supply_pa / place.span_pa
    return Draw(
        roughness_m=float(np.exp(rng.uniform(*np.log(place.new_m)))),
        bore=rng.uniform(-place.bore_limit, place.bore_limit),
        length=rng.uniform(-0.001, 0.001),
        k=rng.uniform(-0.2, 0.2),
        meter=rng.uniform(-place.meter_limit, place.meter_limit),
        viscosity=rng.normal(0.0, 0.01),
        drop=rng.uniform(-0.02, 0.02),
        level=rng.normal(0.0, place.correlation),
        slope=rng.normal(0.0, place.correlation),
        gauges=[draw_line(rng, place.gauge_limit_pa, working) for _ in range(2)],
        noise=rng.standard_normal(len(place.velocities) + 1),
    )


def true_loss(place, fault, drawn, flow):
    """Head loss of the true section [m] at true flows at its meter."""
    bore = place.bore_m * (1.0 + drawn.bore) * fault.bore
    viscosity = water(12.0)[1] * (1.0 + drawn.viscosity)
    roughness = fault.roughness_m or drawn.roughness_m
    centre = np.exp(np.mean(np.log(place.flows)))

    def loss(q):
        velocity = q / (np.pi / 4.0 * bore**2)
        f = np.array([Colebrook(max(abs(v) * bore / viscosity, 4000.0), roughness / bore, tol=1e-12) for v in velocity])
        x = np.log10(np.maximum(np.abs(q), 0.05 * centre) / centre) / 1.5
        f = f * (1.0 + drawn.level + drawn.slope * x)
        k = place.fitting_k * (1.0 + drawn.k) + fault.k
        whole = f * place.length_m * (1.0 + drawn.length) / bore + k
        return whole * velocity * np.abs(velocity) / (2.0 * GRAVITY)

    upper = flow + (fault.leak_m3_s if fault.side < 0 else 0.0)
    lower = flow - (fault.leak_m3_s if fault.side > 0 else 0.0)
    share = fault.place if fault.side else 1.0
    return share * loss(upper) + (1.0 - share) * loss(lower) + fault.air_m


def show(place, fault, drawn, pressure):
    """What both gauges show for true pressures (2, N) [Pa]."""
    shown = pressure.copy()
    for end, (zero, full) in enumerate(drawn.gauges):
        shown[end] += zero + (full - zero) * pressure[end] / place.span_pa
        shown[end] *= fault.gauges[end]
        if fault.absolute == end:
            shown[end] += 101325.0
    return shown[::-1] if fault.swapped else shown


def take_readings(place, fault, drawn, levelled):
    """The readings a crew would come home with."""
    true_flow = place.flows
    density, viscosity = water(12.0)
    weight = density * GRAVITY
    loss = true_loss(place, fault, drawn, true_flow)
    top = float(true_flow[-1])
    upper = place.supply_pa - 0.1 * weight * abs(loss[-1]) * (true_flow / top) ** 2
    drop = place.drop_m + drawn.drop
    shown = show(place, fault, drawn, np.array([upper, upper - weight * (loss - drop)]))
    rest = show(place, fault, drawn, np.array([[place.supply_pa], [place.supply_pa + weight * drop]]))[:, 0]
    noise = np.hypot(place.noise_m, 0.001 * np.abs(loss))
    head = (shown[0] - shown[1]) / weight + place.drop_m + noise * drawn.noise[1:]
    still = (rest[0] - rest[1]) / weight + place.drop_m + place.noise_m * drawn.noise[0]
    if levelled:
        head = head - still
    head = head + fault.offset_m
    metered = (true_flow * (1.0 + drawn.meter) * fault.gain + fault.zero_m3_s) * fault.flow_unit
    gauge = Accuracy(text="limit", fixed=place.gauge_limit_pa / np.sqrt(3.0), span=place.span_pa)
    ends = [
        Tap(column=name, station=exact(at), elevation=exact(0.0), accuracy=gauge, gauge=name)
        for name, at in (("upstream", 0.0), ("downstream", place.length_m))
    ]
    expected = np.sqrt(2.0 / 3.0) * place.gauge_limit_pa / weight
    return ReachReadings(
        upstream=ends[0],
        downstream=ends[1],
        meter=Meter(column="flow", accuracy=Accuracy(text="limit", gain=place.meter_limit / np.sqrt(3.0))),
        length=Uncertain(value=place.length_m, standard=0.001 * place.length_m / np.sqrt(3.0)),
        bore=Uncertain(value=place.bore_m, standard=place.bore_limit * place.bore_m / np.sqrt(3.0)),
        fitting_k=Uncertain(value=place.fitting_k, standard=0.2 * place.fitting_k / np.sqrt(3.0)),
        elevation_drop=Uncertain(value=place.drop_m, standard=0.02 / np.sqrt(3.0)),
        levelling=Levelling(
            offset_m=float(still), standard_m=place.noise_m, drift_m=None, plateaus=1,
            pressure_pa=(float(rest[0]), float(rest[1])), expected_m=float(np.hypot(expected, 0.012)),
        ) if levelled else None,
        number=np.arange(1, len(head) + 1),
        flow_m3_s=metered,
        head_loss_m=head,
        random_m=noise,
        pressure_pa=shown,
        temperature_degc=np.full(len(head), 12.0),
        density_kg_m3=np.full(len(head), density),
        viscosity_m2_s=np.full(len(head), viscosity),
        viscosity_standard=0.01,
        turbulent_from_m3_s=4000.0 * np.pi / 4.0 * place.bore_m * viscosity,
        set_aside=(),
    )  # fmt: skip


def exact(value):
    """A value known exactly."""
    return Uncertain(value=value, standard=0.0)


def effect(place, fault, levelled, clean):
    """How far the fault moves the readings, in combined standard errors of clean ones.

    The covariance is that of simulated clean readings (N, K), wall and all errors drawn; where the flow is read
    wrong the head is compared at the flow that was read.
    """
    quiet = Draw(
        roughness_m=float(np.sqrt(place.new_m[0] * place.new_m[1])), bore=0.0, length=0.0, k=0.0, meter=0.0, viscosity=0.0,
        drop=0.0, level=0.0, slope=0.0, gauges=[(0.0, 0.0)] * 2, noise=np.zeros(len(place.velocities) + 1),
    )  # fmt: skip
    faulty = take_readings(place, fault, quiet, levelled)
    without = true_loss(place, NOTHING, quiet, faulty.flow_m3_s)
    moved = (faulty.head_loss_m - without) / without
    covariance = np.cov((clean / np.mean(clean, axis=0)).T)
    return float(np.sqrt(moved @ np.linalg.solve(covariance, moved)))


def clean_heads(rng, place, levelled, count=1500):
    """Head losses (count, K) that a sound section of this kind would show, at the same metered flows."""
    found = []
    for _ in range(count):
        readings = take_readings(place, NOTHING, draw(rng, place), levelled)
        found.append(readings.head_loss_m * (place.flows / readings.flow_m3_s) ** 1.85)
    return np.array(found)


def roughness_for(place, ratio):
    """Roughness that loses `ratio` times the head of new pipe at the largest flow [m]."""
    viscosity = water(12.0)[1]
    reynolds = place.velocities[-1] * place.bore_m / viscosity
    new = np.sqrt(place.new_m[0] * place.new_m[1]) / place.bore_m
    root = np.sqrt(ratio * Colebrook(reynolds, new))
    return 3.7 * (10.0 ** (-0.5 / root) - 2.51 / (reynolds * root)) * place.bore_m


def fault_of(rng, place, cause, size):
    """One fault of a kind, of size 0, 1 or 2; signs and places are drawn."""
    sign = float(rng.choice([-1.0, 1.0]))
    top = float(place.flows[-1])
    makers = {
        "rough wall": lambda: Fault(roughness_m=roughness_for(place, (1.4, 1.9, 2.6)[size])),
        "reduced bore": lambda: Fault(bore=(0.94, 0.87, 0.75)[size]),
        "local loss": lambda: Fault(k=(0.3, 1.0, 4.0)[size] * 0.02 * place.length_m / place.bore_m),
        "gauge offset": lambda: Fault(
            offset_m=sign * (4.0, 8.0, 20.0)[size] * np.sqrt(2.0 / 3.0) * place.gauge_limit_pa / 9800.0
        ),
        "leak or open branch": lambda: Fault(
            leak_m3_s=(0.06, 0.12, 0.25)[size] * top, side=int(sign), place=0.5 + sign * rng.uniform(-0.5, 0.2)
        ),
        "trapped air": lambda: Fault(air_m=(0.1, 0.4, 1.5)[size]),
        "meter error": lambda: meter_fault(rng, top, sign, size),
        "wrong unit or swapped channel": lambda: wrong_unit(rng, size),
    }
    return makers[cause]()


def meter_fault(rng, top, sign, size):
    """A wrong gain or a wrong zero, as likely."""
    if rng.random() < 0.5:
        return Fault(gain=1.0 + sign * (0.12, 0.2, 0.35)[size])
    return Fault(zero_m3_s=sign * (0.03, 0.07, 0.12)[size] * top)


def wrong_unit(rng, size):
    """A mistake of unit or channel: small, middling or large."""
    way = float(rng.choice([-1.0, 1.0]))
    kinds = (
        [Fault(gauges=(1.422334**way,) * 2), Fault(gauges=(2.306659**way,) * 2)],
        [Fault(flow_unit=3.785412**way), Fault(flow_unit=3.6**way), Fault(flow_unit=4.54609**way)],
        [Fault(swapped=True), Fault(gauges=(6.894757**way,) * 2), Fault(gauges=(10.19716**way,) * 2)],
    )[size]
    return kinds[int(rng.integers(len(kinds)))]
