"""Readings of one reach made from a stated truth, for tests of the inference alone."""

from __future__ import annotations

import numpy as np
from fluids.friction import Colebrook

from fieldfit.field.readings import Levelling, ReachReadings
from fieldfit.field.section import Meter, Tap
from fieldfit.field.uncertain import Accuracy, Uncertain

GRAVITY = 9.80665


def exact(value):
    return Uncertain(value=value, standard=0.0)


ORDINARY_METER = Accuracy(text="0.5 % of reading", gain=0.005 / np.sqrt(3.0))
ORDINARY_GAUGE_PA = 2500.0 / np.sqrt(3.0)


def colebrook(reynolds, relative):
    """Darcy friction factor by the fluids library, by its iteration: its closed form overflows on rough walls."""
    return Colebrook(Re=float(reynolds), eD=float(relative), tol=1e-13)


def head_loss(flow, *, bore, length, roughness, viscosity, fitting_k=0.0):
    """Head loss with friction from the fluids library [m]."""
    velocity = flow / (np.pi * bore**2 / 4.0)
    factor = np.array([colebrook(v * bore / viscosity, roughness / bore) for v in velocity])
    return (factor * length / bore + fitting_k) * velocity**2 / (2.0 * GRAVITY)


def make_readings(
    *,
    roughness=0.3e-3,
    bore=0.0525,
    length=38.2,
    velocities=(0.6, 1.0, 1.4, 1.8, 2.2, 2.5),
    viscosity=1.0e-6,
    noise=0.01,
    seed=None,
    bore_relative=0.003,
    length_relative=0.002,
    meter=ORDINARY_METER,
    senses="volume",
    gauge_pa=ORDINARY_GAUGE_PA,
    levelled=True,
    fitting_k=(0.0, 0.0),
    head=None,
    shape="rectangular",
):
    """Return readings; noise is drawn only when a seed is given, and is stated either way."""
    flow = np.asarray(velocities, dtype=np.float64) * np.pi * bore**2 / 4.0
    if head is None:
        head = head_loss(
            flow, bore=bore, length=length, roughness=roughness, viscosity=viscosity, fitting_k=fitting_k[0]
        )
    if seed is not None:
        head = head + np.random.default_rng(seed).normal(0.0, noise, len(head))
    gauge = Accuracy(text="0.25 % of 10 bar", fixed=gauge_pa, span=1e6)
    pressure = 4e5 - np.outer([0.2, 1.2], head * 9790.0)
    count = len(flow)
    return ReachReadings(
        upstream=Tap(column="upstream", station=exact(0.0), elevation=exact(1.0), accuracy=gauge, gauge="PG-07"),
        downstream=Tap(column="downstream", station=exact(length), elevation=exact(1.0), accuracy=gauge, gauge="PG-11"),
        meter=Meter(column="flow", accuracy=meter, senses=senses),
        length=Uncertain(value=length, standard=length * length_relative, shape=shape),
        bore=Uncertain(value=bore, standard=bore * bore_relative, shape=shape),
        fitting_k=Uncertain(value=fitting_k[0], standard=fitting_k[1]),
        elevation_drop=Uncertain(value=0.0, standard=0.03),
        levelling=Levelling(
            offset_m=0.0, standard_m=0.01, drift_m=None, plateaus=1, pressure_pa=(4e5, 4e5), expected_m=0.2
        )
        if levelled
        else None,
        number=np.arange(1, count + 1),
        flow_m3_s=flow,
        head_loss_m=np.asarray(head, dtype=np.float64),
        random_m=np.full(count, noise),
        pressure_pa=pressure,
        temperature_degc=np.full(count, 20.0),
        density_kg_m3=np.full(count, 998.2),
        viscosity_m2_s=np.full(count, viscosity),
        viscosity_standard=0.02,
        turbulent_from_m3_s=4000.0 * np.pi / 4.0 * bore * viscosity,
        set_aside=(),
    )
