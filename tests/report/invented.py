"""Invented findings to print: consistent in their physics, with no need of the fit."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np

from fieldfit.decisions.new_pipe import NewPipeComparison
from fieldfit.field.log import Log
from fieldfit.field.readings import Levelling, Plateaus, ReachReadings, Screening
from fieldfit.field.section import Fitting, Meter, Section, Tap
from fieldfit.field.uncertain import Accuracy, Uncertain
from fieldfit.hydraulics.liquids import Liquid
from fieldfit.inference.wall import Band, BudgetEntry, MonteCarlo, PlateauValues, Wall
from fieldfit.report.finding import CampaignFinding, Caution, Finding, ReachFinding

GRAVITY = 9.80665
VISCOSITY = 1.17e-6
DENSITY = 999.2
ROWS = 26
"""Rows of one plateau, ten seconds apart."""


@dataclass(frozen=True, kw_only=True)
class Pipe:
    """The truth behind an invented log."""

    name: str = "Kiln cooling supply"
    material: str | None = "carbon steel"
    bore_m: float = 0.0525
    length_m: float = 38.2
    roughness_m: float = 0.31e-3
    new_m: tuple[float, float, float] = (0.03e-3, 0.045e-3, 0.09e-3)
    top_flow_m3_s: float = 0.0045
    flows: int = 8
    taps: tuple[str, ...] = ("upstream", "downstream")
    file: str = "2026-05-12.csv"
    date: dt.date | None = dt.date(2026, 5, 12)
    sheet: bool = False
    statics: bool = True
    repeat: int = 1


def colebrook(reynolds, relative):
    """Darcy friction factor by plain iteration, apart from the program's own."""
    x = np.full(np.broadcast(reynolds, relative).shape, 7.0)
    for _ in range(60):
        x = -2.0 * np.log10(np.asarray(relative) / 3.7 + 2.51 * x / np.asarray(reynolds))
    return 1.0 / x**2


def roughness(f, reynolds, bore):
    """Roughness that a friction factor means, zero when it is below smooth."""
    x = 1.0 / np.sqrt(f)
    return float(np.maximum(0.0, 3.7 * bore * (10.0 ** (-0.5 * x) - 2.51 * x / reynolds)))


def hazen_williams(f, flow, bore):
    """C by its exact definition."""
    velocity = flow / (np.pi * bore**2 / 4.0)
    slope = f * velocity**2 / (2.0 * GRAVITY * bore)
    return velocity / (0.849182 * (bore / 4.0) ** 0.63 * slope**0.54)


def frozen(values):
    """Read-only float array."""
    array = np.asarray(values, dtype=np.float64)
    array.setflags(write=False)
    return array


def invented_section(pipe: Pipe) -> Section:
    """What the section file would have said."""
    stations = np.linspace(0.0, pipe.length_m, len(pipe.taps))
    return Section(
        name=pipe.name,
        path=Path("section.toml"),
        material=pipe.material,
        installed=dt.date(2009, 3, 1),
        bore=Uncertain(value=pipe.bore_m, standard=0.002 * pipe.bore_m, assumed=True),
        bore_source="given in the section file",
        liquid=Liquid(
            name="water",
            source="IAPWS SR6-08",
            density_kg_m3=lambda t: np.full_like(t, DENSITY),
            viscosity_m2_s=lambda t: np.full_like(t, VISCOSITY),
            viscosity_standard=0.005,
        ),
        temperature=None,
        temperature_standard=0.5,
        meter=Meter(
            column="flow", accuracy=Accuracy(text="0.5 % of reading", gain=0.005 / np.sqrt(3)), serial="MAG-118"
        ),
        taps=tuple(
            Tap(
                column=name,
                station=Uncertain(value=float(station), standard=0.02),
                elevation=Uncertain(value=1.2 + 1.25 * index, standard=0.01) if index < 2 else None,
                accuracy=Accuracy(text="0.25 % of 10 bar", fixed=2500 / np.sqrt(3), span=1e6),
                gauge=f"PG-{7 + 4 * index:02d}",
            )
            for index, (name, station) in enumerate(zip(pipe.taps, stations, strict=True))
        ),
        fittings=(Fitting(name="two long-radius bends", k=Uncertain(value=0.5, standard=0.15, assumed=True)),),
        assumed=(
            "The bore may be off by ±0.35 %, because the file does not say how well it is known.",
            "Temperature may be off by ±0.9 °C, because the file does not say.",
        ),
    )


