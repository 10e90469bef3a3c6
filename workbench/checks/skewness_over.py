"""A rule of thumb without a p-value: the skewness of the residuals."""

from typing import Annotated

import numpy as np
from annotated_types import Ge

from workbench.checks.check import CHECKS, Check


@CHECKS.add
class SkewnessOver(Check):
    """Rule without a p-value: the skewness of all residuals, either way, is above `limit`."""

    name = "skewness_over"
    hypothesis = "symmetry"
    assumes = "nothing; it is a rule of thumb, told as 0 where it trips and 1 where it does not"
    undefined_when = "no value differs from another within its group"
    cite = "Bulmer, M. G. (1979). Principles of Statistics, chapter 4. Dover (highly skewed: above 1)"

    limit: Annotated[float, Ge(0)] = 1.0

    def kernel(self, batch, rng):
        skewness = np.abs(batch.shift_free(residual_skewness))
        return np.where(np.isnan(skewness), np.nan, np.where(skewness > self.limit, 0.0, 1.0))


def residual_skewness(batch):
    """(R,) third standardised moment of the residuals from the group means, divisor the number of values."""
    away = np.where(np.isnan(batch.deviations), 0.0, batch.deviations)
    second = (away**2).sum(axis=0) / batch.total
    third = (away**3).sum(axis=0) / batch.total
    return np.where(batch.sum_within > 0, third / second**1.5, np.nan)
