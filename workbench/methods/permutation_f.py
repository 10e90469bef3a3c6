"""The permutation test of the classical F."""

from typing import Annotated

import numpy as np
from annotated_types import Ge, Le

from workbench.methods.method import METHODS, Method
from workbench.relabelled import share_reaching


@METHODS.add
class PermutationF(Method):
    """Permutation test with the classical F as its statistic."""

    name = "permutation_f"
    label = "permutation F test"
    short = "perm. F"
    hypothesis = "distributions"
    assumes = "values that are exchangeable where the null hypothesis is true"
    undefined_when = "no value differs from another within its group"
    cite = (
        "Pitman, E. J. G. (1938). Significance tests which may be applied to samples from any populations: III. The "
        "analysis of variance test. Biometrika 29(3/4), 322-335"
    )
    draws = True

    permutations: Annotated[int, Ge(1), Le(100_000)] = 999

    def kernel(self, batch, rng):
        p = share_reaching(batch.values, batch.sizes, between, self.permutations, rng)
        return np.where(batch.sum_within > 0, p, np.nan)


def between(sums, squares, sizes):
    """Sum of squares between groups about a grand mean of 0: the F ratio rises with it, as the total is given."""
    found = sums[0] ** 2 / sizes[0]
    for group in range(1, len(sizes)):
        found += sums[group] ** 2 / sizes[group]
    return found