def invented_pressures(pipe: Pipe, flow, rng: np.random.Generator):
    """Pressures at every tap, as the true pipe gives them."""
    hydraulic = np.maximum(flow, 1e-12)
    velocity = hydraulic / (np.pi * pipe.bore_m**2 / 4.0)
    reynolds = np.maximum(velocity * pipe.bore_m / VISCOSITY, 4000.0)
    per_metre = colebrook(reynolds, pipe.roughness_m / pipe.bore_m) / pipe.bore_m * velocity**2 / (2 * GRAVITY)
    supply = 412e3 - 4e3 * (flow / pipe.top_flow_m3_s) ** 2
    pressures = []
    for index in range(len(pipe.taps)):
        station = pipe.length_m * index / (len(pipe.taps) - 1)
        level = supply - DENSITY * GRAVITY * (per_metre * station + 1.25 * index)
        pressures.append(level + 120.0 * rng.standard_normal(flow.size))
    return np.array(pressures)


def invented_rows(pipe: Pipe, rng: np.random.Generator):
    """Rows of the log: plateau number, setpoint, flow, pressures, reason."""
    flows = list(np.linspace(0.22, 1.0, pipe.flows) * pipe.top_flow_m3_s)
    flows = flows[::2] + flows[1::2][::-1]
    if pipe.statics:
        flows = [0.0, *flows, 0.0]
    number, flow, reason = [], [], []
    for index, level in enumerate(flows):
        rows = 1 if pipe.sheet else ROWS * pipe.repeat
        if index and not pipe.sheet:
            for step in (0.2, 0.5, 0.8, 0.95):
                number.append(0)
                flow.append(flows[index - 1] + step * (level - flows[index - 1]))
                reason.append("unsteady")
        number += [index + 1] * rows
        flow += [level] * rows
        reason += [""] * rows
    number, flow, reason = np.array(number), np.array(flow), np.array(reason, dtype="U40")
    flow = flow * (1 + 0.002 * rng.standard_normal(flow.size))
    pressure = invented_pressures(pipe, flow, rng)
    if not pipe.sheet and flow.size > 120:
        spoiled = slice(3 * ROWS, 3 * ROWS + 5)
        reason[spoiled], number[spoiled] = "stuck gauge", 0
        pressure[-1, spoiled] = pressure[-1, 3 * ROWS]
        reason[100:102], number[100:102] = "missing value", 0
        flow[100:102] = np.nan
    return number, flow, pressure, reason


def invented_log(pipe: Pipe, flow, pressure) -> Log:
    """The log those rows stand in."""
    rows = flow.size
    return Log(
        file=pipe.file,
        sha256="3f8e1c0d9b7a65544332211000ffeeddccbbaa99887766554433221100abcdef",
        kind="sheet" if pipe.sheet else "logger",
        line=np.arange(2, rows + 2),
        start=None if pipe.sheet else dt.datetime(2026, 5, 12, 8, 0, 0),
        time_s=frozen(np.arange(rows) * (1.0 if pipe.sheet else 10.0)),
        flow_m3_s=frozen(flow),
        pressure_pa=frozen(pressure),
        temperature_degc=None if pipe.sheet else frozen(np.full(rows, 14.2)),
        flow_step_m3_s=1e-5,
        pressure_step_pa=frozen(np.full(pressure.shape[0], 100.0)),
        reason=np.where(np.isnan(flow), "missing value", ""),
        assumed=("The columns are separated by commas.",),
    )


