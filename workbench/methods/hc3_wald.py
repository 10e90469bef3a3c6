"""The Wald test with a covariance that holds under unequal spread."""

from workbench.methods.method import METHODS, Method
from workbench.tails import f_distribution_tail


@METHODS.add
class HC3Wald(Method):
    """Wald F of a regression on the groups with the HC3 covariance."""

    name = "hc3_wald"
    label = "HC3 Wald F"
    short = "HC3"
    hypothesis = "means"
    assumes = (
        "spreads may differ; groups large enough, as for every test that rests on an estimated covariance"
    )
    undefined_when = "all values of some group are equal, or a group has fewer than two"
    cite = (
        "MacKinnon, J. G. & White, H. (1985). Some heteroskedasticity-consistent covariance matrix estimators "
        "with improved finite sample properties. Journal of Econometrics 29(3), 305-325"
    )

    def kernel(self, batch, rng):
        weights, shares = batch.shift_free(hc3_weights)
        centre = (shares * batch.means).sum(axis=1, keepdims=True)
        wald = (weights * (batch.means - centre) ** 2).sum(axis=1)
        k = batch.groups
        return f_distribution_tail(k - 1, batch.total - k, wald / (k - 1))


def hc3_weights(batch):
    """((R, k) inverse variances of the group means, (R, k) their shares).

    A value's leverage is 1 / n, so that HC3, which divides each squared residual by (1 - 1 / n)^2, gives a mean the
    variance v / (n - 1), where the plain estimate is v / n.
    """
    weights = (batch.sizes - 1) / batch.variances
    return weights, weights / weights.sum(axis=1, keepdims=True)
