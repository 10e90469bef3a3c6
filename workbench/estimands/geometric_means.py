"""Equal geometric means."""

import numpy as np

from workbench.estimands.estimand import ESTIMANDS, Estimand


@ESTIMANDS.add
class GeometricMeans(Estimand):
    """The geometric mean of each group, on the multiplicative scale."""

    name = "geometric means"
    quantity = "geometric_mean"
    cite = "Bartlett, M. S. (1947). The use of transformations. Biometrics 3(1), 39-52"

    def additive(self, shape):
        return np.nan

    def multiplicative(self, shape, spread):
        # The shape is that of the logarithm and has mean 0.
        return 1.0
