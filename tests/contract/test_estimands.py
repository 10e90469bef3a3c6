"""What every estimand promises: when a shape is aligned on it, the compared quantity is 0, or 1 as a factor."""

import numpy as np
import pytest

from workbench.estimands import ESTIMANDS
from workbench.population import QUANTITIES, Additive, Multiplicative
from workbench.shapes import SHAPES

SHAPES_TRIED = [
    SHAPES.make("normal"),
    SHAPES.make("lognormal", {"sigma": 0.8, "mirrored": True}),
    SHAPES.make("skew_normal", {"skewness": 0.7}),
    SHAPES.make("gamma", {"shape": 4.0}),
    SHAPES.make("exponential"),
    SHAPES.make("laplace"),
    SHAPES.make("uniform"),
]


def mean_of(function, low=0.0, high=1.0):
    """Mean of function(share) over shares, by Gauss's rule between powers of ten of the share left on either side."""
    edges = np.concatenate([10.0 ** np.arange(-16, 0), [0.5], 1 - 10.0 ** np.arange(-1, -16, -1)])
    edges = np.unique(np.clip(np.concatenate([edges, [low, high]]), max(low, 1e-16), min(high, 1 - 1e-15)))
    x, w = np.polynomial.legendre.leggauss(40)
    half = np.diff(edges)[:, None] / 2
    return (half * w * function(edges[:-1, None] + half * (1 + x))).sum() / (high - low)


def found_by_hand(population, quantity):
    """A quantity of a population, by its definition."""
    return {
        "mean": lambda: mean_of(population.quantile),
        "median": lambda: population.quantile(0.5),
        "trimmed_mean": lambda: mean_of(population.quantile, 0.2, 0.8),
        "geometric_mean": lambda: np.exp(mean_of(lambda share: np.log(population.quantile(share)))),
    }[quantity]()


@pytest.mark.parametrize("name", ESTIMANDS.names())
@pytest.mark.parametrize("shape", SHAPES_TRIED, ids=str)
def test_shapes_are_aligned_on_what_is_compared(name, shape):
    """Beyond a share of 1e-15 a tail of exp(value / 2) of the Laplace shape holds some 1e-9 of the mean."""
    estimand = ESTIMANDS.make(name)
    assert estimand.quantity in QUANTITIES
    zero = estimand.additive(shape)
    if np.isfinite(zero):
        assert abs(found_by_hand(Additive(shape, -2.0 * zero, 2.0), estimand.quantity)) < 1e-7
    one = estimand.multiplicative(shape, 0.5)
    found = found_by_hand(Multiplicative(shape, 1 / one, 0.5), estimand.quantity)
    assert found == pytest.approx(1, abs=1e-6)


def test_what_does_not_exist_is_told():
    """exp of Student's t, of a lognormal, and of an exponential at a spread of 1 or more have no mean."""
    means, geometric = ESTIMANDS.make("means"), ESTIMANDS.make("geometric means")
    assert np.isinf(means.multiplicative(SHAPES.make("student_t", {"df": 5.0}), 0.1))
    assert np.isinf(means.multiplicative(SHAPES.make("lognormal", {"sigma": 0.2}), 0.1))
    assert np.isinf(means.multiplicative(SHAPES.make("exponential"), 1.0))
    assert np.isfinite(means.multiplicative(SHAPES.make("exponential"), 0.99))
    assert np.isinf(means.multiplicative(SHAPES.make("laplace"), 1.5))
    assert np.isnan(geometric.additive(SHAPES.make("normal")))
