"""workbench report: the documents of a result, written again."""

import click

from workbench.cli import options
from workbench.cli.run import disagreement
from workbench.documents import write_documents
from workbench.errors import WorkError
from workbench.run import read_outcome


@click.command("report")
@options.directory
@options.quiet
def command(directory, quiet):
    """Write the tables, report.html and figures/ of the finished result in DIR again, from its ledger.

    report.html is one file that opens without a network. Example: workbench report results/lap_shear
    """
    outcome = read_outcome(directory)
    write_documents(outcome)
    if not quiet:
        click.echo(f"{outcome.directory / 'report.html'}")
    if outcome.agreement.disagreeing:
        raise WorkError(disagreement(outcome.agreement))
