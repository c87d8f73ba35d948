"""Write ``reports/`` from the sample data: each section's page, record and rows, and the picture in README.

Run it with ``python sample_data/make_reports.py``.
"""

from pathlib import Path

from fieldfit import assess
from fieldfit.report.figures import curves, head_loss
from fieldfit.report.files import write_reports

HERE = Path(__file__).resolve().parent
REPORTS = HERE.parent / "reports"
PICTURED = "kiln_cooling"
PICTURE = "kiln-cooling-supply.png"
DOTS_PER_INCH = 180


def main(folder=REPORTS):
    """Write everything into a folder, and clear out what an earlier run left there."""
    written = set()
    for section in sorted(HERE.glob("*/section.toml")):
        finding = assess(section)
        written.update(write_reports(finding, folder))
        if section.parent.name == PICTURED:
            written.add(draw(finding, folder / PICTURE))
    for stale in set(folder.iterdir()) - written:
        stale.unlink()


def draw(finding, path):
    """Draw head loss against flow of a finding's first reach as a picture."""
    figure = head_loss(curves(finding.campaigns[0].reaches[0]))
    figure.savefig(path, dpi=DOTS_PER_INCH, metadata={"Software": None})
    return path


if __name__ == "__main__":
    main()
