"""What every shape on the shelf promises, tried on every shape there is."""

import numpy as np
import pytest

from workbench.registry import SettingsError
from workbench.shapes import SHAPES, Shape
from workbench.shapes.shape import Asymmetric
from workbench.streams import Lane, stream

EXAMPLES = {
    "lognormal": [{"sigma": 0.4}, {"sigma": 1.0}],
    "skew_normal": [{"skewness": 0.5}, {"skewness": -0.95}],
    "student_t": [{"df": 3.0}, {"df": 7.0}],
    "gamma": [{"shape": 0.5}, {"shape": 9.0}],
    "contaminated_normal": [{"fraction": 0.1, "factor": 5.0}, {"fraction": 0.4, "factor": 0.2}],
}

KEY = "fedcba9876543210"


def examples():
    """Every shape with its example settings, asymmetric ones also mirrored."""
    found = []
    for name in SHAPES.names():
        for settings in EXAMPLES.get(name, [{}]):
            found.append(SHAPES.make(name, settings))
            if issubclass(SHAPES[name], Asymmetric):
                found.append(SHAPES.make(name, settings | {"mirrored": True}))
    return found


every_shape = pytest.mark.parametrize("shape", examples(), ids=str)
SHARES = np.unique(
    np.concatenate([10.0 ** np.arange(-9, -1), np.linspace(0.02, 0.98, 33), 1 - 10.0 ** np.arange(-9, -1)])
)


def draws(shape, number=200_000, chunk=0):
    """Independent values in one row."""
    return shape.draw(stream(17, Lane.DATA, chunk, KEY), (1, number))[0]


def by_panels():
    """(nodes, weights) on (0, 1): Gauss's rule between powers of ten of the share left on either side."""
    edges = np.concatenate([10.0 ** np.arange(-16, 0), [0.5], 1 - 10.0 ** np.arange(-1, -16, -1)])
    x, w = np.polynomial.legendre.leggauss(40)
    half = np.diff(edges)[:, None] / 2
    return (edges[:-1, None] + half * (1 + x)).ravel(), (half * w).ravel()


@every_shape
def test_mean_and_standard_deviation_are_0_and_1(shape):
    """Beyond a share of 1e-16 a tail of Student's t with 3 degrees of freedom still holds 1e-5 of the variance."""
    nodes, weights = by_panels()
    values = shape.quantile(nodes)
    slack = 1e-4 if shape.name == "student_t" else 1e-6
    assert abs((weights * values).sum()) < slack
    assert abs((weights * values**2).sum() - 1) < slack


@every_shape
def test_quantiles_and_shares_are_inverse(shape):
    """Near its end a gamma shape is so steep that neighbouring doubles are a share of 1e-8 apart."""
    found = shape.cumulative(shape.quantile(SHARES))
    assert np.allclose(found, SHARES, rtol=1e-6, atol=3e-8 if shape.name == "gamma" else 1e-12)
    assert np.all(np.diff(shape.quantile(SHARES)) >= 0) and np.all(np.diff(shape.quantile(SHARES[8:-8])) > 0)


@every_shape
def test_a_share_found_by_bisection_is_that_of_the_formula(shape):
    values = shape.quantile(SHARES[8:-8:11])
    assert np.allclose(Shape.cumulative(shape, values), shape.cumulative(values), atol=1e-12)


@every_shape
def test_formulas_agree_with_quadrature(shape):
    """The quantile function holds 16 digits of a share near 1, so heavy tails are cut off a little: hence rtol."""
    if np.isfinite(shape.true_excess_kurtosis()) and shape.name not in ("student_t", "lognormal"):
        assert np.isclose(
            Shape.true_excess_kurtosis(shape), shape.true_excess_kurtosis(), rtol=1e-6, atol=1e-8
        )
        assert np.isclose(Shape.true_skewness(shape), shape.true_skewness(), rtol=1e-8, atol=1e-8)
    assert np.isclose(Shape.trimmed_mean(shape), shape.trimmed_mean(), rtol=1e-9, atol=1e-12)
    assert np.isclose(Shape.median(shape), shape.median(), atol=1e-12)
    rate = 0.25
    if np.isfinite(shape.exponential_mean(rate)):
        assert np.isclose(Shape.exponential_mean(shape, rate), shape.exponential_mean(rate), rtol=1e-7)
    assert shape.exponential_mean(rate) > 1  # Jensen's inequality; infinite counts


