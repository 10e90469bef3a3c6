"""Promises that every method and every check keeps, whatever it tests."""

import re
import warnings

import numpy as np
import pytest

from workbench.checks import CHECKS
from workbench.groups import Batch
from workbench.methods import METHODS

SHELVES = (METHODS, CHECKS)
PARTS = [shelf.make(name) for shelf in SHELVES for name in shelf.names()]
EXACT = [part for part in PARTS if not part.draws]
LAYOUTS = ((2, 2), (5, 9), (4, 4, 4), (2, 3, 7), (6, 3, 8, 4, 5), (3,) * 8)

every_part = pytest.mark.parametrize("part", PARTS, ids=lambda part: part.name)
every_exact_part = pytest.mark.parametrize("part", EXACT, ids=lambda part: part.name)
every_layout = pytest.mark.parametrize("sizes", LAYOUTS, ids=str)
every_name = pytest.mark.parametrize(
    ("shelf", "name"),
    [(shelf, name) for shelf in SHELVES for name in shelf.names()],
    ids=lambda word: str(word),
)


def p_values(part, values, sizes):
    """(R,) p-values with a generator that starts anew."""
    return part.p_values(values, sizes, np.random.default_rng(1))


def judged(part, batch):
    """(R,) p-values of a batch with a generator that starts anew."""
    with np.errstate(all="ignore"):
        return part.judge(batch, {part.key(): np.random.default_rng(1)})


def continuous(sizes, replications=24, seed=7):
    """(R, N) positive values, no two alike."""
    rng = np.random.default_rng([seed, *sizes])
    spread = np.repeat(rng.uniform(0.2, 0.6, len(sizes)), sizes)
    return np.exp(1 + spread * rng.standard_normal((replications, sum(sizes))))


def awkward(sizes, replications=24, seed=8):
    """(R, N) positive values: as drawn, rounded to quarters, with a constant group, with gaps, by turns."""
    rng = np.random.default_rng([seed, *sizes])
    values = continuous(sizes, replications, seed)
    rounded = np.maximum(np.round(4 * values) / 4, 0.25)
    constant = rounded.copy()
    constant[:, : sizes[0]] = constant[:, :1]
    gappy = np.where(rng.random(values.shape) < 0.2, np.nan, rounded)
    kinds = np.stack([values, rounded, constant, gappy])
    return kinds[np.arange(replications) % 4, np.arange(replications)]


def same(found, expected, tolerance):
    """Assert that (R,) p-values agree, NaN with NaN."""
    np.testing.assert_allclose(found, expected, rtol=0, atol=tolerance)


def needs_positive(part):
    """Whether a part gives no p-value on data of which one value is negative."""
    values = continuous((5, 5, 5), 1)
    values[0, 3] -= 20
    return bool(np.isnan(p_values(part, values, (5, 5, 5))[0]))


@every_layout
@every_part
def test_p_is_a_share_or_undefined(part, sizes):
    p = p_values(part, awkward(sizes), sizes)
    assert p.shape == (24,)
    assert np.all(np.isnan(p) | ((p >= 0) & (p <= 1)))


@every_part
def test_continuous_data_of_some_size_have_a_p_value(part):
    assert not np.isnan(p_values(part, continuous((5, 9, 7)), (5, 9, 7))).any()


@every_layout
@every_part
def test_the_data_handed_in_are_left_alone(part, sizes):
    values = awkward(sizes)
    values[0, 0] = -0.0
    before = values.tobytes()
    p_values(part, values, sizes)
    assert values.tobytes() == before


@every_layout
@every_exact_part
def test_together_equals_alone(part, sizes):
    values = awkward(sizes)
    alone = np.concatenate([p_values(part, row[None], sizes) for row in values])
    same(p_values(part, values, sizes), alone, 1e-12)


@every_exact_part
def test_a_long_batch_equals_its_datasets_alone(part):
    """The ranks are worked out for 256 datasets at a time: the seams must not show."""
    sizes = (4, 3, 5)
    values = awkward(sizes, 600)
    some = [0, 255, 256, 257, 511, 512, 599]
    alone = np.concatenate([p_values(part, values[row][None], sizes) for row in some])
    same(p_values(part, values, sizes)[some], alone, 1e-12)


@every_layout
@every_exact_part
def test_order_within_groups_does_not_matter(part, sizes):
    values = awkward(sizes)
    rng = np.random.default_rng(3)
    ends = np.cumsum(sizes)
    order = np.concatenate(
        [rng.permutation(np.arange(end - n, end)) for end, n in zip(ends, sizes, strict=True)]
    )
    same(p_values(part, values[:, order], sizes), p_values(part, values, sizes), 1e-9)


