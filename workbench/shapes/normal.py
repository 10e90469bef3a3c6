"""The normal shape."""

import numpy as np
from scipy.special import ndtr, ndtri

from workbench.shapes.shape import SHAPES, Shape


@SHAPES.add
class Normal(Shape):
    """Normal values."""

    name = "normal"
    cite = "Johnson, N. L., Kotz, S. & Balakrishnan, N. (1994). Continuous Univariate Distributions 1, chapter 13"

    def draw(self, rng, size):
        return rng.standard_normal(size)

    def quantile(self, share):
        return ndtri(share)

    def cumulative(self, value):
        return ndtr(value)

    def trimmed_mean(self):
        return 0.0

    def true_skewness(self):
        return 0.0

    def true_excess_kurtosis(self):
        return 0.0

    @np.errstate(over="ignore")
    def exponential_mean(self, rate):
        return float(np.exp(rate**2 / 2))
