"""Histories of a main with known growth: campaigns as readings, with what they share drawn once.

Nothing here comes from fieldfit's physics: friction is solved by the `fluids` library.
"""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np
from fluids.friction import Colebrook
from scipy.optimize import brentq

from fieldfit.decisions.visits import Visit
from fieldfit.field.outlook import Changes, Outlook, Thresholds
from fieldfit.field.readings import Levelling, ReachReadings
from fieldfit.field.section import Campaign, Meter, Section, Tap
from fieldfit.field.uncertain import Accuracy, Uncertain
from fieldfit.hydraulics.liquids import water
from fieldfit.inference.estimate import estimate

GRAVITY, VISCOSITY = 9.80665, 1.2e-6
METER_LIMIT, BORE_LIMIT, LENGTH_LIMIT, CORRELATION = 0.01, 0.01, 0.003, 0.05
FLAT = 1.0 / np.sqrt(3.0)
SHAPES = {
    "linear": lambda t, tau: t,
    "parabolic": lambda t, tau: np.sqrt(20.0 * t),
    "saturating": lambda t, tau: tau * -np.expm1(-t / tau),
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Truth:
    """The pipe behind the readings; years count from the start of the last stage."""

    bore: float
    length: float
    level: float
    slope: float
    centre: float
    law: str
    tau: float
    starts: tuple[float, ...]
    """Roughness at the start of each stage [m]."""
    rates: tuple[float, ...]
    """Starting rate of each stage [m/year]."""

    def roughness(self, years, stage=-1):
        return self.starts[stage] + self.rates[stage] * SHAPES[self.law](years, self.tau)

    def head_loss(self, flow, roughness):
        velocity = flow / (np.pi / 4.0 * self.bore**2)
        reynolds = velocity * self.bore / VISCOSITY
        off = 1.0 + self.level + self.slope * np.log10(reynolds / self.centre) / 1.5
        factor = Colebrook(Re=float(reynolds), eD=float(roughness / self.bore), tol=1e-13)
        return factor * off * self.length / self.bore * velocity**2 / (2.0 * GRAVITY)

    def c(self, flow, roughness):
        slope = self.head_loss(flow, roughness) / self.length
        velocity = flow / (np.pi / 4.0 * self.bore**2)
        return velocity / (0.849182 * (self.bore / 4.0) ** 0.63 * slope**0.54)

    def years_until(self, flow, c):
        """When the last stage reaches a C [years since it began]; infinite where it never does."""

        def left(years):
            return self.c(flow, self.roughness(years)) - c

        return brentq(left, 0.0, 2000.0) if left(0.0) > 0.0 > left(2000.0) else np.inf


@dataclass(frozen=True, slots=True, kw_only=True)
class History:
    """One main, its campaigns, and the truth."""

    section: Section
    visits: list[Visit]
    truth: Truth
    walls: tuple[float, ...]
    """True roughness at each campaign [m]."""
    duty: float
    """Duty flow [m³/s]."""
    crossing: dt.date | None
    """Day on which C truly falls to the threshold; None for never within 2000 years."""


def draw_truth(rng, *, law=None, stages=1):
    """A cast-iron main of ordinary growth."""
    rate = float(np.exp(rng.uniform(*np.log([0.02e-3, 0.4e-3]))))
    starts, rates = [0.26e-3 * float(np.exp(0.35 * rng.standard_normal()))], [rate]
    for _ in range(stages - 1):
        starts.append(float(np.exp(rng.uniform(*np.log([0.3e-3, 1.0e-3])))))
        rates.append(rate * float(np.exp(0.5 * rng.standard_normal())))
    return Truth(
        bore=1.0 + rng.uniform(-BORE_LIMIT, BORE_LIMIT),
        length=1.0 + rng.uniform(-LENGTH_LIMIT, LENGTH_LIMIT),
        level=rng.normal(0.0, CORRELATION),
        slope=rng.normal(0.0, CORRELATION),
        centre=1e5,
        law=law or str(rng.choice(list(SHAPES), p=[0.6, 0.2, 0.2])),
        tau=float(20.0 * np.exp(0.8 * rng.standard_normal())),
        starts=tuple(starts),
        rates=tuple(rates),
    )


def draw_history(rng, *, law=None, campaigns=None, cleaned=None, serials=True):
    """A history with campaigns over ten to twenty-five years; `cleaned` puts a cleaning before the middle."""
    cleaned = bool(rng.random() < 0.4) if cleaned is None else cleaned
    count = int(rng.integers(2, 7)) if campaigns is None else campaigns
    bore, length = float(rng.choice([0.1, 0.15, 0.2, 0.3])), float(rng.uniform(200.0, 500.0))
    stated = draw_truth(rng, law=law, stages=2 if cleaned and count > 2 else 1)
    flows = np.linspace(0.4, 1.0, 6) * rng.uniform(1.2, 1.8) * np.pi / 4.0 * bore**2
    centre = float(np.exp(np.mean(np.log(4.0 * flows / (np.pi * bore * VISCOSITY)))))
    truth = replace(stated, bore=bore * stated.bore, length=length * stated.length, centre=centre)
    laid = dt.date(int(rng.integers(1965, 2000)), 5, 1)
    days = laid + np.sort(rng.uniform(2.0, 25.0, count)) * dt.timedelta(days=365.25)
    wash = count // 2 if len(truth.starts) == 2 else count
    cleaning = days[wash] - dt.timedelta(days=30) if wash < count else laid
    kit = _kit(rng, serials)
    visits, walls = [], []
    for number, day in enumerate(days):
        stage = int(number >= wash)
        years = (day - (cleaning if stage else laid)).days / 365.25
        walls.append(float(truth.roughness(years, stage)))
        readings = _readings(rng, truth, walls[-1], (bore, length), (flows, kit))
        campaign = Campaign(
            date=day,
            log=Path(f"{day}.csv"),
            cleaned=number == wash,
            changes=Changes(cleaned_on=cleaning if number == wash else None),
        )
        wall = estimate(readings, CORRELATED)
        visits.append(Visit(date=day, file=f"{day}.csv", readings=readings, wall=wall, campaign=campaign))
    duty = float(flows[3])
    start = cleaning if wash < count else laid
    ahead = (days[-1] - start).days / 365.25 + rng.uniform(1.0, 20.0)
    limit = truth.c(duty, truth.roughness(ahead))
    section = _section(visits[0].readings, laid, duty, limit)
    crossing = start + dt.timedelta(days=ahead * 365.25)
    return History(section=section, visits=visits, truth=truth, walls=tuple(walls), duty=duty, crossing=crossing)


def _kit(rng, serials):
    """Meter gain, and both gauges' gains as their share of a span, once for all campaigns."""
    return {"gain": rng.uniform(-METER_LIMIT, METER_LIMIT), "serial": "M-1" if serials else None}


def _readings(rng, truth, wall, stated, plan):
    """What one campaign's plateaus say."""
    bore, length = stated
    flows, kit = plan
    head = np.array([truth.head_loss(flow, wall) for flow in flows])
    noise = 0.004 * head + 0.005
    level = 0.01
    read = head + rng.normal(0.0, level) + rng.normal(0.0, noise)
    gain = kit["gain"] if kit["serial"] else rng.uniform(-METER_LIMIT, METER_LIMIT)
    exact = Accuracy(text="0", fixed=0.0)
    ends = [
        Tap(column=name, station=Uncertain(value=at, standard=0.0), elevation=None, accuracy=exact, gauge=None)
        for name, at in (("upstream", 0.0), ("downstream", length))
    ]
    count = len(flows)
    return ReachReadings(
        upstream=ends[0],
        downstream=ends[1],
        meter=Meter(
            column="flow",
            accuracy=Accuracy(text="1 % of reading", gain=METER_LIMIT * FLAT),
            serial=kit["serial"],
        ),
        length=Uncertain(value=length, standard=length * LENGTH_LIMIT * FLAT),
        bore=Uncertain(value=bore, standard=bore * BORE_LIMIT * FLAT),
        fitting_k=Uncertain(value=0.0, standard=0.0),
        elevation_drop=None,
        levelling=Levelling(
            offset_m=0.0, standard_m=level, drift_m=None, plateaus=1, pressure_pa=(4e5, 4e5), expected_m=0.2
        ),
        number=np.arange(1, count + 1),
        flow_m3_s=flows * (1.0 + gain),
        head_loss_m=read,
        random_m=noise,
        pressure_pa=4e5 - np.outer([0.2, 1.2], read * 9790.0),
        temperature_degc=np.full(count, 12.7),
        density_kg_m3=np.full(count, 999.4),
        viscosity_m2_s=np.full(count, VISCOSITY),
        viscosity_standard=0.01,
        turbulent_from_m3_s=4000.0 * np.pi / 4.0 * bore * VISCOSITY,
        set_aside=(),
    )


def _section(readings, laid, duty, limit):
    """What is known of the main beforehand."""
    return Section(
        name="Simulated main",
        path=Path("section.toml"),
        material="uncoated cast iron",
        installed=laid,
        bore=readings.bore,
        bore_source="given",
        liquid=water(),
        temperature=None,
        temperature_standard=0.5,
        meter=readings.meter,
        taps=(readings.upstream, readings.downstream),
        duty_flow_m3_s=duty,
        outlook=Outlook(thresholds=Thresholds(c=float(limit))),
    )


def _correlation():
    from fieldfit.field.section import Correlation

    return Correlation(standard=CORRELATION)


CORRELATED = _correlation()
