"""The Shapiro–Wilk test of the residuals."""

import numpy as np
from scipy.special import ndtr, ndtri

from workbench.checks.check import CHECKS, Check, by_size


@CHECKS.add
class ShapiroResiduals(Check):
    """Shapiro–Wilk test of normality on all residuals from the group means."""

    name = "shapiro_residuals"
    hypothesis = "normality"
    assumes = "independent residuals, of which those of one group are not quite"
    undefined_when = "all residuals are 0, there are fewer than 3 values, or more than 5,000"
    cite = (
        "Royston, P. (1995). Remark AS R94: a remark on algorithm AS 181, the W-test for normality. Applied "
        "Statistics 44(4), 547-551"
    )

    def kernel(self, batch, rng):
        return batch.shift_free(residual_normality)


def residual_normality(batch):
    """(R,) p-values of the residuals."""
    return normality(batch.deviations, batch.total, batch.sum_within == 0)


def normality(columns, sizes, constant):
    """(R,) p-values of (n, R) values, of which (R,) or (1,) are present; NaN where they are constant."""
    ordered = columns.T.copy()
    ordered.sort(axis=1)  # NaN is sorted to the end

    def judge(rows, size):
        return shapiro_wilk(ordered[rows, :size])

    p = by_size(sizes, len(ordered), judge, least=3, most=5000)
    return np.where(constant, np.nan, p)


def shapiro_wilk(ordered):
    """(R,) p-values of W for R ordered samples of n values, (R, n), n from 3 to 5,000 (Royston 1995)."""
    n = ordered.shape[1]
    away = ordered - ordered.mean(axis=1, keepdims=True)
    squares = (away**2).sum(axis=1)
    # 1 - W, kept as a difference of sums of squares, holds its digits where W is near 1. No matrix product:
    # its order of adding up may change with the number of threads.
    lack = np.maximum((squares - (away * weights(n)).sum(axis=1) ** 2) / squares, 0.0)
    if n == 3:
        w = np.maximum(1 - lack, 0.75)
        return np.clip(6 / np.pi * (np.arcsin(np.sqrt(w)) - np.arcsin(np.sqrt(0.75))), 0.0, 1.0)
    y, mean, sd = normalised(np.log(lack), n)
    return ndtr(-(y - mean) / sd)


def normalised(y, n):
    """(transformed ln(1 - W), its mean, its standard deviation) under normality."""
    if n <= 11:
        ceiling = 0.459 * n - 2.273
        y = np.where(y >= ceiling, np.inf, -np.log(np.maximum(ceiling - y, 1e-300)))
        mean = np.polyval([-0.0006714, 0.025054, -0.39978, 0.5440], n)
        return y, mean, np.exp(np.polyval([-0.0020322, 0.062767, -0.77857, 1.3822], n))
    log_n = np.log(n)
    mean = np.polyval([0.0038915, -0.083751, -0.31082, -1.5861], log_n)
    return y, mean, np.exp(np.polyval([0.0030302, -0.082676, -0.4803], log_n))


def weights(n):
    """(n,) weights of the order statistics (Royston 1995)."""
    if n == 3:
        return np.array([-np.sqrt(0.5), 0.0, np.sqrt(0.5)])
    scores = ndtri((np.arange(1, n + 1) - 0.375) / (n + 0.25))
    q, u = scores @ scores, 1 / np.sqrt(n)
    a = np.empty(n)
    last = scores[-1] / np.sqrt(q) + np.polyval([-2.706056, 4.434685, -2.071190, -0.147981, 0.221157, 0], u)
    if n <= 5:
        a[1:-1] = scores[1:-1] / np.sqrt((q - 2 * scores[-1] ** 2) / (1 - 2 * last**2))
    else:
        second = scores[-2] / np.sqrt(q) + np.polyval(
            [-3.582633, 5.682633, -1.752461, -0.293762, 0.042981, 0], u
        )
        left = q - 2 * scores[-1] ** 2 - 2 * scores[-2] ** 2
        a[2:-2] = scores[2:-2] / np.sqrt(left / (1 - 2 * last**2 - 2 * second**2))
        a[-2], a[1] = second, -second
    a[-1], a[0] = last, -last
    return a
