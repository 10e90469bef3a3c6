"""Student's t as a shape, symmetric with tails of any weight."""

from typing import Annotated

import numpy as np
from annotated_types import Gt, Le
from scipy.special import stdtr, stdtrit

from workbench.shapes.shape import SHAPES, Shape


@SHAPES.add
class StudentT(Shape):
    """Values of Student's t with `df` degrees of freedom, above 2 so that there is a standard deviation.

    A million degrees of freedom, the most allowed, differ from the normal shape by less than a run can tell.
    """

    name = "student_t"
    cite = "Johnson, N. L., Kotz, S. & Balakrishnan, N. (1995). Continuous Univariate Distributions 2, chapter 28"

    df: Annotated[float, Gt(2), Le(1e6)]

    def scale(self):
        """The factor that brings t to standard deviation 1."""
        return np.sqrt((self.df - 2) / self.df)

    def draw(self, rng, size):
        values = rng.standard_t(self.df, size)
        values *= self.scale()
        return values

    def quantile(self, share):
        share = np.asarray(share, dtype=float)
        tail = np.minimum(share, 1 - share)
        lower = np.where(tail > 0, stdtrit(self.df, np.maximum(tail, 1e-300)), -np.inf)
        return self.scale() * np.where(share < 0.5, lower, np.where(share > 0.5, -lower, 0.0))

    def cumulative(self, value):
        return stdtr(self.df, np.asarray(value, dtype=float) / self.scale())

    def median(self):
        return 0.0

    def trimmed_mean(self):
        return 0.0

    def true_skewness(self):
        return 0.0 if self.df > 3 else np.nan

    def true_excess_kurtosis(self):
        return 6 / (self.df - 4) if self.df > 4 else np.inf

    def exponential_mean(self, rate):
        # A power of the value outgrows what the tail leaves, so exp of it does too.
        return np.inf
