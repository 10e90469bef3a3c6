"""The plain records that stages hand on."""

from dataclasses import dataclass, field
from functools import cached_property, lru_cache
from typing import NamedTuple

import numpy as np

from workbench.keys import content_key
from workbench.texts import isolated


@dataclass(frozen=True)
class Setting:
    """A condition without its difference: everything that decides how the common draws arise."""

    shapes: tuple
    estimand: object
    scale: str
    centre: float
    sizes: tuple
    spreads: tuple
    disturbances: tuple

    @cached_property
    def key(self):
        """Content key of the setting; names that a file gives to levels are no part of it."""
        return content_key(
            {
                "shapes": [shape.content() for shape in self.shapes],
                "estimand": self.estimand.content(),
                "scale": self.scale,
                "centre": self.centre,
                "sizes": list(self.sizes),
                "spreads": list(self.spreads),
                "disturbances": [part.content() for part in self.disturbances],
            }
        )

    @property
    def groups(self):
        """k, the number of groups."""
        return len(self.sizes)

    @property
    def total(self):
        """N, the number of values in a dataset as planned."""
        return sum(self.sizes)


@dataclass(frozen=True)
class Condition:
    """One row of the table: a setting and a difference, with the level names that led to them."""

    number: int
    levels: dict = field(hash=False)
    setting: Setting
    difference: tuple
    truth: str

    @property
    def is_null(self):
        """Whether the compared quantities are equal."""
        return self.truth == "null"


@dataclass(frozen=True)
class Judge:
    """A method or route under the name it has in a file."""

    name: str
    method: object

    @property
    def label(self):
        """What sentences call it: "use the …"; settings other than the usual ones are told."""
        label = getattr(self.method, "label", None)
        if label is None:
            return f"rule {isolated(self.name)}"
        settings = ", ".join(f"{name} {value}" for name, value in self.method.settings().items())
        return f"{label} ({settings})" if settings else label

    @property
    def short(self):
        """What figures call it where space is short: its name in the file where it has settings of its own."""
        usual = hasattr(self.method, "short") and not self.method.settings()
        return self.method.short if usual else self.name

    @property
    def hypotheses(self):
        """What the method tests: one hypothesis, or those of all ends of a route."""
        ends = getattr(self.method, "ends", None)
        return {method.hypothesis for _, method in ends()} if ends else {self.method.hypothesis}


@dataclass(frozen=True)
class Want:
    """What one difference of a chunk still lacks: the methods to be judged."""

    difference: tuple
    methods: tuple


@dataclass(frozen=True)
class Task:
    """A unit of work: chunks of one setting, with what is wanted of each."""

    seed: int
    setting: Setting
    levels: tuple
    chunks: tuple
    wants: tuple


class Tally(NamedTuple):
    """What one method did under one difference in one chunk of R replications."""

    setting: str
    chunk: int
    difference: str
    method: str
    rejected: dict
    """Level to R bits, eight to a byte, first replication in the highest bit."""
    undefined: bytes
    """R bits: no p-value."""
    histogram: np.ndarray
    """How many p-values fall into each bin of histogram.EDGES."""
    ends: bytes = b""
    """Of a route: R bytes, the number of the end taken; 128 is added where a check gave no p-value."""


@lru_cache(maxsize=4096)
def difference_key(difference):
    """Content key of a difference."""
    return content_key(list(difference))
