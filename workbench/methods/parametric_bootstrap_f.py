"""The parametric bootstrap test of equal means."""

from typing import Annotated

import numpy as np
from annotated_types import Ge, Le

from workbench.methods.method import METHODS, Method
from workbench.methods.welch_f import welch_squares, welch_weights
from workbench.tails import chi_square_tail

ROWS = 64
"""Datasets worked on at a time."""


@METHODS.add
class ParametricBootstrapF(Method):
    """Parametric bootstrap test of equal means under unequal spreads."""

    name = "parametric_bootstrap_f"
    label = "parametric bootstrap test"
    short = "bootstrap"
    hypothesis = "means"
    assumes = "normal groups; spreads may differ"
    undefined_when = "all values of some group are equal, or a group has fewer than two"
    cite = (
        "Krishnamoorthy, K., Lu, F. & Mathew, T. (2007). A parametric bootstrap approach for ANOVA with unequal "
        "variances: fixed and random models. Computational Statistics & Data Analysis 51(12), 5731-5742"
    )
    draws = True

    resamples: Annotated[int, Ge(1), Le(100_000)] = 400

    def kernel(self, batch, rng):
        weights, shares, _, _ = batch.shift_free(welch_weights)
        observed = batch.shared(welch_squares).sum(axis=1)
        freedom = np.broadcast_to(batch.sizes - 1, weights.shape)
        p = np.full(batch.replications, np.nan)
        usable = np.flatnonzero(np.isfinite(observed) & (batch.variances > 0).all(axis=1))
        for start in range(0, len(usable), ROWS):
            rows = usable[start : start + ROWS]
            p[rows] = tail(observed[rows], shares[rows], freedom[rows], self.resamples, rng)
        return p


def tail(observed, shares, freedom, resamples, rng):
    """(R,) chance that the statistic of normal groups with the variances observed reaches the one observed.

    The resampled statistic is a squared length times what depends on a direction alone; given the direction it
    exceeds a value with a chance that chi-square gives, and that chance is averaged: fewer resamples do then.
    """
    shape = len(observed), resamples
    length, first, cross, total = (np.zeros(shape) for _ in range(4))
    for share, df in zip(shares.T[:, :, None], freedom.T[:, :, None], strict=True):
        z = rng.standard_normal(shape)
        inverse = (df / 2) / rng.standard_gamma(df / 2, shape)  # of a chi-square by its degrees of freedom
        squares = z * z
        length += squares
        squares *= inverse
        first += squares
        inverse *= share
        total += inverse
        z *= inverse
        z /= np.sqrt(share)
        cross += z
    cross *= cross
    cross /= total
    first -= cross
    return chi_square_tail(shares.shape[1], observed[:, None] * length / first).mean(axis=1)
