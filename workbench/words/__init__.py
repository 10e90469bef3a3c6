"""Words: the sentences of documents, kept as templates in a folder for each language."""

import re
from functools import cache
from types import SimpleNamespace

from jinja2 import Environment, PackageLoader, StrictUndefined
from jinja2.ext import Extension
from jinja2.lexer import Token
from jinja2.runtime import Macro

from workbench.numbers import listed


class OneLine(Extension):
    """Lets a sentence of a template run over several lines: its line breaks and indents count as one space.

    Only the text of the template is touched; no-break spaces and whatever a user wrote stay as they are.
    """

    def filter_stream(self, stream):
        """The tokens of a template, those of plain text with every run of white space as one space."""
        for token in stream:
            plain = token.type == "data"
            yield Token(token.lineno, "data", re.sub(r"[ \t\r\n]+", " ", token.value)) if plain else token


@cache
def environment():
    """The Jinja environment of the plain text templates; a value that is missing is an error."""
    made = Environment(
        loader=PackageLoader("workbench", "words/en"),
        extensions=[OneLine],
        autoescape=False,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    made.filters["listed"] = listed
    return made


def phrases(name):
    """The macros of a template as functions that return plain text on one line."""
    module = environment().get_template(f"{name}.jinja").module
    macros = {key: value for key, value in vars(module).items() if isinstance(value, Macro)}
    return SimpleNamespace(**{key: on_one_line(macro) for key, macro in macros.items()})


def on_one_line(macro):
    """A macro as a function whose text neither begins nor ends with a space of the template."""

    def phrase(*values, **named):
        # Without an argument, strip would also take no-break spaces.
        return str(macro(*values, **named)).strip(" ")

    return phrase
