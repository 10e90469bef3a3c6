"""Several tests of which the smallest p-value is reported, as some people do."""

from dataclasses import dataclass

import numpy as np

from workbench.routes.procedure import Procedure, ends_of, ends_taken, joined, parts_of


@dataclass(frozen=True)
class Smallest(Procedure):
    """Do all tests and take the smallest p-value; undefined where none of them gives one."""

    of: tuple

    def content(self):
        return {"smallest_p_of": [way.content() for way in self.of]}

    def parts(self):
        return [part for way in self.of for part in parts_of(way)]

    def ends(self):
        return [
            (joined(f"{word} smallest", path), method)
            for word, way in zip(self.words(), self.of, strict=True)
            for path, method in ends_of(way)
        ]

    def words(self):
        """What each test is called among the others: its name, with its number where that is not enough."""
        names = [getattr(way, "name", "rule") for way in self.of]
        several = {name for name in names if name == "rule" or names.count(name) > 1}
        return [f"{name} ({place})" if name in several else name for place, name in enumerate(names, 1)]

    def judge(self, batch, rngs):
        least = self.all_of(batch, rngs).min(axis=0)
        return np.where(np.isinf(least), np.nan, least)

    def all_of(self, batch, rngs):
        """(tests, R) p-values, infinite where there is none."""
        found = np.stack([way.judge(batch, rngs) for way in self.of])
        return np.where(np.isnan(found), np.inf, found)

    def ends_taken(self, batch, rngs):
        first = np.argmin(self.all_of(batch, rngs), axis=0)
        before = np.cumsum([0, *(len(ends_of(way)) for way in self.of)])[:-1]
        each = np.stack([ends_taken(way, batch, rngs) for way in self.of])
        taken = np.take_along_axis(each, first[None], axis=0)[0]
        return taken + before[first]
