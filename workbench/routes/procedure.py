"""What a procedure of several steps is: it ends in one of several methods, and is judged as one."""

from abc import ABC, abstractmethod
from functools import cached_property

import numpy as np

from workbench.keys import content_key


class Procedure(ABC):
    """Steps that lead to one of several methods, depending on the data."""

    @abstractmethod
    def content(self):
        """What makes the procedure give the numbers it gives."""

    @abstractmethod
    def parts(self):
        """Every check, rule and method of the procedure."""

    @abstractmethod
    def ends(self):
        """[(description, method)] of all ends, in the order of `ends_taken`."""

    @abstractmethod
    def judge(self, batch, rngs):
        """(R,) p-values of the methods that the procedure ends in."""

    @abstractmethod
    def ends_taken(self, batch, rngs):
        """(R,) number of the end each dataset came to, plus 128 where a check on its way gave no p-value."""

    @cached_property
    def _key(self):
        return content_key(self.content())

    def key(self):
        """The procedure's content key."""
        return self._key

    @property
    def cite(self):
        """The sources of all parts."""
        return "; ".join(dict.fromkeys(part.cite for part in self.parts()))

    @cached_property
    def hypothesis(self):
        """What all ends test, or `mixed` where they test different things."""
        tested = {method.hypothesis for _, method in self.ends()}
        return tested.pop() if len(tested) == 1 else "mixed"


def parts_of(way):
    """Every part of a method or procedure."""
    return way.parts() if isinstance(way, Procedure) else [way]


def ends_of(way):
    """[(description, method)] of the ends of a method or procedure."""
    return way.ends() if isinstance(way, Procedure) else [("", way)]


def ends_taken(way, batch, rngs):
    """(R,) numbers of the ends of a method (always 0) or procedure."""
    if isinstance(way, Procedure):
        return way.ends_taken(batch, rngs)
    return np.zeros(batch.replications, dtype=np.int64)


def joined(word, path):
    """The description of an end that a step with its own word leads to."""
    return f"{word}, {path}" if path else word
