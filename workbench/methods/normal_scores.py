"""The normal scores test of van der Waerden."""

from functools import lru_cache

import numpy as np
from scipy.special import ndtri

from workbench.methods.method import METHODS, Method
from workbench.moments import group_places
from workbench.tails import chi_square_tail


@METHODS.add
class NormalScores(Method):
    """Van der Waerden's test: normal scores of mid-ranks, centred, by the chi-square distribution."""

    name = "normal_scores"
    label = "van der Waerden test"
    short = "scores"
    hypothesis = "distributions"
    assumes = "nothing but equal distributions under the null hypothesis; sizes large enough for chi-square"
    undefined_when = "all values are equal, or a group is empty"
    cite = (
        "van der Waerden, B. L. (1952). Order tests for the two-sample problem and their power. Proceedings of the "
        "Koninklijke Nederlandse Akademie van Wetenschappen A 55, 453-458; for k groups Conover, W. J. (1999). "
        "Practical Nonparametric Statistics, 3rd ed. Wiley, section 5.10"
    )

    def kernel(self, batch, rng):
        scores = scores_of(batch.ranks, batch.total)
        sums = np.stack([scores[place].sum(axis=0) for place in group_places(batch.designed)], axis=1)
        # Scores of tied values do not add up to 0.
        mean = sums.sum(axis=1) / batch.total
        squares = (scores**2).sum(axis=0) - batch.total * mean**2
        between = ((sums - batch.sizes * mean[:, None]) ** 2 / batch.sizes).sum(axis=1)
        variance = squares / (batch.total - 1)
        return chi_square_tail(batch.groups - 1, between / np.where(variance > 0, variance, np.nan))


def scores_of(ranks, totals):
    """(N, R) normal scores of (R, N) mid-ranks among so many values present, (R,) or (1,); 0 where one is missing."""
    twice = (2 * ranks.T).astype(np.intp)
    different, which = np.unique(totals, return_inverse=True)
    if len(different) == 1:
        return half_rank_scores(int(different[0]))[twice]
    tables = np.zeros((len(different), 2 * int(different[-1]) + 1))
    for table, total in zip(tables, different.astype(int), strict=True):
        table[: 2 * total + 1] = half_rank_scores(total)
    return tables.ravel()[twice + tables.shape[1] * which]


@lru_cache(maxsize=256)
def half_rank_scores(total):
    """(2 N + 1,) normal quantiles of r / (N + 1) for r = 0, 1/2, 1 … N; 0 for the rank 0 of a missing value."""
    scores = ndtri(np.arange(2 * total + 1) / 2 / (total + 1))
    scores[0] = 0.0
    return scores
