"""Options that several commands share."""

import json

import click

experiment = click.argument("file", type=click.Path(), metavar="FILE")
directory = click.argument("directory", type=click.Path(), metavar="DIR")
as_json = click.option("--json", "as_json", is_flag=True, help="Print one JSON document and nothing else.")
quiet = click.option("--quiet", is_flag=True, help="No progress and no messages.")
seed = click.option(
    "--seed", type=click.IntRange(0, 2**63 - 1), metavar="S", help="Another seed than the file's."
)
replications = click.option(
    "--replications",
    type=click.IntRange(1, 10**9),
    metavar="R",
    help="Another number of replications per condition than the file's.",
)


def print_json(data):
    """Print plain data as one JSON document."""
    click.echo(json.dumps(data, indent=2, ensure_ascii=False, allow_nan=False))
