"""Reports as files: all of them whole, or none."""

from __future__ import annotations

import contextlib
import os
import re
import tempfile
import unicodedata
from collections.abc import Mapping
from pathlib import Path

from fieldfit.decisions.plan import Plan
from fieldfit.report.audit import audit_csv
from fieldfit.report.finding import Finding
from fieldfit.report.handover import Handover
from fieldfit.report.page import page
from fieldfit.report.record import as_json, record, record_json

LONGEST = 60
"""Longest file name made from a section's name, without its ending."""
RESERVED = {"con", "prn", "aux", "nul", *(f"{device}{n}" for device in ("com", "lpt") for n in range(10))}
"""Names that Windows keeps for devices."""


def safe_name(name: str) -> str:
    """Return a section's name as a file name of letters, digits and hyphens.

    Parameters
    ----------
    name : str
        Any text.

    Returns
    -------
    str
        Never empty, never a path, never a name that a system keeps for itself.

    Examples
    --------
    >>> safe_name("Kiln cooling supply"), safe_name("../../etc/passwd"), safe_name("CON"), safe_name("  ")
    ('kiln-cooling-supply', 'etc-passwd', 'con-section', 'section')
    >>> safe_name("Mühlgasse <b>7</b>")
    'muhlgasse-b-7-b'
    """
    plain = unicodedata.normalize("NFKD", name).encode("ascii", "ignore").decode("ascii")
    safe = re.sub(r"[^a-z0-9]+", "-", plain.lower()).strip("-")[:LONGEST].strip("-")
    if not safe:
        return "section"
    return f"{safe}-section" if safe in RESERVED else safe


def write_reports(finding: Finding, folder: Path) -> tuple[Path, ...]:
    """Write the page, the record and the rows of each log into a folder, which is made when it is missing.

    Everything is composed before anything is written, and each file appears whole or not at all.

    Parameters
    ----------
    finding : Finding
        What was found.
    folder : Path
        Where to write.

    Returns
    -------
    tuple of Path
        The files: page first, then record, then the rows of each log.

    Raises
    ------
    OSError
        When the folder cannot be written; no new file is left behind.
    """
    name = safe_name(finding.section.name)
    texts = {f"{name}.html": page(finding), f"{name}.json": record_json(finding)}
    for index, campaign in enumerate(finding.campaigns, start=1):
        date = campaign.date.isoformat() if campaign.date else safe_name(Path(campaign.log.file).stem)
        file = f"{name}-{date}-rows.csv"
        texts[f"{name}-{date}-{index}-rows.csv" if file in texts else file] = audit_csv(campaign, finding.section)
    folder = Path(folder)
    folder.mkdir(parents=True, exist_ok=True)
    return write_whole({folder / file: text for file, text in texts.items()})


def write_handover(handover: Handover, folder: Path) -> tuple[Path, ...]:
    """Write the certificate as a page and as PDF, and the record of the verdict.

    Parameters
    ----------
    handover : Handover
        What was found.
    folder : Path
        Where to write; made when it is missing.

    Returns
    -------
    tuple of Path
        Page, PDF and record.

    Raises
    ------
    OSError
        When the folder cannot be written; no new file is left behind.
    """
    from fieldfit.report.certificate import acceptance_record, certificate
    from fieldfit.report.sheet import sheet_html
    from fieldfit.report.sheet_pdf import sheet_pdf

    name, sheet = safe_name(handover.finding.section.name), certificate(handover)
    full = record(handover.finding)
    full["decisions"] = (full["decisions"] or {}) | {
        "acceptance": {
            "outcome": handover.outcome,
            "reaches": [acceptance_record(verdict.acceptance) for verdict in handover.verdicts],
        }
    }
    folder = Path(folder)
    folder.mkdir(parents=True, exist_ok=True)
    return write_whole(
        {
            folder / f"{name}-certificate.html": sheet_html(sheet),
            folder / f"{name}-certificate.pdf": sheet_pdf(sheet),
            folder / f"{name}-certificate.json": as_json(full),
        }
    )