def invented_plateaus(number, flow, pressure, log: Log) -> Plateaus:
    """Means over the rows of each plateau."""
    numbers = np.unique(number[number > 0])
    masks = [number == n for n in numbers]
    reaches = pressure.shape[0] - 1
    mean = np.array([flow[m].mean() for m in masks])
    return Plateaus(
        number=numbers,
        static=mean < 1e-9,
        start_s=frozen([log.time_s[m].min() for m in masks]),
        end_s=frozen([log.time_s[m].max() for m in masks]),
        rows=np.array([m.sum() for m in masks]),
        flow_m3_s=frozen(mean),
        pressure_pa=frozen([[p[m].mean() for m in masks] for p in pressure]),
        temperature_degc=frozen(np.full(numbers.size, 14.2)),
        random_pa=frozen(np.full((reaches, numbers.size), 60.0)),
        independent_rows=frozen(np.full((reaches, numbers.size), 12.0)),
        curvature_pa=frozen(np.zeros((reaches, numbers.size))),
        flow_slope_m3_s2=frozen(np.zeros(numbers.size)),
    )


def invented_readings(pipe: Pipe, section: Section, plateaus: Plateaus, reach: int) -> ReachReadings:
    """Readings of one reach, levelled on the statics."""
    flowing = ~plateaus.static
    loss = (plateaus.pressure_pa[reach] - plateaus.pressure_pa[reach + 1]) / (DENSITY * GRAVITY)
    still = loss[plateaus.static]
    upstream, downstream = section.taps[reach], section.taps[reach + 1]
    count = int(flowing.sum())
    return ReachReadings(
        upstream=upstream,
        downstream=downstream,
        meter=section.meter,
        length=Uncertain(value=downstream.station.value - upstream.station.value, standard=0.03),
        bore=section.bore,
        fitting_k=Uncertain(value=0.5, standard=0.15),
        elevation_drop=Uncertain(value=-1.25, standard=0.014),
        levelling=Levelling(
            offset_m=float(still.mean()) - 1.25,
            standard_m=0.008,
            drift_m=float(still[-1] - still[0]),
            plateaus=int(still.size),
            pressure_pa=(412.1e3, 400.3e3),
            expected_m=0.21,
        )
        if pipe.statics
        else None,
        number=plateaus.number[flowing],
        flow_m3_s=frozen(plateaus.flow_m3_s[flowing]),
        head_loss_m=frozen(loss[flowing] - (still.mean() if pipe.statics else 1.25)),
        random_m=frozen(np.full(count, 0.008)),
        pressure_pa=frozen(plateaus.pressure_pa[reach : reach + 2, flowing]),
        temperature_degc=frozen(np.full(count, 14.2)),
        density_kg_m3=frozen(np.full(count, DENSITY)),
        viscosity_m2_s=frozen(np.full(count, VISCOSITY)),
        viscosity_standard=0.013,
        turbulent_from_m3_s=1.9e-4,
        set_aside=((int(plateaus.number[flowing][0]), "critical zone"),) if pipe.repeat > 1 else (),
    )


BUDGET = (
    BudgetEntry(error="friction correlation", share=0.58, measurement_share=0.0, standard=0.05, pull=0.0),
    BudgetEntry(error="bore", share=0.17, measurement_share=0.40, standard=0.010, pull=0.2),
    BudgetEntry(error="meter gain", share=0.12, measurement_share=0.29, standard=0.0058, pull=-0.4),
    BudgetEntry(error="zero of gauge PG-07", share=0.06, measurement_share=0.14, standard=0.004, pull=0.1),
    BudgetEntry(error="zero of gauge PG-11", share=0.05, measurement_share=0.12, standard=0.004, pull=-0.1),
    BudgetEntry(error="readings' scatter", share=0.015, measurement_share=0.04, standard=0.002, pull=0.0),
    BudgetEntry(error="length", share=0.005, measurement_share=0.01, standard=0.0008, pull=0.0),
)


