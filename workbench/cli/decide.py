"""workbench decide: the criteria applied to a result."""

import click

from workbench.cli import options
from workbench.cli.summary import print_outcome
from workbench.decide import Status
from workbench.run import UnfinishedError, read_outcome

OPEN = 3
"""Exit status where the question stays open."""


def exit_status(decision):
    """0 where something was chosen or a tie was found, else OPEN."""
    return 0 if decision.status in (Status.CHOSEN, Status.TIE) else OPEN


@click.command("decide")
@options.directory
@options.as_json
def command(directory, as_json):
    """Apply the criteria to the result in DIR and print the decision.

    Reads the ledger; ends with 0 (chosen or tie) or 3 (the question stays open). Example: workbench decide
    results/lap_shear
    """
    try:
        outcome = read_outcome(directory)
    except UnfinishedError as unfinished:
        if not as_json:
            raise
        options.print_json(nothing_yet(unfinished))
        return OPEN
    if as_json:
        options.print_json(outcome.decision.as_data())
    else:
        print_outcome(outcome)
    return exit_status(outcome.decision)


def nothing_yet(unfinished):
    """The decision of a result that lacks some of its work, as plain data."""
    open_decision = {"status": Status.UNDECIDED.value, "chosen": [], "eligible": [], "excluded": {}}
    return open_decision | {"plan": unfinished.study.key, "digest": None, "sentences": [str(unfinished)]}
