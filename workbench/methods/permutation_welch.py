"""The permutation test of Welch's F."""

from typing import Annotated

import numpy as np
from annotated_types import Ge, Le

from workbench.methods.method import METHODS, Method
from workbench.relabelled import share_reaching


@METHODS.add
class PermutationWelch(Method):
    """Permutation test with Welch's F as its statistic."""

    name = "permutation_welch"
    label = "permutation Welch test"
    short = "perm. Welch"
    hypothesis = "means"
    assumes = "large groups, or values that are exchangeable where the null hypothesis is true"
    undefined_when = "all values of some group are equal, or a group has fewer than two"
    cite = (
        "Chung, E. & Romano, J. P. (2013). Exact and asymptotically robust permutation tests. Annals of Statistics "
        "41(2), 484-507"
    )
    draws = True

    permutations: Annotated[int, Ge(1), Le(100_000)] = 999

    def kernel(self, batch, rng):
        p = share_reaching(batch.values, batch.sizes, welch_ratio, self.permutations, rng)
        return np.where((batch.variances > 0).all(axis=1), p, np.nan)


SMALLEST = 1e-12
"""Variances below this, in units of the mean square of the dataset, are those of equal values."""


def welch_ratio(sums, squares, sizes):
    """Welch's F of groups given by their sums and sums of squares, (k, …); NaN where all values of one are equal."""
    k = len(sizes)
    weights, means = squares(), sums
    for group, n in enumerate(sizes):
        # In place, a group at a time: weights begin as sums of squares and end as sizes by variances.
        weights[group] -= sums[group] ** 2 / n
        if weights[group].min() <= SMALLEST * (n - 1):
            weights[group][weights[group] <= SMALLEST * (n - 1)] = np.nan
        np.divide(n * (n - 1), weights[group], out=weights[group])
        means[group] /= n
    total = weights.sum(axis=0)
    centre, slack = np.zeros_like(total), np.zeros_like(total)
    for group, n in enumerate(sizes):
        share = weights[group] / total
        centre += share * means[group]
        slack += (1 - share) ** 2 / (n - 1)
    slack *= 2 * (k - 2) / (k**2 - 1)
    slack += 1
    means -= centre
    means *= means
    means *= weights
    return means.sum(axis=0) / slack
