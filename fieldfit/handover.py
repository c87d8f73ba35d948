"""The hand-over, top to bottom: a section with a contract and its log in, a verdict out."""

from __future__ import annotations

from pathlib import Path

from fieldfit.assessment import assess
from fieldfit.decisions.acceptance import judge_contract
from fieldfit.decisions.acceptance_stress import stress_contract
from fieldfit.errors import InputError
from fieldfit.field.section import Section
from fieldfit.inference.fit import fit_reach
from fieldfit.inference.head_model import head_model
from fieldfit.report.finding import ReachFinding
from fieldfit.report.handover import Handover, ReachVerdict


def accept(section: str | Path | Section, *logs: str | Path) -> Handover:
    """Hold a pipe as built against its contract.

    Parameters
    ----------
    section : path or Section
        The section file with its `[contract]` table, or the folder that holds it.
    *logs : path
        Logs, one per campaign; without any, those that the section file names, else the folder's only CSV file. The
        last campaign counts.

    Returns
    -------
    Handover
        The finding and a verdict for each reach.

    Raises
    ------
    InputError
        When a file cannot be used, or the section file has no contract.
    """
    finding = assess(section, *logs)
    if finding.section.contract is None:
        raise InputError(
            "there is no [contract] table",
            'Write [contract] with c = 130 and rule = "guarded acceptance", risk = "5 %", as agreed.',
            finding.section.path.name,
        )
    reaches = finding.campaigns[-1].reaches
    return Handover(finding=finding, verdicts=tuple(_verdict(finding.section, reach) for reach in reaches))


def _verdict(section: Section, reach: ReachFinding) -> ReachVerdict:
    """Judge one reach; without a friction factor there is nothing to judge."""
    contract = section.contract
    if contract is None or reach.wall.friction_factor.best is None:
        return ReachVerdict(reach=reach, acceptance=None)
    fit = fit_reach(head_model(reach.readings, section.correlation))
    verdict = judge_contract(fit, contract, section)
    return ReachVerdict(reach=reach, acceptance=verdict, stress=stress_contract(reach.readings, verdict, section))
