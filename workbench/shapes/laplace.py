"""The Laplace shape, symmetric with heavy tails."""

import numpy as np

from workbench.shapes.shape import SHAPES, Shape


@SHAPES.add
class Laplace(Shape):
    """Laplace (double exponential) values, excess kurtosis 3."""

    name = "laplace"
    cite = "Johnson, N. L., Kotz, S. & Balakrishnan, N. (1995). Continuous Univariate Distributions 2, chapter 24"

    def draw(self, rng, size):
        return rng.laplace(scale=np.sqrt(0.5), size=size)

    def quantile(self, share):
        share = np.asarray(share, dtype=float)
        with np.errstate(divide="ignore"):
            tail = np.sqrt(0.5) * np.log(2 * np.minimum(share, 1 - share))
        return np.where(share < 0.5, tail, -tail)

    def cumulative(self, value):
        value = np.asarray(value, dtype=float)
        tail = 0.5 * np.exp(-np.sqrt(2) * np.abs(value))
        return np.where(value < 0, tail, 1 - tail)

    def median(self):
        return 0.0

    def trimmed_mean(self):
        return 0.0

    def true_skewness(self):
        return 0.0

    def true_excess_kurtosis(self):
        return 3.0

    def exponential_mean(self, rate):
        return 1 / (1 - rate**2 / 2) if rate < np.sqrt(2) else np.inf
