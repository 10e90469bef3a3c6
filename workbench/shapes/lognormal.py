"""The lognormal shape."""

from typing import Annotated

import numpy as np
from annotated_types import Gt, Le
from scipy.special import ndtr, ndtri

from workbench.quadrature import over_shares
from workbench.shapes.shape import SHAPES, Asymmetric


@SHAPES.add
class Lognormal(Asymmetric):
    """Lognormal values, `sigma` the standard deviation of their logarithm."""

    name = "lognormal"
    cite = "Johnson, N. L., Kotz, S. & Balakrishnan, N. (1994). Continuous Univariate Distributions 1, chapter 14"

    sigma: Annotated[float, Gt(0), Le(4)]

    def centre_and_scale(self):
        """(mean, standard deviation) of exp(sigma * normal)."""
        mean = np.exp(self.sigma**2 / 2)
        return mean, mean * np.sqrt(np.expm1(self.sigma**2))

    def draw_upright(self, rng, size):
        centre, scale = self.centre_and_scale()
        values = rng.standard_normal(size)
        values *= self.sigma
        np.exp(values, out=values)
        values -= centre
        values /= scale
        return values

    def quantile_upright(self, share):
        centre, scale = self.centre_and_scale()
        return (np.exp(self.sigma * ndtri(share)) - centre) / scale

    def cumulative_upright(self, value):
        centre, scale = self.centre_and_scale()
        original = centre + scale * np.asarray(value, dtype=float)
        return np.where(original > 0, ndtr(np.log(np.maximum(original, 1e-300)) / self.sigma), 0.0)

    def true_skewness_upright(self):
        w = np.exp(self.sigma**2)
        return float((w + 2) * np.sqrt(w - 1))

    def true_excess_kurtosis(self):
        w = np.exp(self.sigma**2)
        return float(w**4 + 2 * w**3 + 3 * w**2 - 6)

    def exponential_mean_upright(self, rate):
        # The right tail of a lognormal outgrows every exponential.
        if rate > 0:
            return np.inf
        return over_shares(lambda share: np.exp(rate * self.quantile_upright(share)))
