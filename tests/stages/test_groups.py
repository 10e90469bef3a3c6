"""What a batch works out for its datasets, against plain arithmetic one dataset at a time."""

from fractions import Fraction

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from workbench.groups import Batch

steady = settings(
    derandomize=True, deadline=None, max_examples=150, suppress_health_check=[HealthCheck.too_slow]
)

HUNDREDTHS = st.integers(-2000, 2000).map(lambda whole: whole / 100)
NUMBERS = st.floats(-100, 100).map(lambda value: float(np.float32(value)))


@st.composite
def batches(draw, gaps):
    """((R, N) values, sizes), NaN here and there where gaps are asked for."""
    sizes = draw(st.lists(st.integers(1, 6), min_size=2, max_size=6))
    kind = draw(st.sampled_from([HUNDREDTHS, NUMBERS]))
    kind = kind | st.just(np.nan) if gaps else kind
    row = st.lists(kind, min_size=sum(sizes), max_size=sum(sizes))
    return np.array(draw(st.lists(row, min_size=1, max_size=5))), tuple(sizes)


def members(row, sizes):
    """The values present of each group, as fractions: their sums are exact."""
    parts = np.split(row, np.cumsum(sizes)[:-1])
    return [[Fraction(value) for value in part[~np.isnan(part)]] for part in parts]


def mean(group):
    """The exact mean."""
    return sum(group) / len(group)


def squares(group):
    """The exact sum of squares about the mean."""
    return sum((value - mean(group)) ** 2 for value in group)


def quietly(work):
    """work(), without the warnings of groups that are empty."""
    with np.errstate(all="ignore"):
        return work()


@steady
@given(batches(gaps=False) | batches(gaps=True))
def test_sizes_count_the_values_present(drawn):
    values, sizes = drawn
    batch = Batch(values, sizes)
    found = np.broadcast_to(quietly(lambda: batch.sizes), (len(values), len(sizes)))
    np.testing.assert_array_equal(found, [[len(group) for group in members(row, sizes)] for row in values])
    np.testing.assert_array_equal(np.broadcast_to(batch.total, len(values)), found.sum(axis=1))


@steady
@given(batches(gaps=False) | batches(gaps=True))
def test_variances_are_exact_to_rounding(drawn):
    values, sizes = drawn
    found = quietly(lambda: Batch(values, sizes).variances)
    for row, variances in zip(values, found, strict=True):
        for group, variance in zip(members(row, sizes), variances, strict=True):
            if len(group) < 2:
                assert np.isnan(variance)
            elif len(set(group)) == 1:
                assert variance == 0
            else:
                exact = float(squares(group) / (len(group) - 1))
                assert variance == pytest.approx(exact, rel=1e-12)


@steady
@given(batches(gaps=False) | batches(gaps=True))
def test_differences_of_means_are_exact_to_rounding(drawn):
    values, sizes = drawn
    found = quietly(lambda: Batch(values, sizes).means)
    for row, means in zip(values, found, strict=True):
        exact = [float(mean(group)) if group else np.nan for group in members(row, sizes)]
        np.testing.assert_allclose(
            np.subtract.outer(means, means), np.subtract.outer(exact, exact), rtol=0, atol=2e-13
        )


@steady
@given(batches(gaps=False) | batches(gaps=True))
def test_sums_of_squares_are_those_of_the_analysis_of_variance(drawn):
    values, sizes = drawn
    batch = Batch(values, sizes)
    between, within = quietly(lambda: (batch.sum_between, batch.sum_within))
    for row, found_between, found_within in zip(values, between, within, strict=True):
        groups = members(row, sizes)
        if min(map(len, groups)) == 0:
            assert np.isnan(found_between)
            continue
        everything = [value for group in groups for value in group]
        exact_within = sum(squares(group) for group in groups)
        exact_between = squares(everything) - exact_within
        assert found_within == pytest.approx(float(exact_within), rel=1e-12)
        assert found_between == pytest.approx(float(exact_between), rel=1e-11, abs=1e-20)


@steady
@given(batches(gaps=False) | batches(gaps=True))
def test_deviations_are_values_less_the_means_of_their_groups(drawn):
    values, sizes = drawn
    found = quietly(lambda: Batch(values, sizes).deviations)
    assert found.shape == values.T.shape
    np.testing.assert_array_equal(np.isnan(found), np.isnan(values.T))
    for row, column in zip(values, found.T, strict=True):
        for part, away in zip(members(row, sizes), np.split(column, np.cumsum(sizes)[:-1]), strict=True):
            exact = [float(value - mean(part)) for value in part]
            if len(set(part)) == 1:
                assert np.all(away[~np.isnan(away)] == 0)
            np.testing.assert_allclose(away[~np.isnan(away)], exact, rtol=0, atol=1e-13)


