"""The Shapiro–Wilk test of each group."""

from typing import Literal

import numpy as np

from workbench.checks.check import CHECKS, Check
from workbench.checks.shapiro_residuals import normality
from workbench.moments import group_places


@CHECKS.add
class ShapiroEachGroup(Check):
    """Shapiro–Wilk test of normality in each group, of which the smallest p-value counts."""

    name = "shapiro_each_group"
    hypothesis = "normality"
    assumes = "independent values"
    undefined_when = (
        "all values of some group are equal, or a group has fewer than 3 values, or more than 5,000"
    )
    cite = (
        "Royston, P. (1995). Remark AS R94: a remark on algorithm AS 181, the W-test for normality. Applied "
        "Statistics 44(4), 547-551; Holm, S. (1979). A simple sequentially rejective multiple test procedure. "
        "Scandinavian Journal of Statistics 6(2), 65-70"
    )

    adjust: Literal["none", "holm"] = "none"
    """Whether the p-values are taken as they are, or adjusted for there being one of each group."""

    def kernel(self, batch, rng):
        smallest = batch.shift_free(smallest_p)
        # Holm multiplies the smallest of k p-values by k.
        return np.minimum(batch.groups * smallest, 1.0) if self.adjust == "holm" else smallest


def smallest_p(batch):
    """(R,) smallest p-value of the groups; NaN where some group has none."""
    each = [
        normality(batch.deviations[place], batch.sizes[:, group], batch.variances[:, group] == 0)
        for group, place in enumerate(group_places(batch.designed))
    ]
    return np.minimum.reduce(each)