def invented_values(readings: ReachReadings) -> PlateauValues:
    """Friction factor and C by definition, at each plateau."""
    kept = ~np.isin(readings.number, [number for number, _ in readings.set_aside])
    bore, length = readings.bore.value, readings.length.value
    flow, head = readings.flow_m3_s[kept], readings.head_loss_m[kept]
    velocity = flow / (np.pi * bore**2 / 4.0)
    loss = head - readings.fitting_k.value * velocity**2 / (2 * GRAVITY)
    f = 2 * GRAVITY * bore * loss / (length * velocity**2)
    standard = np.hypot(0.03, 0.012 * loss)
    fitted = head + 0.008 * np.sin(1.7 * np.arange(flow.size))
    return PlateauValues(
        number=readings.number[kept],
        flow_m3_s=frozen(flow),
        velocity_m_s=frozen(velocity),
        reynolds=frozen(velocity * bore / VISCOSITY),
        temperature_degc=readings.temperature_degc[kept],
        friction_loss_m=frozen(loss),
        friction_loss_standard_m=frozen(standard),
        friction_factor=frozen(f),
        friction_factor_relative=frozen(np.hypot(standard / loss, 0.012)),
        friction_factor_random=frozen(0.008 / loss),
        hazen_williams_c=frozen(hazen_williams(f, flow, bore)),
        hazen_williams_relative=frozen(0.54 * standard / loss + 0.004),
        fitted_loss_m=frozen(fitted),
        residual=frozen((head - fitted) / readings.random_m[kept]),
    )


def invented_wall(pipe: Pipe, readings: ReachReadings) -> Wall:
    """Bands as the fit would give them, from the truth."""
    values = invented_values(readings)
    centre = int(np.argsort(values.flow_m3_s)[-3])
    flow, reynolds = float(values.flow_m3_s[centre]), float(values.reynolds[centre])
    bore = pipe.bore_m
    f = float(colebrook(reynolds, pipe.roughness_m / bore))
    smooth = float(colebrook(reynolds, 0.0))
    ends = {u: (f * np.exp(-1.96 * u), f * np.exp(1.96 * u)) for u in (0.016, 0.0525)}
    walls = {u: tuple(roughness(end, reynolds, bore) for end in pair) for u, pair in ends.items()}
    cs = {u: tuple(sorted(float(hazen_williams(end, flow, bore)) for end in pair)) for u, pair in ends.items()}
    smooth_wall = walls[0.0525][0] <= 0.0
    return Wall(
        state="upper limit" if smooth_wall else "measured",
        because="The readings lie so near a smooth wall that no roughness can be told from zero."
        if smooth_wall
        else "The friction factor stands clear of the smooth wall's.",
        advice="",
        roughness_m=Band(best=None, measurement=(0.0, walls[0.016][1]), with_correlation=(0.0, walls[0.0525][1]))
        if smooth_wall
        else Band(best=pipe.roughness_m, measurement=walls[0.016], with_correlation=walls[0.0525]),
        hazen_williams_c=Band(
            best=float(hazen_williams(f, flow, bore)), measurement=cs[0.016], with_correlation=cs[0.0525]
        ),
        friction_factor=Band(best=f, measurement=ends[0.016], with_correlation=ends[0.0525]),
        flow_m3_s=flow,
        velocity_m_s=float(values.velocity_m_s[centre]),
        reynolds=reynolds,
        temperature_degc=14.2,
        viscosity_m2_s=VISCOSITY,
        smooth_friction_factor=smooth,
        reduced_chi_square=0.9,
        degrees_of_freedom=values.number.size - 1,
        budget=BUDGET,
        plateaus=values,
        monte_carlo=MonteCarlo(
            draws=10_000, seed=1, friction_factor=ends[0.016], with_correlation=ends[0.0525], unconverged=0
        ),
        other_laws=(
            ("Haaland", pipe.roughness_m * 1.02),
            ("Swamee–Jain", pipe.roughness_m * 0.97),
            ("Nikuradse", None),
        ),
    )


def invented_comparison(pipe: Pipe, wall: Wall) -> NewPipeComparison | None:
    """Against new pipe of the material, when it is known."""
    if pipe.material is None:
        return None
    low, typical, high = (float(colebrook(wall.reynolds, r / pipe.bore_m)) for r in pipe.new_m)
    f = wall.friction_factor.best or wall.smooth_friction_factor
    ratio = f / typical
    return NewPipeComparison(
        material=pipe.material,
        roughness_m=pipe.new_m,
        hazen_williams_c=tuple(float(hazen_williams(x, wall.flow_m3_s, pipe.bore_m)) for x in (high, typical, low)),
        source="ASHRAE Fundamentals 2021, chapter 3",
        head_loss_ratio=(ratio * 0.89, ratio, ratio * 1.12),
        probability_worse=0.998 if ratio > 1.2 else 0.03,
        limit=1.10,
    )


