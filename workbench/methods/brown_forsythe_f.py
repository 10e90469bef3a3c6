"""Brown and Forsythe's F* for means."""

import numpy as np

from workbench.methods.method import METHODS, Method
from workbench.tails import f_distribution_tail


@METHODS.add
class BrownForsytheF(Method):
    """Brown–Forsythe F* for means, with k - 1 numerator degrees of freedom."""

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

    def kernel(self, batch, rng):
        spread, df = batch.shift_free(spread_and_df)
        return f_distribution_tail(batch.groups - 1, df, batch.sum_between / spread)


def spread_and_df(batch):
    """((R,) denominator of F*, (R,) its degrees of freedom by Satterthwaite's rule); NaN where it is 0."""
    parts = (1 - batch.sizes / batch.total[:, None]) * batch.variances
    spread = parts.sum(axis=1)
    spread = np.where(spread > 0, spread, np.nan)
    return spread, spread**2 / (parts**2 / (batch.sizes - 1)).sum(axis=1)
