"""A rule of thumb without a p-value: the size of the smallest group."""

from typing import Annotated

import numpy as np
from annotated_types import Ge

from workbench.checks.check import CHECKS, Check


@CHECKS.add
class SmallestSizeBelow(Check):
    """Rule without a p-value: some group has fewer than `limit` values left."""

    name = "smallest_size_below"
    hypothesis = "enough values in every group"
    assumes = "nothing; it is a rule of thumb, told as 0 where it trips and 1 where it does not"
    undefined_when = "no value is left"
    cite = (
        "Boneau, C. A. (1960). The effects of violations of assumptions underlying the t test. Psychological Bulletin "
        "57(1), 49-64 (on small unequal groups; the limit is a habit)"
    )

    limit: Annotated[int, Ge(1)] = 5

    def kernel(self, batch, rng):
        smallest = np.broadcast_to(batch.sizes.min(axis=1), (batch.replications,))
        some = np.broadcast_to(batch.total > 0, smallest.shape)
        return np.where(some, np.where(smallest < self.limit, 0.0, 1.0), np.nan)
