"""What screening found as plain data."""

from __future__ import annotations

import json
import math
from typing import Any

import numpy as np

from fieldfit import __version__
from fieldfit.report.screening import words
from fieldfit.report.screening.finding import CampaignScreen, Check, ReachScreen, ScreenFinding

SCHEMA = 1
"""Version of the record: keys may be added to it, but none renamed."""

Record = dict[str, Any]


def screen_record(finding: ScreenFinding) -> Record:
    """Return what screening found as plain data.

    Keys, in order: ``schema``, ``fieldfit`` (version), ``section`` (``name``), ``good_enough``, and ``campaigns``, one for
    each log, with

    - ``date``; ``log``: ``file``, ``sha256``, ``kind``, ``rows``, ``used``, ``set_aside`` (rows by reason: used and set
      aside add up to rows); ``read_as`` ("plateaus", "service" or "sheet"); ``good_enough``; ``do`` (sentences);
    - ``plateaus``: ``number``, ``static``, ``start_s``, ``end_s``, ``rows``, ``flow_m3_s`` of each;
    - ``steps``: ``column``, ``step_si`` (m³/s or Pa), ``different_values``, ``trembling_steps``, ``standard_si``;
    - ``reaches``: ``from``, ``to``, ``head_loss`` (``plateau``, ``head_loss_m``, ``standard_m``, ``set_aside`` of each),
      ``levelling`` (``statics``, ``offset_m``, ``standard_m``, ``drift_m``, ``allowed_standard_m``; null without a
      static), ``checks``;
    - ``checks``: ``what``, ``value``, ``limit``, ``at_most`` (else at least), ``unit``, ``passed``, ``needed``, ``because``,
      ``do``; those of a reach stand with it, those of the log as a whole with the campaign;
    - ``clocks``, one for each logger of several: ``file``, ``columns``, ``how`` its offset is known, ``offset_s`` ahead,
      ``interval_s`` (95 %), ``drift`` (s/s);
    - ``assumed``: sentences.

    A value that is not defined is null.

    Parameters
    ----------
    finding : ScreenFinding
        What screening found.

    Returns
    -------
    dict
        Fit for JSON, without NaN or infinity.
    """
    return {
        "schema": SCHEMA,
        "fieldfit": __version__,
        "section": {"name": finding.section.name},
        "good_enough": finding.good,
        "campaigns": [_campaign(campaign) for campaign in finding.campaigns],
    }


def screen_record_json(finding: ScreenFinding) -> str:
    """Return the record as JSON text, ending with a line end."""
    return json.dumps(screen_record(finding), ensure_ascii=False, allow_nan=False, indent=2) + "\n"


def _campaign(campaign: CampaignScreen) -> Record:
    plateaus, log = campaign.plateaus, campaign.log
    kind = "service" if campaign.screening.block is not None else "sheet" if log.kind == "sheet" else "plateaus"
    return {
        "date": campaign.date.isoformat() if campaign.date else None,
        "log": {
            "file": log.file,
            "sha256": log.sha256,
            "kind": log.kind,
            "rows": log.rows,
            "used": campaign.screening.used,
            "set_aside": {reason: int(number) for reason, number in campaign.screening.counts},
        },
        "read_as": kind,
        "good_enough": campaign.good,
        "do": words.again(campaign),
        "plateaus": [
            {
                "number": int(plateaus.number[k]),
                "static": bool(plateaus.static[k]),
                "start_s": _number(plateaus.start_s[k]),
                "end_s": _number(plateaus.end_s[k]),
                "rows": int(plateaus.rows[k]),
                "flow_m3_s": _number(plateaus.flow_m3_s[k]),
            }
            for k in range(plateaus.number.size)
        ],
        "steps": [
            {
                "column": one.column,
                "step_si": _number(one.step),
                "different_values": one.values,
                "trembling_steps": _number(one.trembling),
                "standard_si": _number(one.standard),
            }
            for one in campaign.steps
        ],
        "reaches": [_reach(reach) for reach in campaign.reaches],
        "checks": [_check(check) for check in campaign.checks],
        "clocks": [
            {
                "file": one.file,
                "columns": list(one.columns),
                "how": one.how,
                "offset_s": _number(one.offset_s),
                "interval_s": None if one.interval_s is None else [_number(end) for end in one.interval_s],
                "drift": _number(one.drift),
            }
            for one in log.clocks
        ],
        "assumed": list(log.assumed),
    }


def _reach(reach: ReachScreen) -> Record:
    heads, level = reach.heads, reach.heads.levelling
    return {
        "from": reach.upstream.column,
        "to": reach.downstream.column,
        "head_loss": [
            {
                "plateau": int(heads.plateaus.number[k]),
                "head_loss_m": _number(heads.head_loss_m[k]),
                "standard_m": _number(heads.standard_m[k]),
                "set_aside": str(heads.reason[k]) or None,
            }
            for k in np.flatnonzero(~heads.plateaus.static)
        ],
        "levelling": None
        if level is None
        else {
            "statics": level.plateaus,
            "offset_m": _number(level.offset_m),
            "standard_m": _number(level.standard_m),
            "drift_m": _number(level.drift_m),
            "allowed_standard_m": _number(level.expected_m),
        },
        "checks": [_check(check) for check in reach.checks],
    }


def _check(check: Check) -> Record:
    return {
        "what": check.what,
        "value": _number(check.value),
        "limit": _number(check.limit),
        "at_most": check.at_most,
        "unit": check.unit,
        "passed": check.passed,
        "needed": check.needed,
        "because": check.because,
        "do": check.do or None,
    }


def _number(value: float | None) -> float | None:
    """Return a plain float, or None for what is not defined."""
    return None if value is None or not math.isfinite(value) else float(value)
