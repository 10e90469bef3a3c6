"""The exponential shape."""

import numpy as np

from workbench.shapes.shape import SHAPES, Asymmetric


@SHAPES.add
class Exponential(Asymmetric):
    """Exponential values, such as waiting times."""

    name = "exponential"
    cite = "Johnson, N. L., Kotz, S. & Balakrishnan, N. (1994). Continuous Univariate Distributions 1, chapter 19"

    def draw_upright(self, rng, size):
        values = rng.standard_exponential(size)
        values -= 1
        return values

    def quantile_upright(self, share):
        with np.errstate(divide="ignore"):
            return -np.log1p(-np.asarray(share, dtype=float)) - 1

    def cumulative_upright(self, value):
        return -np.expm1(-np.maximum(np.asarray(value, dtype=float) + 1, 0))

    def true_skewness_upright(self):
        return 2.0

    def true_excess_kurtosis(self):
        return 6.0

    def exponential_mean_upright(self, rate):
        return float(np.exp(-rate) / (1 - rate)) if rate < 1 else np.inf
