"""Values that look like outliers are taken away, and a test is done on what is left."""

from dataclasses import dataclass

import numpy as np

from workbench.groups import Batch
from workbench.moments import group_places
from workbench.routes.procedure import Procedure, ends_of, ends_taken, joined, parts_of


@dataclass(frozen=True)
class Dropping(Procedure):
    """Flag values in each group by a rule, take them away once, and go on with the rest."""

    rule: object
    then: object

    def content(self):
        return {"drop_outliers": self.rule.content(), "then": self.then.content()}

    def parts(self):
        return [self.rule, *parts_of(self.then)]

    def ends(self):
        words = (f"{self.rule.name} kept all values", f"{self.rule.name} took values away")
        return [(joined(word, path), method) for word in words for path, method in ends_of(self.then)]

    def judge(self, batch, rngs):
        return self.then.judge(self.left(batch), rngs)

    def ends_taken(self, batch, rngs):
        taken = ends_taken(self.then, self.left(batch), rngs)
        return taken + np.where(self.flags(batch).any(axis=0), len(ends_of(self.then)), 0)

    def left(self, batch):
        """The Batch without the values that the rule flags; they are missing there."""
        place = self.rule, "left"
        if place not in batch.memory:
            columns = np.where(self.flags(batch), np.nan, batch.columns)
            batch.memory[place] = Batch.of_columns(columns, batch.designed)
        return batch.memory[place]

    def flags(self, batch):
        """(N, R) bool: which values are flagged; no shift of a group changes that."""
        memory = batch.root.memory
        place = self.rule, "flags"
        if place not in memory:
            away = batch.deviations
            parts = [self.rule.flags(away[rows]) for rows in group_places(batch.designed)]
            memory[place] = np.concatenate(parts)
        return memory[place]
