"""Equal trimmed means."""

import numpy as np

from workbench.estimands.estimand import ESTIMANDS, Estimand
from workbench.population import TRIM
from workbench.quadrature import over_shares


@ESTIMANDS.add
class TrimmedMeans(Estimand):
    """The mean of each group when 20 % are cut from each end."""

    name = "trimmed means"
    quantity = "trimmed_mean"
    cite = "Yuen, K. K. (1974). The two-sample trimmed t for unequal population variances. Biometrika 61(1), 165-170"

    def additive(self, shape):
        return shape.trimmed_mean()

    def multiplicative(self, shape, spread):
        return over_shares(lambda share: np.exp(spread * shape.quantile(share)), TRIM, 1 - TRIM) / (
            1 - 2 * TRIM
        )
