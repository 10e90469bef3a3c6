"""A two-stage rule: a check decides which test is done."""

from dataclasses import dataclass

import numpy as np

from workbench.routes.procedure import Procedure, ends_of, ends_taken, joined, parts_of


@dataclass(frozen=True)
class Route(Procedure):
    """Do a check; where its p-value is at most `level` go one way, else the other.

    Each way ends in a method or goes on as a further procedure. A check that gives no p-value has not tripped.
    """

    check: object
    level: float
    if_passed: object
    if_failed: object

    def content(self):
        ways = {"if_passed": self.if_passed.content(), "if_failed": self.if_failed.content()}
        return {"check": self.check.content(), "level": self.level} | ways

    def parts(self):
        return [self.check, *parts_of(self.if_passed), *parts_of(self.if_failed)]

    def ends(self):
        ways = ((f"{self.check.name} passed", self.if_passed), (f"{self.check.name} tripped", self.if_failed))
        return [(joined(word, path), method) for word, way in ways for path, method in ends_of(way)]

    def judge(self, batch, rngs):
        passed, failed = self.if_passed.judge(batch, rngs), self.if_failed.judge(batch, rngs)
        return np.where(self.tripped(batch, rngs), failed, passed)

    def tripped(self, batch, rngs):
        """(R,) bool: the check gave a p-value at or below its level."""
        return self.check.judge(batch, rngs) <= self.level

    def ends_taken(self, batch, rngs):
        passed, failed = ends_taken(self.if_passed, batch, rngs), ends_taken(self.if_failed, batch, rngs)
        beyond = len(ends_of(self.if_passed))
        taken = np.where(self.tripped(batch, rngs), failed + beyond, passed)
        return taken | np.where(np.isnan(self.check.judge(batch, rngs)), 128, 0)
