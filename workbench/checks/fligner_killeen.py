"""The Fligner–Killeen test of equal spreads."""

from functools import lru_cache

import numpy as np
from scipy.special import ndtri

from workbench.checks.check import CHECKS, Check, by_size
from workbench.checks.levene_median import distances
from workbench.tails import chi_square_tail


@CHECKS.add
class FlignerKilleen(Check):
    """Fligner–Killeen test of equal spreads on normal scores of the distances from the group medians."""

    name = "fligner_killeen"
    hypothesis = "equal spreads"
    assumes = "groups of one shape"
    undefined_when = "all distances from the medians are equal, or a group has no value"
    cite = (
        "Fligner, M. A. & Killeen, T. J. (1976). Distribution-free two-sample tests for scale. Journal of the "
        "American Statistical Association 71(353), 210-213; Conover, W. J., Johnson, M. E. & Johnson, M. M. "
        "(1981). A comparative study of tests for homogeneity of variances. Technometrics 23(4), 351-361"
    )

    def kernel(self, batch, rng):
        return batch.shift_free(spread_by_scores)


def spread_by_scores(batch):
    """(R,) p-values by chi-square: how far the mean scores of the groups lie apart.

    The two middle values of a group of even size are equally far from its median; other distances that are equal on
    paper may differ in the last digits that the values hold. Both count as ties.
    """
    apart = np.concatenate([distances(batch.members(group)) for group in range(batch.groups)]).T
    near = 8 * np.finfo(float).eps * np.fmax.reduce(np.abs(batch.columns), axis=0)
    order = np.argsort(apart, axis=1)
    ordered = np.take_along_axis(apart, order, axis=1)
    found = np.repeat(np.arange(batch.groups, dtype=np.int16), batch.designed)[order]
    ordered[~np.isfinite(near)] = np.nan
    sizes = np.broadcast_to(batch.sizes, (batch.replications, batch.groups))

    def judge(rows, total):
        scores = centred_scores(ordered[rows, :total], near[rows])
        return tail_of_scores(scores, found[rows, :total], sizes[rows])

    return by_size(batch.total, batch.replications, judge)


def centred_scores(ordered, near):
    """(R, n) normal scores of (R, n) distances in order, less their mean; what lies no further than near is tied."""
    replications, n = ordered.shape
    opens = np.ones(ordered.shape, dtype=bool)
    opens[:, 1:] = ~(ordered[:, 1:] - ordered[:, :-1] <= near[:, None])
    runs = opens.sum(axis=1)
    starts = np.flatnonzero(opens)
    lengths = np.diff(starts, append=opens.size)
    below = starts - np.repeat(n * np.arange(replications), runs)
    scores = np.repeat(half_normal_scores(n)[2 * below + lengths + 1], lengths).reshape(ordered.shape)
    scores[runs == 1] = np.nan
    scores[np.isnan(ordered[:, -1])] = np.nan
    scores -= scores.mean(axis=1, keepdims=True)
    return scores


@lru_cache(maxsize=256)
def half_normal_scores(n):
    """(2 n + 1,) scores of the ranks 0, 1/2, 1 … n among n values: normal quantiles of 1/2 + rank / (2 n + 2)."""
    return ndtri(0.5 + np.arange(2 * n + 1) / (4 * (n + 1)))


def tail_of_scores(scores, found, sizes):
    """(R,) p-values of (R, n) centred scores of the groups found beside them, of (R, k) sizes."""
    k = sizes.shape[1]
    variance = np.square(scores).sum(axis=1) / (scores.shape[1] - 1)
    sums = np.empty((k, len(scores)))
    for group in range(k - 1):
        sums[group] = (scores * (found == group)).sum(axis=1)
    sums[-1] = -sums[:-1].sum(axis=0)
    between = np.square(sums).T / np.where(sizes > 0, sizes, np.nan)
    return chi_square_tail(k - 1, between.sum(axis=1) / variance)
