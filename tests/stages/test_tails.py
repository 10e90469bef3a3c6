"""Upper tails of F and chi-square against SciPy's incomplete beta and gamma functions, and against plain sums."""

from decimal import Decimal, localcontext

import numpy as np
import pytest
from scipy.special import chdtrc, fdtrc

from workbench.groups import Batch
from workbench.tails import anova_tail, chi_square_tail, f_distribution_tail

NUMERATORS = [*range(1, 31), 38, 39]
DENOMINATORS = np.concatenate([np.geomspace(0.3, 1e4, 60), [1, 2, 3, 4, 5, 10, 27, 33.3, 120, 1000]])
F_VALUES = np.concatenate([[0.0], np.geomspace(1e-6, 1e5, 80)])


def exact_f_tail(numerator, denominator, f):
    """The tail area of F for whole numerator 2 m and denominator 2 n as a sum of 50-digit numbers.

    P(F > f) is the probability of fewer than m successes before the n-th failure where a success has the chance
    1 - z, z = b / (b + a f): so it follows from counting, not from the incomplete beta function.
    """
    with localcontext() as context:
        context.prec = 50
        m, n = numerator // 2, denominator // 2
        z = Decimal(denominator) / (Decimal(denominator) + Decimal(numerator) * Decimal(f))
        term = total = z**n
        for j in range(1, m):
            term = term * (1 - z) * (n + j - 1) / j
            total += term
        return float(total)


@pytest.mark.parametrize("numerator", NUMERATORS)
def test_the_f_tail_is_scipys(numerator):
    """scipy.special.fdtrc, over tails down to 1e-290; itself good to about 1e-12 there."""
    denominator, f = (grid.ravel() for grid in np.meshgrid(DENOMINATORS, F_VALUES))
    found, expected = f_distribution_tail(numerator, denominator, f), fdtrc(numerator, denominator, f)
    kept = expected > 1e-290
    np.testing.assert_allclose(found[kept], expected[kept], rtol=1e-12)
    assert np.all(found[~kept] <= 1.01e-290)


@pytest.mark.parametrize("numerator", [2, 4, 8, 24])
@pytest.mark.parametrize("denominator", [2, 6, 30, 200, 2000])
def test_the_f_tail_is_the_sum_worked_in_fifty_digits(numerator, denominator):
    f = np.geomspace(1e-3, 1e3, 13)
    expected = np.array([exact_f_tail(numerator, denominator, value) for value in f])
    kept = expected > 1e-290
    found = f_distribution_tail(numerator, float(denominator), f)
    np.testing.assert_allclose(found[kept], expected[kept], rtol=1e-12)


@pytest.mark.parametrize("df", NUMERATORS)
def test_the_chi_square_tail_is_scipys(df):
    """scipy.special.chdtrc, over tails down to 1e-290."""
    x = np.concatenate([[0.0], np.geomspace(1e-8, 1400, 400)])
    found, expected = chi_square_tail(df, x), chdtrc(df, x)
    kept = expected > 1e-290
    np.testing.assert_allclose(found[kept], expected[kept], rtol=1e-12)
    assert np.all(found[~kept] <= 1.01e-290)


@pytest.mark.parametrize("df", [1, 2, 3, 4, 9, 24, 26])
def test_tails_run_from_one_to_zero_and_never_beyond(df):
    f = np.array([0.0, 1e-300, 1e-20, 1e300, np.inf, np.nan])
    with np.errstate(all="ignore"):
        for tail in (f_distribution_tail(df, 7.5, f), chi_square_tail(df, f)):
            assert tail[0] == 1
            assert np.all((tail[:4] >= 0) & (tail[:4] <= 1))
            assert np.isnan(tail[5])
            assert np.isnan(tail[4]) or tail[4] == 0


def test_undefined_degrees_of_freedom_give_no_tail():
    for numerator in (2, 3):
        assert np.isnan(f_distribution_tail(numerator, np.array([np.nan]), np.array([1.0])))


def test_the_f_ratio_of_a_small_table():
    """Groups 1 2 3 and 2 4 6: between 6, within 2 + 8, so F = 6 / (10 / 4) = 2.4 on 1 and 4 degrees of freedom."""
    p = anova_tail(Batch([[1.0, 2, 3, 2, 4, 6]], (3, 3)))
    np.testing.assert_allclose(p, fdtrc(1, 4, 2.4), rtol=1e-14)


def test_the_f_ratio_of_data_that_vary_only_between_groups_is_undefined():
    with np.errstate(all="ignore"):
        p = anova_tail(Batch([[0.1, 0.1, 0.1, 0.3, 0.3, 0.3]], (3, 3)))
    assert np.isnan(p[0])
