"""Six-tap surveys with known truth: is a shut valve, a bad reach or a bad stretch found, placed and sized?

100 runs each, with instruments, stations, heights and the friction law itself off by amounts drawn from their limits.
Run it with ``pytest -m slow -s tests/studies/test_survey_study.py``.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pytest
from instruments import Gauge, Kit, Limits, Meter, Plan
from simulator import friction_factor, water
from survey_simulator import SurveyLine, bring_survey, per_reach, simulate_survey

from fieldfit.assessment import read_campaign
from fieldfit.bore_and_taps import survey_of
from fieldfit.field.reaches import reach_readings
from fieldfit.field.section_file import read_section
from fieldfit.hydraulics.hazen_williams import c_from_friction_factor
from fieldfit.inference.fit import fit_reach
from fieldfit.inference.head_model import head_model

pytestmark = pytest.mark.slow

RUNS = 100
SEED = 4711
REACHES = 5
FAULTY = 2
SCENARIOS = ("valve between taps 3 and 4", "bad reach from tap 3 to 4", "bad stretch from tap 3 to 5", "nothing")


@dataclass(frozen=True, slots=True, kw_only=True)
class Case:
    """One survey and what came of it."""

    found: bool
    """Whether the cause stands first, or in the group that cannot be told from the first."""
    first: bool
    """Whether it stands first."""
    placed: bool
    sized: bool
    """Whether the stated 95 % interval of K, or of the friction factor, holds the truth."""
    naive_c: tuple[float, ...]
    joint_c: tuple[float, ...]
    true_c: tuple[float, ...]
    reduced_chi_square: float


def design(rng, scenario):
    """Line, kit and plan of an ordinary survey of an ordinary old main."""
    bore = float(rng.choice([0.08, 0.1016, 0.1524, 0.2032]))
    spacing = bore * rng.uniform(600.0, 1100.0, REACHES)
    station = np.round(np.append(0.0, np.cumsum(spacing)), 1)
    roughness = float(bore * np.exp(rng.uniform(*np.log([5e-4, 1e-2]))))
    velocity = float(rng.uniform(1.2, 2.0))
    area = np.pi / 4.0 * bore**2
    hidden, walls = [0.0] * REACHES, [roughness] * REACHES
    if scenario == SCENARIOS[0]:
        hidden[FAULTY] = float(np.exp(rng.uniform(*np.log([6.0, 60.0]))))
    elif scenario != "nothing":
        worse = min(roughness * float(rng.uniform(4.0, 10.0)), 0.045 * bore)
        for reach in range(FAULTY, FAULTY + (1 if scenario == SCENARIOS[1] else 2)):
            walls[reach] = worse
    line = SurveyLine(
        bore_m=bore,
        station_m=tuple(station.tolist()),
        elevation_m=tuple(np.round(20.0 + rng.uniform(-2.0, 2.0, REACHES + 1), 2).tolist()),
        roughness_m=tuple(walls),
        hidden_k=tuple(hidden),
        temperature_degc=round(float(rng.uniform(6.0, 18.0)), 1),
    )
    kit = Kit(
        gauge=Gauge(full_scale_pa=1e6, limit=0.0025, step_pa=100.0, noise_pa=float(rng.uniform(150.0, 500.0))),
        meter=Meter(limit=0.005, step_m3_s=2e-4 * velocity * area),
        limits=Limits(bore=0.005, station_m=0.1, elevation_m=0.02, temperature_k=0.5),
    )
    plan = Plan(
        flows_m3_s=tuple((velocity * area * np.linspace(0.4, 1.0, 5)).tolist()),
        supply_pa=8.5e5,
        dwell_s=100.0,
        ramp_s=max(20.0, 0.2 * station[-1] * velocity / 9.81),
        interval_s=2.0,
        statics="both" if rng.random() < 0.7 else "before",
    )
    return line, kit, plan


def true_friction(day, reach, reynolds):
    """Friction factor of the true pipe by its definition with the stated bore, at the reach's reference."""
    bores, roughness, _ = per_reach(day.line)
    _, viscosity = water(day.line.temperature_degc + day.truth.temperature_k)
    middle = np.exp(np.mean(np.log(day.plan.flows_m3_s))) * 4.0 / (np.pi * day.line.bore_m * viscosity)
    bore = bores[reach] * (1.0 + day.truth.bore)
    own = reynolds / (1.0 + day.truth.bore)
    return float(friction_factor(own, roughness[reach] / bore, day.truth, middle))


def true_c(f, flow, bore):
    """Hazen–Williams C by its exact definition, of a pipe of the stated bore."""
    velocity = flow / (np.pi * bore**2 / 4.0)
    return float(velocity / (0.849182 * (bore / 4.0) ** 0.63 * (f * velocity**2 / (2.0 * 9.80665 * bore)) ** 0.54))


