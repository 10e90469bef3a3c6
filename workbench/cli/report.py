"""workbench report: the documents of a result, written again."""

import click

from workbench.cli import options
from workbench.cli.run import disagreement
from workbench.documents import write_documents
from workbench.errors import WorkError
from workbench.run import read_outcome, write


@click.command("report")
@options.directory
@options.as_json
@options.quiet
def command(directory, as_json, quiet):
    """Write the tables, report.html and figures/ of the finished result in DIR again, from its ledger.

    report.html is one file that opens without a network. Example: workbench report results/lap_shear
    """
    outcome = read_outcome(directory)
    write(outcome)
    report, *figures = map(str, write_documents(outcome))
    if as_json:
        told = {"report": report, "figures": figures, "plan": outcome.study.key}
        options.print_json(told | {"digest": outcome.tables.digest})
    elif not quiet:
        click.echo(report)
    if outcome.agreement.disagreeing:
        raise WorkError(disagreement(outcome.agreement))
