"""Shapes against SciPy's distributions, brought to mean 0 and standard deviation 1."""

import numpy as np
import pytest
from scipy import integrate, stats

from workbench.shapes import SHAPES

SHARES = np.array([1e-8, 1e-4, 0.01, 0.1, 0.3, 0.5, 0.77, 0.95, 0.999, 1 - 1e-6])


def slant(skewness):
    """Azzalini's alpha of a skewness, solved by bisection on SciPy's own moments."""
    low, high = 0.0, 1000.0
    for _ in range(200):
        middle = (low + high) / 2
        low, high = (middle, high) if float(stats.skewnorm(middle).stats("s")) < skewness else (low, middle)
    return low


PAIRS = [
    (SHAPES.make("normal"), stats.norm()),
    (SHAPES.make("lognormal", {"sigma": 0.7}), stats.lognorm(0.7)),
    (SHAPES.make("skew_normal", {"skewness": 0.6}), stats.skewnorm(slant(0.6))),
    (SHAPES.make("student_t", {"df": 4.5}), stats.t(4.5)),
    (SHAPES.make("uniform"), stats.uniform()),
    (SHAPES.make("exponential"), stats.expon()),
    (SHAPES.make("gamma", {"shape": 2.5}), stats.gamma(2.5)),
    (SHAPES.make("laplace"), stats.laplace()),
]

every_pair = pytest.mark.parametrize(("shape", "reference"), PAIRS, ids=[shape.name for shape, _ in PAIRS])


@every_pair
def test_shares_and_quantiles_are_those_of_scipy(shape, reference):
    """scipy.stats 1.17, distribution of the same name; standardised by its own mean and standard deviation."""
    mean, sd = reference.mean(), reference.std()
    values = (reference.ppf(SHARES) - mean) / sd
    assert np.allclose(shape.quantile(SHARES), values, rtol=1e-7, atol=1e-9)
    assert np.allclose(shape.cumulative(values), SHARES, rtol=1e-6, atol=1e-12)


@every_pair
def test_higher_moments_are_those_of_scipy(shape, reference):
    """scipy.stats 1.17: skewness and excess kurtosis."""
    skewness, kurtosis = (float(value) for value in reference.stats("sk"))
    assert shape.true_skewness() == pytest.approx(skewness, rel=1e-7, abs=1e-12)
    assert shape.true_excess_kurtosis() == pytest.approx(kurtosis, rel=1e-7, abs=1e-12)


@every_pair
@pytest.mark.parametrize("rate", [0.1, 0.6])
def test_means_of_exponentials_are_integrals(shape, reference, rate):
    """scipy.integrate.quad of exp(rate * value) times SciPy's density, where the integral exists."""
    if not np.isfinite(shape.exponential_mean(rate)):
        assert shape.name in ("lognormal", "student_t")
        return
    mean, sd = reference.mean(), reference.std()
    low, high = reference.ppf(1e-14), reference.isf(1e-25 if shape.name != "uniform" else 0)
    found, error = integrate.quad(
        lambda x: np.exp(rate * (x - mean) / sd) * reference.pdf(x), low, high, limit=400, epsabs=1e-12
    )
    assert shape.exponential_mean(rate) == pytest.approx(found, rel=1e-7, abs=10 * error)


def test_a_contaminated_normal_is_the_mixture_it_says():
    """The definition: 0.9 N(0, 1) + 0.1 N(0, 25), divided by the root of its variance 3.4."""
    shape = SHAPES.make("contaminated_normal", {"fraction": 0.1, "factor": 5.0})
    values = np.linspace(-6, 6, 25)
    scale = np.sqrt(3.4)
    wanted = 0.9 * stats.norm.cdf(values * scale) + 0.1 * stats.norm.cdf(values * scale / 5)
    assert np.allclose(shape.cumulative(values), wanted, rtol=1e-12)
    assert shape.true_excess_kurtosis() == pytest.approx(3 * (0.9 + 0.1 * 625) / 3.4**2 - 3)
