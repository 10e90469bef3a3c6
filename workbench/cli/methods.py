"""workbench methods: the methods, what each tests and assumes, and its source."""

import click

from workbench.cli import options, terminal
from workbench.methods import METHODS


@click.command("methods")
@options.as_json
def command(as_json):
    """List the methods, what each tests and assumes, and its source.

    Reads and writes nothing. Example: workbench methods
    """
    found = [described(METHODS[name]) for name in METHODS.names()]
    if as_json:
        return options.print_json(found)
    console = terminal.console()
    for one in found:
        console.print(one["name"], style="bold")
        for word, key in (("", "title"), ("tests equal ", "hypothesis"), ("assumes ", "assumes")):
            console.print(f"  {word}{one[key]}")
        console.print(f"  undefined when {one['undefined_when']}")
        console.print(f"  {one['cite']}\n")


def described(method):
    """A method as plain data."""
    return {
        "name": method.name,
        "title": method.title(),
        "hypothesis": method.hypothesis,
        "assumes": method.assumes,
        "undefined_when": method.undefined_when,
        "cite": method.cite,
    }