@pytest.mark.parametrize("far", [0.0, 1e7, 1e9, -1e12])
def test_variances_keep_their_digits_far_from_zero(far):
    """1, 2, 4 and a large whole number: every sum is exact in doubles, and 7 / 3 must come out."""
    variances = Batch([[far + 1, far + 2, far + 4, 5.0, 6.0, 8.0]], (3, 3)).variances
    np.testing.assert_allclose(variances, [[7 / 3, 7 / 3]], rtol=1e-15)


@pytest.mark.parametrize("value", [0.1, 1 / 3, -18.3, 1e7 + 0.1, 1e300, 5e-324])
@pytest.mark.parametrize("size", [2, 3, 7, 10, 49])
def test_a_constant_group_has_variance_exactly_zero(value, size):
    batch = Batch([[value] * size + [1.0, 2.0], [value] * size + [1.0, np.nan]], (size, 2))
    np.testing.assert_array_equal(quietly(lambda: batch.variances[:, 0]), [0, 0])
    np.testing.assert_array_equal(quietly(lambda: batch.deviations[:size]), np.zeros((size, 2)))


def test_a_constant_group_with_gaps_has_variance_exactly_zero():
    batch = Batch([[np.nan, 0.1, 0.1, np.nan, 0.1, 1.0, 2.0]], (5, 2))
    assert quietly(lambda: batch.variances[0, 0]) == 0
    assert quietly(lambda: batch.sizes[0, 0]) == 3


def test_equal_groups_far_apart_from_zero_have_no_sum_between():
    batch = Batch([[1e9 + 1, 1e9 + 2, 1e9 + 4, 1e9 + 2, 1e9 + 4, 1e9 + 1]], (3, 3))
    assert batch.sum_between[0] == 0


def test_the_first_dataset_missing_its_first_value_does_not_move_the_others():
    values = np.array([[np.nan, 2.0, 3.0, 4.0, 6.0], [1.0, 2.0, 3.0, 4.0, 6.0]])
    means = Batch(values, (3, 2)).means
    np.testing.assert_allclose(means[:, 1] - means[:, 0], [2.5, 3.0], rtol=1e-15)


def test_shifts_add_up_and_leave_the_parent_alone():
    values, sizes = np.arange(12.0).reshape(2, 6) ** 1.5, (2, 4)
    batch = Batch(values, sizes)
    twice = batch.shifted([1.0, 0.0]).shifted([0.5, -2.0])
    np.testing.assert_allclose(twice.values, values + np.repeat([1.5, -2.0], sizes), rtol=1e-15)
    np.testing.assert_array_equal(batch.values, values)
    means = values[:, :2].mean(axis=1) + 1.5 - (values[:, 2:].mean(axis=1) - 2)
    np.testing.assert_allclose(twice.means[:, 0] - twice.means[:, 1], means, rtol=1e-13)


def test_a_batch_shifted_and_then_scaled_has_the_means_of_its_values():
    values, sizes = np.arange(12.0).reshape(2, 6) ** 1.5, (2, 4)
    moved = Batch(values, sizes).shifted([1.0, 5.0]).scaled([2.0, 3.0])
    spelled_out = Batch(moved.values, sizes)
    np.testing.assert_allclose(np.diff(moved.means), np.diff(spelled_out.means), rtol=1e-13)
    np.testing.assert_allclose(moved.variances, spelled_out.variances, rtol=1e-13)


def test_what_is_shared_between_shifts_is_worked_out_once():
    batch = Batch(np.arange(12.0).reshape(2, 6), (2, 4))
    asked = []

    def counted(root):
        asked.append(root)
        return len(asked)

    for moved in (batch.shifted([1.0, 2.0]), batch.shifted([3.0, 0.0]), batch):
        assert moved.shift_free(counted) == 1
    assert asked == [batch]


def test_values_that_do_not_fit_the_sizes_are_refused():
    with pytest.raises(ValueError, match=r"\(R, 5\) wanted for sizes \(2, 3\)"):
        Batch(np.zeros((4, 6)), (2, 3))
    with pytest.raises(ValueError, match="wanted"):
        Batch(np.zeros(5), (2, 3))


def test_no_datasets_are_a_batch_too():
    assert Batch(np.empty((0, 5)), (2, 3)).replications == 0