def write_trend(finding: Finding, folder: Path) -> tuple[Path, ...]:
    """Write the page of the ageing and the record into a folder, which is made when it is missing.

    Parameters
    ----------
    finding : Finding
        What was found, with its ageing.
    folder : Path
        Where to write.

    Returns
    -------
    tuple of Path
        The files: page first, then record.

    Raises
    ------
    OSError
        When the folder cannot be written; no new file is left behind.
    """
    from fieldfit.report.trend_page import trend_page

    name = safe_name(finding.section.name)
    texts = {f"{name}-trend.html": trend_page(finding), f"{name}-trend.json": record_json(finding)}
    folder = Path(folder)
    folder.mkdir(parents=True, exist_ok=True)
    return write_whole({folder / file: text for file, text in texts.items()})


def write_plan(plan: Plan, folder: Path) -> tuple[Path, ...]:
    """Write a plan: its report, the sheet to take along as page and PDF, the table to fill in, and the record.

    Parameters
    ----------
    plan : Plan
        What was planned.
    folder : Path
        Where to write; made when it is missing.

    Returns
    -------
    tuple of Path
        Report, sheet, sheet as PDF, table and record.

    Raises
    ------
    OSError
        When the folder cannot be written; no new file is left behind.
    """
    from fieldfit.report.plan_sheets import crew_sheet, crew_table, plan_record, plan_sheet
    from fieldfit.report.sheet import sheet_html
    from fieldfit.report.sheet_pdf import sheet_pdf

    name, sheet = safe_name(plan.section.name), crew_sheet(plan)
    folder = Path(folder)
    folder.mkdir(parents=True, exist_ok=True)
    return write_whole(
        {
            folder / f"{name}-plan.html": sheet_html(plan_sheet(plan)),
            folder / f"{name}-test-sheet.html": sheet_html(sheet),
            folder / f"{name}-test-sheet.pdf": sheet_pdf(sheet),
            folder / f"{name}-readings.csv": crew_table(plan),
            folder / f"{name}-plan.json": as_json(plan_record(plan)),
        }
    )


def write_json(finding: Finding, path: Path) -> Path:
    """Write the record alone, whole or not at all.

    Parameters
    ----------
    finding : Finding
        What was found.
    path : Path
        Where to write; its folder must exist.

    Returns
    -------
    Path
        The file.

    Raises
    ------
    OSError
        When the file cannot be written.
    """
    return write_whole({Path(path): record_json(finding)})[0]


def write_whole(contents: Mapping[Path, str | bytes]) -> tuple[Path, ...]:
    """Write texts and bytes beside their places, then move them in: all of them whole, or none.

    A pipe or a device takes its text as it comes.

    Parameters
    ----------
    contents : mapping of Path to str or bytes
        What to write where; the folders must exist.

    Returns
    -------
    tuple of Path
        The files.

    Raises
    ------
    OSError
        When one of them cannot be written; no new file is left behind.
    """
    waiting: dict[Path, Path] = {}
    raw = {path: text.encode("utf-8") if isinstance(text, str) else text for path, text in contents.items()}
    try:
        for path, data in raw.items():
            if path.exists() and not path.is_file():
                path.write_bytes(data)
                continue
            waiting[path] = _beside(path)
            waiting[path].write_bytes(data)
        for path, temporary in waiting.items():
            os.replace(temporary, path)
    finally:
        for temporary in waiting.values():
            with contextlib.suppress(OSError):
                temporary.unlink(missing_ok=True)
    return tuple(contents)


def _beside(path: Path) -> Path:
    """Make an empty file in the same folder, readable as any other that the user writes."""
    handle, name = tempfile.mkstemp(prefix=f".{path.stem}-", suffix=".part", dir=path.parent)
    os.close(handle)
    mask = os.umask(0)
    os.umask(mask)
    Path(name).chmod(0o666 & ~mask)
    return Path(name)
