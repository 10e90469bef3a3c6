"""Shapes against SciPy's distributions and integrals, brought to mean 0 and standard deviation 1."""

from functools import partial
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import integrate, optimize, stats

from workbench.shapes import SHAPES

SHARES = np.array([1e-12, 1e-8, 1e-4, 0.01, 0.1, 0.3, 0.5, 0.77, 0.95, 0.999, 1 - 1e-6, 1 - 1e-10])


def skew_normal(skewness):
    """SciPy's skew normal of a skewness: its slant solved for on SciPy's own moments."""

    def surplus(slant):
        return float(stats.skewnorm.stats(slant, moments="s")) - skewness

    return stats.skewnorm(optimize.brentq(surplus, -300, 300, xtol=1e-13))


REFERENCES = {
    "normal": stats.norm,
    "lognormal": stats.lognorm,
    "skew_normal": skew_normal,
    "student_t": stats.t,
    "uniform": stats.uniform,
    "exponential": stats.expon,
    "gamma": stats.gamma,
    "laplace": stats.laplace,
}
"""The distribution of scipy.stats that goes by a shape's settings; a contaminated normal has none."""

SETTINGS = {
    "lognormal": {"sigma": (0.01, 4.0)},
    "skew_normal": {"skewness": (-0.99, 0.99)},
    "student_t": {"df": (2.01, 1e6)},
    "gamma": {"shape": (0.01, 1e6)},
}
"""Ranges of settings tried, by name of the shape: those allowed, less ends at which SciPy loses digits."""


def between(low, high):
    """Numbers of a range; of every order of magnitude alike where it spans several."""
    if low <= 0 or high / low < 100:
        return st.floats(low, high)
    return st.floats(np.log(low), np.log(high)).map(lambda log: float(np.clip(np.exp(log), low, high)))


def pairs(name, **narrowed):
    """Strategy of (shape, SciPy's distribution), some settings narrowed to another range."""
    ranges = SETTINGS.get(name, {}) | narrowed
    values = st.fixed_dictionaries({setting: between(*ends) for setting, ends in ranges.items()})
    return values.map(lambda chosen: (SHAPES.make(name, chosen), REFERENCES[name](*chosen.values())))


def standardised(reference, values):
    """Values of SciPy's distribution less its mean, in units of its standard deviation."""
    return (values - reference.mean()) / reference.std()


def rounding(reference):
    """What standardising costs: the rounding of the mean, a few times over, in standard deviations."""
    return 1e-15 * (1 + abs(reference.mean()) / reference.std())


every_reference = pytest.mark.parametrize("name", REFERENCES)
some = partial(settings, derandomize=True, deadline=None, database=None)


def test_every_shape_has_a_reference():
    assert set(SHAPES.names()) == {*REFERENCES, "contaminated_normal"}


@every_reference
@some(max_examples=30)
@given(data=st.data())
def test_quantiles_are_those_of_scipy(name, data):
    """scipy.stats 1.17, `ppf`; its skew normal is inverted by a root finder on shares right to 1e-11."""
    shape, reference = data.draw(pairs(name))
    shares = SHARES[2:-2] if name == "skew_normal" else SHARES
    tolerance = 1e-6 if name == "skew_normal" else 1e-11
    wanted = standardised(reference, reference.ppf(shares))
    np.testing.assert_allclose(shape.quantile(shares), wanted, rtol=tolerance, atol=rounding(reference))


@every_reference
@some(max_examples=30)
@given(data=st.data())
def test_shares_are_those_of_scipy(name, data):
    """scipy.stats 1.17, `cdf` on a grid and at rounded quantiles; its skew normal is right to 1e-10."""
    shape, reference = data.draw(pairs(name))
    values = np.concatenate([np.linspace(-5, 5, 21), np.round(shape.quantile(SHARES), 3)])
    wanted = reference.cdf(reference.mean() + reference.std() * values)
    # Close to a lower end at which the density is infinite, neighbouring doubles are whole shares apart.
    clear = np.abs(values - shape.quantile(0.0)) > 1e-3
    assert clear.sum() > 10
    tolerance = 1e-10 if name == "skew_normal" else 1e-12
    np.testing.assert_allclose(shape.cumulative(values)[clear], wanted[clear], rtol=0, atol=tolerance)


@every_reference
@some(max_examples=30)
@given(data=st.data())
def test_ends_are_those_of_scipy(name, data):
    """scipy.stats 1.17, `support`; its lognormal loses digits of the standard deviation, hence 1e-11."""
    shape, reference = data.draw(pairs(name))
    wanted = [standardised(reference, end) for end in reference.support()]
    np.testing.assert_allclose([shape.quantile(0.0), shape.quantile(1.0)], wanted, rtol=1e-11)


@every_reference
@some(max_examples=30)
@given(data=st.data())
def test_skewness_and_excess_kurtosis_are_those_of_scipy(name, data):
    """scipy.stats 1.17, `stats`, NaN and infinite alike; its lognormal loses digits, hence 1e-12."""
    shape, reference = data.draw(pairs(name))
    wanted = [float(moment) for moment in reference.stats("sk")]
    found = [shape.true_skewness(), shape.true_excess_kurtosis()]
    np.testing.assert_allclose(found, wanted, rtol=1e-9, atol=1e-12)


