"""Reports as files: all of them whole, or none."""

from __future__ import annotations

import contextlib
import os
import re
import tempfile
import unicodedata
from collections.abc import Mapping
from pathlib import Path

from fieldfit.report.audit import audit_csv
from fieldfit.report.finding import Finding
from fieldfit.report.page import page
from fieldfit.report.record import record_json

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
    return _write({folder / file: text for file, text in texts.items()})


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
    return _write({Path(path): record_json(finding)})[0]


def _write(texts: Mapping[Path, str]) -> tuple[Path, ...]:
    """Write all texts beside their places, then move them in; a pipe or a device takes its text as it comes."""
    waiting: dict[Path, Path] = {}
    try:
        for path, text in texts.items():
            if path.exists() and not path.is_file():
                path.write_text(text, encoding="utf-8", newline="\n")
                continue
            waiting[path] = _beside(path)
            waiting[path].write_text(text, encoding="utf-8", newline="\n")
        for path, temporary in waiting.items():
            os.replace(temporary, path)
    finally:
        for temporary in waiting.values():
            with contextlib.suppress(OSError):
                temporary.unlink(missing_ok=True)
    return tuple(texts)


def _beside(path: Path) -> Path:
    """Make an empty file in the same folder, readable as any other that the user writes."""
    handle, name = tempfile.mkstemp(prefix=f".{path.stem}-", suffix=".part", dir=path.parent)
    os.close(handle)
    mask = os.umask(0)
    os.umask(mask)
    Path(name).chmod(0o666 & ~mask)
    return Path(name)
