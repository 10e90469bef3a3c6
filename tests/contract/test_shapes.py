"""What every shape on the shelf promises, tried on every shape there is."""

from dataclasses import fields

import numpy as np
import pytest

from workbench.quadrature import over_shares
from workbench.registry import SettingsError
from workbench.shapes import SHAPES, Shape
from workbench.shapes.shape import Asymmetric
from workbench.streams import Lane, stream

EXAMPLES = {
    "lognormal": [{"sigma": 1e-3}, {"sigma": 0.4}, {"sigma": 1.0}],
    "skew_normal": [{"skewness": 0.0}, {"skewness": 0.5}, {"skewness": -0.95}],
    "student_t": [{"df": 2.5}, {"df": 3.5}, {"df": 9.0}, {"df": 1e6}],
    "gamma": [{"shape": 0.5}, {"shape": 9.0}, {"shape": 1e4}],
    "contaminated_normal": [{"fraction": 0.1, "factor": 5.0}, {"fraction": 0.4, "factor": 0.2}],
}
"""Settings to try, by name; a shape that needs none is tried without."""

SHARES = np.unique(np.concatenate([10.0 ** np.arange(-15, -1), np.arange(0.02, 0.99, 0.03)]))
SHARES = np.concatenate([SHARES, 1 - SHARES[13::-1]])

DRAWS = 200_000


def needed(name):
    """The settings without which a shape cannot be made."""
    return {field.name for field in fields(SHAPES[name])} - {"mirrored"}


def examples_of(name):
    """A shape with each of its example settings, if it is asymmetric also mirrored."""
    made = [SHAPES.make(name, settings) for settings in EXAMPLES.get(name, [{}])]
    if issubclass(SHAPES[name], Asymmetric):
        made += [SHAPES.make(name, shape.settings() | {"mirrored": True}) for shape in made]
    return made


TRIED = [
    shape for name in SHAPES.names() if name in EXAMPLES or not needed(name) for shape in examples_of(name)
]

every_name = pytest.mark.parametrize("name", SHAPES.names())
every_shape = pytest.mark.parametrize("shape", TRIED, ids=str)
every_asymmetric_shape = pytest.mark.parametrize(
    "shape", [shape for shape in TRIED if isinstance(shape, Asymmetric)], ids=str
)
every_symmetric_shape = pytest.mark.parametrize(
    "shape", [shape for shape in TRIED if not isinstance(shape, Asymmetric)], ids=str
)


def drawn(shape, size=(1, DRAWS), chunk=0):
    """Values of a shape at one address."""
    return shape.draw(stream(17, Lane.DATA, chunk, "fedcba9876543210"), size)


def slack(function):
    """How far the integral of function(share) by quadrature may be off.

    The outermost shares a double tells from 0 and 1 are 1e-16 away. What lies beyond is missed: in a heavy
    tail some hundred times the function's value there, times 1e-16. The sum of 481 terms loses 1e-13 besides.
    """
    ends = np.abs(function(np.array([1e-16, 1 - 1.2e-16])))
    return 1e-14 * ends.max() + 1e-12


def agrees(quadrature, formula, function):
    """Whether a formula is what one sweep over all shares found, which a kink within throws off by 1e-9."""
    return abs(quadrature - formula) <= slack(function) + 1e-9 * (1 + abs(formula))


@every_name
def test_there_are_examples_of_every_shape(name):
    assert name in EXAMPLES or not needed(name), "add settings to EXAMPLES, so that this shape is tried"


@every_shape
@pytest.mark.parametrize(("power", "moment"), [(1, 0.0), (2, 1.0)], ids=["mean", "variance"])
def test_the_mean_is_0_and_the_standard_deviation_1(shape, power, moment):
    """In two halves: the kink of a symmetric shape lies at an end, where the rule is not thrown off."""

    def function(share):
        return shape.quantile(share) ** power

    found = over_shares(function, 0.0, 0.5) + over_shares(function, 0.5, 1.0)
    assert abs(found - moment) <= slack(function)


@every_shape
def test_a_quantile_has_the_share_it_was_asked_for(shape):
    """A step of 1e-12 either way encloses it, also where neighbouring doubles are whole shares apart.

    Shares themselves are right to a few units of 1e-16, the rounding of 1.
    """
    found = shape.quantile(SHARES)
    step = 1e-12 * (1 + np.abs(found))
    assert np.all(shape.cumulative(found - step) <= SHARES + 4e-16)
    assert np.all(shape.cumulative(found + step) >= SHARES - 4e-16)


@every_shape
def test_a_value_is_the_quantile_of_its_share(shape):
    """Where shares have all their digits: within the middle 99.8 %, and a density of at least 1e-4 there."""
    values = shape.quantile(np.linspace(0.001, 0.999, 67))
    assert np.allclose(shape.quantile(shape.cumulative(values)), values, rtol=1e-11, atol=1e-11)


