"""How fast the friction kernel is, beside a floor of bare arithmetic and two other ways to the same number.

Run ``pytest -m benchmark -s tests/benchmarks``. Every ratio comes from one run, and the accuracy is asserted in it.

The floor is one log10, one square root and four multiply-adds on the same array: written the natural way over whole
arrays, and again in blocks that stay in the cache, as the kernel works. The kernel is held to the stricter of the two.
"""

import math
import time

import fluids.friction
import mpmath
import numpy as np
import pytest
from scipy.special import wrightomega

from fieldfit.hydraulics.friction import colebrook_white, colebrook_white_with_slopes, relative_roughness

ELEMENTS = 1_000_000
BLOCK = 16384
SCALAR_CALLS = 2000
LIMIT = 2.5
C = 2.0 / math.log(10.0)


def floor_whole(reynolds):
    """One log10, one square root and four multiply-adds, over whole arrays."""
    result, root = np.log10(reynolds), np.sqrt(reynolds)
    for _ in range(4):
        result = result * 0.999 + root
    return result


def floor_in_blocks(reynolds):
    """Do the same block by block, without temporaries."""
    result, scratch = np.empty_like(reynolds), np.empty(min(BLOCK, reynolds.size))
    for start in range(0, reynolds.size, BLOCK):
        block = reynolds[start : start + BLOCK]
        now, root = result[start : start + BLOCK], scratch[: block.size]
        np.log10(block, out=now)
        np.sqrt(block, out=root)
        for _ in range(4):
            np.multiply(now, 0.999, out=now)
            np.add(now, root, out=now)
    return result


def closed_form(reynolds, rough):
    """Colebrook–White by the Wright omega function, as it is usually written."""
    b = 2.51 / reynolds
    k = rough / 3.7 / b
    return (C * wrightomega(k / C - np.log(b * C)) - k) ** -2


def scalar_loop(reynolds, rough):
    """Colebrook–White point by point by the `fluids` library."""
    return np.array([fluids.friction.Colebrook(*at) for at in zip(reynolds.tolist(), rough.tolist(), strict=True)])


def seconds(jobs, rounds):
    """Return the shortest time of each job; the jobs take turns, so that a busy machine hits all alike."""
    best = dict.fromkeys(jobs, math.inf)
    for _ in range(rounds):
        for name, (run, arguments) in jobs.items():
            start = time.perf_counter()
            run(*arguments)
            best[name] = min(best[name], time.perf_counter() - start)
    return best


def worst_error(friction_factor, reynolds, rough):
    """Return the largest relative error against arithmetic of 40 digits."""
    worst = mpmath.mpf(0)
    with mpmath.workdps(40):
        for f, re, wall in zip(friction_factor.tolist(), reynolds.tolist(), rough.tolist(), strict=True):
            a, b = mpmath.mpf(wall) / mpmath.mpf("3.7"), mpmath.mpf("2.51") / mpmath.mpf(re)
            x = mpmath.findroot(lambda x, a=a, b=b: x + 2 * mpmath.log10(a + b * x), 7.0)
            worst = max(worst, abs(f * x**2 - 1))
    return float(worst)


def domain(count, seed=1937):
    """Return random points over Re 4e3 to 1e8 and ε/D 0 to 0.05, one in twenty smooth."""
    random = np.random.default_rng(seed)
    reynolds = 10.0 ** random.uniform(math.log10(4e3), 8.0, count)
    rough = 10.0 ** random.uniform(-8.0, math.log10(0.05), count)
    rough[::20] = 0.0
    return reynolds, rough


@pytest.mark.benchmark
def test_kernel_against_the_floor():
    reynolds, rough = domain(ELEMENTS)
    few = (reynolds[:SCALAR_CALLS], rough[:SCALAR_CALLS])
    f = colebrook_white(reynolds, rough)
    best = seconds(
        {
            "floor, whole arrays": (floor_whole, (reynolds,)),
            "floor, in blocks": (floor_in_blocks, (reynolds,)),
            "f": (colebrook_white, (reynolds, rough)),
            "f and both slopes": (colebrook_white_with_slopes, (reynolds, rough)),
            "back to ε/D": (relative_roughness, (f, reynolds)),
        },
        rounds=25,
    )
    best |= seconds({"Wright omega, scipy": (closed_form, (reynolds, rough))}, rounds=3)
    scaled = seconds({"scalar loop, fluids": (scalar_loop, few)}, rounds=3)
    best |= {name: each * ELEMENTS / SCALAR_CALLS for name, each in scaled.items()}

    check = slice(0, 300)
    at = (reynolds[check], rough[check])
    errors = {
        "f": worst_error(f[check], *at),
        "f and both slopes": worst_error(colebrook_white_with_slopes(*at)[0], *at),
        "Wright omega, scipy": worst_error(closed_form(*at), *at),
        "scalar loop, fluids": worst_error(scalar_loop(*at), *at),
    }
    whole, blocks = best["floor, whole arrays"], best["floor, in blocks"]
    print(f"\n\nFriction kernel, {ELEMENTS:,} elements; worst error of 300 points in 40 digits")
    print(f"{'':24}{'ns each':>10}{'× whole floor':>15}{'× block floor':>15}{'worst error':>14}")
    for name, each in best.items():
        error = f"{errors[name]:14.1e}" if name in errors else f"{'':14}"
        print(f"{name:24}{each / ELEMENTS * 1e9:10.2f}{each / whole:15.2f}{each / blocks:15.2f}{error}")
    assert max(errors["f"], errors["f and both slopes"]) < 1e-12
    assert best["f"] <= LIMIT * min(whole, blocks)


@pytest.mark.benchmark
@pytest.mark.parametrize("count", [1, 20, 200, 2000])
def test_kernel_on_short_arrays(count):
    reynolds, rough = domain(count)
    best = seconds(
        {
            "floor": (floor_whole, (reynolds,)),
            "f": (colebrook_white, (reynolds, rough)),
            "f and both slopes": (colebrook_white_with_slopes, (reynolds, rough)),
            "Wright omega, scipy": (closed_form, (reynolds, rough)),
            "scalar loop, fluids": (scalar_loop, (reynolds, rough)),
        },
        rounds=300,
    )
    row = "".join(f"   {name} {each * 1e6:.1f}" for name, each in best.items())
    print(f"\n{count} elements, microseconds a call:{row}", end="")
    assert worst_error(colebrook_white(reynolds[:50], rough[:50]), reynolds[:50], rough[:50]) < 1e-12
