"""300 simulated sections with known truth through the whole chain: do the bands hold it as often as they say?

Run it with ``pytest -m slow -s tests/studies``.
"""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass

import numpy as np
import pytest
from crew import PLANT, STREET, WORKS, bring
from instruments import Gauge, Kit, Limits, Meter, Pipe, Plan
from simulator import GRAVITY, friction_factor, simulate, water

pytestmark = pytest.mark.slow

SECTIONS = 300
SEED = 1937
CLASSES = {"smooth": None, "slight": (1e-5, 5e-4), "moderate": (5e-4, 5e-3), "rough": (5e-3, 3e-2)}
SHARES = (0.15, 0.2, 0.25, 0.4)
FULL_SCALES_PA = 1e5 * np.array([2.5, 4.0, 6.0, 10.0, 16.0, 25.0])


@dataclass(frozen=True, slots=True, kw_only=True)
class Case:
    """One section of the study and what came of it."""

    roughness_class: str
    good_instruments: bool
    statics: str
    fully_rough: bool
    relative_roughness: float
    state: str
    because: str
    holds_truth: bool
    holds_equivalent: bool
    width_decades: float
    """Of the band with correlation; NaN where its low end is zero."""
    reduced_chi_square: float


def draw_wall(rng):
    """Roughness class and ε/D."""
    name = str(rng.choice(list(CLASSES), p=SHARES))
    ends = CLASSES[name]
    return name, 0.0 if ends is None else float(np.exp(rng.uniform(*np.log(ends))))


def draw_kit(rng, good, supply_pa, top_flow):
    """Instruments a crew might own; `good` ones are what a careful crew brings."""
    full_scale = float(FULL_SCALES_PA[1.1 * supply_pa < FULL_SCALES_PA][0])
    limit = float(rng.choice([0.0005, 0.001, 0.0025] if good else [0.0025, 0.005, 0.01]))
    step = full_scale * float(rng.choice([1e-4, 2e-4])) if good else full_scale * 5e-4
    meter_limit = float(rng.choice([0.003, 0.005, 0.01] if good else [0.01, 0.02]))
    spanned = rng.random() < 0.3
    meter = Meter(
        limit=0.4 * meter_limit if spanned else meter_limit,
        span_m3_s=float(top_flow * rng.uniform(1.1, 2.0)) if spanned else None,
        step_m3_s=top_flow * float(rng.choice([2e-4, 1e-3])),
        senses="velocity" if rng.random() < 0.3 else "volume",
        noise=float(rng.uniform(0.002, 0.006)),
    )
    limits = Limits(
        bore=float(rng.uniform(0.002, 0.005) if good else rng.uniform(0.005, 0.02)),
        station_m=float(rng.uniform(0.01, 0.1)),
        elevation_m=float(rng.uniform(0.005, 0.03)),
        fitting_k=float(rng.uniform(0.1, 0.3)),
        temperature_k=float(rng.uniform(0.2, 1.0)),
    )
    noise = float(full_scale * rng.uniform(1e-4, 6e-4))
    return Kit(
        gauge=Gauge(full_scale_pa=full_scale, limit=limit, step_pa=step, noise_pa=noise), meter=meter, limits=limits
    )


def design(rng, good, relative_roughness):
    """Pipe, kit and plan of a section whose head loss the instruments can resolve, as a sane crew would see to."""
    bore = float(np.exp(rng.uniform(*np.log([0.025, 0.6]))))
    temperature = float(rng.uniform(4.0, 35.0))
    density, viscosity = water(temperature)
    top_velocity = max(float(rng.uniform(1.0, 2.8)), 3e4 * viscosity / bore)
    statics = str(rng.choice(["both", "before", "none"], p=[0.5, 0.2, 0.3]))
    per_metre = (
        friction_factor(top_velocity * bore / viscosity, relative_roughness) / bore * top_velocity**2 / 2 / GRAVITY
    )
    wanted = float(np.exp(rng.uniform(*np.log([8.0, 25.0]))))
    area = np.pi / 4.0 * bore**2
    for _ in range(20):
        length = float(np.clip(wanted / per_metre, 40.0 * bore, 4000.0))
        loss_pa = per_metre * length * density * GRAVITY
        supply = loss_pa * 1.35 + float(rng.uniform(1.0, 2.5)) * 1e5
        kit = draw_kit(rng, good, supply, top_velocity * area)
        doubt = np.sqrt(2.0 / 3.0) * kit.gauge.limit * kit.gauge.full_scale_pa
        if loss_pa > (40.0 * doubt if statics == "none" else 20.0 * doubt):
            break
        wanted *= 1.3
    length = round(length, 1)
    flows = top_velocity * area * np.linspace(rng.uniform(0.3, 0.5), 1.0, int(rng.integers(5, 9)))
    fittings = float(rng.uniform(0.0, 0.08)) * per_metre * length * 2.0 * GRAVITY / top_velocity**2
    rise = float(np.round(rng.uniform(-0.02, 0.02) * min(length, 150.0), 3))
    pipe = Pipe(
        bore_m=bore,
        length_m=length,
        roughness_m=relative_roughness * bore,
        fitting_k=round(fittings, 2),
        elevation_m=(10.0, 10.0 + rise),
        temperature_degc=round(temperature, 1),
    )
    # A valve on a long main is moved slowly: stopping the water must not cost more than some 8 m of head.
    ramp = max(float(rng.uniform(6.0, 16.0)), 1.6 * length * top_velocity / GRAVITY / 8.0)
    interval = 5.0 if ramp > 60.0 else 2.0
    plan = Plan(
        flows_m3_s=tuple(flows.tolist()),
        supply_pa=supply,
        statics=statics,
        source_loss_pa=float(rng.uniform(0.0, 0.1)) * loss_pa,
        dwell_s=float(rng.uniform(30.0, 60.0)) * interval,
        ramp_s=ramp,
        interval_s=interval,
    )
    return pipe, kit, plan


