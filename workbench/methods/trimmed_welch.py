"""Welch's F on trimmed means, for groups of unequal spread and heavy tails."""

from functools import lru_cache
from typing import Annotated

import numpy as np
from annotated_types import Ge, Lt

from workbench.groups import group_places
from workbench.methods.method import METHODS, Method
from workbench.methods.welch_f import welch_terms
from workbench.tails import f_distribution_tail


@METHODS.add
class TrimmedWelch(Method):
    """Welch's F on trimmed means and Winsorised variances, after Yuen."""

    name = "trimmed_welch"
    label = "Yuen–Welch test"
    short = "Yuen"
    hypothesis = "trimmed means"
    assumes = "groups without strong skewness, at least five values each; spreads may differ"
    undefined_when = "all Winsorised values of some group are equal, or fewer than two of its values are left"
    cite = "Yuen, K. K. (1974). The two-sample trimmed t for unequal population variances. Biometrika 61(1), 165-170"

    trim: Annotated[float, Ge(0), Lt(0.5)] = 0.2
    """Share of values cut from each end of a group."""

    def kernel(self, batch, rng):
        away, weights, shares, inflation, freedom = batch.shift_free(trimmed_weights(self.trim))
        means = batch.means + away
        centre = (shares * means).sum(axis=1, keepdims=True)
        between = (weights * (means - centre) ** 2).sum(axis=1)
        return f_distribution_tail(batch.groups - 1, freedom, between / inflation)


@lru_cache(maxsize=64)
def trimmed_weights(trim):
    """A function of a batch, the same for the same share: what Welch's F needs of groups that are trimmed."""

    def found(batch):
        """(away, weights, shares, inflation, freedom): trimmed mean less mean, and so on as in Welch's F."""
        away, spread, left = trimmed(batch, trim)
        weights = np.where(left > 1, 1 / np.where(spread > 0, spread, np.nan), np.nan)
        return away, weights, *welch_terms(weights, left - 1)

    return found


def trimmed(batch, trim):
    """((R, k) trimmed mean less mean, (R, k) its squared standard error, (R, k) values left) of the groups."""
    parts = []
    sizes = np.broadcast_to(batch.sizes, (batch.replications, batch.groups)).astype(int)
    for group, place in enumerate(group_places(batch.designed)):
        ordered = np.sort(batch.deviations[place], axis=0)  # NaN is sorted to the end
        parts.append(trimmed_group(ordered, sizes[:, group], trim))
    return tuple(np.stack(rows, axis=1) for rows in zip(*parts, strict=True))


def trimmed_group(ordered, sizes, trim):
    """((R,) trimmed mean, (R,) its squared standard error, (R,) values left) of one group's ordered (n, R) values."""
    found = np.full((3, len(sizes)), np.nan)
    for size in np.unique(sizes):
        columns = np.flatnonzero(sizes == size) if (sizes != size).any() else slice(None)
        if size:
            found[:, columns] = of_one_size(ordered[:size, columns], trim)
    return found


def of_one_size(ordered, trim):
    """The same for complete groups of n values, (n, R).

    Winsorised values are measured from the lowest of them: equal ones must have a variance of exactly 0.
    """
    n = len(ordered)
    cut = int(trim * n + 1e-9)  # 0.29 * 100 is a little less than 29
    left = n - 2 * cut
    inner = ordered[cut : n - cut]
    away = inner - inner[0]
    mean = (away.sum(axis=0) + cut * away[-1]) / n
    squares = ((away - mean) ** 2).sum(axis=0) + cut * (mean**2 + (away[-1] - mean) ** 2)
    error = squares / (left * (left - 1)) if left > 1 else np.full(ordered.shape[1], np.nan)
    return inner[0] + away.sum(axis=0) / left, error, np.full(ordered.shape[1], float(left))
