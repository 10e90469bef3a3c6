"""What results look like in a terminal."""

import sys

from rich import box
from rich.console import Console
from rich.table import Table
from rich.text import Text

PIPED_WIDTH = 140
"""Columns of output that goes into a file or another program."""

NARROW = 120
"""Below so many columns a rate, its interval and its place stand under one another."""


def console():
    """The console of standard output; plain and of fixed width where that is no terminal."""
    terminal = sys.stdout.isatty()
    return Console(
        file=sys.stdout,
        width=None if terminal else PIPED_WIDTH,
        markup=False,
        highlight=False,
        emoji=False,
        soft_wrap=False,
    )


def table(columns):
    """An empty table: columns are (heading, 'left' or 'right'); a heading that ends in … marks one that may wrap."""
    made = Table(box=box.SIMPLE_HEAD, show_edge=False, pad_edge=False, header_style="bold")
    for heading, side in columns:
        made.add_column(Text(heading.removesuffix("…")), justify=side, no_wrap=not heading.endswith("…"))
    return made


def add(made, cells):
    """Add a row of plain texts."""
    made.add_row(*(Text(str(cell)) for cell in cells))
