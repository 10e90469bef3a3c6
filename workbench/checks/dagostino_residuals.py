"""D'Agostino's test of the residuals."""

import numpy as np

from workbench.checks.check import CHECKS, Check
from workbench.tails import chi_square_tail


@CHECKS.add
class DagostinoResiduals(Check):
    """D'Agostino–Pearson test of normality on skewness and kurtosis of all residuals from the group means."""

    name = "dagostino_residuals"
    hypothesis = "normality"
    assumes = "independent residuals, of which those of one group are not quite"
    undefined_when = "all residuals are 0, or there are fewer than 8 values"
    cite = (
        "D'Agostino, R. B. & Pearson, E. S. (1973). Tests for departure from normality. Empirical results for the "
        "distributions of b2 and √b1. Biometrika 60(3), 613-622; D'Agostino, R. B., Belanger, A. & D'Agostino, "
        "R. B. Jr (1990). A suggestion for using powerful and informative tests of normality. The American "
        "Statistician 44(4), 316-321"
    )

    def kernel(self, batch, rng):
        return batch.shift_free(residual_moments)


def residual_moments(batch):
    """(R,) p-values of skewness and kurtosis together, by chi-square with two degrees of freedom."""
    n = np.where(batch.total >= 8, batch.total, np.nan)
    second, third, fourth = (power_sum / n for power_sum in power_sums(batch))
    second = np.where(batch.sum_within > 0, second, np.nan)
    z_skewness = normal_skewness(third / (second * np.sqrt(second)), n)
    z_kurtosis = normal_kurtosis(fourth / second**2, n)
    return chi_square_tail(2, z_skewness**2 + z_kurtosis**2)


def power_sums(batch):
    """(3, R) sums of second, third and fourth powers of the residuals; a missing one adds nothing."""
    away = batch.deviations
    if batch.total.min() < len(away):
        away = np.where(np.isnan(batch.columns), 0.0, away)
    squares = away * away
    return squares.sum(axis=0), (squares * away).sum(axis=0), (squares * squares).sum(axis=0)


def normal_skewness(skewness, n):
    """(R,) skewnesses of n normal values, made standard normal (D'Agostino 1970, Biometrika 57, 679-681)."""
    y = skewness * np.sqrt((n + 1) * (n + 3) / (6 * (n - 2)))
    fourth = 3 * (n**2 + 27 * n - 70) * (n + 1) * (n + 3) / ((n - 2) * (n + 5) * (n + 7) * (n + 9))
    w_squared = np.sqrt(2 * (fourth - 1)) - 1
    return np.arcsinh(y * np.sqrt((w_squared - 1) / 2)) / np.sqrt(np.log(w_squared) / 2)


def normal_kurtosis(kurtosis, n):
    """(R,) kurtoses of n normal values, made standard normal (Anscombe & Glynn 1983, Biometrika 70, 227-234)."""
    variance = 24 * n * (n - 2) * (n - 3) / ((n + 1) ** 2 * (n + 3) * (n + 5))
    x = (kurtosis - 3 * (n - 1) / (n + 1)) / np.sqrt(variance)
    skewness = (
        6
        * (n**2 - 5 * n + 2)
        / ((n + 7) * (n + 9))
        * np.sqrt(6 * (n + 3) * (n + 5) / (n * (n - 2) * (n - 3)))
    )
    a = 6 + 8 / skewness * (2 / skewness + np.sqrt(1 + 4 / skewness**2))
    root = np.cbrt((1 - 2 / a) / (1 + x * np.sqrt(2 / (a - 4))))
    return (1 - 2 / (9 * a) - root) / np.sqrt(2 / (9 * a))
