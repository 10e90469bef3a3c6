"""Mood's median test."""

import numpy as np

from workbench.methods.method import METHODS, Method
from workbench.moments import group_places
from workbench.tails import chi_square_tail


@METHODS.add
class MedianTest(Method):
    """Mood's median test: how many values of each group lie above the median of all, by chi-square."""

    name = "median_test"
    label = "median test"
    short = "median"
    hypothesis = "medians"
    assumes = "groups that differ at most in location; sizes large enough for chi-square, of two groups as Yates has it"
    undefined_when = "no value lies above the median of all, or a group is empty"
    cite = (
        "Brown, G. W. & Mood, A. M. (1951). On median tests for linear hypotheses. Proceedings of the Second Berkeley "
        "Symposium on Mathematical Statistics and Probability, 159-166"
    )

    def kernel(self, batch, rng):
        above = counts_above(batch)
        share = (above.sum(axis=1) / batch.total)[:, None]
        away = np.abs(above - share * batch.sizes)
        if batch.groups == 2:
            away = np.maximum(away - 0.5, 0)
        share = np.where(share > 0, share, np.nan)
        return chi_square_tail(batch.groups - 1, (away**2 / batch.sizes / (share * (1 - share))).sum(axis=1))


def counts_above(batch):
    """(R, k) how many values of each group lie above the median of their dataset, ties with it not counted."""
    ranks = batch.ranks
    above = ranks > median_rank(ranks, batch.total)[:, None]
    return np.stack([above[:, place].sum(axis=1) for place in group_places(batch.designed)], axis=1)


def median_rank(ranks, totals):
    """(R,) mid-rank of the lower of the two middle values: what lies above it lies above the median.

    It is the largest rank up to the middle place, unless too few values have such a rank: then the run of ties across
    the middle place has its mid-rank beyond it, the next there is.
    """
    middle = np.broadcast_to(np.floor((totals + 1) / 2), len(ranks)).copy()
    missing = (ranks == 0).sum(axis=1)
    beyond = np.flatnonzero((ranks <= middle[:, None]).sum(axis=1) - missing < middle)
    some = ranks[beyond]
    middle[beyond] = np.where(some > middle[beyond, None], some, np.inf).min(axis=1)
    return middle
