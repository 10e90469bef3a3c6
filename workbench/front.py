"""Study and Result as a notebook meets them."""

from html import escape
from pathlib import Path

import pandas as pd

from workbench import run as running
from workbench import study as files
from workbench.cores import default_workers
from workbench.documents import write_report
from workbench.errors import StudyError
from workbench.grid import conditions, holds_as_recorded, recorded_quantities
from workbench.population import QUANTITIES

__all__ = ["Result", "Study", "StudyError", "read"]


def read(path):
    """The Study in an experiment file; raises StudyError with every mistake listed."""
    return Study(files.read(path))


class Study:
    """An experiment file that was read: its conditions, and the way to run it."""

    def __init__(self, plan):
        self.plan = plan
        """The study as the program's stages hand it on."""

    @property
    def title(self):
        """The study's title."""
        return self.plan.title

    @property
    def conditions(self):
        """DataFrame: one row a condition, with what is true of it and the true quantities of each group."""
        return pd.DataFrame([condition_row(self.plan, condition) for condition in conditions(self.plan)])

    def run(self, workers=None, out=None, replications=None, seed=None, watch=lambda progress: None):
        """Simulate what is missing and return the Result; the same ledger and the same resume as the command.

        Raises WorkbenchError where the result directory cannot be used.
        """
        plan = files.with_overrides(self.plan, seed, replications)
        workers = workers or default_workers()
        return Result(running.run(plan, out or running.default_directory(plan), workers, watch))

    def _repr_html_(self):
        return f"<h3>{escape(self.title)}</h3>{self.conditions.to_html(index=False)}"


def condition_row(plan, condition):
    """One condition as a flat row: level names, truth, what holds as recorded, quantities of group 1, 2 …"""
    row = {"condition": condition.number} | condition.levels
    row |= {"truth": condition.truth, "holds": ", ".join(holds_as_recorded(condition))}
    for name, group in zip(plan.group_names, recorded_quantities(condition), strict=True):
        row |= {f"{quantity} of {name}": group[quantity] for quantity in ("size", *QUANTITIES)}
    return row


class Result:
    """What a study came to: its table, its paired differences, its decision."""

    def __init__(self, outcome):
        self.outcome = outcome
        """The result as the program's stages hand it on."""

    @classmethod
    def read(cls, directory):
        """The Result in a finished result directory; raises WorkbenchError where there is none."""
        return cls(running.read_outcome(directory))

    @property
    def directory(self):
        """Where the result's files are."""
        return Path(self.outcome.directory)

    @property
    def table(self):
        """DataFrame with the columns of table.csv."""
        return self.outcome.tables.rates.copy()

    @property
    def differences(self):
        """DataFrame with the columns of differences.csv."""
        return self.outcome.tables.differences.copy()

    @property
    def branches(self):
        """DataFrame with the columns of branches.csv."""
        return self.outcome.tables.branches.copy()

    @property
    def decision(self):
        """What was decided, and why, as data and as sentences."""
        return self.outcome.decision

    def report(self, path="report.html"):
        """Write the report, one HTML file that opens without a network; raises WorkError where it cannot be written."""
        write_report(self.outcome, Path(path))

    def _repr_html_(self):
        sentences = "".join(f"<p>{escape(sentence)}</p>" for sentence in self.decision.sentences)
        return f"<h3>{escape(self.outcome.study.title)}</h3>{sentences}{self.table.to_html(index=False)}"
