"""Outliers: rules by which people take values away before they test."""

from dataclasses import dataclass

import numpy as np
from scipy.special import stdtr


@dataclass(frozen=True)
class OutlierRule:
    """A rule that flags values of each group by itself; settings are part of the name."""

    name: str
    cite: str
    draws: bool = False

    def content(self):
        """What makes the rule flag what it flags."""
        return self.name

    def flags(self, deviations):
        """(n, R) bool: which values of one group are flagged, from their deviations from its mean, NaN if missing."""
        return FLAGS[self.name](deviations)


REACH = 1.5
"""Quartile ranges beyond the quartiles from which the box rule flags a value."""

GRUBBS_LEVEL = 0.05
"""Two-sided level at which Grubbs' test takes the most extreme value of a group away."""


def outside_the_box(deviations):
    """(n, R) bool: more than 1.5 quartile ranges beyond a quartile (Tukey 1977, section 2C).

    Quartiles by linear interpolation between order statistics, at (n - 1) / 4 and 3 (n - 1) / 4 from the lowest.
    """
    low, high = quartiles(np.sort(deviations, axis=0), (~np.isnan(deviations)).sum(axis=0))
    # A value on the bound is not beyond it, whatever rounding has done to either.
    reach = REACH * (high - low) * (1 + 1e-9)
    return (deviations < low - reach) | (deviations > high + reach)


def quartiles(ordered, present):
    """((R,) lower, (R,) upper quartile) of (n, R) ordered values of which the first `present` (R,) are there."""
    found = []
    each = np.arange(ordered.shape[1])
    for share in (0.25, 0.75):
        place = np.maximum(share * (present - 1), 0.0)
        below = place.astype(int)
        above = np.minimum(below + 1, np.maximum(present - 1, 0))
        part = place - below
        found.append(ordered[below, each] * (1 - part) + ordered[above, each] * part)
    return tuple(found)


def most_extreme(deviations):
    """(n, R) bool: the value farthest from the mean, where Grubbs' test finds it too far (Grubbs 1969)."""
    present = (~np.isnan(deviations)).sum(axis=0)
    with np.errstate(all="ignore"):
        sd = np.sqrt(np.nansum(deviations**2, axis=0) / (present - 1))
        far = np.where(np.isnan(deviations), -1.0, np.abs(deviations))
        g = far.max(axis=0) / sd
        t2 = present * (present - 2) * g**2 / ((present - 1) ** 2 - present * g**2)
        t = np.where(t2 > 0, np.sqrt(t2), np.where((present - 1) ** 2 <= present * g**2, np.inf, 0.0))
        p = np.minimum(2 * present * stdtr(present - 2.0, -t), 1.0)
    first = np.zeros(deviations.shape, dtype=bool)
    first[np.argmax(far, axis=0), np.arange(deviations.shape[1])] = True
    return first & (p <= GRUBBS_LEVEL) & (present >= 3) & (sd > 0)


FLAGS = {"box_rule": outside_the_box, "grubbs": most_extreme}

RULES = {
    "box_rule": OutlierRule("box_rule", "Tukey, J. W. (1977). Exploratory Data Analysis. Addison-Wesley"),
    "grubbs": OutlierRule(
        "grubbs",
        "Grubbs, F. E. (1969). Procedures for detecting outlying observations in samples. Technometrics 11(1), 1-21",
    ),
}
"""The words of an experiment file."""
