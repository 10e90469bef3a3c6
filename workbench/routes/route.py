"""A two-stage rule: a check decides which test is done."""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from workbench.keys import content_key


@dataclass(frozen=True)
class Route:
    """Do a check; where its p-value is at most `level` go one way, else the other.

    Each way ends in a method or goes on as a further route. A check that gives no p-value has not tripped.
    """

    check: object
    level: float
    if_passed: object
    if_failed: object

    def content(self):
        """What makes the route give the numbers it gives."""
        ways = {"if_passed": self.if_passed.content(), "if_failed": self.if_failed.content()}
        return {"check": self.check.content(), "level": self.level} | ways

    @cached_property
    def _key(self):
        return content_key(self.content())

    def key(self):
        """The route's content key."""
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

    def parts(self):
        """Every check and method of the route, the ways in the order passed, failed."""
        return [self.check, *parts_of(self.if_passed), *parts_of(self.if_failed)]

    def ends(self):
        """[(description, method)] of all ends, in the order of `ends_taken`."""
        passed = f"{self.check.name} passed"
        failed = f"{self.check.name} tripped"
        return [
            (f"{word}, {path}" if path else word, method)
            for word, way in ((passed, self.if_passed), (failed, self.if_failed))
            for path, method in ends_of(way)
        ]

    def judge(self, batch, rngs):
        """(R,) p-values of the methods the route ends in."""
        passed, failed = self.if_passed.judge(batch, rngs), self.if_failed.judge(batch, rngs)
        return np.where(self.tripped(batch, rngs), failed, passed)

    def tripped(self, batch, rngs):
        """(R,) bool: the check gave a p-value at or below its level."""
        return self.check.judge(batch, rngs) <= self.level

    def ends_taken(self, batch, rngs):
        """(R,) number of the end each dataset came to, plus 128 where a check on its way gave no p-value."""
        passed, failed = ends_taken(self.if_passed, batch, rngs), ends_taken(self.if_failed, batch, rngs)
        beyond = len(ends_of(self.if_passed))
        taken = np.where(self.tripped(batch, rngs), failed + beyond, passed)
        return taken | np.where(np.isnan(self.check.judge(batch, rngs)), 128, 0)


def parts_of(way):
    """Every part of a method or route."""
    return way.parts() if isinstance(way, Route) else [way]


def ends_of(way):
    """[(description, method)] of the ends of a method or route."""
    return way.ends() if isinstance(way, Route) else [("", way)]


def ends_taken(way, batch, rngs):
    """(R,) numbers of the ends of a method (always 0) or route."""
    if isinstance(way, Route):
        return way.ends_taken(batch, rngs)
    return np.zeros(batch.replications, dtype=np.int64)
