"""A report into a folder, as HTML and as PDF."""

from pathlib import Path

from lamwright.geometry.whole_file import whole_file, write_text
from lamwright.postprocess.report import Report
from lamwright.postprocess.report_html import report_html
from lamwright.postprocess.report_pdf import report_pdf

HTML_FILE, PDF_FILE = "report.html", "report.pdf"


def write_report(report: Report, folder: Path) -> None:
    """Write `report.html` and `report.pdf` beside the pictures that the report names."""
    write_text(folder / HTML_FILE, report_html(report, folder))
    with whole_file(folder / PDF_FILE) as path:
        path.write_bytes(report_pdf(report, folder))
