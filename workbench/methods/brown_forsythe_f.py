"""Brown and Forsythe's F* for means."""

from typing import Literal

import numpy as np
from scipy.special import fdtrc

from workbench.methods.method import METHODS, Method
from workbench.tails import f_distribution_tail


@METHODS.add
class BrownForsytheF(Method):
    """Brown–Forsythe F* for means, with k - 1 numerator degrees of freedom or Mehrotra's."""

    name = "brown_forsythe_f"
    label = "Brown–Forsythe F*"
    short = "B–F"
    hypothesis = "means"
    assumes = "normal groups; spreads may differ"
    undefined_when = "no value differs from another within its group"
    cite = (
        "Brown, M. B. & Forsythe, A. B. (1974). The small sample behavior of some statistics which test the "
        "equality of several means. Technometrics 16(1), 129-132"
    )

    df: Literal["1974", "mehrotra"] = "1974"
    """Numerator degrees of freedom: k - 1 as published in 1974, or those that mehrotra_df gives."""

    def kernel(self, batch, rng):
        spread, df = batch.shift_free(spread_and_df)
        ratio = batch.sum_between / spread
        if self.df == "mehrotra":
            return fdtrc(batch.shift_free(mehrotra_df), df, ratio)
        return f_distribution_tail(batch.groups - 1, df, ratio)


def spread_and_df(batch):
    """((R,) denominator of F*, (R,) its degrees of freedom by Satterthwaite's rule); NaN where it is 0."""
    parts = (1 - batch.sizes / batch.total[:, None]) * batch.variances
    spread = parts.sum(axis=1)
    spread = np.where(spread > 0, spread, np.nan)
    return spread, spread**2 / (parts**2 / (batch.sizes - 1)).sum(axis=1)


def mehrotra_df(batch):
    """(R,) numerator degrees of freedom of F*: 1 for two groups, k - 1 for equal sizes and equal variances.

    Mehrotra (1997), Improving the Brown-Forsythe solution to the generalized Behrens-Fisher problem, Communications
    in Statistics: Simulation and Computation 26, 1139-1145.
    """
    spread, _ = batch.shift_free(spread_and_df)
    shares = batch.sizes / batch.total[:, None]
    pooled = (shares * batch.variances).sum(axis=1)
    return spread**2 / (((1 - 2 * shares) * batch.variances**2).sum(axis=1) + pooled**2)
