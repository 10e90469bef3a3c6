"""Population: the distribution of one group as numbers, from theory or quadrature."""

from abc import ABC, abstractmethod
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from workbench.quadrature import over_shares, unit_interval

QUANTITIES = ("mean", "median", "sd", "skewness", "excess_kurtosis", "trimmed_mean", "geometric_mean")

TRIM = 0.2
"""Share cut from each end by a trimmed mean."""


class Population(ABC):
    """One group's distribution."""

    @abstractmethod
    def quantile(self, share):
        """The value below which the given share lies, for any array of shares."""

    @abstractmethod
    def cumulative(self, value):
        """The share at or below each value."""

    def below(self, value):
        """The share strictly below each value; equal to `cumulative` where no value has a share of its own."""
        return self.cumulative(value)

    @abstractmethod
    def pieces(self):
        """(values, shares): points and weights whose weighted sums are integrals over the population."""

    @property
    @abstractmethod
    def quantities(self):
        """The true quantities by the names in QUANTITIES; None where one does not exist."""


class Continuous(Population):
    """A distribution of which no single value has a share of its own."""

    def pieces(self):
        nodes, weights = unit_interval()
        return self.quantile(nodes), weights


@dataclass(frozen=True)
class Additive(Continuous):
    """location + spread * shape."""

    shape: object
    location: float
    spread: float

    def quantile(self, share):
        return self.location + self.spread * self.shape.quantile(share)

    def cumulative(self, value):
        return self.shape.cumulative((np.asarray(value, dtype=float) - self.location) / self.spread)

    @cached_property
    def quantities(self):
        standard = self.shape.true_quantities()
        moved = {
            name: self.location + self.spread * standard[name] for name in ("mean", "median", "trimmed_mean")
        }
        moved |= {"sd": self.spread} | {name: standard[name] for name in ("skewness", "excess_kurtosis")}
        return moved | {"geometric_mean": self.geometric_mean()}

    def geometric_mean(self):
        """The geometric mean; None where values of 0 or less can occur."""
        lowest = self.quantile(0.0)
        if not lowest > 0:
            return None
        return float(np.exp(over_shares(lambda share: np.log(self.quantile(share)))))


@dataclass(frozen=True)
class Multiplicative(Continuous):
    """location * exp(spread * shape)."""

    shape: object
    location: float
    spread: float

    def quantile(self, share):
        with np.errstate(over="ignore"):  # far in a heavy tail a value may be too large for a double
            return self.location * np.exp(self.spread * self.shape.quantile(share))

    def cumulative(self, value):
        value = np.asarray(value, dtype=float)
        log = np.log(np.where(value > 0, value, 1.0) / self.location) / self.spread
        return np.where(value > 0, self.shape.cumulative(log), 0.0)

    @cached_property
    def quantities(self):
        raw = [self.shape.exponential_mean(power * self.spread) for power in (1, 2, 3, 4)]
        moments = standardised(raw)
        for name in ("mean", "sd"):
            moments[name] = None if moments[name] is None else self.location * moments[name]
        return moments | {
            "median": float(self.quantile(0.5)),
            "trimmed_mean": over_shares(self.quantile, TRIM, 1 - TRIM) / (1 - 2 * TRIM),
            "geometric_mean": self.location,
        }


def standardised(raw):
    """Mean, sd, skewness, excess_kurtosis from the means of the first four powers; None where infinite."""
    m1, m2, m3, m4 = raw
    found = dict.fromkeys(("mean", "sd", "skewness", "excess_kurtosis"))
    if np.isfinite(m1):
        found["mean"] = float(m1)
    if np.isfinite(m2):
        variance = m2 - m1**2
        found["sd"] = float(np.sqrt(variance))
        if np.isfinite(m3) and variance > 0:
            found["skewness"] = float((m3 - 3 * m1 * m2 + 2 * m1**3) / variance**1.5)
        if np.isfinite(m4) and variance > 0:
            fourth = m4 - 4 * m1 * m3 + 6 * m1**2 * m2 - 3 * m1**4
            found["excess_kurtosis"] = float(fourth / variance**2 - 3)
    return found


def superiority(one, other):
    """P(X < Y) + P(X = Y) / 2 for X from one population and Y from the other."""
    values, shares = other.pieces()
    return float((shares * (one.below(values) + one.cumulative(values)) / 2).sum() / shares.sum())
