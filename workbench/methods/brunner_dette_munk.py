"""The rank statistic of Brunner, Dette and Munk."""

import numpy as np
from scipy.special import fdtrc

from workbench.methods.method import METHODS, Method


@METHODS.add
class BrunnerDetteMunk(Method):
    """Brunner–Dette–Munk test: squared distances of mean ranks by Box's approximation to F."""

    name = "brunner_dette_munk"
    label = "Brunner–Dette–Munk test"
    short = "B–D–M"
    hypothesis = "distributions"
    assumes = "groups large enough for their mean ranks to be normal; spreads may differ, values may be tied"
    undefined_when = "no value differs from another within its group, or a group has fewer than two"
    cite = (
        "Brunner, E., Dette, H. & Munk, A. (1997). Box-type approximations in nonparametric factorial designs. Journal "
        "of the American Statistical Association 92(440), 1494-1502"
    )

    def kernel(self, batch, rng):
        k, ranks = batch.groups, batch.ranked
        parts = ranks.variances / ranks.sizes
        spread = parts.sum(axis=1)
        spread = np.where(spread > 0, spread, np.nan)
        squares = (parts**2).sum(axis=1)
        means = ranks.means - ranks.means.mean(axis=1, keepdims=True)
        f = (means**2).sum(axis=1) / ((1 - 1 / k) * spread)
        # Traces of M V and of M V M V, M = I - J / k and V the diagonal of the parts.
        numerator = ((1 - 1 / k) * spread) ** 2 / ((1 - 2 / k) * squares + (spread / k) ** 2)
        denominator = spread**2 / (parts**2 / (ranks.sizes - 1)).sum(axis=1)
        return fdtrc(numerator, denominator, f)
