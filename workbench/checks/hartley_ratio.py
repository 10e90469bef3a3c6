"""Hartley's test of equal variances."""

from functools import lru_cache

import numpy as np
from scipy.special import chdtrc, fdtri, gammainccinv, gammaincinv, gammaln

from workbench.checks.check import CHECKS, Check

LEAST = 1e-17
"""Smaller tail areas are left out of integrals and tables."""

KNOTS = 201
"""Ratios at which the law is worked out for a layout."""

NEIGHBOURS = 10
"""Knots that a value between them is worked out from."""


@CHECKS.add
class HartleyRatio(Check):
    """Hartley's test of equal variances: the largest of them over the smallest, by its exact law."""

    name = "hartley_ratio"
    hypothesis = "equal spreads"
    assumes = "normal groups"
    undefined_when = "all values of some group are equal, or a group has fewer than two"
    cite = (
        "Hartley, H. O. (1950). The maximum F-ratio as a short-cut test for heterogeneity of variance. "
        "Biometrika 37(3/4), 308-312; David, H. A. (1952). Upper 5 and 1% points of the maximum F-ratio. "
        "Biometrika 39(3/4), 422-424"
    )

    def kernel(self, batch, rng):
        return batch.shift_free(largest_over_smallest)


def largest_over_smallest(batch):
    """(R,) p-values of the ratio; datasets are taken together whose sizes are the same in any order."""
    smallest = batch.variances.min(axis=1)
    log_ratio = np.log(batch.variances.max(axis=1) / np.where(smallest > 0, smallest, np.nan))
    layouts, places = np.unique(np.sort(batch.sizes, axis=1), axis=0, return_inverse=True)
    places = np.broadcast_to(places.ravel(), batch.replications)
    p = np.full(batch.replications, np.nan)
    defined = np.isfinite(log_ratio)
    for place, sizes in enumerate(layouts):
        rows = np.flatnonzero((places == place) & defined)
        if len(rows):
            p[rows] = ratio_tail(tuple((sizes - 1).tolist()), log_ratio[rows])
    return p


def ratio_tail(freedoms, log_ratio):
    """(R,) chances of a larger ratio of variances with k degrees of freedom, given the logarithm of each.

    The logarithm of the chance runs smoothly over the square root of that of the ratio. It is taken from the table by
    Newton's formula with forward differences, to 1e-9 or better.
    """
    step, differences = table(freedoms)
    place = np.minimum(np.sqrt(log_ratio) / step, KNOTS - 1)
    first = np.clip(place.astype(int) - (NEIGHBOURS // 2 - 1), 0, KNOTS - NEIGHBOURS)
    along = place - first
    log_p = 0.0
    for order in range(NEIGHBOURS - 1, -1, -1):
        log_p = differences[order][first] + log_p * (along - order) / (order + 1)
    return np.minimum(np.exp(log_p), 1.0)


@lru_cache(maxsize=4096)
def table(freedoms):
    """(step between knots, forward differences of each order of the log chance at them)."""
    pairs = [(one, other) for one in set(freedoms) for other in set(freedoms)]
    end = np.sqrt(max(-np.log(fdtri(*pair, LEAST)) for pair in pairs))
    log_p = np.log(exact_tail(freedoms, np.linspace(0, end, KNOTS) ** 2))
    return end / (KNOTS - 1), [np.diff(log_p, order) for order in range(NEIGHBOURS)]


def exact_tail(freedoms, log_ratio):
    """(X,) chances that the largest variance is more than exp(log_ratio) times the smallest.

    With s the smallest, of group i, the chance that none is above x s is the integral of the density of s times the
    product over the other groups of G_j(x s) - G_j(s), where G_j is the law of a variance whose true value is 1; that
    they are above s, of 1 - G_j(s). The difference of these two is summed over i (Hartley 1950 for equal sizes).
    """
    freedoms = np.array(freedoms)
    log_s, step = abscissae(freedoms)
    found = 0.0
    for own, times in zip(*np.unique(freedoms, return_counts=True), strict=True):
        others = np.delete(freedoms, np.flatnonzero(freedoms == own)[0])
        integrand = log_density(own, log_s) * exceeded(others, log_s, log_ratio)
        found = found + times * step * integrand.sum(axis=1)
    return found


def abscissae(freedoms):
    """((S,) logarithms of variances whose true value is 1, from end to end of their laws; their step).

    The trapezoidal rule over them converges faster than any power of the step.
    """
    halves = freedoms / 2
    least = np.log(gammaincinv(halves, LEAST) / halves).min()
    most = np.log(gammainccinv(halves, LEAST) / halves).max()
    step = min(0.25, 1 / np.sqrt(freedoms.sum()))
    return np.arange(least, most + step, step), step


def log_density(freedom, log_s):
    """(S,) density of the logarithm of a variance whose true value is 1."""
    half = freedom / 2
    return np.exp(half * (np.log(half) + log_s - np.exp(log_s)) - gammaln(half))


def exceeded(freedoms, log_s, log_ratio):
    """(X, S) chances that all variances are above s and some of them above x s.

    Added up one group at a time in positive terms, so that small chances keep their digits.
    """
    above = {nu: chdtrc(nu, nu * np.exp(log_s)) for nu in set(freedoms)}
    beyond = {nu: chdtrc(nu, nu * np.exp(log_s + log_ratio[:, None])) for nu in set(freedoms)}
    none, some = 1.0, 0.0
    for nu in freedoms:
        none, some = none * (above[nu] - beyond[nu]), some * above[nu] + none * beyond[nu]
    return some
