"""Rounding to multiples of a unit."""

from dataclasses import dataclass
from functools import cached_property
from typing import Annotated

import numpy as np
from annotated_types import Gt

from workbench.disturbances.disturbance import DISTURBANCES, Disturbance
from workbench.population import TRIM, Population, standardised

MOST_CELLS = 20_000
"""Beyond so many multiples within the bulk of a population, rounding in the tails is left to Sheppard's rule."""


NEGLIGIBLE = 1e-6
"""Share of values that rounding may bring to 0 without taking the geometric mean away: one in a million."""


@DISTURBANCES.add
class Round(Disturbance):
    """Values are recorded to the nearest multiple of `to`."""

    name = "round"
    cite = (
        "Sheppard, W. F. (1898). On the calculation of the most probable values of frequency-constants. "
        "Proceedings of the London Mathematical Society 29, 353-380"
    )

    to: Annotated[float, Gt(0)]

    def apply(self, columns, sizes, rng):
        return nearest(columns, self.to)

    def recorded(self, population):
        return Rounded(population, self.to)


def nearest(values, unit):
    """The nearest multiples of the unit; halves go to the even multiple."""
    if unit < 1 and (1 / unit).is_integer():
        # 0.1 is no exact binary number, ten is: so 18.3 comes out as the number written 18.3.
        return np.round(values * (1 / unit)) / (1 / unit)
    return np.round(values / unit) * unit


@dataclass(frozen=True)
class Rounded(Population):
    """A population whose values were rounded to multiples of `to`."""

    of: Population
    to: float

    def quantile(self, share):
        return nearest(self.of.quantile(share), self.to)

    def cumulative(self, value):
        return self.of.cumulative((np.floor(np.asarray(value) / self.to + 1e-9) + 0.5) * self.to)

    def below(self, value):
        return self.of.below((np.ceil(np.asarray(value) / self.to - 1e-9) - 0.5) * self.to)

    @cached_property
    def cells(self):
        """(multiples, their shares) between the outermost 1e-13 of the population; None where they are too many."""
        if isinstance(self.of, Rounded) and self.of.cells is not None:
            values, shares = self.of.cells
            multiples, place = np.unique(nearest(values, self.to), return_inverse=True)
            return multiples, np.bincount(place, weights=shares)
        first, last = (np.round(self.of.quantile(share) / self.to) for share in (1e-13, 1 - 1e-13))
        if not last - first < MOST_CELLS:
            return None
        multiples = np.arange(first, last + 1)
        upper = self.of.cumulative((multiples + 0.5) * self.to)
        lower = self.of.cumulative((multiples - 0.5) * self.to)
        return multiples * self.to, upper - lower

    def pieces(self):
        return self.of.pieces() if self.cells is None else self.cells

    @cached_property
    def quantities(self):
        before = self.of.quantities
        if self.cells is None:
            return before | self.by_sheppard(before)
        values, shares = self.cells
        centre = values[np.argmax(shares)]
        raw = [(shares * (values - centre) ** power).sum() / shares.sum() for power in (1, 2, 3, 4)]
        found = standardised(raw)
        found["mean"] = float(found["mean"] + centre)
        exists = {name: value if before[name] is not None else None for name, value in found.items()}
        return exists | {
            "median": float(self.quantile(0.5)),
            "trimmed_mean": self.trimmed_mean(),
            "geometric_mean": self.geometric_mean(),
        }

    def by_sheppard(self, before):
        """The quantities that rounding to a unit far below the spread changes: it adds to² / 12 to the variance."""
        sd = None if before["sd"] is None else float(np.sqrt(before["sd"] ** 2 + self.to**2 / 12))
        found = {"sd": sd, "median": float(self.quantile(0.5))}
        return found if self.above_zero else found | {"geometric_mean": None}

    def trimmed_mean(self):
        """Mean of the rounded values between the quantiles at 0.2 and 0.8."""
        values, shares = self.cells
        upper = np.clip(np.cumsum(shares), TRIM, 1 - TRIM)
        kept = np.diff(upper, prepend=TRIM)
        return float((kept * values).sum() / (1 - 2 * TRIM))

    def geometric_mean(self):
        """The geometric mean of the values above 0; None where others are not as good as impossible."""
        if not self.above_zero:
            return None
        values, shares = self.cells
        some = values > 0
        return float(np.exp((shares[some] * np.log(values[some])).sum() / shares[some].sum()))

    @property
    def above_zero(self):
        """Whether values of 0 or less cannot occur before rounding, and are as good as impossible after it."""
        return bool(self.of.quantile(0.0) >= 0 and self.cumulative(0.0) <= NEGLIGIBLE)