@every_reference
@some(max_examples=30)
@given(data=st.data())
def test_medians_are_those_of_scipy(name, data):
    """scipy.stats 1.17, `median`."""
    shape, reference = data.draw(pairs(name))
    wanted = standardised(reference, reference.median())
    np.testing.assert_allclose(shape.median(), wanted, rtol=1e-10, atol=1e-10)


def mean_of_exponential(reference, rate):
    """Mean of exp(rate * standardised value), by scipy.integrate.quad between many edges of the density."""
    mean, sd = reference.mean(), reference.std()
    low, high = (standardised(reference, end) for end in reference.support())
    inner = standardised(
        reference, reference.ppf([1e-12, 1e-6, 1e-3, 0.1, 0.5, 0.9, 0.999, 1 - 1e-6, 1 - 1e-12])
    )
    edges = np.concatenate([inner, [-40, -10, -5, -2, 0, 2, 5, 10, 40, 200], [low, high]])
    edges = np.unique(edges[(edges >= low) & (edges <= high)])

    def integrand(value):
        return sd * np.exp(rate * value + reference.logpdf(mean + sd * value))

    return sum(integrate.quad(integrand, *panel, epsabs=1e-13, epsrel=1e-10)[0] for panel in pairwise(edges))


NARROWED = {"gamma": {"shape": (0.7, 1e4)}, "lognormal": {"sigma": (0.05, 1.5)}}
"""Steeper densities than these are beyond quad."""

RATES_END = {"exponential": 1.0, "laplace": 2**0.5, "gamma": 0.7**0.5, "lognormal": 0.0, "student_t": 0.0}
"""Rates from which on exp(rate * value) has no mean, for gamma the least among the settings tried."""


@pytest.mark.parametrize("name", [name for name in REFERENCES if RATES_END.get(name, 1) > 0])
@some(max_examples=12)
@given(data=st.data())
def test_exponential_means_are_integrals_of_scipys_density(name, data):
    """scipy.integrate.quad 1.17 over exp(rate * value) and the density of scipy.stats."""
    shape, reference = data.draw(pairs(name, **NARROWED.get(name, {})))
    rate = data.draw(st.floats(0.01, 0.6 * RATES_END.get(name, 2.0)))
    assert shape.exponential_mean(rate) == pytest.approx(mean_of_exponential(reference, rate), rel=1e-8)


@pytest.mark.parametrize("name", ["lognormal", "exponential", "gamma", "skew_normal"])
@some(max_examples=12)
@given(data=st.data())
def test_exponential_means_of_mirrored_shapes_are_integrals_at_the_opposite_rate(name, data):
    """scipy.integrate.quad 1.17 over exp(-rate * value) and the density of scipy.stats."""
    shape, reference = data.draw(pairs(name, **NARROWED.get(name, {})))
    rate = data.draw(st.floats(0.01, 2.0))
    mirrored = SHAPES.make(name, shape.settings() | {"mirrored": True})
    assert mirrored.exponential_mean(rate) == pytest.approx(mean_of_exponential(reference, -rate), rel=1e-8)


@pytest.mark.parametrize("rate", [0.01, 0.8, 20.0])
@pytest.mark.parametrize("sigma", [0.3, 2.0, 4.0])
def test_exponential_means_of_a_mirrored_lognormal_are_integrals_over_the_normal(sigma, rate):
    """scipy.integrate.quad 1.17 over exp(-rate * (exp(sigma z) - mean) / sd) and the normal density of z."""
    reference = stats.lognorm(sigma)

    def integrand(z):
        return stats.norm.pdf(z) * np.exp(-rate * standardised(reference, np.exp(sigma * z)))

    wanted, _ = integrate.quad(
        integrand, -12, 12, limit=500, epsabs=1e-13, epsrel=1e-11, points=[-3, 0, 1, 2, 3, 4, 5]
    )
    shape = SHAPES.make("lognormal", {"sigma": sigma, "mirrored": True})
    assert shape.exponential_mean(rate) == pytest.approx(wanted, rel=1e-9)


@pytest.mark.parametrize(
    ("name", "chosen", "end"),
    [
        ("exponential", {}, 1.0),
        ("laplace", {}, 2**0.5),
        ("gamma", {"shape": 9.0}, 3.0),
        ("gamma", {"shape": 0.25}, 0.5),
        ("lognormal", {"sigma": 0.05}, 0.0),
        ("student_t", {"df": 1e6}, 0.0),
    ],
)
def test_exponential_means_end_where_the_tail_outweighs_them(name, chosen, end):
    """Johnson, Kotz & Balakrishnan, the moment generating functions of chapters 14, 17, 19, 24 and 28."""
    shape = SHAPES.make(name, chosen)
    assert np.isinf(shape.exponential_mean(max(end, 1e-9)))
    assert end == 0 or np.isfinite(shape.exponential_mean(end - 1e-9))