def judge(rng, scenario, folder):
    """Simulate one survey, assess it, and compare."""
    day = simulate_survey(rng, *design(rng, scenario))
    section_file, log_file = bring_survey(day, folder)
    section = read_section(section_file)
    log, screening, plateaus = read_campaign(section, log_file)
    survey = survey_of(section, plateaus, (log, screening))
    place = {0: (FAULTY,), 1: (FAULTY,), 2: (FAULTY, FAULTY + 1), 3: None}[SCENARIOS.index(scenario)]
    cause = ("local loss", "bad reach", "bad reach", "one wall")[SCENARIOS.index(scenario)]
    group = [survey.likely[index] for index in (0, *survey.alike)]
    right = [one for one in group if one.cause == cause and (place is None or one.reaches == place)]
    true = tuple(
        true_c(true_friction(day, k, reach.explained.reynolds), reach.explained.flow_m3_s, day.line.bore_m)
        for k, reach in enumerate(survey.reaches)
    )
    harmless = scenario == "nothing" and survey.likely[0].cause in {"one wall", "uneven wall"}
    return Case(
        found=harmless if scenario == "nothing" else bool(right),
        first=survey.likely[0].cause == cause,
        placed=place is None or survey.likely[0].reaches == place,
        sized=bool(right) and sized(day, right[0], scenario),
        naive_c=tuple(naive_c(section, plateaus, reach) for reach in range(REACHES)),
        joint_c=tuple(nearest(survey.reaches[k], true[k]) for k in range(REACHES)),
        true_c=true,
        reduced_chi_square=survey.reduced_chi_square,
    )


def naive_c(section, plateaus, reach):
    """C of one reach read as if there were no other taps."""
    model = head_model(reach_readings(plateaus, section, reach), section.correlation)
    flow, bore = model.reference.flow_m3_s, model.readings.bore.value
    return float(c_from_friction_factor(np.exp(fit_reach(model).ln_friction), flow, bore))


def nearest(reach, true):
    """C of a reach by all taps together; of two that are left open, the one nearer the truth."""
    stated = [wall.hazen_williams_c.best for wall in (reach.explained, reach.rival) if wall is not None]
    return min(stated, key=lambda c: abs(c - true))


def sized(day, one, scenario):
    """Whether the stated interval of the fault's size, or of the common wall, holds the truth.

    Friction factors are of the stated bore: by definition they go with its fifth power.
    """
    if scenario == SCENARIOS[0]:
        low, high = one.local_k[0].measurement
        return low <= day.line.hidden_k[FAULTY] <= high
    if scenario == "nothing":
        return True
    low, high = one.wall.friction_factor.measurement
    as_stated = true_friction(day, FAULTY, one.wall.reynolds) / (1.0 + day.truth.bore) ** 5
    return low <= as_stated <= high


@pytest.fixture(scope="module")
def cases(tmp_path_factory):
    """All surveys, each from its own stream of random numbers."""
    folder = tmp_path_factory.mktemp("surveys")
    found = {
        scenario: [
            judge(np.random.default_rng([SEED, order, number]), scenario, folder / f"{order}-{number:03d}")
            for number in range(RUNS)
        ]
        for order, scenario in enumerate(SCENARIOS)
    }
    print_tables(found)
    return found


def print_tables(cases):
    """Print what was found, and C reach by reach beside C all together."""
    print(f"\n{'scenario':30}{'runs':>5}{'found':>8}{'first':>8}{'placed':>8}{'sized':>8}{'chi2/dof':>10}")
    for scenario, some in cases.items():
        shares = "".join(f"{share(some, what):7.0f}%" for what in ("found", "first", "placed", "sized"))
        print(f"{scenario:30}{len(some):5d}{shares}{np.median([c.reduced_chi_square for c in some]):10.2f}")
    print(f"\n{'rms error of C, % of the true C':34}" + "".join(f"{k + 1}-{k + 2:<7}" for k in range(REACHES)))
    for scenario, some in cases.items():
        for name in ("naive_c", "joint_c"):
            ratio = np.array([getattr(case, name) for case in some]) / np.array([case.true_c for case in some])
            errors = 100.0 * np.sqrt(np.nanmean((ratio - 1.0) ** 2, axis=0))
            label = f"{scenario}, {'on its own' if name == 'naive_c' else 'all together'}"
            print(f"{label:44}" + "".join(f"{error:8.2f}" for error in errors))


def share(cases, what):
    """Percentage of cases that hold."""
    return 100.0 * float(np.mean([getattr(case, what) for case in cases]))


@pytest.mark.parametrize("scenario", SCENARIOS[:3])
def test_the_fault_is_found_placed_and_sized(cases, scenario):
    some = cases[scenario]
    assert share(some, "found") >= 90.0
    assert share(some, "placed") >= 90.0
    assert share(some, "sized") >= 90.0


def test_no_false_alarm_on_a_sound_main(cases):
    assert share(cases["nothing"], "found") >= 95.0


def test_the_valve_spoils_the_naive_c_only(cases):
    some = cases[SCENARIOS[0]]
    naive = np.array([case.naive_c[FAULTY] / case.true_c[FAULTY] for case in some])
    joint = np.array([case.joint_c[FAULTY] / case.true_c[FAULTY] for case in some])
    assert np.median(naive) < 0.9
    assert abs(np.median(joint) - 1.0) < 0.01
