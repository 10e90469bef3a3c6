"""The lognormal shape."""

from typing import Annotated

import numpy as np
from annotated_types import Gt, Le
from scipy.special import ndtr, ndtri

from workbench.shapes.shape import SHAPES, Asymmetric


@SHAPES.add
class Lognormal(Asymmetric):
    """Lognormal values, `sigma` the standard deviation of their logarithm.

    Beyond a sigma of 4 nearly all of the variance lies in values that a run of any length would never draw.
    """

    name = "lognormal"
    cite = "Johnson, N. L., Kotz, S. & Balakrishnan, N. (1994). Continuous Univariate Distributions 1, chapter 14"

    sigma: Annotated[float, Gt(0), Le(4)]

    def centre_and_scale(self):
        """(mean, standard deviation) of exp(sigma * normal)."""
        mean = np.exp(self.sigma**2 / 2)
        return mean, mean * self.variation()

    def draw_upright(self, rng, size):
        centre, scale = self.centre_and_scale()
        values = rng.standard_normal(size)
        values *= self.sigma
        np.exp(values, out=values)
        values -= centre
        values /= scale
        return values

    def variation(self):
        """The coefficient of variation, which is all that standard form leaves of centre and scale."""
        return np.sqrt(np.expm1(self.sigma**2))

    def of_normal(self, value):
        """What a standard normal value becomes."""
        # Not by centre and scale: at a small sigma their difference from the value is all lost digits.
        return np.expm1(self.sigma * value - self.sigma**2 / 2) / self.variation()

    def quantile_upright(self, share):
        return self.of_normal(ndtri(share))

    def cumulative_upright(self, value):
        beyond_mean = np.maximum(self.variation() * np.asarray(value, dtype=float), -1.0)
        with np.errstate(divide="ignore"):
            return ndtr(np.log1p(beyond_mean) / self.sigma + self.sigma / 2)

    def true_skewness_upright(self):
        return float(self.variation() ** 3 + 3 * self.variation())

    def true_excess_kurtosis(self):
        # Johnson, Kotz & Balakrishnan's polynomial in exp(sigma^2), written in exp(sigma^2) - 1.
        excess = np.expm1(self.sigma**2)
        return float(excess * (16 + excess * (15 + excess * (6 + excess))))

    def exponential_mean_upright(self, rate):
        # The right tail of a lognormal outgrows every exponential.
        if rate > 0:
            return np.inf
        # Equal steps of the normal value are as precise as any rule for a function this smooth, and unlike
        # shares they reach as far into the tail as a high rate needs.
        normal = np.linspace(-50, 50, 5001)
        terms = np.exp(rate * self.of_normal(normal) - normal**2 / 2)
        return float(terms.sum() * (normal[1] - normal[0]) / np.sqrt(2 * np.pi))
