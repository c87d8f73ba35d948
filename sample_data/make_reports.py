"""Write ``reports/`` from the sample data: each section's page, record and rows, and the picture in README.

A section with several campaigns gets the page of its ageing instead, one with a contract its certificate too, and one
with a plan the plan and the sheet to take along. Run it with ``python sample_data/make_reports.py``.
"""

from pathlib import Path

from fieldfit import assess
from fieldfit.decisions.planning import plan_test
from fieldfit.handover import accept
from fieldfit.report.figures import curves, head_loss
from fieldfit.report.files import write_handover, write_plan, write_reports, write_trend
from fieldfit.trend import trend

HERE = Path(__file__).resolve().parent
REPORTS = HERE.parent / "reports"
PICTURED = "kiln_cooling"
PICTURE = "kiln-cooling-supply.png"
DOTS_PER_INCH = 180


def main(folder=REPORTS):
    """Write everything into a folder, and clear out what an earlier run left there."""
    written = set()
    for section in sorted(HERE.glob("*/section.toml")):
        written.update(write_section(section, folder))
    for stale in set(folder.iterdir()) - written:
        stale.unlink()


def write_section(section, folder):
    """Write all that one section is there to show."""
    finding = assess(section)
    several = len(finding.campaigns) > 1
    written = [*(write_trend(trend(section), folder) if several else write_reports(finding, folder))]
    if finding.section.contract is not None:
        written += write_handover(accept(section), folder)
    if finding.section.wishes is not None:
        written += write_plan(plan_test(finding.section), folder)
    if section.parent.name == PICTURED:
        written.append(draw(finding, folder / PICTURE))
    return written


def draw(finding, path):
    """Draw head loss against flow of a finding's first reach as a picture."""
    figure = head_loss(curves(finding.campaigns[0].reaches[0]))
    figure.savefig(path, dpi=DOTS_PER_INCH, metadata={"Software": None})
    return path


if __name__ == "__main__":
    main()
