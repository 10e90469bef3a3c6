"""workbench status: how far a result is."""

import click

from workbench.cli import options
from workbench.run import progress


@click.command("status")
@options.directory
@options.as_json
def command(directory, as_json):
    """Show how far the result in DIR is, while it runs or after; writes nothing.

    Example: workbench status results/lap_shear
    """
    study, state = progress(directory)
    share = state.done / state.total
    if as_json:
        told = {"experiment": study.file, "plan": study.key, "done": state.done, "total": state.total}
        return options.print_json(told | {"share": share, "finished": state.finished})
    click.echo(f"{study.title}: {state.done:,} of {state.total:,} tallies done ({100 * share:.0f} %).")
    if not state.finished:
        click.echo(f"`workbench run {study.file}` goes on from there.")
