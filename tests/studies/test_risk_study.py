"""Risks over 2000 hand-overs: what is accepted and does not conform, what is rejected and does.

Run it with ``pytest -m slow -s tests/studies/test_risk_study.py``.
"""

import numpy as np
import pytest
from handovers import build, contract_of, read, section_of

from fieldfit.decisions.acceptance import judge_contract
from fieldfit.inference.fit import fit_reach
from fieldfit.inference.head_model import head_model

HANDOVERS = 2000
RISK = 0.05
SEED = 106


@pytest.fixture(scope="module")
def cases():
    """Outcome and truth of every hand-over: pipes are built about the limit, where it is hard."""
    contract = contract_of(limit=140.0, risk=RISK)
    section = section_of(contract)
    rng = np.random.default_rng(SEED)
    found = []
    for _ in range(HANDOVERS):
        truth = build(rng, roughness=float(np.exp(rng.normal(np.log(5e-5), 0.7))))
        fit = fit_reach(head_model(read(rng, truth), section.correlation))
        verdict = judge_contract(fit, contract, section)
        found.append((verdict.outcome, truth.c(contract.flow_m3_s) >= contract.limit, verdict.conformance_probability))
    table = {
        (outcome, conforms): sum(o == outcome and c == conforms for o, c, _ in found)
        for outcome in ("pass", "fail", "undecided")
        for conforms in (True, False)
    }
    print(f"\n{HANDOVERS} hand-overs, guarded at {RISK:.0%}")
    for outcome in ("pass", "fail", "undecided"):
        print(f"{outcome:10} conforming {table[outcome, True]:5d}   not conforming {table[outcome, False]:5d}")
    print(f"accepted and not conforming: {wrong(table, 'pass', False):.1%} of the accepted")
    print(f"rejected and conforming: {wrong(table, 'fail', True):.1%} of the rejected")
    return found, table


def wrong(table, outcome, conforms):
    """Share of the wrong ones under an outcome."""
    return table[outcome, conforms] / max(table[outcome, True] + table[outcome, False], 1)


@pytest.mark.slow
def test_both_risks_stay_at_or_under_the_agreed_one(cases):
    _, table = cases
    assert table["pass", True] > 200
    assert table["fail", False] > 200
    assert wrong(table, "pass", False) <= RISK
    assert wrong(table, "fail", True) <= RISK


@pytest.mark.slow
def test_the_conformance_probability_is_calibrated(cases):
    found, _ = cases
    probability = np.array([p for *_, p in found])
    conforms = np.array([c for _, c, _ in found])
    for low, high in ((0.05, 0.3), (0.3, 0.7), (0.7, 0.95)):
        inside = (probability > low) & (probability <= high)
        assert np.count_nonzero(inside) > 60
        assert np.mean(conforms[inside]) == pytest.approx(np.mean(probability[inside]), abs=0.12)
