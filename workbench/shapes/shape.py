"""What a shape is."""

from abc import ABC, abstractmethod

import numpy as np

from workbench.population import TRIM
from workbench.quadrature import over_shares
from workbench.registry import Part, Shelf, record

SHAPES = Shelf("shape")


class Shape(Part, ABC):
    """A population in standard form: mean 0, standard deviation 1.

    What is not overridden follows from the quantile function by quadrature.
    """

    @abstractmethod
    def draw(self, rng, size):
        """Independent values of the given array size."""

    @abstractmethod
    def quantile(self, share):
        """The value below which the given share of the population lies; shares from 0 to 1, any array."""

    def cumulative(self, value):
        """The share of the population at or below each value, found by bisection of the quantile function."""
        value = np.asarray(value, dtype=float)
        low, high = np.zeros(value.shape), np.ones(value.shape)
        for _ in range(60):
            middle = (low + high) / 2
            below = self.quantile(middle) <= value
            low, high = np.where(below, middle, low), np.where(below, high, middle)
        return (low + high) / 2

    def median(self):
        """The median."""
        return float(self.quantile(0.5))

    def trimmed_mean(self):
        """The mean of what is left when 20 % are cut from each end."""
        return over_shares(self.quantile, TRIM, 1 - TRIM) / (1 - 2 * TRIM)

    def true_skewness(self):
        """Third standardised moment; NaN where it does not exist."""
        return over_shares(lambda share: self.quantile(share) ** 3)

    def true_excess_kurtosis(self):
        """Fourth standardised moment less 3; infinite or NaN where it is not finite or does not exist."""
        return over_shares(lambda share: self.quantile(share) ** 4) - 3

    @np.errstate(over="ignore")
    def exponential_mean(self, rate):
        """Mean of exp(rate * value), rate > 0; infinite where there is none or a double cannot hold it.

        The mean, and with 2, 3 and 4 times the rate the higher moments, on the multiplicative scale.
        """
        ends = 1 - np.array([1e-6, 1e-9, 1e-12])
        weight = rate * self.quantile(ends) + np.log1p(-ends)
        if not np.all(np.diff(weight) < 0):
            return np.inf
        return over_shares(lambda share: np.exp(rate * self.quantile(share)))

    def true_quantities(self):
        """Mean, median, sd, skewness, excess_kurtosis, trimmed_mean, geometric_mean (None: does not exist)."""
        skewness, kurtosis = self.true_skewness(), self.true_excess_kurtosis()
        return {
            "mean": 0.0,
            "median": self.median(),
            "sd": 1.0,
            "skewness": skewness if np.isfinite(skewness) else None,
            "excess_kurtosis": kurtosis if np.isfinite(kurtosis) else None,
            "trimmed_mean": self.trimmed_mean(),
            "geometric_mean": None,
        }


@record
class Asymmetric(Shape, ABC):
    """A shape with a longer tail on the right, or with `mirrored` on the left.

    A file describes the upright form; turning it over happens here.
    """

    mirrored: bool = False

    @abstractmethod
    def draw_upright(self, rng, size):
        """Like draw, of the form that is not mirrored."""

    @abstractmethod
    def quantile_upright(self, share):
        """Like quantile, of the form that is not mirrored."""

    @abstractmethod
    def cumulative_upright(self, value):
        """Like cumulative, of the form that is not mirrored."""

    @abstractmethod
    def true_skewness_upright(self):
        """Like true_skewness, of the form that is not mirrored."""

    @abstractmethod
    def exponential_mean_upright(self, rate):
        """Like exponential_mean, of the form that is not mirrored; rate may be negative."""

    def draw(self, rng, size):
        values = self.draw_upright(rng, size)
        return np.negative(values, out=values) if self.mirrored else values

    def quantile(self, share):
        if self.mirrored:
            return -self.quantile_upright(1 - np.asarray(share, dtype=float))
        return self.quantile_upright(share)

    def cumulative(self, value):
        if self.mirrored:
            return 1 - self.cumulative_upright(-np.asarray(value, dtype=float))
        return self.cumulative_upright(value)

    def true_skewness(self):
        return -self.true_skewness_upright() if self.mirrored else self.true_skewness_upright()

    @np.errstate(over="ignore")
    def exponential_mean(self, rate):
        return self.exponential_mean_upright(-rate if self.mirrored else rate)
