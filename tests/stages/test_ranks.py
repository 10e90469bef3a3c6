"""Rank sums against ranks worked out one dataset at a time."""

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from scipy.stats import rankdata

from workbench.groups import Batch
from workbench.ranks import mid_ranks

steady = settings(
    derandomize=True, deadline=None, max_examples=120, suppress_health_check=[HealthCheck.too_slow]
)

TIED = st.sampled_from([0.0, -0.0, 0.1, 0.2, -1.5, 1e300, 5e-324, -5e-324])
ANY = st.floats(allow_nan=False, allow_infinity=False)
HALVES = st.integers(-6, 6).map(lambda whole: whole / 2)
SPECIAL = st.sampled_from([np.nan, np.inf, -np.inf, 1.0, 2.0, 0.0, -0.0])


def neighbours(start):
    """Values that differ from the start in their lowest bits only."""
    return st.integers(-70, 70).map(lambda steps: float(start + steps * np.spacing(start)))


KINDS = [
    TIED,
    ANY,
    HALVES,
    SPECIAL,
    neighbours(1.0),
    neighbours(-18.3),
    neighbours(1e7),
    HALVES | SPECIAL | ANY,
]


@st.composite
def batches(draw):
    """((R, N) values, sizes): R from 1, k from 2 to 12."""
    sizes = draw(st.lists(st.integers(1, 5), min_size=2, max_size=12))
    kind = draw(st.sampled_from(KINDS))
    row = st.lists(kind, min_size=sum(sizes), max_size=sum(sizes))
    return np.array(draw(st.lists(row, min_size=1, max_size=5))), tuple(sizes)


def ranks_of(row):
    """(N,) mid-ranks of the values present by SciPy's rankdata; 0 where one is missing."""
    ranks = np.zeros(row.size)
    present = ~np.isnan(row)
    ranks[present] = rankdata(row[present])
    return ranks


def tie_sum(row):
    """Sum of t^3 - t over the runs of t equal values present."""
    lengths = np.unique(row[~np.isnan(row)], return_counts=True)[1].astype(float)
    return (lengths**3 - lengths).sum()


def assert_ranks_are_right(values, sizes):
    """Ranks, rank sums and tie sums of every dataset, exactly: all are multiples of a half."""
    batch = Batch(values, sizes)
    expected = np.array([ranks_of(row) for row in values])
    starts = np.cumsum((0, *sizes))[:-1]
    with np.errstate(all="ignore"):
        ranks, sums, ties = batch.ranks, batch.rank_sums, batch.tie_sums
    np.testing.assert_array_equal(ranks, expected)
    np.testing.assert_array_equal(sums, np.add.reduceat(expected, starts, axis=1))
    np.testing.assert_array_equal(ties, [tie_sum(row) for row in values])


@steady
@given(batches())
def test_ranks_are_those_of_scipy(drawn):
    assert_ranks_are_right(*drawn)


@pytest.mark.parametrize("scale", [1e-320, 1e-300, 1e-42, 1e-38, 1e-30, 1e30, 1e38, 1e39, 1e300])
def test_ranks_are_right_at_any_magnitude(scale):
    """Also where values fall below or rise above what a shorter number can hold."""
    values = np.round(np.random.default_rng(6).standard_normal((300, 15)), 1) * scale
    values[::2] += np.random.default_rng(7).standard_normal((150, 15)) * scale / 8
    assert_ranks_are_right(values, (4, 6, 5))


@pytest.mark.parametrize("replications", [1, 255, 256, 257, 600])
@pytest.mark.parametrize("groups", [2, 3, 7, 16, 17, 33, 40])
def test_ranks_are_right_for_any_number_of_groups_and_datasets(groups, replications):
    rng = np.random.default_rng([groups, replications])
    sizes = tuple(rng.integers(1, 5, groups))
    assert_ranks_are_right(rng.standard_normal((replications, sum(sizes))), sizes)


def test_ranks_are_right_where_only_some_datasets_have_ties_or_gaps():
    rng = np.random.default_rng(1)
    sizes = (4, 6, 5, 7)
    values = rng.standard_normal((600, 22))
    values[::3] = np.round(values[::3], 1)
    values[1::7, 4] = np.nan
    values[5::11, 8] = np.inf
    values[300] = 2.5
    values[301] = np.nan
    assert_ranks_are_right(values, sizes)


@pytest.mark.parametrize("start", [1.0, -1.0, 0.1, 18.3, 1e7, 1e-300, -4503599627370497.5])
def test_values_that_differ_in_their_lowest_bits_are_no_ties(start):
    """Group numbers are kept in the lowest bits while ranks are sorted: no neighbour may be mistaken for a tie."""
    rng = np.random.default_rng(2)
    sizes = (3,) * 40
    chain = start + np.arange(120) * np.spacing(start)
    assert np.unique(chain).size == 120
    values = np.array([rng.permutation(chain) for _ in range(40)])
    assert_ranks_are_right(values, sizes)


def test_true_ties_beside_values_one_bit_away_are_told_apart():
    up, down = np.nextafter(1.0, 2.0), np.nextafter(1.0, 0.0)
    values = np.array([[1.0, up, down, 1.0, up, 1.0, down, 2.0], [1.0, 1.0, 1.0, 1.0, up, up, 0.0, -0.0]])
    assert_ranks_are_right(values, (2, 3, 3))


def test_both_zeros_tie_and_differ_from_the_smallest_numbers():
    values = np.array([[-0.0, 0.0, 5e-324, -5e-324, 0.0, -0.0, 1e-323, -1e-323]])
    assert_ranks_are_right(values, (3, 2, 3))
    assert_ranks_are_right(np.array([[0.0, -5e-324, 0.0]]), (2, 1))


def test_many_values_keep_their_sums_exact():
    """40 groups of 60: the sums reach 2,400 * 2,401 / 2 and are packed side by side in one double."""
    rng = np.random.default_rng(3)
    values = rng.standard_normal((3, 2400))
    values[1] = np.round(values[1], 1)
    assert_ranks_are_right(values, (60,) * 40)


def test_a_large_dataset_with_ties_overflows_nothing():
    """50,000 values: twice the rank sums pass 2^31."""
    values = np.round(np.random.default_rng(4).standard_normal((2, 50_000)), 1)
    assert_ranks_are_right(values, (30_000, 20_000))


def test_ranks_of_a_shifted_batch_are_those_of_the_shifted_values():
    rng = np.random.default_rng(5)
    values, sizes, by = np.round(rng.standard_normal((30, 12)), 1), (4, 3, 5), np.array([0.0, 0.5, -0.7])
    moved, spelled_out = Batch(values, sizes).shifted(by), Batch(values + np.repeat(by, sizes), sizes)
    np.testing.assert_array_equal(moved.rank_sums, spelled_out.rank_sums)
    np.testing.assert_array_equal(moved.tie_sums, spelled_out.tie_sums)


def test_mid_ranks_leave_the_values_alone():
    values = np.array([[3.0, 1.0, np.nan, 1.0]])
    before = values.tobytes()
    ranks, ties = mid_ranks(values)
    assert values.tobytes() == before
    np.testing.assert_array_equal(ranks, [[3, 1.5, 0, 1.5]])
    np.testing.assert_array_equal(ties, [6])
