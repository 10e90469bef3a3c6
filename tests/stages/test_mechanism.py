"""Data arise at addressed streams, with exactly the quantities that theory says, as recorded too."""

import numpy as np
import pytest

from workbench import mechanism
from workbench.chunk import REPLICATIONS, blocks, judged
from workbench.disturbances import DISTURBANCES
from workbench.disturbances.round import Round, Rounded
from workbench.estimands import ESTIMANDS
from workbench.grid import equal_as_recorded, holding
from workbench.methods import METHODS
from workbench.population import Additive, Multiplicative, superiority
from workbench.records import Condition, Setting, Task, Want
from workbench.shapes import SHAPES
from workbench.streams import Lane, stream

SKEWED = SHAPES.make("lognormal", {"sigma": 0.7})
NORMAL = SHAPES.make("normal")
KEY = "0123456789abcdef"


def setting(estimand="means", scale="additive", shape=SKEWED, disturbances=(), centre=10.0):
    """Three groups of unequal spread."""
    return Setting(
        (shape,) * 3, ESTIMANDS.make(estimand), scale, centre, (3, 4, 5), (0.3, 0.6, 0.9), disturbances
    )


def drawn(one, difference, replications=60_000):
    """(k) arrays of all values of each group over many replications."""
    base = mechanism.draw(one, stream(3, Lane.DATA, 0, KEY), replications)
    batch = mechanism.recorded(one, base, difference, [None] * len(one.disturbances))
    return [batch.members(group) for group in range(3)]


CASES = [
    ("means", "additive", SKEWED, ()),
    ("medians", "additive", SKEWED, ()),
    ("trimmed means", "additive", SKEWED, ()),
    ("means", "multiplicative", NORMAL, ()),
    ("geometric means", "multiplicative", NORMAL, ()),
    ("medians", "multiplicative", SHAPES.make("skew_normal", {"skewness": 0.6}), ()),
    ("means", "additive", SKEWED, (DISTURBANCES.make("round", {"to": 0.5}),)),
    (
        "medians",
        "multiplicative",
        NORMAL,
        (DISTURBANCES.make("round", {"to": 1.0}), DISTURBANCES.make("round", {"to": 2.0})),
    ),
]


@pytest.mark.parametrize(("estimand", "scale", "shape", "disturbances"), CASES)
def test_true_quantities_are_those_of_the_data(estimand, scale, shape, disturbances):
    """Means, standard deviations, medians, trimmed and geometric means within 4.5 standard errors of 180,000 draws."""
    one = setting(estimand, scale, shape, disturbances)
    difference = (1.0, 1.3, 2.0) if scale == "multiplicative" else (0.0, 0.5, -1.0)
    populations = mechanism.recorded_populations(one, difference)
    for values, population in zip(drawn(one, difference), populations, strict=True):
        x, true = values.ravel(), population.quantities
        error = x.std() / np.sqrt(x.size)
        assert abs(x.mean() - true["mean"]) < 4.5 * error
        assert abs(x.var() - true["sd"] ** 2) < 4.5 * ((x - x.mean()) ** 2).std() / np.sqrt(x.size)
        low, high = np.quantile(x, [0.5 - 2.5 / np.sqrt(x.size), 0.5 + 2.5 / np.sqrt(x.size)])
        assert low <= true["median"] <= high
        kept = np.sort(x)[int(0.2 * x.size) : int(0.8 * x.size)]
        assert abs(kept.mean() - true["trimmed_mean"]) < 6 * error
        if true["geometric_mean"] is not None:
            assert abs(np.log(x).mean() - np.log(true["geometric_mean"])) < 4.5 * np.log(x).std() / np.sqrt(
                x.size
            )


@pytest.mark.parametrize(("estimand", "scale", "shape", "disturbances"), CASES)
def test_the_compared_quantity_is_exactly_centre_and_difference(estimand, scale, shape, disturbances):
    one = setting(estimand, scale, shape)
    difference = (1.0, 1.3, 2.0)
    wanted = [10 * each if scale == "multiplicative" else 10 + each for each in difference]
    quantity = one.estimand.quantity
    found = [population.quantities[quantity] for population in mechanism.populations(one, difference)]
    assert np.allclose(found, wanted, rtol=1e-9)


def test_rounded_values_are_the_numbers_as_written():
    values = np.array([[18.34999], [0.15], [-0.04], [2.5]])
    found = DISTURBANCES.make("round", {"to": 0.1}).apply(values, (4,), None)
    assert found.ravel().tolist() == [18.3, 0.2, 0.0, 2.5]
    assert DISTURBANCES.make("round", {"to": 3}).apply(values, (4,), None).ravel().tolist() == [
        18.0,
        0.0,
        0.0,
        3.0,
    ]


