"""Equal distributions."""

from workbench.estimands.estimand import ESTIMANDS, Estimand


@ESTIMANDS.add
class Distributions(Estimand):
    """The whole distribution of each group; shapes are aligned on their means."""

    name = "distributions"
    quantity = "mean"
    cite = "Kruskal, W. H. & Wallis, W. A. (1952). Use of ranks in one-criterion variance analysis. JASA 47, 583-621"

    def additive(self, shape):
        return 0.0

    def multiplicative(self, shape, spread):
        return shape.exponential_mean(spread)