@every_shape
def test_quantiles_rise_with_the_share(shape):
    assert np.all(np.diff(shape.quantile(SHARES)) >= 0)
    assert np.all(np.diff(shape.quantile(SHARES[(SHARES > 0.01) & (SHARES < 0.99)])) > 0)


@every_shape
def test_a_share_found_by_bisection_is_that_of_the_formula(shape):
    """Right to 1e-12, because a value is right to 1e-15 and no density here is above 1000."""
    values = np.concatenate([shape.quantile(np.array([0.02, 0.3, 0.5, 0.8, 0.99])), [-1e3, 0.0, 1e3]])
    assert np.allclose(Shape.cumulative(shape, values), shape.cumulative(values), rtol=0, atol=1e-12)


@every_shape
def test_skewness_is_what_quadrature_finds(shape):
    found = shape.true_skewness()
    if np.isfinite(found):
        assert agrees(Shape.true_skewness(shape), found, lambda share: shape.quantile(share) ** 3)


@every_shape
def test_excess_kurtosis_is_what_quadrature_finds(shape):
    found = shape.true_excess_kurtosis()
    if np.isfinite(found):
        assert agrees(Shape.true_excess_kurtosis(shape), found, lambda share: shape.quantile(share) ** 4)


@every_shape
def test_median_and_trimmed_mean_are_what_quadrature_finds(shape):
    """No tail takes part, so nothing is missed: 1e-12 for rounding."""
    assert abs(Shape.median(shape) - shape.median()) < 1e-12
    assert abs(Shape.trimmed_mean(shape) - shape.trimmed_mean()) < 1e-12


@every_shape
@pytest.mark.parametrize("rate", [1e-3, 0.25, 0.9])
def test_exponential_mean_is_what_quadrature_finds(shape, rate):
    found = shape.exponential_mean(rate)
    assert found > 1, "the mean of a convex function is above the function of the mean; infinite counts"
    if np.isfinite(found):
        quadrature = Shape.exponential_mean(shape, rate)
        assert agrees(quadrature, found, lambda share: np.exp(rate * shape.quantile(share)))


@every_shape
def test_exponential_means_too_large_for_a_double_are_infinite_without_a_warning(shape):
    found = np.array([shape.exponential_mean(rate) for rate in (0.5, 5.0, 30.0, 300.0, 3000.0)])
    assert not np.isnan(found).any()
    assert np.all(found[1:] >= found[:-1])


@every_shape
def test_draws_follow_the_quantiles(shape):
    """Kolmogorov's distance; its 1e-4 point is 2.23 / sqrt(n) (asymptotic law, two-sided)."""
    shares = shape.cumulative(np.sort(drawn(shape)[0]))
    steps = np.arange(DRAWS + 1) / DRAWS
    distance = max((shares - steps[:-1]).max(), (steps[1:] - shares).max())
    assert distance < 2.23 / np.sqrt(DRAWS)


@every_shape
def test_draws_have_the_mean_and_the_standard_deviation(shape):
    """4.5 Monte Carlo standard errors, from the true fourth moment where there is one."""
    values = drawn(shape, chunk=1)
    assert abs(values.mean()) < 4.5 / np.sqrt(DRAWS)
    kurtosis = shape.true_excess_kurtosis()
    if np.isfinite(kurtosis):
        assert abs(values.var() - 1) < 4.5 * np.sqrt((kurtosis + 2) / DRAWS)


@every_shape
def test_rows_and_columns_of_a_draw_are_independent(shape):
    """Correlations of shares between neighbours, 4.5 standard errors; a row drawn twice would show."""
    values = drawn(shape, (50, 1000), chunk=2)
    assert values.shape == (50, 1000) and values.dtype == float
    shares = 12**0.5 * (shape.cumulative(values) - 0.5)
    for one, other in ((shares[1:], shares[:-1]), (shares[:, 1:], shares[:, :-1])):
        assert abs((one * other).mean()) < 4.5 / np.sqrt(one.size)


@every_shape
def test_the_same_stream_gives_the_same_values(shape):
    assert np.array_equal(drawn(shape, (6, 50)), drawn(shape, (6, 50)))
    assert not np.array_equal(drawn(shape, (6, 50)), drawn(shape, (6, 50), chunk=1))


@every_shape
def test_nothing_lies_beyond_the_ends(shape):
    low, high = shape.quantile(0.0), shape.quantile(1.0)
    values = drawn(shape)
    assert low <= values.min() and values.max() <= high
    assert shape.cumulative(low) == 0 and shape.cumulative(high) == 1
    assert shape.cumulative(-np.inf) == 0 and shape.cumulative(np.inf) == 1
    for end, outside, share in ((low, low - 1, 0), (high, high + 1, 1)):
        assert np.isinf(end) or shape.cumulative(outside) == share


