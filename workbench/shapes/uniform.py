"""The uniform shape."""

import numpy as np

from workbench.shapes.shape import SHAPES, Shape

HALF = np.sqrt(3)
"""Half the width of a uniform population of standard deviation 1."""


@SHAPES.add
class Uniform(Shape):
    """Uniform values between two ends."""

    name = "uniform"
    cite = "Johnson, N. L., Kotz, S. & Balakrishnan, N. (1995). Continuous Univariate Distributions 2, chapter 26"

    def draw(self, rng, size):
        values = rng.random(size)
        values -= 0.5
        values *= 2 * HALF
        return values

    def quantile(self, share):
        return HALF * (2 * np.asarray(share, dtype=float) - 1)

    def cumulative(self, value):
        return np.clip((np.asarray(value, dtype=float) / HALF + 1) / 2, 0, 1)

    def trimmed_mean(self):
        return 0.0

    def true_skewness(self):
        return 0.0

    def true_excess_kurtosis(self):
        return -1.2

    @np.errstate(over="ignore")
    def exponential_mean(self, rate):
        return float(np.sinh(HALF * rate) / (HALF * rate))
