"""Which files make one campaign: a log of its own, or the files of several loggers."""

from __future__ import annotations

import itertools
from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path

from fieldfit.errors import InputError
from fieldfit.field.log import AUDIT_HEADINGS, Log
from fieldfit.field.log_file import log_text, read_log
from fieldfit.field.log_headings import find_any_headings, wanted_columns
from fieldfit.field.section import Campaign, Section

OTHER_LOGS = (".tsv", ".txt", ".dat", ".xlsx", ".xlsm")
"""Endings of logs besides .csv."""


def logs_beside(section: Section) -> list[Path]:
    """Return the CSV files in a section's folder, but for the lists of rows that earlier assessments left there.

    Without any, files with other endings that loggers and spreadsheets use are returned.
    """
    files = sorted(path for path in section.path.parent.iterdir() if path.is_file())
    found = [path for path in files if path.suffix.casefold() == ".csv" and not _is_audit(path)]
    return found or [path for path in files if path.suffix.casefold() in OTHER_LOGS and not path.name.startswith("~$")]


def _is_audit(path: Path) -> bool:
    """Return whether a file is a list of rows written by this program."""
    try:
        with path.open("rb") as file:
            return file.readline(10_000).rstrip().endswith(",".join(AUDIT_HEADINGS).encode())
    except OSError:
        # Whoever reads the file says what is wrong with it.
        return False


def gather_parts(section: Section, given: Sequence[str | Path]) -> tuple[Section, tuple[Path, ...]]:
    """Find out which files are loggers' parts of one campaign, and note that with the section.

    Files that hold all columns are campaigns of their own; files that each hold only some are one campaign. Without
    given files the folder's are looked at, where the section file names no campaign.

    Parameters
    ----------
    section : Section
        Names the columns.
    given : sequence of path
        Logs as given; may be none.

    Returns
    -------
    section : Section
        With a campaign for the parts, where there are any.
    logs : tuple of Path
        One log per campaign, the first file of several; none where the section file or the folder decides.
    """
    paths = [Path(path) for path in given]
    if not paths and not section.campaigns:
        paths = logs_beside(section)
    if len(paths) < 2:
        return section, tuple(Path(path) for path in given)
    parts = [path for path in paths if _holds_part(path, section)]
    whole = [path for path in paths if path not in parts]
    if len(parts) < 2 or (whole and not given):
        return section, tuple(Path(path) for path in given)
    joined = Campaign(date=None, log=parts[0], parts=tuple(parts[1:]))
    return replace(section, campaigns=(*section.campaigns, joined)), (parts[0], *whole)


def _holds_part(path: Path, section: Section) -> bool:
    """Return whether a file's headings name some of the columns and not all; a look at its beginning tells."""
    wanted = wanted_columns(section)
    try:
        source = log_text(path, section, find_any_headings, [])
        with source.open() as file:
            lines = list(itertools.islice(file, 200))
        return len(find_any_headings(lines, wanted, path.name).wanted) < len(wanted)
    except (InputError, UnicodeError):
        # Whoever reads the whole file says what is wrong with it.
        return False


def read_campaign_log(path: Path, section: Section) -> Log:
    """Read the log of one campaign: a single file, or the files of several loggers as one.

    Parameters
    ----------
    path : Path
        The file, or the first of several that the section's campaign names.
    section : Section
        Names the columns, and the campaign's parts.

    Returns
    -------
    Log

    Raises
    ------
    InputError
        When a file cannot be used.
    """
    parts = next((one.parts for one in section.campaigns if one.parts and one.log.name == path.name), ())
    if parts or section.loggers:
        from fieldfit.field.joined_log import read_joined_log

        return read_joined_log((path, *parts), section)
    return read_log(path, section)
