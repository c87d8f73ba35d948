"""Three days of ordinary service instead of a stepped test: is the friction factor right, and its band?

Run it with ``pytest -m slow -s tests/studies/test_service_log_study.py``.
"""

from __future__ import annotations

import numpy as np
import pytest
from crew import bring
from instruments import Gauge, Kit, Meter, Pipe, Plan
from service_day import service
from simulator import Errors, draw_errors, friction_factor

pytestmark = pytest.mark.slow

SEED = 1904
RUNS = 12
DRAWN = 60
PIPE = Pipe(bore_m=0.2, length_m=600.0, roughness_m=1e-3, elevation_m=(12.0, 9.5))


def assessed(rng, folder, interval_s, noise, errors=None):
    """Simulate three days and assess them; return the day and what was found."""
    from fieldfit.assessment import assess

    kit = Kit(
        gauge=Gauge(full_scale_pa=1e6, limit=0.001, step_pa=100.0, noise_pa=300.0),
        meter=Meter(limit=0.005, step_m3_s=1e-5, noise=noise),
    )
    plan = Plan(flows_m3_s=(0.018, 0.055), supply_pa=5e5, interval_s=interval_s, statics="none")
    day = service(rng, (PIPE, kit), plan, errors(rng, PIPE, kit, plan) if errors else Errors())
    section, log = bring(day, folder)
    return day, assess(section, log).campaigns[0]


def slope_by_binned_rows(day):
    """Error of the exponent of flow when rows are simply binned by their own noisy flow [-]; for comparison."""
    rows = day.rows
    fall = (rows.pressure_pa[0] - rows.pressure_pa[1]) / (day.truth.density_kg_m3 * 9.80665) + 2.5
    edges = np.quantile(rows.flow_m3_s, np.linspace(0.0, 1.0, 41))
    bins = np.clip(np.searchsorted(edges, rows.flow_m3_s) - 1, 0, 39)
    level = [np.log([rows.flow_m3_s[bins == k].mean(), fall[bins == k].mean()]) for k in range(40)]
    return float(np.polyfit(*np.array(level).T, 1)[0])


@pytest.mark.parametrize("interval_s", [10.0, 60.0])
@pytest.mark.parametrize("noise", [0.01, 0.02])
def test_friction_is_not_biased_and_the_groups_know_their_noise(tmp_path, interval_s, noise):
    off, pulls, exponents = [], [], []
    for run in range(RUNS):
        rng = np.random.default_rng([SEED, run, int(interval_s), int(1000 * noise)])
        day, campaign = assessed(rng, tmp_path / f"{run}", interval_s, noise)
        assert campaign.screening.block is not None
        wall = campaign.reaches[0].wall
        truth = friction_factor(wall.reynolds, PIPE.roughness_m / PIPE.bore_m)
        off.append(wall.friction_factor.best / truth - 1.0)
        values = wall.plateaus
        each = friction_factor(values.reynolds, PIPE.roughness_m / PIPE.bore_m)
        pulls.append((values.friction_factor / each - 1.0) / values.friction_factor_random)
        exponents.append(
            np.polyfit(np.log(values.flow_m3_s), np.log(values.friction_loss_m), 1)[0] - slope_by_binned_rows(day)
        )
    pulls = np.sqrt(np.mean(np.concatenate(pulls) ** 2))
    print(
        f"\nrows every {interval_s:g} s, meter noise {100 * noise:g} %: f off by {100 * np.mean(off):+.3f} % on average, "
        f"{100 * np.max(np.abs(off)):.3f} % at most; groups off by {pulls:.2f} of their stated standard error; "
        f"exponent {np.mean(exponents):+.3f} over that of rows binned by their own flow"
    )
    assert abs(np.mean(off)) < 0.002
    assert np.max(np.abs(off)) < 0.005
    assert 0.5 < pulls < 1.3


def test_bands_hold_the_truth(tmp_path):
    """With every instrument off by a draw from its limit, the measurement band holds the equivalent roughness."""
    held = []
    for run in range(DRAWN):
        rng = np.random.default_rng([SEED, 7, run])
        day, campaign = assessed(rng, tmp_path / f"{run}", 60.0, 0.015, draw_errors)
        low, high = campaign.reaches[0].wall.roughness_m.measurement
        held.append(low <= day.truth.equivalent_roughness_m <= high)
    print(f"\n{DRAWN} logs with drawn instrument errors: band holds the truth in {100 * np.mean(held):.0f} %")
    assert np.mean(held) >= 0.9