@every_layout
@every_exact_part
def test_labels_of_groups_do_not_matter(part, sizes):
    values = awkward(sizes)
    members = np.split(values, np.cumsum(sizes)[:-1], axis=1)
    order = np.random.default_rng(4).permutation(len(sizes))
    relabelled = np.concatenate([members[group] for group in order], axis=1)
    same(p_values(part, relabelled, [sizes[group] for group in order]), p_values(part, values, sizes), 1e-9)


@pytest.mark.parametrize("factor", [1e-6, 0.3, 4096.0, 7e8])
@every_layout
@every_exact_part
def test_the_unit_of_measurement_does_not_matter(part, sizes, factor):
    values = awkward(sizes)
    same(p_values(part, factor * values, sizes), p_values(part, values, sizes), 1e-9)


@pytest.mark.parametrize("shift", [-3.0, 40.0, 1000.0])
@every_layout
@every_exact_part
def test_the_zero_of_the_scale_does_not_matter_unless_values_must_be_positive(part, sizes, shift):
    if needs_positive(part):
        assert "0 or less" in part.undefined_when
        return
    values = awkward(sizes)
    same(p_values(part, values + shift, sizes), p_values(part, values, sizes), 1e-9)


@every_part
def test_only_parts_that_say_so_need_positive_values(part):
    assert needs_positive(part) == ("0 or less" in part.undefined_when)


@every_layout
@every_exact_part
def test_a_shifted_batch_is_judged_like_the_shifted_data(part, sizes):
    """Twice shifted, and asked only after its parent was: nothing may be kept that a shift changes."""
    values = awkward(sizes)
    batch = Batch(values, sizes)
    judged(part, batch)
    for by in np.random.default_rng(5).uniform(0, 3, (2, len(sizes))):
        spelled_out = p_values(part, values + np.repeat(by, sizes), sizes)
        same(judged(part, batch.shifted(by)), spelled_out, 1e-9)


@every_layout
@every_exact_part
def test_a_scaled_batch_is_judged_like_the_scaled_data(part, sizes):
    values = awkward(sizes)
    by = np.random.default_rng(6).uniform(0.5, 3, len(sizes))
    same(
        judged(part, Batch(values, sizes).scaled(by)),
        p_values(part, values * np.repeat(by, sizes), sizes),
        1e-9,
    )


@every_layout
@every_exact_part
def test_a_batch_scaled_and_then_shifted_is_judged_like_the_data(part, sizes):
    values = awkward(sizes)
    factors, by = np.random.default_rng(9).uniform(0.5, 3, (2, len(sizes)))
    spelled_out = values * np.repeat(factors, sizes) + np.repeat(by, sizes)
    same(
        judged(part, Batch(values, sizes).scaled(factors).shifted(by)),
        p_values(part, spelled_out, sizes),
        1e-9,
    )


@every_layout
@every_exact_part
def test_a_batch_moved_again_and_again_is_judged_like_the_data(part, sizes):
    values = awkward(sizes)
    by = np.random.default_rng(11).uniform(0.5, 2, (4, len(sizes)))
    moved = Batch(values, sizes).shifted(by[0]).scaled(by[1]).scaled(by[2]).shifted(by[3])
    wide = np.repeat(by, sizes, axis=1)
    same(judged(part, moved), p_values(part, (values + wide[0]) * wide[1] * wide[2] + wide[3], sizes), 1e-9)


@every_layout
@every_exact_part
def test_missing_values_leave_what_the_shorter_data_give(part, sizes):
    values = awkward(sizes, 60)
    values[np.random.default_rng(10).random(values.shape) < 0.15] = np.nan
    found = p_values(part, values, sizes)
    for row, p in zip(values, found, strict=True):
        kept = [members[~np.isnan(members)] for members in np.split(row, np.cumsum(sizes)[:-1])]
        if min(map(len, kept)) == 0:
            continue
        same(p, p_values(part, np.concatenate(kept)[None], [len(members) for members in kept])[0], 1e-12)


@every_part
def test_an_empty_group_or_dataset_is_no_fault(part):
    values = continuous((3, 3, 3))
    values[:, :3] = np.nan
    values[0] = np.nan
    p = p_values(part, values, (3, 3, 3))
    assert np.isnan(p[0])
    assert np.all(np.isnan(p) | ((p >= 0) & (p <= 1)))


