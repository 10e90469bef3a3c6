"""workbench run: simulate what is missing, write the tables, print the decision."""

import click

from workbench.chunk import REPLICATIONS
from workbench.cli import options
from workbench.cli.decide import exit_status
from workbench.cli.progress import Reporter, silent
from workbench.cli.summary import print_outcome
from workbench.cores import default_workers
from workbench.documents import write_documents
from workbench.errors import WorkError
from workbench.run import default_directory, run
from workbench.study import read, with_overrides


@click.command("run")
@options.experiment
@click.option(
    "--out", type=click.Path(), metavar="DIR", help="Where results go (default: results/<file stem>)."
)
@click.option(
    "--workers", type=click.IntRange(1, 1024), metavar="N", help="Processes (default: the cores there are)."
)
@options.replications
@options.seed
@options.as_json
@options.quiet
def command(file, out, workers, replications, seed, as_json, quiet):
    """Simulate what FILE asks for and is missing, write tables and report, print the decision.

    Writes ledger.sqlite, the tables (CSV), report.html, figures/, manifest.json and experiment.toml. A run that was
    cut off is taken up where it stopped. Ends with 0 (chosen or tie) or 3 (the question stays open).

    Example: workbench run experiments/lap_shear.toml
    """
    study = with_overrides(read(file), seed, replications)
    watch = silent if quiet else Reporter(REPLICATIONS)
    outcome = run(study, out or default_directory(study), workers or default_workers(), watch)
    write_documents(outcome)
    if as_json:
        options.print_json(outcome.decision.as_data())
    else:
        print_outcome(outcome)
    if outcome.agreement.disagreeing:
        raise WorkError(disagreement(outcome.agreement))
    return exit_status(outcome.decision)


def disagreement(agreement):
    """The sentence that names the first rows in which simulation and theory disagree."""
    rows = [
        f"condition {row['condition']} {row['method']} at {row['alpha']:g}: {row['rate']:.6f}, "
        f"theory {row['exact']:.6f}"
        for row in agreement.disagreeing[:5]
    ]
    return "Simulation and theory disagree, so this table must not be used: " + "; ".join(rows)
