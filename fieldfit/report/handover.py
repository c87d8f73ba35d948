"""What a hand-over found: the verdict on each reach, with all it rests on."""

from __future__ import annotations

from dataclasses import dataclass

from fieldfit.decisions.acceptance import Acceptance
from fieldfit.decisions.conformity import Outcome
from fieldfit.decisions.stress_test import Stress
from fieldfit.report.finding import Finding, ReachFinding


@dataclass(frozen=True, slots=True, kw_only=True)
class ReachVerdict:
    """One reach under the contract."""

    reach: ReachFinding
    """What was found of it."""
    acceptance: Acceptance | None
    """The verdict; None where the readings allow no friction factor."""
    stress: tuple[Stress, ...] = ()
    """How far off an input would have to be to change it."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Handover:
    """The whole hand-over."""

    finding: Finding
    """What the test found."""
    verdicts: tuple[ReachVerdict, ...]
    """One per reach of the last campaign."""

    @property
    def outcome(self) -> Outcome:
        """Pass only when every reach passes; fail as soon as one fails."""
        outcomes = [one.acceptance.outcome if one.acceptance else "undecided" for one in self.verdicts]
        if "fail" in outcomes:
            return "fail"
        return "pass" if all(one == "pass" for one in outcomes) else "undecided"