def holds(band, value):
    """Whether a 95 % band holds a roughness; any band that reaches zero holds a smooth wall."""
    return band is not None and band[0] <= value <= band[1]


def judge(rng, folder):
    """Simulate one section, assess it, and compare."""
    from fieldfit.assessment import assess

    roughness_class, relative = draw_wall(rng)
    good = bool(rng.random() < 0.6)
    pipe, kit, plan = design(rng, good, relative)
    day = simulate(rng, pipe, kit, plan)
    units = (PLANT, WORKS, STREET)[rng.integers(3)]
    section, log = bring(day, folder, units, spoil=rng if rng.random() < 0.5 else None)
    wall = assess(section, log).campaigns[0].reaches[0].wall
    band = wall.roughness_m.with_correlation
    f = day.truth.friction_factor[-1]
    # Fully rough: u*ε/ν of 70 and more at the largest flow (Nikuradse 1933).
    fully_rough = day.truth.reynolds[-1] * np.sqrt(f / 8.0) * relative > 70.0
    return Case(
        roughness_class=roughness_class,
        good_instruments=good,
        statics=plan.statics,
        fully_rough=bool(fully_rough),
        relative_roughness=relative,
        state=wall.state,
        because=wall.because,
        holds_truth=holds(band, day.truth.roughness_m),
        holds_equivalent=holds(wall.roughness_m.measurement, day.truth.equivalent_roughness_m),
        width_decades=float(np.log10(band[1] / band[0])) if band and band[0] > 0.0 else float("nan"),
        reduced_chi_square=wall.reduced_chi_square or float("nan"),
    )


@pytest.fixture(scope="module")
def cases(tmp_path_factory):
    """All sections, each from its own stream of random numbers."""
    folder = tmp_path_factory.mktemp("sections")
    found = [judge(np.random.default_rng([SEED, number]), folder / f"{number:03d}") for number in range(SECTIONS)]
    print_table(found)
    return found


def print_table(cases):
    """Print shares by group."""
    groups = {"all": lambda case: True}
    groups |= {name: lambda case, name=name: case.roughness_class == name for name in CLASSES}
    groups |= {state: lambda case, state=state: case.state == state for state in ("measured", "upper limit")}
    groups |= {f"statics {kind}": lambda case, kind=kind: case.statics == kind for kind in ("both", "before", "none")}
    groups |= {
        "good instruments": lambda case: case.good_instruments,
        "rough, good instruments": lambda case: case.good_instruments and is_rough(case),
    }
    print(f"\n{'group':26}{'n':>5}{'truth in band':>15}{'equivalent in':>15}{'width, decades':>16}{'chi2/dof':>10}")
    for name, chosen in groups.items():
        some = [case for case in cases if chosen(case)]
        widths = [case.width_decades for case in some if np.isfinite(case.width_decades)]
        scatter = [case.reduced_chi_square for case in some if np.isfinite(case.reduced_chi_square)]
        print(
            f"{name:26}{len(some):5d}{share(some, 'holds_truth'):14.1f}%{share(some, 'holds_equivalent'):14.1f}%"
            f"{middle(widths):16.3f}{middle(scatter):10.2f}"
        )
    print(Counter(case.state for case in cases))
    for case in cases:
        if case.state == "no estimate":
            print(case.roughness_class, case.statics, case.because)


def share(cases, what):
    """Percentage of cases that hold."""
    return 100.0 * float(np.mean([getattr(case, what) for case in cases])) if cases else float("nan")


def middle(values):
    """Median; NaN of nothing."""
    return float(np.median(values)) if values else float("nan")


def is_rough(case):
    """Whether the wall is rough: fully rough flow and ε/D of 0.005 or more."""
    return case.fully_rough and case.relative_roughness >= 5e-3


def test_every_section_ends_with_an_answer(cases):
    assert len(cases) == SECTIONS
    assert [case.because for case in cases if case.state == "no estimate"] == []


def test_band_with_correlation_holds_the_true_roughness(cases):
    assert 93.0 <= share(cases, "holds_truth") <= 99.0


def test_measurement_band_holds_the_colebrook_equivalent_roughness(cases):
    assert 93.0 <= share(cases, "holds_equivalent") <= 99.0


def test_band_is_narrow_where_the_wall_is_rough(cases):
    rough = [case for case in cases if is_rough(case) and case.good_instruments]
    assert len(rough) >= 40
    assert np.median([case.width_decades for case in rough]) <= 0.30


def test_the_rough_are_measured_and_the_smooth_are_not(cases):
    assert all(case.state == "measured" for case in cases if case.roughness_class == "rough")
    smooth = [case for case in cases if case.roughness_class == "smooth"]
    assert np.mean([case.state == "upper limit" for case in smooth]) >= 0.9
