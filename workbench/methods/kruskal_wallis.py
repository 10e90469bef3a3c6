"""The Kruskal–Wallis rank test."""

import numpy as np

from workbench.methods.method import METHODS, Method
from workbench.tails import chi_square_tail


@METHODS.add
class KruskalWallis(Method):
    """Kruskal–Wallis rank test, corrected for ties, by the chi-square distribution."""

    name = "kruskal_wallis"
    label = "Kruskal–Wallis test"
    short = "K–W"
    hypothesis = "distributions"
    assumes = "nothing but equal distributions under the null hypothesis; sizes large enough for chi-square"
    undefined_when = "all values are equal, or a group is empty"
    cite = (
        "Kruskal, W. H. & Wallis, W. A. (1952). Use of ranks in one-criterion variance analysis. Journal of "
        "the American Statistical Association 47(260), 583-621"
    )

    def kernel(self, batch, rng):
        n, total = batch.sizes, batch.total
        variance = (total**3 - total - batch.tie_sums) / 12 / (total - 1)
        squares = (batch.rank_sums - n * (total[:, None] + 1) / 2) ** 2 / n
        return chi_square_tail(
            batch.groups - 1, squares.sum(axis=1) / np.where(variance > 0, variance, np.nan)
        )
