"""The contaminated normal shape."""

from typing import Annotated

import numpy as np
from annotated_types import Ge, Gt, Le, Lt
from scipy.special import ndtr

from workbench.quadrature import inverted
from workbench.shapes.shape import SHAPES, Shape


@SHAPES.add
class ContaminatedNormal(Shape):
    """Normal values of which a share `fraction` has `factor` times the standard deviation of the others.

    A factor below 0.001 or above 1000 would leave the narrower part a point in all but name.
    """

    name = "contaminated_normal"
    cite = (
        "Tukey, J. W. (1960). A survey of sampling from contaminated distributions. In Contributions to "
        "Probability and Statistics, 448-485. Stanford University Press"
    )

    fraction: Annotated[float, Gt(0), Lt(1)]
    factor: Annotated[float, Ge(0.001), Le(1000)]

    def parts(self):
        """((2,) shares, (2,) standard deviations) of the clean and the contaminated values, brought to variance 1."""
        shares = np.array([1 - self.fraction, self.fraction])
        spreads = np.array([1.0, self.factor])
        return shares, spreads / np.sqrt((shares * spreads**2).sum())

    def draw(self, rng, size):
        values = rng.standard_normal(size)
        clean, wide = self.parts()[1]
        values *= np.where(rng.random(size) < self.fraction, wide, clean)
        return values

    def quantile(self, share):
        # The lower half is inverted, where shares are precise, and turned over for the upper one.
        share = np.asarray(share, dtype=float)
        tail = np.minimum(share, 1 - share)
        lower = np.where(tail == 0.5, 0.0, inverted(self.cumulative, tail, -40 * max(self.parts()[1]), 0.0))
        return np.where(share <= 0.5, lower, -lower)

    def cumulative(self, value):
        shares, spreads = self.parts()
        value = np.asarray(value, dtype=float)
        return shares[0] * ndtr(value / spreads[0]) + shares[1] * ndtr(value / spreads[1])

    def median(self):
        return 0.0

    def trimmed_mean(self):
        return 0.0

    def true_skewness(self):
        return 0.0

    def true_excess_kurtosis(self):
        shares, spreads = self.parts()
        return float(3 * (shares * spreads**4).sum() - 3)

    @np.errstate(over="ignore")
    def exponential_mean(self, rate):
        shares, spreads = self.parts()
        return float((shares * np.exp((rate * spreads) ** 2 / 2)).sum())
