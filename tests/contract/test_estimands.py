"""What every estimand promises: a shape aligned on it has the compared quantity at 0, or at 1 as a factor."""

from dataclasses import fields
from itertools import pairwise

import numpy as np
import pytest
from scipy import integrate, optimize

from workbench.estimands import ESTIMANDS
from workbench.population import QUANTITIES, Additive, Multiplicative
from workbench.shapes import SHAPES
from workbench.shapes.shape import Asymmetric

EXAMPLES = {
    "lognormal": [{"sigma": 0.3}, {"sigma": 0.8}],
    "skew_normal": [{"skewness": 0.7}, {"skewness": -0.95}],
    "student_t": [{"df": 9.0}],
    "gamma": [{"shape": 1.5}, {"shape": 9.0}],
    "contaminated_normal": [{"fraction": 0.1, "factor": 4.0}],
}
"""Settings to try, by name; a shape that needs none is tried without."""

RATES_END = {
    "lognormal": lambda shape: 0.0,
    "student_t": lambda shape: 0.0,
    "exponential": lambda shape: 1.0,
    "laplace": lambda shape: 2**0.5,
    "gamma": lambda shape: shape.shape**0.5,
}
"""Spreads from which on exp(spread * value) has no mean, because the right tail falls off too slowly."""

SPREADS = (0.2, 0.7, 1.5)


def needed(name):
    """The settings without which a shape cannot be made."""
    return {field.name for field in fields(SHAPES[name])} - {"mirrored"}


def examples_of(name):
    """A shape with each of its example settings, if it is asymmetric also mirrored."""
    made = [SHAPES.make(name, settings) for settings in EXAMPLES.get(name, [{}])]
    if issubclass(SHAPES[name], Asymmetric):
        made += [SHAPES.make(name, shape.settings() | {"mirrored": True}) for shape in made]
    return made


every_shape_name = pytest.mark.parametrize("name", SHAPES.names())
every_estimand = pytest.mark.parametrize(
    "estimand", [ESTIMANDS.make(name) for name in ESTIMANDS.names()], ids=lambda estimand: estimand.name
)
every_shape = pytest.mark.parametrize(
    "shape",
    [shape for name in SHAPES.names() if name in EXAMPLES or not needed(name) for shape in examples_of(name)],
    ids=str,
)
every_spread = pytest.mark.parametrize("spread", SPREADS)


def integral(function, edges):
    """Integral from the first edge to the last, by scipy.integrate.quad from edge to edge."""
    precision = {"limit": 200, "epsabs": 1e-12, "epsrel": 1e-11}
    return sum(integrate.quad(function, *panel, **precision)[0] for panel in pairwise(edges))


def edges_of(population):
    """Where to begin and end panels: quantiles from a share of 1e-13 to one of 1 - 1e-13."""
    shares = 10.0 ** np.array([-13, -9, -6, -4, -2, -1])
    return population.quantile(np.concatenate([shares, [0.5], 1 - shares[::-1]]))


def value_of_share(population, share):
    """The value with a given share at or below it, by a root finder."""
    low, high = population.quantile(np.array([0.01, 0.99]))
    return optimize.brentq(lambda value: float(population.cumulative(value)) - share, low, high, xtol=1e-14)


def mean(population):
    """The mean as an area: the last edge less what lies under the shares on the way there."""
    edges = edges_of(population)
    return edges[-1] - integral(population.cumulative, edges)


def trimmed_mean(population):
    """The mean between the shares 0.2 and 0.8, by parts."""
    low, high = value_of_share(population, 0.2), value_of_share(population, 0.8)
    under = integral(population.cumulative, np.unique([low, *np.clip(edges_of(population), low, high), high]))
    return (0.8 * high - 0.2 * low - under) / 0.6


def geometric_mean(population):
    """exp of the mean of the logarithm, as an area like `mean`."""
    edges = np.log(edges_of(population))
    return np.exp(edges[-1] - integral(lambda log: population.cumulative(np.exp(log)), edges))


FOUND = {
    "mean": mean,
    "median": lambda population: value_of_share(population, 0.5),
    "trimmed_mean": trimmed_mean,
    "geometric_mean": geometric_mean,
}
"""Each quantity from the shares of a population alone."""


def slack(quantity, population):
    """How far a quantity may be off: 1e-9 by quad, and for means what tails beyond shares of 1e-13 hold.

    That is the value there times 1e-13, and a few times as much where the tail falls off slowly.
    """
    ends = np.abs(edges_of(population)[[0, -1]])
    beyond = {"mean": ends.max(), "geometric_mean": np.abs(np.log(ends)).max()}.get(quantity, 0.0)
    return 1e-9 + 10e-13 * beyond


def exists(quantity, shape, spread):
    """Whether exp(spread * value) has the quantity."""
    if quantity != "mean" or getattr(shape, "mirrored", False):
        return True
    return shape.name not in RATES_END or spread < RATES_END[shape.name](shape)


@every_shape_name
def test_there_are_examples_of_every_shape(name):
    assert name in EXAMPLES or not needed(name), "add settings to EXAMPLES, so that this shape is tried"


@every_estimand
def test_the_quantity_is_one_that_populations_know(estimand):
    assert estimand.quantity in QUANTITIES and estimand.quantity in FOUND


@every_spread
@every_shape
@every_estimand
def test_an_aligned_shape_has_its_quantity_at_zero(estimand, shape, spread):
    zero = estimand.additive(shape)
    if estimand.quantity == "geometric_mean":
        assert np.isnan(zero), "values around zero have no geometric mean"
        return
    aligned = Additive(shape, -spread * zero, spread)
    assert abs(FOUND[estimand.quantity](aligned)) < slack(estimand.quantity, aligned)


@every_spread
@every_shape
@every_estimand
def test_an_aligned_shape_has_its_quantity_at_one_as_a_factor(estimand, shape, spread):
    one = estimand.multiplicative(shape, spread)
    if not exists(estimand.quantity, shape, spread):
        assert not np.isfinite(one)
        return
    aligned = Multiplicative(shape, 1 / one, spread)
    assert abs(FOUND[estimand.quantity](aligned) - 1) < slack(estimand.quantity, aligned)


@every_spread
@every_shape
@every_estimand
def test_the_population_tells_what_was_aligned(estimand, shape, spread):
    """The true quantities in a report are the ones that were put in place, to rounding and quadrature."""
    zero, one = estimand.additive(shape), estimand.multiplicative(shape, spread)
    if np.isfinite(zero):
        assert abs(Additive(shape, -spread * zero, spread).quantities[estimand.quantity]) < 1e-12
    if np.isfinite(one):
        told = Multiplicative(shape, 1 / one, spread).quantities[estimand.quantity]
        assert told == pytest.approx(1, rel=1e-12)