@pytest.mark.parametrize("value", [-2.5, -1.3, -0.4, 0.0, 0.9, 2.2])
@pytest.mark.parametrize("skewness", [-0.994, -0.5, 0.3, 0.9, 0.994])
def test_shares_of_a_skew_normal_are_integrals_of_its_density(skewness, value):
    """Azzalini (1985), the density 2 phi(x) Phi(slant x), by scipy.integrate.quad 1.17, to 1e-13."""
    shape, reference = SHAPES.make("skew_normal", {"skewness": skewness}), skew_normal(skewness)
    end = reference.mean() + reference.std() * value
    edges = np.unique(np.clip([-40, -6, -3, -1, -0.1, 0, 0.1, 1, 3, 40], -40, end))

    def density(x):
        return 2 * stats.norm.pdf(x) * stats.norm.cdf(reference.args[0] * x)

    wanted = sum(integrate.quad(density, *panel, epsabs=1e-15, epsrel=1e-13)[0] for panel in pairwise(edges))
    assert shape.cumulative(value) == pytest.approx(wanted, rel=0, abs=1e-13)


def test_a_skew_normal_of_strong_slant_has_exponential_means_at_high_rates():
    """Azzalini (1985), 2 exp(t^2 / 2) Phi(delta t), as logarithms: a huge factor meets a tiny one."""
    shape = SHAPES.make("skew_normal", {"skewness": -0.9})
    centre, scale = shape.centre_and_scale()
    t = 40 / scale
    log = np.log(2) + t * t / 2 + stats.norm.logcdf(shape.slant() * t) - t * centre
    assert t * t / 2 > 710 and stats.norm.cdf(shape.slant() * t) < 1e-300
    assert np.log(shape.exponential_mean(40.0)) == pytest.approx(log, rel=1e-12)


@pytest.mark.parametrize("sigma", [1e-100, 1e-12, 1e-8])
def test_a_lognormal_of_tiny_sigma_is_normal_to_first_order(sigma):
    """(exp(sigma z) - mean) / sd = z + sigma (z^2 - 1) / 2; skewness 3 sigma, excess kurtosis 16 sigma^2."""
    shape, z = SHAPES.make("lognormal", {"sigma": sigma}), stats.norm.ppf(SHARES)
    np.testing.assert_allclose(shape.quantile(SHARES), z + sigma * (z**2 - 1) / 2, rtol=0, atol=1e-14)
    np.testing.assert_allclose(shape.cumulative(shape.quantile(SHARES)), SHARES, rtol=1e-12)
    assert shape.true_skewness() == pytest.approx(3 * sigma, rel=1e-12)
    assert shape.true_excess_kurtosis() == pytest.approx(16 * sigma**2, rel=1e-12)


mixtures = st.fixed_dictionaries({"fraction": st.floats(0.001, 0.999), "factor": between(0.001, 1000.0)})


def weights_of_mixture(fraction, factor):
    """(fraction, factor, standard deviation of the mixture in units of the clean part's)."""
    return fraction, factor, np.sqrt(1 - fraction + fraction * factor**2)


@some(max_examples=40)
@given(mixtures)
def test_a_contaminated_normal_is_the_mixture_it_says(chosen):
    """The definition: (1 - fraction) N(0, 1) + fraction N(0, factor^2), in its own standard deviations."""
    shape = SHAPES.make("contaminated_normal", chosen)
    fraction, factor, sd = weights_of_mixture(**chosen)

    def share(value):
        clean, wide = stats.norm.cdf(sd * value), stats.norm.cdf(sd * value / factor)
        return (1 - fraction) * clean + fraction * wide

    values = np.array([-9, -2, -0.7, -0.01, 0, 0.3, 1, 6])
    np.testing.assert_allclose(shape.cumulative(values), share(values), rtol=1e-11, atol=1e-300)
    for one in (1e-9, 0.02, 0.4, 0.8):
        wanted = optimize.brentq(
            lambda value, one=one: share(value) - one, -50_000, 50_000, xtol=1e-14, rtol=1e-14
        )
        assert shape.quantile(one) == pytest.approx(wanted, rel=1e-6, abs=1e-12)


@some(max_examples=40)
@given(mixtures, st.floats(0.01, 1.5))
def test_moments_of_a_contaminated_normal_are_those_of_its_parts_weighed(chosen, rate):
    """scipy.stats 1.17, the fourth moment of each normal part; its exponential mean is a lognormal's mean."""
    shape = SHAPES.make("contaminated_normal", chosen)
    fraction, factor, sd = weights_of_mixture(**chosen)
    parts = [(1 - fraction, stats.norm(0, 1 / sd)), (fraction, stats.norm(0, factor / sd))]
    fourth = sum(weight * part.moment(4) for weight, part in parts)
    assert shape.true_excess_kurtosis() == pytest.approx(fourth - 3, rel=1e-11, abs=1e-11)
    if rate * max(1, factor) / sd < 30:
        wanted = sum(weight * stats.lognorm.mean(rate * part.std()) for weight, part in parts)
        assert shape.exponential_mean(rate) == pytest.approx(wanted, rel=1e-11)
