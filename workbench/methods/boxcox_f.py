"""The classical F after a power that the data choose."""

import numpy as np

from workbench.groups import Batch
from workbench.methods.log_f import all_positive, logarithms
from workbench.methods.method import METHODS, Method
from workbench.tails import anova_tail

WIDEST = 2.0
"""Powers from minus this to this are tried."""

STEPS = 11
"""Golden sections before a parabola through the last points; together they leave the power uncertain by 1e-4."""

GOLDEN = (np.sqrt(5) - 1) / 2

NO_POWER = 1e-9
"""Powers this small are taken as 0, the logarithm."""


@METHODS.add
class BoxcoxF(Method):
    """Classical F after a Box–Cox power of which the likelihood within groups is largest."""

    name = "boxcox_f"
    label = "F after a Box–Cox power"
    short = "Box–Cox F"
    hypothesis = "means after a power chosen from the data"
    assumes = "positive values that some power makes normal with equal spreads"
    undefined_when = "a value is 0 or less, or no value differs from another within its group"
    cite = (
        "Box, G. E. P. & Cox, D. R. (1964). An analysis of transformations. Journal of the Royal Statistical "
        "Society B 26(2), 211-252"
    )

    def kernel(self, batch, rng):
        positive = batch.shared(all_positive)
        logs = np.where(positive, batch.shared(logarithms).columns, 0.0)
        logs -= np.nansum(logs, axis=0) / (~np.isnan(logs)).sum(axis=0)
        powers = likeliest(logs, batch.designed)
        transformed = Batch.of_columns(powered(logs, powers), batch.designed)
        varies = positive & np.broadcast_to(batch.sum_within > 0, positive.shape)
        return np.where(varies, anova_tail(transformed), np.nan)


def powered(logs, powers):
    """(N, R) values raised to powers (R,), as ((x / g)^power - 1) / power, from the logarithms of x / g."""
    small = np.abs(powers) < NO_POWER
    safe = np.where(small, 1.0, powers)
    return np.where(small, logs, np.expm1(safe * logs) / safe)


def likeliest(logs, sizes):
    """(R,) powers of the least variation within groups, by golden sections (Box & Cox 1964, section 3)."""
    low, high = np.full((2, logs.shape[1]), WIDEST)
    low = -low
    left, right = high - GOLDEN * (high - low), low + GOLDEN * (high - low)
    at_left, at_right = within(logs, left, sizes), within(logs, right, sizes)
    for _ in range(STEPS):
        lower = at_left < at_right
        low, high = np.where(lower, low, left), np.where(lower, right, high)
        fresh = np.where(lower, high - GOLDEN * (high - low), low + GOLDEN * (high - low))
        there = within(logs, fresh, sizes)
        left, right = np.where(lower, fresh, right), np.where(lower, left, fresh)
        at_left, at_right = np.where(lower, there, at_right), np.where(lower, at_left, there)
    middle = (left + right) / 2
    least = vertex(left, middle, at_left, within(logs, middle, sizes), at_right)
    return np.clip(least, low, high)


def vertex(left, middle, at_left, at_middle, at_right):
    """(R,) where the parabola through three points at equal distances is least; the middle where it does not bend."""
    bend = at_left - 2 * at_middle + at_right
    bend = np.where(bend > 0, bend, np.inf)
    return middle + (middle - left) * (at_left - at_right) / (2 * bend)


def within(logs, powers, sizes):
    """(R,) sums of squares within groups of values raised to the given powers."""
    return Batch.of_columns(powered(logs, powers), sizes).sum_within