def invented_campaign(pipe: Pipe, section: Section, seed: int) -> CampaignFinding:
    """One log and what was found in it."""
    number, flow, pressure, reason = invented_rows(pipe, np.random.default_rng(seed))
    log = invented_log(pipe, flow, pressure)
    plateaus = invented_plateaus(number, flow, pressure, log)
    reasons, counts = np.unique(reason[reason != ""], return_counts=True)
    order = np.argsort(-counts, kind="stable")
    reaches = []
    for reach in range(len(pipe.taps) - 1):
        readings = invented_readings(pipe, section, plateaus, reach)
        wall = invented_wall(pipe, readings)
        reaches.append(ReachFinding(readings=readings, wall=wall, new_pipe=invented_comparison(pipe, wall)))
    return CampaignFinding(
        date=pipe.date,
        log=log,
        screening=Screening(
            reason=reason, plateau=number, counts=tuple((str(reasons[i]), int(counts[i])) for i in order)
        ),
        plateaus=plateaus,
        reaches=tuple(reaches),
        cautions=(
            Caution(
                about="static", text="The gauges drifted by 0.004 m of head between the first static and the last."
            ),
        ),
    )


def plant_line(**changes) -> Finding:
    """Measured: scaled steel pipe in a plant."""
    pipe = Pipe(**changes)
    section = invented_section(pipe)
    return Finding(section=section, campaigns=(invented_campaign(pipe, section, 7),))


def smooth_pipe(**changes) -> Finding:
    """Upper limit: new plastic pipe."""
    new = dict(
        name="Orchard rising main",
        material="polyethylene",
        bore_m=0.1472,
        length_m=420.0,
        roughness_m=0.004e-3,
        new_m=(0.0015e-3, 0.003e-3, 0.01e-3),
        top_flow_m3_s=0.034,
    )
    return plant_line(**(new | changes))


def street_main(**changes) -> Finding:
    """Three taps, two campaigns, the second a hand sheet without statics; material unknown."""
    base = dict(
        name="Tanner's Row main",
        material=None,
        bore_m=0.154,
        length_m=301.0,
        roughness_m=2.1e-3,
        top_flow_m3_s=0.036,
        taps=("hydrant 12", "hydrant 14", "hydrant 17"),
    )
    first = Pipe(**(base | changes))
    section = invented_section(first)
    second = replace(first, sheet=True, statics=False, file="second visit.csv", date=None, flows=6)
    return Finding(
        section=section,
        campaigns=(invented_campaign(first, section, 3), invented_campaign(second, section, 4)),
    )


def no_estimate(because: str = "Every reading is laminar, and laminar flow does not feel the wall.") -> Finding:
    """No estimate: the plant line, with nothing left to fit."""
    finding = plant_line()
    campaign = finding.campaigns[0]
    reach = campaign.reaches[0]
    nothing = Band(best=None, measurement=None, with_correlation=None)
    wall = replace(
        reach.wall,
        state="no estimate",
        because=because,
        advice="Only turbulent flow feels the wall, above 0.19 L/s here; several times that tells more.",
        roughness_m=nothing,
        hazen_williams_c=nothing,
        friction_factor=nothing,
        reduced_chi_square=None,
        degrees_of_freedom=0,
        budget=(),
        plateaus=None,
        monte_carlo=None,
        other_laws=(),
    )
    set_aside = tuple((int(n), "laminar") for n in reach.readings.number)
    emptied = ReachFinding(readings=replace(reach.readings, set_aside=set_aside), wall=wall, new_pipe=None)
    caution = Caution(about="fit", text=because)
    return replace(finding, campaigns=(replace(campaign, reaches=(emptied,), cautions=(caution,)),))
