"""Equal medians."""

import numpy as np

from workbench.estimands.estimand import ESTIMANDS, Estimand


@ESTIMANDS.add
class Medians(Estimand):
    """The median of each group."""

    name = "medians"
    quantity = "median"
    cite = "Brown, G. W. & Mood, A. M. (1951). On median tests for linear hypotheses. Proc. 2nd Berkeley Symp., 159-166"

    def additive(self, shape):
        return shape.median()

    def multiplicative(self, shape, spread):
        return float(np.exp(spread * shape.median()))
