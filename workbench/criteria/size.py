"""Limits of the error rate."""

from typing import Annotated

from annotated_types import Ge, Le

from workbench.criteria.criterion import CRITERIA, Criterion

BANDS = {"liberal": (0.5, 1.5), "stringent": (0.9, 1.1)}
"""Bradley's limits as multiples of the level."""


@CRITERIA.add
class Size(Criterion):
    """Error rate within limits wherever the compared quantities are equal."""

    name = "size"
    reading = "error"
    cite = "Bradley, J. V. (1978). Robustness? British Journal of Mathematical and Statistical Psychology 31, 144-152"

    word: str = "liberal"
    """`liberal` or `stringent`; not used where limits are given."""
    lower: Annotated[float, Ge(0), Le(1)] = 0.0
    upper: Annotated[float, Ge(0), Le(1)] | None = None

    def band(self, level):
        if self.upper is not None:
            return self.lower, self.upper
        low, high = BANDS[self.word]
        return low * level, high * level

    def applies(self, condition):
        return condition.is_null