def difficult_rows():
    """{what it is: 9 values in groups of 3} that hold what makes arithmetic stumble."""
    plain = [1.2, 2.5, 0.7, 2.2, 4.6, 3.9, 4.1, 9.3, 2.0]
    return {
        "one constant group": [0.1, 0.1, 0.1, *plain[3:]],
        "constant groups that differ": [0.1, 0.1, 0.1, 0.2, 0.2, 0.2, 0.7, 0.7, 0.7],
        "all equal": [0.1] * 9,
        "all zero": [0.0] * 9,
        "far from zero": [1e7 + value for value in plain],
        "far below zero": [value - 1e7 for value in plain],
        "tiny": [1e-300 * value for value in plain],
        "huge": [1e300 * value for value in plain],
        "one infinite": [np.inf, *plain[1:]],
        "one infinite at the end": [*plain[:-1], np.inf],
        "both infinities": [np.inf, -np.inf, *plain[2:]],
        "a group infinite": [np.inf, np.inf, np.inf, *plain[3:]],
        "all infinite": [np.inf] * 9,
        "one missing": [np.nan, *plain[1:]],
        "one left in a group": [np.nan, np.nan, *plain[2:]],
        "smallest numbers": [0.0, 5e-324, -5e-324, 1e-323, -0.0, 0.0, 5e-324, 0.0, -1e-323],
    }


@pytest.mark.parametrize("kind", difficult_rows())
@every_part
def test_difficult_data_give_a_p_value_or_none_and_no_warning(part, kind):
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        p = p_values(part, [difficult_rows()[kind]], (3, 3, 3))
    assert np.isnan(p[0]) or 0 <= p[0] <= 1


@every_exact_part
def test_difficult_datasets_do_not_touch_their_neighbours(part):
    rows = np.array(list(difficult_rows().values()))
    alone = np.concatenate([p_values(part, row[None], (3, 3, 3)) for row in rows])
    same(p_values(part, rows, (3, 3, 3)), alone, 1e-12)


@every_part
def test_data_that_are_all_equal_have_no_p_value_unless_a_part_never_lacks_one(part):
    rows = [difficult_rows()[kind] for kind in ("all equal", "all zero")]
    assert (np.isnan(p_values(part, rows, (3, 3, 3))) == (part.undefined_when != "no value is left")).all()


@every_part
def test_both_zeros_are_one_value(part):
    row = np.array([[0.0, 0.0, 1.5, 2.0, 0.0, 4.0, 0.0, 3.0, 5.0]])
    negative = row.copy()
    negative[0, [1, 6]] = -0.0
    np.testing.assert_array_equal(p_values(part, negative, (3, 3, 3)), p_values(part, row, (3, 3, 3)))


@every_exact_part
def test_the_same_data_give_the_same_p_values_to_the_bit(part):
    values = awkward((6, 3, 8, 4, 5))
    found = [p_values(part, values, (6, 3, 8, 4, 5)).tobytes() for _ in range(2)]
    assert found[0] == found[1]


@every_name
def test_a_part_has_the_name_of_its_file(shelf, name):
    assert shelf[name].name == name
    assert shelf[name].__module__.rsplit(".", 1)[-1] == name


@every_name
def test_a_part_says_what_it_is_and_where_it_comes_from(shelf, name):
    part = shelf[name]
    assert re.search(r"\((1[89]|20)\d\d\)", part.cite)
    for text in (part.title(), part.hypothesis, part.assumes, part.undefined_when):
        assert text.strip() == text and text
        assert not text.endswith(".")


@pytest.mark.parametrize("name", METHODS.names())
def test_a_method_has_a_label_for_sentences(name):
    assert METHODS[name].label and METHODS[name].label == METHODS[name].label.strip()


@pytest.mark.parametrize("name", METHODS.names())
def test_a_method_has_a_short_name_for_figures(name):
    assert 0 < len(METHODS[name].short) <= 12


def test_no_two_parts_share_a_name_key_or_label():
    assert len({part.name for part in PARTS}) == len(PARTS)
    assert len({part.key() for part in PARTS}) == len(PARTS)
    labels = [METHODS[name].label for name in METHODS.names()]
    assert len(set(labels)) == len(labels)
    short = [METHODS[name].short for name in METHODS.names()]
    assert len(set(short)) == len(short)


@every_name
def test_settings_make_the_part_they_came_from(shelf, name):
    part = shelf.make(name)
    again = shelf.make(name, part.settings())
    assert again == part
    assert again.key() == part.key()