def test_what_is_equal_is_found_by_theory():
    normal = [Additive(NORMAL, 5.0, spread) for spread in (1.0, 2.0)]
    assert holding(normal, (5, 5)) == ["means", "medians", "trimmed means", "stochastic size"]
    skewed = [Additive(SKEWED, 5.0, spread) for spread in (1.0, 2.0)]
    assert holding(skewed, (5, 5)) == ["means"]
    same = [Additive(NORMAL, 5.0, 1.0)] * 2
    assert holding(same, (5, 5)) == ["means", "medians", "trimmed means", "distributions", "stochastic size"]


def test_a_heavy_tail_is_described_without_a_warning():
    """exp of Student's t has no mean; its far tail is too large for a double."""
    heavy = Multiplicative(SHAPES.make("student_t", {"df": 5.0}), 1.0, 1.5)
    assert heavy.quantities["mean"] is None and heavy.quantities["median"] == pytest.approx(1.0)
    assert superiority(heavy, Multiplicative(heavy.shape, 1.0, 0.5)) == pytest.approx(0.5, abs=1e-9)


def test_the_chance_to_be_larger_is_known_for_normal_populations():
    """P(X < Y) = Phi((mean Y - mean X) / sqrt(sum of variances)), by definition of the normal difference."""
    one, other = Additive(NORMAL, 0.0, 1.0), Additive(NORMAL, 1.2, 2.0)
    assert superiority(one, other) == pytest.approx(float(NORMAL.cumulative(1.2 / np.sqrt(5))), abs=1e-9)


def test_streams_depend_on_their_address_alone():
    first = stream(1, Lane.DATA, 0, KEY).random(4)
    assert np.array_equal(first, stream(1, Lane.DATA, 0, KEY).random(4))
    for other in (stream(2, Lane.DATA, 0, KEY), stream(1, Lane.METHOD, 0, KEY), stream(1, Lane.DATA, 1, KEY)):
        assert not np.array_equal(first, other.random(4))
    assert not np.array_equal(first, stream(1, Lane.DATA, 0, KEY, KEY).random(4))
    assert stream(1, Lane.DATA, 0, KEY).bit_generator.__class__.__name__ == "SFC64"


def test_a_chunk_is_a_pure_function_of_its_task():
    one = setting()
    judges = tuple(METHODS.make(name) for name in METHODS.names())
    null, shifted = (0.0, 0.0, 0.0), (0.0, 0.0, 0.4)
    together = Task(5, one, (0.05, 0.01), (3, 4), (Want(null, judges), Want(shifted, judges)))
    alone = Task(5, one, (0.05,), (4,), (Want(shifted, judges[2:3]),))
    (tally,) = judged(alone)
    twin = next(
        each
        for each in judged(together)
        if (each.chunk, each.difference, each.method) == (4, tally.difference, tally.method)
    )
    assert twin.rejected[0.05] == tally.rejected[0.05] and np.array_equal(twin.histogram, tally.histogram)
    assert len(tally.rejected[0.05]) == REPLICATIONS / 8


@pytest.mark.parametrize("total", [4, 60, 61, 1000, 61_440, 1_000_000])
def test_blocks_make_up_a_chunk(total):
    found = blocks(total)
    assert sum(found) == REPLICATIONS and min(found) >= 1
    assert max(found) * total <= 2 * 131_072 or max(found) == 1


@pytest.mark.parametrize("spread", [0.7, 0.9])
def test_rounding_leaves_a_geometric_mean_where_zeros_are_as_good_as_impossible(spread):
    """Lognormal values about 6 rounded to 0.1: a zero in 1e11 or in 2e7 values takes nothing away."""
    population = Rounded(Multiplicative(NORMAL, 6.0, spread), 0.1)
    assert population.quantities["geometric_mean"] == pytest.approx(6.0, abs=0.002)


def test_rounding_to_zero_takes_the_geometric_mean_away():
    for unit in (0.1, 1e-6):
        population = Rounded(Multiplicative(NORMAL, unit, 0.9), unit)
        assert population.quantities["geometric_mean"] is None


def test_identical_groups_are_equal_as_recorded_even_without_the_quantity_compared():
    shapes, spreads = (NORMAL,) * 2, (2.0, 2.0)
    setting = Setting(
        shapes, ESTIMANDS.make("geometric means"), "multiplicative", 0.1, (5, 5), spreads, (Round(to=1.0),)
    )
    assert equal_as_recorded(Condition(1, {}, setting, (1.0, 1.0), "null"), "geometric means")


def test_rounding_makes_no_geometric_mean_where_there_was_none():
    assert Additive(NORMAL, 18.0, 2.0).quantities["geometric_mean"] is None
    assert Rounded(Additive(NORMAL, 18.0, 2.0), 0.1).quantities["geometric_mean"] is None
