"""Intervals of rates and of paired differences against exact numbers and simulation."""

import numpy as np
import pytest
from scipy.stats import binomtest

from workbench.measures import paired, rate
from workbench.streams import Lane, stream

RNG_KEY = "0" * 16


@pytest.mark.parametrize(
    ("x", "n", "error"), [(50, 1000, 0.05), (0, 1000, 0.05), (1000, 1000, 0.01), (5000, 100_000, 1e-4)]
)
def test_limits_of_a_rate_are_clopper_pearson(x, n, error):
    """scipy.stats.binomtest(...).proportion_ci(method="exact"), SciPy 1.17."""
    wanted = binomtest(x, n).proportion_ci(confidence_level=1 - error, method="exact")
    assert np.allclose(rate.clopper_pearson(x, n, error), wanted, rtol=1e-10, atol=1e-15)


def test_limits_of_a_rate_at_published_points():
    """Worked out once by an independent program with the incomplete beta function (own numbers, seven digits)."""
    lower, upper = rate.clopper_pearson(
        [50, 50, 5000], [1000, 1000, 100_000], np.array([0.05, 0.05 / 360, 0.05 / 360])
    )
    assert np.allclose(lower, [0.0373354, 0.0277341, 0.0474141], atol=5e-8)
    assert np.allclose(upper, [0.0653905, 0.0814504, 0.0526762], atol=5e-8)


def test_limits_of_a_difference_at_a_worked_point():
    """30 and 10 discordant pairs of 1,000: worked out once by an independent program (own numbers)."""
    assert np.allclose(paired.limits(30, 10, 1000, 0.05), (-0.0012047, 0.0447554), atol=5e-8)


def test_limits_of_a_difference_turn_over_with_the_methods():
    lower, upper = paired.limits([30, 5, 0], [10, 80, 0], 1000, 0.01)
    swapped = paired.limits([10, 80, 0], [30, 5, 0], 1000, 0.01)
    assert np.allclose(lower, -swapped[1]) and np.allclose(upper, -swapped[0])


def test_standard_errors_are_those_of_the_definition():
    """The variance of a mean of 0s and 1s, and of -1s, 0s and 1s, worked out from the values themselves."""
    values = np.repeat([1.0, 0.0], [30, 970])
    assert np.isclose(rate.monte_carlo_error(0.03, 1000), values.std() / np.sqrt(1000))
    pairs = np.repeat([1.0, -1.0, 0.0], [30, 10, 960])
    assert np.isclose(paired.monte_carlo_error(30, 10, 1000), pairs.std() / np.sqrt(1000))


@pytest.mark.heavy
@pytest.mark.parametrize("rates", [(0.05, 0.02), (0.004, 0.003), (0.3, 0.25)])
def test_limits_of_a_difference_miss_no_more_often_than_stated(rates):
    """Counts drawn from known rates of discordant pairs: misses against the binomial chance of the stated error."""
    rng = stream(4, Lane.DATA, 0, RNG_KEY)
    n, tables, error = 3000, 4000, 0.05
    counts = rng.multinomial(n, [*rates, 1 - sum(rates)], size=tables)
    lower, upper = paired.limits(counts[:, 0], counts[:, 1], n, error)
    difference = rates[0] - rates[1]
    missed = ((lower > difference) | (upper < difference)).mean()
    assert missed <= error + 4.5 * np.sqrt(error * (1 - error) / tables)