@every_shape
def test_only_shares_of_0_and_1_may_have_infinite_quantiles(shape):
    assert np.isfinite(shape.quantile(np.array([1e-15, 0.5, 1 - 1e-15]))).all()


@every_shape
@pytest.mark.parametrize("function", ["quantile", "cumulative"])
def test_arrays_of_any_form_are_answered_like_their_elements(shape, function):
    asked = np.array([[0.0, 0.1, 0.5], [0.7, 0.999, 1.0]])
    told = getattr(shape, function)
    found = told(asked)
    assert found.shape == (2, 3) and told(np.empty((0, 4))).shape == (0, 4)
    assert [[float(told(float(one))) for one in row] for row in asked] == found.tolist()
    assert np.array_equal(asked, [[0.0, 0.1, 0.5], [0.7, 0.999, 1.0]]), "what was handed in is left alone"


@every_shape
def test_whole_numbers_are_numbers(shape):
    assert shape.quantile(0) == shape.quantile(0.0) and shape.quantile(1) == shape.quantile(1.0)
    assert shape.cumulative(2) == shape.cumulative(2.0)


@every_symmetric_shape
def test_symmetric_shapes_are_symmetric_to_the_bit(shape):
    """At shares of which 1 less the share is a double too."""
    shares = np.arange(1, 4096) / 4096
    assert np.array_equal(shape.quantile(1 - shares), -shape.quantile(shares))
    assert shape.quantile(0.0) == -shape.quantile(1.0)
    assert shape.median() == 0 and shape.trimmed_mean() == 0
    assert shape.true_skewness() == 0 or np.isnan(shape.true_skewness())


@every_asymmetric_shape
def test_a_mirrored_shape_is_the_upright_one_turned_over(shape):
    twin = SHAPES.make(shape.name, shape.settings() | {"mirrored": not shape.mirrored})
    shares = np.arange(4097) / 4096
    values = np.linspace(-4, 4, 33)
    assert np.array_equal(twin.quantile(shares), -shape.quantile(1 - shares))
    assert np.allclose(twin.cumulative(values), 1 - shape.cumulative(-values), rtol=0, atol=4e-16)
    assert np.array_equal(drawn(twin, (3, 50)), -drawn(shape, (3, 50)))
    assert twin.true_skewness() == -shape.true_skewness()
    assert twin.true_excess_kurtosis() == shape.true_excess_kurtosis()
    assert twin.key() != shape.key()


@every_shape
def test_settings_go_round(shape):
    again = SHAPES.make(shape.name, shape.settings())
    assert again == shape and again.key() == shape.key()


@every_shape
def test_true_quantities_are_those_of_the_formulas(shape):
    told = shape.true_quantities()
    assert told["mean"] == 0 and told["sd"] == 1 and told["geometric_mean"] is None
    assert told["median"] == shape.median() and told["trimmed_mean"] == shape.trimmed_mean()
    for name, value in (
        ("skewness", shape.true_skewness()),
        ("excess_kurtosis", shape.true_excess_kurtosis()),
    ):
        assert told[name] == value if np.isfinite(value) else told[name] is None


def settings_one_wrong(name):
    """(setting, good settings of a shape with that one setting changed to what no shape takes)."""
    good = examples_of(name)[0].settings()
    beyond = (-1e300, 1e300, float("nan"), float("inf"), float("-inf"), True)
    for setting in needed(name):
        yield from ((setting, good | {setting: value}) for value in (*beyond, "1", None, [1.0], {}))
    if issubclass(SHAPES[name], Asymmetric):
        yield from (("mirrored", good | {"mirrored": value}) for value in (1, 0.0, "true", None))


@every_name
def test_wrong_settings_are_refused_by_their_name(name):
    for setting, settings in settings_one_wrong(name):
        with pytest.raises(SettingsError) as refusal:
            SHAPES.make(name, settings)
        assert [path for path, _ in refusal.value.problems] == [(setting,)]


@every_name
def test_unknown_and_missing_settings_are_refused(name):
    good = examples_of(name)[0].settings()
    with pytest.raises(SettingsError, match="unknown setting"):
        SHAPES.make(name, good | {"colour": 1.0})
    for setting in needed(name):
        with pytest.raises(SettingsError, match="missing"):
            SHAPES.make(name, {other: value for other, value in good.items() if other != setting})
    if not issubclass(SHAPES[name], Asymmetric):
        with pytest.raises(SettingsError, match="unknown setting"):
            SHAPES.make(name, good | {"mirrored": True})


@every_name
def test_a_whole_number_and_the_same_with_a_point_are_one_key(name):
    for shape in examples_of(name):
        whole = {word: int(value) if value % 1 == 0 else value for word, value in shape.settings().items()}
        assert (
            SHAPES.make(name, whole | {"mirrored": True} if "mirrored" in whole else whole).key()
            == shape.key()
        )
