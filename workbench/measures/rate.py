"""The share of replications that reject, with its standard error and exact interval."""

import numpy as np
from scipy.special import betaincinv


def monte_carlo_error(rate, replications):
    """Monte Carlo standard error of a rate: sqrt(rate (1 - rate) / R)."""
    return np.sqrt(rate * (1 - rate) / replications)


def clopper_pearson(rejections, replications, error):
    """(lower, upper) limits of a rate that miss it with chance `error` at most (Clopper & Pearson 1934)."""
    x, n = np.broadcast_arrays(np.asarray(rejections, dtype=float), np.asarray(replications, dtype=float))
    with np.errstate(invalid="ignore"):
        lower = np.where(x > 0, betaincinv(np.maximum(x, 1), n - x + 1, error / 2), 0.0)
        upper = np.where(x < n, betaincinv(x + 1, np.maximum(n - x, 1), 1 - error / 2), 1.0)
    return lower, upper