@every_shape
def test_draws_follow_the_quantiles(shape):
    """Kolmogorov's distance of 200,000 draws; its 1e-6 point is 2.7 / sqrt(n) (asymptotic law, two-sided)."""
    values = np.sort(draws(shape))
    shares = shape.cumulative(values)
    steps = np.arange(1, values.size + 1) / values.size
    distance = max(np.abs(shares - steps).max(), np.abs(shares - steps + 1 / values.size).max())
    assert distance < 2.7 / np.sqrt(values.size)


@every_shape
def test_draws_have_the_moments(shape):
    values = draws(shape, 400_000, chunk=1)
    assert abs(values.mean()) < 4.5 / np.sqrt(values.size)
    kurtosis = shape.true_excess_kurtosis()
    if np.isfinite(kurtosis):
        error = np.sqrt((kurtosis + 2) / values.size)
        # The variance of heavy tails is far from normal at this number of draws; doubled for them.
        assert abs(values.var() - 1) < (4.5 if kurtosis < 10 else 9) * error


@every_shape
def test_the_same_stream_gives_the_same_values(shape):
    assert np.array_equal(draws(shape, 100), draws(shape, 100))
    assert shape.draw(stream(1, Lane.DATA, 0, KEY), (3, 5)).shape == (3, 5)


@every_shape
def test_the_ends_and_any_array_shape_can_be_asked_for(shape):
    low, high = shape.quantile(0.0), shape.quantile(1.0)
    assert low <= shape.quantile(1e-9) < shape.quantile(1 - 1e-9) <= high
    assert shape.quantile(np.full((2, 3), 0.3)).shape == (2, 3)
    assert np.ndim(shape.quantile(0.3)) == 0
    assert np.all(shape.cumulative(np.array([-1e9, 1e9])) == [0, 1]) or shape.name == "student_t"


@every_shape
def test_symmetric_shapes_are_symmetric_and_mirrored_ones_turned_over(shape):
    halves = np.array([0.001, 0.1, 0.3, 0.5])
    if isinstance(shape, Asymmetric):
        twin = SHAPES.make(shape.name, shape.settings() | {"mirrored": not shape.mirrored})
        assert np.allclose(shape.quantile(halves), -twin.quantile(1 - halves), rtol=1e-9)
        assert np.isclose(shape.true_skewness(), -twin.true_skewness())
        assert np.array_equal(draws(shape, 50), -draws(twin, 50))
    else:
        assert np.allclose(shape.quantile(halves), -shape.quantile(1 - halves), rtol=1e-9, atol=1e-12)
        assert shape.median() == 0.0 and shape.trimmed_mean() == 0.0


@every_shape
def test_settings_go_round(shape):
    again = SHAPES.make(shape.name, shape.settings())
    assert again == shape and again.key() == shape.key()
    told = shape.true_quantities()
    assert told["mean"] == 0 and told["sd"] == 1 and told["geometric_mean"] is None


@pytest.mark.parametrize("name", SHAPES.names())
def test_wrong_settings_are_refused(name):
    good = EXAMPLES.get(name, [{}])[0]
    with pytest.raises(SettingsError, match="unknown setting"):
        SHAPES.make(name, good | {"colour": 1})
    for setting in good:
        for value in (True, "1", float("nan"), float("inf"), -1e9, None, [1.0]):
            with pytest.raises(SettingsError):
                SHAPES.make(name, good | {setting: value})
        with pytest.raises(SettingsError, match="missing"):
            SHAPES.make(name, {other: value for other, value in good.items() if other != setting})
