"""Welch's F, for groups of unequal spread."""

from workbench.methods.method import METHODS, Method
from workbench.tails import f_distribution_tail


@METHODS.add
class WelchF(Method):
    """Welch's heteroscedastic F."""

    name = "welch_f"
    label = "Welch F"
    short = "Welch"
    hypothesis = "means"
    assumes = "normal groups; spreads may differ"
    undefined_when = "all values of some group are equal, or a group has fewer than two"
    cite = "Welch, B. L. (1951). On the comparison of several mean values. Biometrika 38(3/4), 330-336"

    def kernel(self, batch, rng):
        return welch_tail(batch)


def welch_tail(batch):
    """(R,) upper tail areas of Welch's F."""
    _, _, inflation, freedom = batch.shift_free(welch_weights)
    between = batch.shared(welch_squares).sum(axis=1)
    return f_distribution_tail(batch.groups - 1, freedom, between / inflation)


def welch_squares(batch):
    """(R, k) squared distances of the group means from their weighted mean, in squared standard errors."""
    weights, shares, _, _ = batch.shift_free(welch_weights)
    centre = (shares * batch.means).sum(axis=1, keepdims=True)
    return weights * (batch.means - centre) ** 2


def welch_weights(batch):
    """((R, k) weights n / variance, (R, k) their shares, (R,) k - 1 times the correction of F, (R,) denominator df)."""
    weights = batch.sizes / batch.variances
    return weights, *welch_terms(weights, batch.sizes - 1)


def welch_terms(weights, freedoms):
    """(shares, inflation, freedom) as in welch_weights, of any (R, k) weights and degrees of freedom of the groups."""
    k = weights.shape[1]
    shares = weights / weights.sum(axis=1, keepdims=True)
    slack = ((1 - shares) ** 2 / freedoms).sum(axis=1)
    inflation = (k - 1) * (1 + 2 * (k - 2) / (k**2 - 1) * slack)
    return shares, inflation, (k**2 - 1) / (3 * slack)
