"""The classical F among normal groups: its rejection rate, whatever their sizes, spreads and means."""

import numpy as np
from scipy.special import betainccinv, betaincinv

from workbench.theory.quadratic_form import positive_share

ROUNDING = 2e-12
"""Error of the rate, as a share of it, by rounding in the critical value; 7e-13 was the most in 3,000 designs."""


def classical_f_rate(sizes, spreads, means, alpha):
    """(rejection rate of the classical F at level alpha, bound on its numerical error) for normal groups.

    sizes, spreads (standard deviations, above 0) and means hold k values, one a group. F exceeds its critical
    value where the sum of squares between groups less a multiple of that within is positive, and this is a
    weighted sum of independent chi-squares (Box 1954, Annals of Mathematical Statistics 25, 290-302).
    """
    sizes, spreads, means = (np.asarray(column, dtype=float) for column in (sizes, spreads, means))
    if alike(spreads) and alike(means):
        return float(alpha), 0.0
    # Equal spreads take the same way: ncfdtr errs by 1e-5 in some versions of SciPy, and tells no error.
    ratio = critical_ratio(len(sizes) - 1, sizes.sum() - len(sizes), alpha)
    terms = zip(between(sizes, spreads, means), within(sizes, spreads, ratio), strict=True)
    rate, error = positive_share(*map(np.concatenate, terms))
    return rate, error + ROUNDING * rate


def alike(values):
    """Whether all values are the same."""
    return bool((values == values[0]).all())


def critical_ratio(above, below, alpha):
    """The ratio of sums of squares, above by below so many degrees of freedom, exceeded with chance alpha.

    With B beta distributed the ratio is B / (1 - B). Each part is got from alpha: 1 - alpha would be rounded.
    """
    return betainccinv(above / 2, below / 2, alpha) / betaincinv(below / 2, above / 2, alpha)


def between(sizes, spreads, means):
    """(weights, degrees, noncentralities), (k - 1,) each, of the sum of squares between groups.

    That sum is the squared length of root(size) * group mean less its part along root(size). Along singular
    vectors its terms are independent; the last of them is the part taken out.
    """
    along = np.sqrt(sizes / sizes.sum())
    left = np.eye(len(sizes)) - np.outer(along, along)
    directions, scales, _ = np.linalg.svd(left * spreads)
    # Means are taken from the first one, so that a far origin costs no digits.
    shifts = np.sqrt(sizes) * (means - means[0]) @ directions
    return scales[:-1] ** 2, np.ones(len(sizes) - 1), (shifts[:-1] / scales[:-1]) ** 2


def within(sizes, spreads, ratio):
    """(weights, degrees, noncentralities) of the sum of squares within groups times -ratio, one a spread."""
    different, which = np.unique(spreads, return_inverse=True)
    return -ratio * different**2, np.bincount(which, sizes - 1), np.zeros(len(different))
