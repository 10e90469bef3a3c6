"""Levene's test with distances from the means."""

import numpy as np

from workbench.checks.check import CHECKS, Check
from workbench.groups import Batch
from workbench.tails import anova_tail


@CHECKS.add
class LeveneMean(Check):
    """Levene's test of equal spreads on distances from the group means."""

    name = "levene_mean"
    hypothesis = "equal spreads"
    assumes = "groups of one shape, which is not skewed"
    undefined_when = "the distances from the mean vary in no group"
    cite = (
        "Levene, H. (1960). Robust tests for equality of variances. In I. Olkin (Ed.), Contributions to "
        "Probability and Statistics, 278-292. Stanford University Press"
    )

    def kernel(self, batch, rng):
        return batch.shift_free(levene)


def levene(batch):
    """(R,) p-values: the classical F of the distances from the group means."""
    apart = Batch.of_columns(np.abs(batch.deviations), batch.designed)
    # Where half of a group has one value and half another, all its distances are equal. Rounding of the mean may
    # make them differ, but by no more than this.
    rounding = (batch.total * np.finfo(float).eps) ** 2 * batch.sum_within
    return np.where(apart.sum_within > rounding, anova_tail(apart), np.nan)
