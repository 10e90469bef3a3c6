"""The Kruskal–Wallis test by permutation."""

from typing import Annotated

import numpy as np
from annotated_types import Ge, Le

from workbench.methods.method import METHODS, Method
from workbench.methods.permutation_f import between
from workbench.relabelled import share_reaching


@METHODS.add
class KruskalWallisPermuted(Method):
    """Kruskal–Wallis test on mid-ranks, its p-value from permutations."""

    name = "kruskal_wallis_permuted"
    label = "permuted Kruskal–Wallis test"
    short = "perm. K–W"
    hypothesis = "distributions"
    assumes = "values that are exchangeable where the null hypothesis is true"
    undefined_when = "all values are equal"
    cite = (
        "Kruskal, W. H. & Wallis, W. A. (1952). Use of ranks in one-criterion variance analysis. Journal of the "
        "American Statistical Association 47(260), 583-621"
    )
    draws = True

    permutations: Annotated[int, Ge(1), Le(100_000)] = 999

    def kernel(self, batch, rng):
        ranks = np.where(np.isnan(batch.values), np.nan, batch.ranks)
        p = share_reaching(ranks, batch.sizes, between, self.permutations, rng)
        total = batch.total
        return np.where(batch.tie_sums < total**3 - total, p, np.nan)
