"""Equal means."""

from workbench.estimands.estimand import ESTIMANDS, Estimand


@ESTIMANDS.add
class Means(Estimand):
    """The mean of each group."""

    name = "means"
    quantity = "mean"
    cite = "Fisher, R. A. (1925). Statistical Methods for Research Workers. Oliver & Boyd"

    def additive(self, shape):
        return 0.0

    def multiplicative(self, shape, spread):
        return shape.exponential_mean(spread)
