"""200 stepped tests whose loggers' clocks are apart: is the lag within its stated interval, and is friction unmoved?

Run it with ``pytest -m slow -s tests/studies/test_clock_study.py``.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
import pytest
from crew import PLANT, section_text
from instruments import Gauge, Kit, Meter, Pipe, Plan
from loggers import Logger, logger_text
from simulator import GRAVITY, friction_factor, simulate

from fieldfit.errors import InputError

pytestmark = pytest.mark.slow

RUNS = 200
SEED = 1985
LAGS_S = (2.0, 5.0, 15.0, 60.0, 3600.0)
SETUPS = ("gauge apart", "meter apart", "all apart")


@dataclass(frozen=True, slots=True, kw_only=True)
class Run:
    """One test and what came of it."""

    lag_s: float
    setup: str
    within: bool
    refused: bool
    error_s: float
    width_s: float
    bias: float
    """Relative change of the friction factor against the same loggers on one clock."""


def design(rng):
    """A main with a stepped test, a drifting supply and noisy gauges, simulated every half second."""
    bore = float(rng.uniform(0.08, 0.4))
    top = float(rng.uniform(1.2, 2.2))
    relative = float(np.exp(rng.uniform(*np.log([5e-4, 2e-2]))))
    # Long enough for a head loss that any crew would ask for.
    slope = float(friction_factor(top * bore / 1.2e-6, relative)) / bore * top**2 / 2.0 / GRAVITY
    length = float(rng.uniform(8.0, 20.0)) / slope
    pipe = Pipe(bore_m=bore, length_m=length, roughness_m=relative * bore, temperature_degc=12.0)
    area = np.pi / 4.0 * bore**2
    kit = Kit(
        gauge=Gauge(full_scale_pa=1e6, limit=0.0025, step_pa=100.0, noise_pa=float(rng.uniform(200.0, 1500.0))),
        meter=Meter(limit=0.005, step_m3_s=top * area * 5e-4, noise=float(rng.uniform(0.002, 0.006))),
    )
    plan = Plan(
        flows_m3_s=tuple((area * top * np.linspace(rng.uniform(0.3, 0.5), 1.0, int(rng.integers(4, 8)))).tolist()),
        supply_pa=6e5,
        source_loss_pa=float(rng.uniform(0.1, 1.0)) * 1e5,
        dwell_s=float(rng.uniform(45.0, 90.0)),
        ramp_s=float(rng.uniform(8.0, 25.0)),
        interval_s=0.5,
        drift=float(rng.uniform(0.01, 0.04)),
    )
    return simulate(rng, pipe, kit, plan)


def loggers_of(rng, setup, lag):
    """The loggers of a setup, one of them ahead, at sampling of their own."""
    pace = {"every": 4}
    other = {"every": int(rng.choice([2, 4, 6])), "phase": int(rng.integers(0, 4)), "ahead_s": lag}
    if setup == "gauge apart":
        return [
            Logger(file="main.csv", channels=("flow", "upstream", "temperature"), **pace),
            Logger(file="apart.csv", channels=("downstream",), **other),
        ]
    if setup == "meter apart":
        return [
            Logger(file="apart.csv", channels=("flow", "temperature"), **other),
            Logger(file="main.csv", channels=("upstream", "downstream"), **pace),
        ]
    return [
        Logger(file="main.csv", channels=("flow", "temperature"), **pace),
        Logger(file="other.csv", channels=("upstream",), every=4, phase=1, ahead_s=float(rng.uniform(-20.0, 20.0))),
        Logger(file="apart.csv", channels=("downstream",), **other),
    ]


def assessed(folder, day, loggers):
    """Assess the files; return the campaign and its friction factor."""
    from fieldfit.assessment import assess

    folder.mkdir(parents=True)
    (folder / "section.toml").write_text(section_text(day, PLANT), encoding="utf-8")
    for logger in loggers:
        (folder / logger.file).write_text(logger_text(day, logger), encoding="utf-8")
    campaign = assess(folder / "section.toml", *(folder / logger.file for logger in loggers)).campaigns[0]
    return campaign, campaign.reaches[0].wall.friction_factor.best


def judge(number, folder):
    """Simulate and assess one test."""
    rng = np.random.default_rng([SEED, number])
    lag = LAGS_S[number % len(LAGS_S)] * float(rng.choice([-1.0, 1.0]))
    setup = SETUPS[number % len(SETUPS)]
    day = design(rng)
    loggers = loggers_of(rng, setup, lag)
    _, clean = assessed(folder / "clean", day, [replace(one, ahead_s=0.0) for one in loggers])
    try:
        campaign, skewed = assessed(folder / "apart", day, loggers)
    except InputError as error:
        print(error)
        nothing = float("nan")
        return Run(
            lag_s=abs(lag), setup=setup, within=False, refused=True, error_s=nothing, width_s=nothing, bias=nothing
        )
    clocks = {clock.file: clock for clock in campaign.log.clocks}
    ahead = {logger.file: logger.ahead_s for logger in loggers}
    reference = next(clock.file for clock in campaign.log.clocks if clock.how == "reference")
    clock = clocks["apart.csv" if reference != "apart.csv" else "main.csv"]
    true = ahead[clock.file] - ahead[reference]
    refused = clock.interval_s is None
    low, high = clock.interval_s or (np.nan, np.nan)
    return Run(
        lag_s=abs(lag),
        setup=setup,
        within=bool(low <= true <= high),
        refused=refused,
        error_s=abs(clock.best_s - true),
        width_s=high - low,
        bias=skewed / clean - 1.0 if skewed and clean else float("nan"),
    )


@pytest.fixture(scope="module")
def runs(tmp_path_factory):
    """All tests, each from its own stream of random numbers."""
    folder = tmp_path_factory.mktemp("clocks")
    found = [judge(number, folder / f"{number:03d}") for number in range(RUNS)]
    print(
        f"\n{'group':14}{'n':>5}{'within':>9}{'refused':>9}{'error, s':>10}{'width, s':>10}{'bias of f, %':>14}{'worst':>8}"
    )
    groups = {"all": lambda run: True}
    groups |= {f"{lag:g} s": lambda run, lag=lag: run.lag_s == lag for lag in LAGS_S}
    groups |= {setup: lambda run, setup=setup: run.setup == setup for setup in SETUPS}
    for name, chosen in groups.items():
        some = [run for run in found if chosen(run)]
        bias = np.array([100.0 * run.bias for run in some])
        print(
            f"{name:14}{len(some):5d}{100.0 * np.mean([run.within for run in some]):8.1f}%"
            f"{sum(run.refused for run in some):9d}{np.nanmedian([run.error_s for run in some]):10.3f}"
            f"{np.nanmedian([run.width_s for run in some]):10.3f}{np.nanmedian(bias):+14.3f}{np.nanmax(np.abs(bias)):8.3f}"
        )
    return found


def test_lags_lie_within_their_stated_intervals(runs):
    assert np.mean([run.within for run in runs]) >= 0.95


def test_intervals_say_something(runs):
    """An interval that held anything would be no result: half of them are narrower than two rows, wave and all."""
    assert np.nanmedian([run.width_s for run in runs]) < 4.0


def test_friction_is_not_biased(runs):
    bias = np.array([run.bias for run in runs if not run.refused])
    assert np.all(np.isfinite(bias))
    assert np.abs(np.mean(bias)) < 0.001
    assert np.quantile(np.abs(bias), 0.95) < 0.005
