"""Documents: the report and its figures, written beside the tables."""

import re

from workbench.report.page import Report
from workbench.run import make_directory, write_bytes, write_text

FIGURE = re.compile(r"\d\d_\w+\.(svg|png)")
"""Names of the files in figures/ that are ours to replace."""


def write_documents(outcome):
    """Write report and figures of an Outcome, each file whole or not at all; gives their paths."""
    report = Report(outcome)
    write_text(outcome.directory / "report.html", report.html())
    folder = outcome.directory / "figures"
    make_directory(folder)
    figures = report.files()
    for name, content in figures.items():
        write_bytes(folder / name, content)
    for path in folder.iterdir():
        if FIGURE.fullmatch(path.name) and path.name not in figures:
            path.unlink()
    return [outcome.directory / "report.html", *(folder / name for name in figures)]


def write_report(outcome, path):
    """Write the report of an Outcome to a file of one's own choice."""
    write_text(path, Report(outcome).html())
