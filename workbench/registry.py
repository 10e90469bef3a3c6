"""Part and Shelf: how a class in a file becomes a word in an experiment file."""

import pkgutil
from abc import ABC
from dataclasses import MISSING, fields
from functools import cached_property
from importlib import import_module
from types import ModuleType
from typing import ClassVar

from pydantic import ConfigDict, ValidationError
from pydantic.dataclasses import dataclass

from workbench.errors import suggestion
from workbench.keys import content_key

STRICT = ConfigDict(strict=True, extra="forbid", allow_inf_nan=False, defer_build=True)

record = dataclass(frozen=True, kw_only=True, config=STRICT)
"""Decorator: the annotated fields of a class become its settings, checked strictly when one is made."""


class Part(ABC):
    """A piece with settings that an experiment file can name."""

    name: ClassVar[str]
    cite: ClassVar[str]
    version: ClassVar[int] = 1
    draws: ClassVar[bool] = False
    """Whether the part needs a random stream of its own."""

    @classmethod
    def title(cls):
        """The first sentence of the part's docstring, without its full stop."""
        return cls.__doc__.strip().split("\n")[0].rstrip(".")

    def settings(self):
        """The settings that differ from their defaults, by name."""
        return {
            field.name: getattr(self, field.name)
            for field in fields(self)
            if field.default is MISSING or getattr(self, field.name) != field.default
        }

    def content(self):
        """What makes this part give the numbers it gives: name, version, settings."""
        return {"part": self.name, "version": self.version, "settings": self.settings()}

    @cached_property
    def _key(self):
        return content_key(self.content())

    def key(self):
        """The part's content key."""
        return self._key


class SettingsError(ValueError):
    """Settings a part cannot be made of: `problems` is a list of (path within the settings, sentence)."""

    def __init__(self, problems):
        self.problems = problems
        super().__init__("; ".join(text for _, text in problems))


class Shelf:
    """Parts of one kind by name; `fill` finds every file of a package by itself."""

    def __init__(self, kind, ready=False):
        """Begin an empty shelf; from a ready one the package offers parts with default settings, else classes."""
        self.kind, self.ready = kind, ready
        self._parts = {}

    def add(self, part):
        """Class decorator: make the class a strict frozen record and put it on the shelf."""
        part = record(part)
        self._parts[part.name] = part
        return part

    def fill(self, package):
        """Import every module of the package, so that each can add its part; the package then offers them by name."""
        room = import_module(package)
        room.__class__, room.SHELF = ShelfModule, self
        for module in pkgutil.iter_modules(room.__path__):
            import_module(f"{package}.{module.name}")

    def names(self):
        """The words that can be used, in alphabetical order."""
        return sorted(self._parts)

    def __contains__(self, name):
        return name in self._parts

    def __repr__(self):
        return f"<shelf of {self.kind}s>"

    def __getitem__(self, name):
        if name not in self._parts:
            raise KeyError(f"no {self.kind} is called '{name}'; {suggestion(name, self.names())}")
        return self._parts[name]

    def make(self, name, settings=None):
        """A part with the given settings; raises SettingsError with every problem in them."""
        try:
            return self[name](**(settings or {}))
        except ValidationError as error:
            raise SettingsError(problems_of(error)) from None


class ShelfModule(ModuleType):
    """The package of a shelf, from which a notebook takes parts by name: workbench.methods["welch_f"]."""

    def __getitem__(self, name):
        return self.SHELF.make(name) if self.SHELF.ready else self.SHELF[name]

    def __iter__(self):
        return iter(self.SHELF.names())

    def __len__(self):
        return len(self.SHELF.names())

    def __contains__(self, name):
        return name in self.SHELF


def problems_of(error):
    """[(path, sentence)] of a pydantic ValidationError, in words of an experiment file."""
    return [(problem["loc"], sentence(problem)) for problem in error.errors(include_url=False)]


WANTED = {
    "int_type": "a whole number wanted",
    "float_type": "a number wanted",
    "string_type": "a text wanted",
    "bool_type": "true or false wanted",
    "list_type": "a list wanted",
    "tuple_type": "a list wanted",
    "dict_type": "a table wanted",
    "finite_number": "a finite number wanted",
    "greater_than": "a number above {gt:g} wanted",
    "greater_than_equal": "a number of {ge:g} or more wanted",
    "less_than": "a number below {lt:g} wanted",
    "less_than_equal": "a number of {le:g} or less wanted",
    "literal_error": "one of {expected} wanted",
}


def sentence(problem):
    """One pydantic problem as a sentence that names the value and what is wanted."""
    kind, value = problem["type"], problem["input"]
    if kind in ("missing", "missing_keyword_only_argument"):
        return "this setting is missing"
    if kind in ("extra_forbidden", "unexpected_keyword_argument"):
        return "unknown setting"
    wanted = WANTED.get(kind)
    if wanted is None:
        text = problem["msg"].removeprefix("Value error, ")
        return text[:1].lower() + text[1:]
    return f"{wanted.format(**problem.get('ctx', {}))}; got {shown(value)}"


def shown(value):
    """A value as it would stand in the file, cut where it is long."""
    if isinstance(value, bool):
        text = "true" if value else "false"
    elif isinstance(value, str):
        text = f"'{value}'"
    elif isinstance(value, dict):
        text = "a table"
    else:
        text = str(value)
    return text if len(text) <= 60 else text[:57] + "…"
