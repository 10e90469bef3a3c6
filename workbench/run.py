"""Run: a study from start to table."""

import json
import os
from dataclasses import dataclass
from pathlib import Path

from workbench import pool
from workbench.errors import WorkbenchError, WorkError
from workbench.grid import conditions
from workbench.ledger import FORMAT, Ledger
from workbench.outcome import libraries, manifest, outcome_of
from workbench.plan import plan_of, tally_count
from workbench.study import parse

LEDGER = "ledger.sqlite"


@dataclass(frozen=True)
class Progress:
    """How far a study's work has come, in tallies."""

    done: int
    total: int

    @property
    def finished(self):
        """Whether nothing is left to do."""
        return self.done >= self.total


def default_directory(study):
    """Where a study's results go if nothing else is said."""
    return Path("results") / study.stem


def run(study, directory, workers, watch=lambda progress: None):
    """Simulate what is missing, write the tables, and return the Outcome; `watch` is told each Progress."""
    found = conditions(study)
    plan = plan_of(study, found)
    directory = Path(directory)
    make_directory(directory)
    with Ledger.writing(directory / LEDGER, header(study)) as ledger:
        ledger.note({"experiment": study.text, "file": study.file})
        simulate(plan, ledger, workers, watch)
        outcome = outcome_of(study, found, directory, ledger)
    write(outcome)
    return outcome


def make_directory(directory):
    """Make the result directory; raises WorkbenchError where that cannot be done."""
    try:
        directory.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise WorkbenchError(f"{directory}: cannot be made a result directory ({error.strerror})") from None
    if not os.access(directory, os.W_OK):
        raise WorkbenchError(f"{directory}: this directory cannot be written to; choose another with --out")


def header(study):
    """What all work in one ledger must have in common."""
    return {"format": FORMAT, "seed": study.simulation.seed} | libraries()


def simulate(plan, ledger, workers, watch):
    """Do the work that a ledger lacks, storing every bundle as it arrives."""
    tasks = plan.tasks(ledger)
    done = plan.tallies - sum(tally_count(task) for task in tasks)
    watch(Progress(done, plan.tallies))
    rows_arriving = pool.rows_of(tasks, min(workers, max(1, sum(len(task.chunks) for task in tasks))))
    try:
        for bundle, rows in rows_arriving:
            ledger.put(rows)
            done += tally_count(bundle)
            watch(Progress(done, plan.tallies))
    finally:
        rows_arriving.close()


def stored_study(directory):
    """The Study that was run in a result directory; raises WorkbenchError where there is none."""
    with Ledger.reading(Path(directory) / LEDGER) as ledger:
        stored = ledger.header()
    if "experiment" not in stored:
        raise WorkbenchError(f"{directory}: no experiment is stored here; run one with --out {directory}")
    return parse(stored["experiment"], stored["file"])


def progress(directory):
    """(Study, Progress) of a result directory, from its ledger."""
    study = stored_study(directory)
    plan = plan_of(study, conditions(study))
    with Ledger.reading(Path(directory) / LEDGER) as ledger:
        left = sum(tally_count(task) for task in plan.tasks(ledger))
    return study, Progress(plan.tallies - left, plan.tallies)


def read_outcome(directory):
    """The Outcome of a finished result directory; raises UnfinishedError where work is missing."""
    study, state = progress(directory)
    if not state.finished:
        raise UnfinishedError(study, state)
    with Ledger.reading(Path(directory) / LEDGER) as ledger:
        return outcome_of(study, conditions(study), directory, ledger)


class UnfinishedError(WorkbenchError):
    """A result that lacks some of its work."""

    status = 3

    def __init__(self, study, state):
        self.study, self.state = study, state
        super().__init__(
            f"No verdict yet: {state.done:,} of {state.total:,} tallies are done; `workbench run {study.file}` goes on "
            "from there."
        )


def write(outcome):
    """Write the tables, the manifest and the experiment of an Outcome, each file whole or not at all."""
    tables, directory = outcome.tables, outcome.directory
    written = {
        "table.csv": tables.rates,
        "differences.csv": tables.differences,
        "branches.csv": tables.branches,
        "calibration.csv": outcome.calibration,
    }
    for name, table in written.items():
        if len(table) or name in ("table.csv", "differences.csv"):
            write_text(directory / name, table.to_csv(index=False, lineterminator="\n"))
    write_text(directory / "experiment.toml", outcome.study.text)
    write_text(
        directory / "manifest.json", json.dumps(manifest(outcome), indent=2, ensure_ascii=False) + "\n"
    )


def write_text(path, text):
    """Write a text file so that a reader finds the old one or the new one, never half of it."""
    write_bytes(path, text.encode("utf-8"))


def write_bytes(path, content):
    """Write a file so that a reader finds the old one or the new one, never half of it."""
    part = path.with_name(f".{path.name}.{os.getpid()}.part")
    try:
        part.write_bytes(content)
        os.replace(part, path)
    except OSError as error:
        part.unlink(missing_ok=True)
        raise WorkError(f"{path}: cannot be written ({error.strerror})") from None
