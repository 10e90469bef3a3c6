"""workbench new: a commented experiment file to begin with."""

from importlib.resources import files
from pathlib import Path

import click

from workbench.cli import options
from workbench.errors import WorkbenchError


@click.command("new")
@click.argument("name", metavar="NAME")
@options.as_json
def command(name, as_json):
    """Write a commented experiment file NAME.toml; a file that is there is never overwritten.

    Example: workbench new experiments/my_study
    """
    path = Path(name if name.endswith(".toml") else f"{name}.toml")
    text = files("workbench.cli").joinpath("beginning.toml").read_text(encoding="utf-8")
    try:
        with path.open("x", encoding="utf-8", newline="\n") as file:
            file.write(text)
    except FileExistsError:
        raise WorkbenchError(
            f"{path}: this file is there already and is not overwritten; choose another name"
        ) from None
    except OSError as error:
        raise WorkbenchError(f"{path}: cannot be written ({error.strerror})") from None
    if as_json:
        return options.print_json({"experiment": str(path)})
    click.echo(f"{path} is written. Edit it, then: workbench check {path}")
