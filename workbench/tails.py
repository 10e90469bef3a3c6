"""Upper tails of F and chi-square, and the F ratio of analysis of variance, shared by the tests built on them."""

import numpy as np
from scipy.special import chdtrc, erfc, fdtrc

MOST_TERMS = 12
"""The closed form for even numerator degrees of freedom is used up to so many terms."""


def f_distribution_tail(numerator, denominator, f):
    """(R,) upper tail areas of F with whole numerator and any denominator degrees of freedom.

    For an even numerator 2 m the tail is z^(b/2) times the sum over j < m of (b/2) … (b/2 + j - 1) (1 - z)^j / j!,
    z = b / (b + 2 m f) (Johnson, Kotz & Balakrishnan 1995, Continuous Univariate Distributions 2, section 27.4):
    all terms are positive, and it takes a fraction of the time of the incomplete beta function.
    """
    terms = numerator // 2
    if numerator % 2 or terms > MOST_TERMS:
        return fdtrc(numerator, denominator, f)
    half = 0.5 * denominator
    odds = f * terms / half
    tail = np.exp(-half * np.log1p(odds))
    if terms == 1:
        return tail
    rest = odds / (1 + odds)
    term = total = np.ones_like(odds)
    for j in range(1, terms):
        term = term * rest * ((half + (j - 1)) / j)
        total = total + term
    return tail * total


def chi_square_tail(df, x):
    """(R,) upper tail areas of chi-square with whole degrees of freedom.

    With h = x / 2 the tail is exp(-h) times the sum over j < m of h^j / j! for an even number 2 m, and erfc(sqrt(h))
    plus exp(-h) times the sum over j <= m of h^(j - 1/2) / Gamma(j + 1/2) for an odd one 2 m + 1 (Johnson, Kotz &
    Balakrishnan 1994, Continuous Univariate Distributions 1, section 18.3): all terms are positive.
    """
    terms, odd = divmod(df, 2)
    if terms > MOST_TERMS:
        return chdtrc(df, x)
    half = 0.5 * x
    term = np.exp(-half) * (2 * np.sqrt(half / np.pi) if odd else 1.0)
    tail = erfc(np.sqrt(half)) if odd else 0.0
    for j in range(terms):
        tail = tail + term
        term = term * half / (j + 1.5 if odd else j + 1)
    return tail


def anova_tail(batch):
    """(R,) upper tail areas of the classical F (Fisher 1925); NaN where nothing varies within the groups."""
    within, freedom = batch.shift_free(within_groups)
    return f_distribution_tail(batch.groups - 1, freedom, batch.sum_between / within)


def within_groups(batch):
    """((R,) mean square within the groups times k - 1, NaN where it is 0; (R,) its degrees of freedom)."""
    freedom = batch.total - batch.groups
    within = batch.sum_within * ((batch.groups - 1) / freedom)
    return np.where(within > 0, within, np.nan), freedom
