"""A screening as files: all of them whole, or none."""

from __future__ import annotations

from pathlib import Path

from fieldfit.report.audit import audit_csv
from fieldfit.report.files import safe_name, write_whole
from fieldfit.report.screening.finding import ScreenFinding
from fieldfit.report.screening.page import screen_page
from fieldfit.report.screening.record import screen_record_json


def write_screening(finding: ScreenFinding, folder: Path) -> tuple[Path, ...]:
    """Write page, record and the rows of each log into a folder, which is made when it is missing.

    Parameters
    ----------
    finding : ScreenFinding
        What screening found.
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
    name = f"{safe_name(finding.section.name)}-screening"
    texts = {f"{name}.html": screen_page(finding), f"{name}.json": screen_record_json(finding)}
    for index, campaign in enumerate(finding.campaigns, start=1):
        date = campaign.date.isoformat() if campaign.date else safe_name(Path(campaign.log.file).stem)
        file = f"{name}-{date}-rows.csv"
        texts[f"{name}-{date}-{index}-rows.csv" if file in texts else file] = audit_csv(campaign, finding.section)
    folder = Path(folder)
    folder.mkdir(parents=True, exist_ok=True)
    return write_whole({folder / file: text for file, text in texts.items()})


def write_screen_json(finding: ScreenFinding, path: Path) -> Path:
    """Write the record alone, whole or not at all."""
    return write_whole({Path(path): screen_record_json(finding)})[0]
