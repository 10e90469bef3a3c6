"""Welch's F on mid-ranks."""

from workbench.methods.method import METHODS, Method
from workbench.methods.welch_f import welch_tail


@METHODS.add
class RankWelch(Method):
    """Welch's heteroscedastic F of the mid-ranks among all values."""

    name = "rank_welch"
    label = "Welch F on ranks"
    short = "rank Welch"
    hypothesis = "stochastic size"
    assumes = "groups large enough for their mean ranks to be normal; spreads may differ"
    undefined_when = "all values of some group are equal, or a group has fewer than two"
    cite = (
        "Zimmerman, D. W. & Zumbo, B. D. (1993). Rank transformations and the power of the Student t test and Welch t' "
        "test for non-normal populations with unequal variances. Canadian Journal of Experimental Psychology 47(3), "
        "523-539"
    )

    def kernel(self, batch, rng):
        return welch_tail(batch.ranked)
