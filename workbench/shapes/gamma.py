"""The gamma shape."""

from typing import Annotated

import numpy as np
from annotated_types import Ge, Le
from scipy.special import gammainc, gammaincinv

from workbench.shapes.shape import SHAPES, Asymmetric


@SHAPES.add
class Gamma(Asymmetric):
    """Gamma values of the given shape parameter, from 0.01 to a million.

    At 0.01 two thirds of all values are already too close to the lower end to be told apart by double
    numbers; at a million the shape differs from the normal by less than a run can tell.
    """

    name = "gamma"
    cite = "Johnson, N. L., Kotz, S. & Balakrishnan, N. (1994). Continuous Univariate Distributions 1, chapter 17"

    shape: Annotated[float, Ge(0.01), Le(1e6)]

    def draw_upright(self, rng, size):
        values = rng.standard_gamma(self.shape, size)
        values -= self.shape
        values /= np.sqrt(self.shape)
        return values

    def quantile_upright(self, share):
        return (gammaincinv(self.shape, share) - self.shape) / np.sqrt(self.shape)

    def cumulative_upright(self, value):
        original = self.shape + np.sqrt(self.shape) * np.asarray(value, dtype=float)
        return gammainc(self.shape, np.maximum(original, 0))

    def true_skewness_upright(self):
        return float(2 / np.sqrt(self.shape))

    def true_excess_kurtosis(self):
        return 6 / self.shape

    def exponential_mean_upright(self, rate):
        share = rate / np.sqrt(self.shape)
        if share >= 1:
            return np.inf
        return float(np.exp(-self.shape * (share + np.log1p(-share))))
