"""Every fault at three sizes on three kinds of section: is the cause named, or declared one that cannot be told apart?

Run it with ``pytest -m slow -s tests/studies/test_fault_study.py``: it prints the confusion table.
"""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass

import numpy as np
import pytest
from fault_maker import NOTHING, PLACES, clean_heads, draw, effect, fault_of, take_readings

from fieldfit.field.section import Correlation
from fieldfit.inference.explanations import explain

pytestmark = pytest.mark.slow

SEED = 1893
RUNS = 40
SEEN = 3.0
"""Combined standard errors from which a fault ought to be found."""
CAUSES = (
    "rough wall",
    "reduced bore",
    "local loss",
    "gauge offset",
    "leak or open branch",
    "trapped air",
    "meter error",
    "wrong unit or swapped channel",
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Run:
    """One simulated test and what was made of it."""

    place: str
    cause: str
    size: int
    effect: float
    named: str
    """The most probable; a wall as new counts as a rough wall."""
    new_wall: bool
    group: tuple[str, ...]
    surest_wrong: float
    """Largest probability given to anything else than the truth."""

    @property
    def found(self):
        """Whether the truth is on top, or in the declared group."""
        return self.named == self.cause or self.cause in self.group


def judge(place_name, cause, size, run, clean):
    """Simulate one test, explain it and compare."""
    place, index = PLACES[place_name], list(PLACES).index(place_name)
    rng = np.random.default_rng([SEED, index, CAUSES.index(cause) if cause in CAUSES else len(CAUSES), size, run])
    fault = NOTHING if cause == "clean" else fault_of(rng, place, cause, size)
    # A gauge's offset does not outlive a static; sound sections are tested both ways.
    levelled = cause != "gauge offset" and (cause != "clean" or bool(rng.random() < 0.7))
    found = explain(take_readings(place, fault, draw(rng, place), levelled), Correlation(), place.new_m)
    by_name = {}
    for one in found.ranked:
        name = " with ".join(one.causes).replace("nothing unusual", "rough wall")
        by_name[name] = by_name.get(name, 0.0) + one.probability
    truth = "rough wall" if cause == "clean" else cause
    return Run(
        place=place_name,
        cause=cause,
        size=size,
        effect=0.0 if cause == "clean" else effect(place, fault, levelled, clean[place_name, levelled]),
        named=" with ".join(found.ranked[0].causes).replace("nothing unusual", "rough wall"),
        new_wall=found.nothing_unusual,
        group=found.alike,
        surest_wrong=max((p for name, p in by_name.items() if name != truth), default=0.0),
    )


@pytest.fixture(scope="module")
def runs():
    """All runs, each from its own stream of random numbers."""
    clean = {
        (name, levelled): clean_heads(np.random.default_rng([SEED, number, levelled]), place, levelled)
        for number, (name, place) in enumerate(PLACES.items())
        for levelled in (True, False)
    }
    found = [
        judge(place, cause, size, run, clean)
        for place in PLACES
        for cause in (*CAUSES, "clean")
        for size in range(3)
        for run in range(RUNS)
    ]
    print_tables(found)
    return found


def visible(runs):
    """Runs whose fault stands clear of the errors."""
    return [run for run in runs if run.cause != "clean" and run.effect > SEEN]


def print_tables(runs):
    """Print what was named for each truth, and how often the truth was found, by section and size."""
    columns = [*CAUSES, "two causes"]
    print("\ntruth (rows), named most probable (columns), % of visible runs")
    print(f"{'':31}{'runs':>5}" + "".join(f"{name[:12]:>14}" for name in columns) + f"{'found':>8}{'group of':>10}")
    for cause in (*CAUSES, "clean"):
        some = [run for run in runs if run.cause == cause and (cause == "clean" or run.effect > SEEN)]
        named = Counter(run.named if run.named in CAUSES else "two causes" for run in some)
        row = "".join(f"{100.0 * named[name] / max(len(some), 1):13.0f}%" for name in columns)
        right = np.mean([run.found or (cause == "clean" and run.named == "rough wall") for run in some])
        size = np.mean([max(len(run.group), 1) for run in some])
        print(f"{cause:31}{len(some):5d}{row}{100.0 * right:7.1f}%{size:10.1f}")
    print("\nfound, % of visible runs, by size of fault (small, middling, large)")
    for cause in CAUSES:
        cells = []
        for place in PLACES:
            for size in range(3):
                some = [run for run in visible(runs) if (run.place, run.cause, run.size) == (place, cause, size)]
                cells.append(f"{100.0 * np.mean([run.found for run in some]):5.0f}" if some else "    -")
        print(f"{cause:31}" + "".join(cells))
    some = visible(runs)
    clean = [run for run in runs if run.cause == "clean"]
    print(f"\nfound: {100.0 * np.mean([run.found for run in some]):.1f} % of {len(some)} visible faults")
    print(f"surely wrong (over 0.9): {100.0 * np.mean([run.surest_wrong > 0.9 for run in some]):.2f} %")
    print(f"sound sections without alarm: {100.0 * np.mean([run.named == 'rough wall' for run in clean]):.1f} %")
    print(f"sound sections, nothing unusual on top: {100.0 * np.mean([run.new_wall for run in clean]):.1f} %")


def test_the_right_cause_is_named_or_declared_inseparable(runs):
    some = visible(runs)
    assert len(some) > 0.8 * len(PLACES) * len(CAUSES) * 3 * RUNS
    assert np.mean([run.found for run in some]) >= 0.90


@pytest.mark.parametrize("cause", CAUSES)
def test_no_kind_of_fault_is_overlooked(runs, cause):
    some = [run for run in visible(runs) if run.cause == cause]
    assert np.mean([run.found for run in some]) >= 0.90


def test_no_wrong_cause_is_sworn_to(runs):
    assert np.mean([run.surest_wrong > 0.9 for run in visible(runs)]) <= 0.02


def test_sound_sections_raise_no_alarm(runs):
    clean = [run for run in runs if run.cause == "clean"]
    assert np.mean([run.named == "rough wall" for run in clean]) >= 0.95


def test_the_declared_group_is_an_answer_and_not_a_list_of_everything(runs):
    assert np.mean([max(len(run.group), 1) for run in visible(runs)]) < 3.5
