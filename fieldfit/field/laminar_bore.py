"""The bore by laminar flow: plateaus that feel no wall measure the bore instead, for their loss goes with Q/D⁴."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from fieldfit.field.reach_pipe import section_of_reach
from fieldfit.field.reaches import reach_readings
from fieldfit.field.readings import Plateaus, ReachReadings
from fieldfit.field.screens import LAMINAR
from fieldfit.field.section import BoreEvidence, Section
from fieldfit.field.uncertain import Uncertain
from fieldfit.hydraulics.friction import STANDARD_GRAVITY


def bore_evidence_of(
    plateaus: Plateaus, section: Section, readings: ReachReadings, reach: int
) -> tuple[BoreEvidence, ...]:
    """Return all evidence of the bore that holds for one reach, that of its own laminar plateaus included.

    Parameters
    ----------
    plateaus : Plateaus
        Plateaus of the campaign.
    section : Section
        The test section.
    readings : ReachReadings
        What was used of the reach, and what was set aside.
    reach : int
        The reach from tap `reach` to the next.

    Returns
    -------
    tuple of BoreEvidence
    """
    columns = [tap.column for tap in section.taps]
    given = tuple(
        one
        for one in section.bore_evidence
        if one.between is None or columns.index(one.between[0]) <= reach < columns.index(one.between[1])
    )
    numbers = [number for number, why in readings.set_aside if why == LAMINAR]
    found = _laminar(plateaus, section, (reach, numbers)) if numbers else None
    return given if found is None else (*given, found)


def _laminar(plateaus: Plateaus, section: Section, place: tuple[int, list[int]]) -> BoreEvidence | None:
    """Return the bore by a reach's laminar plateaus, None where their loss is not clear of its uncertainty.

    From Hagen–Poiseuille, h = 128 ν L Q/(π g D⁴), so D carries a quarter of the relative errors of the others; half
    where the meter senses velocity, whose flow goes with D² itself.
    """
    reach, numbers = place
    open_limits = replace(section, screen_limits=(*section.screen_limits, ("laminar", 0.0), ("turbulent", 0.0)))
    readings = reach_readings(plateaus, open_limits, reach)
    kept = np.isin(readings.number, numbers)
    if not np.any(kept):
        return None
    bore, meter = section_of_reach(section, reach).bore.value, section.meter
    flow, head = readings.flow_m3_s[kept], readings.head_loss_m[kept]
    head = head - readings.fitting_k.value * 8.0 * flow**2 / (np.pi**2 * STANDARD_GRAVITY * bore**4)
    power = 2.0 if meter.senses == "velocity" else 4.0
    constant = 128.0 * readings.viscosity_m2_s[kept] * readings.length.value / (np.pi * STANDARD_GRAVITY)
    found = bore * (constant * flow / (np.maximum(head, 1e-9) * bore**4)) ** (1.0 / power)
    random = readings.random_m[kept] / np.maximum(head, 1e-9)
    weight = 1.0 / random**2 / np.sum(1.0 / random**2)
    zero = readings.levelling.standard_m if readings.levelling else _gauges_m(readings)
    shared = np.array(
        [
            float(weight @ (zero / np.maximum(head, 1e-9))),
            readings.viscosity_standard,
            readings.length.relative,
            float(weight @ (meter.accuracy.standard_at(flow) / flow)),
            1.0 / np.sqrt(np.sum(1.0 / random**2)),
        ]
    )
    value = float(np.exp(weight @ np.log(found)))
    standard = value * float(np.sqrt(np.sum(shared**2))) / power
    return BoreEvidence(kind="laminar flow", bore=Uncertain(value=value, standard=standard, shape="normal"))


def _gauges_m(readings: ReachReadings) -> float:
    """Return how far gauges and heights may be off together where nothing levels them [m]."""
    weight = float(np.mean(readings.density_kg_m3)) * STANDARD_GRAVITY
    ends = zip((readings.upstream, readings.downstream), readings.pressure_pa, strict=True)
    gauges = [float(np.mean(tap.accuracy.standard_at(pressure))) / weight for tap, pressure in ends]
    drop = readings.elevation_drop.standard if readings.elevation_drop else 0.0
    return float(np.sqrt(np.sum(np.square([*gauges, drop]))))
