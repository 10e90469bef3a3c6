"""Levene's test with distances from the medians."""

import numpy as np

from workbench.checks.check import CHECKS, Check
from workbench.groups import Batch
from workbench.tails import anova_tail


@CHECKS.add
class LeveneMedian(Check):
    """Levene's test of equal spreads on distances from the group medians."""

    name = "levene_median"
    hypothesis = "equal spreads"
    assumes = "groups of one shape"
    undefined_when = "the distances from the median vary in no group"
    cite = (
        "Brown, M. B. & Forsythe, A. B. (1974). Robust tests for the equality of variances. Journal of the "
        "American Statistical Association 69(346), 364-367"
    )

    def kernel(self, batch, rng):
        return batch.shift_free(levene)


def levene(batch):
    """(R,) p-values: the classical F of the distances from the group medians."""
    apart = np.concatenate([distances(batch.members(group)) for group in range(batch.groups)])
    return anova_tail(Batch.of_columns(apart, batch.designed))


def distances(members):
    """(n, R) distances of (n, R) values of one group from its median.

    Worked out from the two middle values, so that both lie exactly equally far from the median between them.
    """
    low, high = middles(members)
    return np.abs((members - low) - (high - low) / 2)


def middles(members):
    """((R,) lower, (R,) upper middle value present in (n, R) values), the same where their number is odd."""
    rows = np.sort(members.T, axis=1)  # NaN is sorted to the end
    present = len(members) - np.isnan(rows).sum(axis=1)
    low, high = np.maximum((present - 1) // 2, 0), np.minimum(present // 2, len(members) - 1)
    each = np.arange(len(rows))
    return rows[each, low], rows[each, high]
