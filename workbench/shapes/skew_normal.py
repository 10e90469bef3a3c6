"""The skew normal shape."""

from typing import Annotated

import numpy as np
from annotated_types import Gt, Lt
from scipy.special import log_ndtr, ndtr, owens_t

from workbench.quadrature import inverted
from workbench.shapes.shape import SHAPES, Asymmetric

LARGEST = 0.995
"""A skew normal population has a skewness below 0.99527."""


@SHAPES.add
class SkewNormal(Asymmetric):
    """Skew normal values of the given skewness, between -0.995 and 0.995.

    Shares are right to about 2e-16, so a quantile far out on the thinner side is less precise than others.
    """

    name = "skew_normal"
    cite = (
        "Azzalini, A. (1985). A class of distributions which includes the normal ones. Scandinavian Journal of "
        "Statistics 12(2), 171-178"
    )

    skewness: Annotated[float, Gt(-LARGEST), Lt(LARGEST)]

    def slant(self):
        """Azzalini's delta, the correlation with the hidden normal value, between -1 and 1."""
        third = np.cbrt(2 * self.skewness / (4 - np.pi))
        return third / np.sqrt((1 + third**2) * 2 / np.pi)

    def centre_and_scale(self):
        """(mean, standard deviation) of the skew normal that is not brought to standard form."""
        mean = np.sqrt(2 / np.pi) * self.slant()
        return mean, np.sqrt(1 - mean**2)

    def draw_upright(self, rng, size):
        delta, (centre, scale) = self.slant(), self.centre_and_scale()
        values = rng.standard_normal(size)
        np.abs(values, out=values)
        values *= delta
        apart = rng.standard_normal(size)
        apart *= np.sqrt(1 - delta**2)
        values += apart
        values -= centre
        values /= scale
        return values

    def quantile_upright(self, share):
        return inverted(self.cumulative_upright, share, -40.0, 40.0)

    def cumulative_upright(self, value):
        delta, (centre, scale) = self.slant(), self.centre_and_scale()
        original = centre + scale * np.asarray(value, dtype=float)
        alpha = delta / np.sqrt(1 - delta**2)
        return np.clip(ndtr(original) - 2 * owens_t(original, alpha), 0.0, 1.0)

    def true_skewness_upright(self):
        return float(self.skewness)

    def true_excess_kurtosis(self):
        centre, scale = self.centre_and_scale()
        return float(2 * (np.pi - 3) * (centre / scale) ** 4)

    def exponential_mean_upright(self, rate):
        delta, (centre, scale) = self.slant(), self.centre_and_scale()
        t = rate / scale
        # One exponent, because a huge factor may meet a tiny one.
        return float(2 * np.exp(t**2 / 2 - t * centre + log_ndtr(delta * t)))
