"""A rule of thumb without a p-value: the ratio of spreads."""

from typing import Annotated

import numpy as np
from annotated_types import Ge

from workbench.checks.check import CHECKS, Check


@CHECKS.add
class SpreadRatioOver(Check):
    """Rule without a p-value: the largest standard deviation is more than `limit` times the smallest."""

    name = "spread_ratio_over"
    hypothesis = "equal spreads"
    assumes = "nothing; it is a rule of thumb, told as 0 where it trips and 1 where it does not"
    undefined_when = "no value differs from another within its group, or a group has fewer than two"
    cite = "Dean, A. & Voss, D. (1999). Design and Analysis of Experiments, section 5.6. Springer (variances, ratio 3)"

    limit: Annotated[float, Ge(1)] = 3.0

    def kernel(self, batch, rng):
        spreads = np.sqrt(batch.variances)
        low, high = spreads.min(axis=1), spreads.max(axis=1)
        return np.where(high > 0, np.where(high > self.limit * low, 0.0, 1.0), np.nan)
