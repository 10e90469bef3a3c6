"""Procedures of several steps, dataset by dataset against their definition."""

import numpy as np
import pytest
from scipy.stats import t as student

from workbench.checks import CHECKS
from workbench.groups import Batch
from workbench.methods import METHODS
from workbench.outliers import RULES
from workbench.routes.dropping import Dropping
from workbench.routes.route import Route
from workbench.routes.smallest import Smallest

F, WELCH, RANKS, LOG = (METHODS.make(name) for name in ("classical_f", "welch_f", "kruskal_wallis", "log_f"))
SIZES = (5, 7, 6)


def sample(replications=60, seed=1):
    """(R, N) positive values: as drawn, rounded, with an outlier, with a constant group, with gaps, by turns."""
    rng = np.random.default_rng(seed)
    values = np.exp(rng.normal(0, 0.6, (replications, sum(SIZES))))
    kinds = [values, np.round(4 * values) / 4, values.copy(), values.copy(), values.copy()]
    kinds[2][:, 6] = 40.0
    kinds[3][:, :5] = 2.0
    kinds[4][:, [1, 9, 12]] = np.nan
    return np.stack(kinds)[np.arange(replications) % 5, np.arange(replications)]


def groups_of(row):
    """The values present in each group of one dataset."""
    parts = np.split(row, np.cumsum(SIZES)[:-1])
    return [part[~np.isnan(part)] for part in parts]


def judged(way, values):
    """((R,) p-values, (R,) ends taken) of a procedure."""
    with np.errstate(all="ignore"):
        batch = Batch(values, SIZES)
        return way.judge(batch, {}), way.ends_taken(batch, {})


def alone(method, groups):
    """The p-value of one dataset."""
    return method.p_values(np.concatenate(groups)[None], [len(group) for group in groups])[0]


def test_the_smallest_p_value_is_taken_and_its_test_named():
    values = sample()
    p, taken = judged(Smallest((F, WELCH, RANKS)), values)
    for row, found, end in zip(values, p, taken, strict=True):
        each = np.array([alone(method, groups_of(row)) for method in (F, WELCH, RANKS)])
        np.testing.assert_allclose(found, np.nanmin(each), rtol=1e-12)
        assert end == np.nanargmin(each)


def test_where_no_test_has_a_value_neither_has_the_smallest():
    p, taken = judged(Smallest((F, WELCH)), np.array([[1.0] * 18]))
    assert np.isnan(p[0]) and taken[0] == 0


def test_ends_of_the_smallest_count_through_nested_procedures():
    inner = Route(CHECKS.make("levene_median"), 0.3, F, WELCH)
    way = Smallest((inner, RANKS))
    assert [method for _, method in way.ends()] == [F, WELCH, RANKS]
    assert [path for path, _ in way.ends()] == [
        "rule (1) smallest, levene_median passed",
        "rule (1) smallest, levene_median tripped",
        "kruskal_wallis smallest",
    ]
    trims = [METHODS.make("trimmed_welch", {"trim": trim}) for trim in (0.1, 0.2)]
    assert len({path for path, _ in Smallest((*trims, F)).ends()}) == 3
    values = sample()
    p, taken = judged(way, values)
    inner_p, inner_taken = judged(inner, values)
    ranks = RANKS.p_values(values, SIZES)
    first = ~(np.where(np.isnan(ranks), np.inf, ranks) < np.where(np.isnan(inner_p), np.inf, inner_p))
    assert np.array_equal(taken, np.where(first, inner_taken, 2))
    np.testing.assert_array_equal(p, np.fmin(inner_p, ranks))


def boxed(group):
    """Values within 1.5 quartile ranges of the quartiles; numpy.quantile's default is linear interpolation."""
    low, high = np.quantile(group, [0.25, 0.75])
    return group[(group >= low - 1.5 * (high - low)) & (group <= high + 1.5 * (high - low))]


def grubbed(group):
    """A group without its most extreme value, where 2 n times the t tail is at most 0.05 (Grubbs 1969)."""
    n = len(group)
    if n < 3 or group.std() == 0:
        return group
    far = np.abs(group - group.mean())
    g = far.max() / group.std(ddof=1)
    rest = (n - 1) ** 2 - n * g**2
    p = 0.0 if rest <= 0 else min(1.0, 2 * n * student.sf(np.sqrt(n * (n - 2) * g**2 / rest), n - 2))
    return np.delete(group, far.argmax()) if p <= 0.05 else group


@pytest.mark.parametrize(("rule", "kept"), [("box_rule", boxed), ("grubbs", grubbed)])
def test_outliers_are_dropped_from_each_group_and_the_rest_is_tested(rule, kept):
    values = sample(200)
    p, taken = judged(Dropping(RULES[rule], WELCH), values)
    touched = 0
    for row, found, end in zip(values, p, taken, strict=True):
        groups = groups_of(row)
        left = [kept(group) for group in groups]
        np.testing.assert_allclose(found, alone(WELCH, left), rtol=1e-9)
        dropped = sum(map(len, groups)) - sum(map(len, left))
        assert end == (dropped > 0)
        touched += dropped > 0
    assert 20 < touched < 180


def test_grubbs_on_the_example_of_the_handbook():
    """NIST/SEMATECH e-Handbook of Statistical Methods, 1.3.5.17.1: G = 2.468765, the value 245.57 is dropped."""
    data = np.array([199.31, 199.53, 200.19, 200.82, 201.92, 201.95, 202.18, 245.57])
    away = data - data.mean()
    assert np.abs(away).max() / data.std(ddof=1) == pytest.approx(2.468765, abs=5e-7)
    assert RULES["grubbs"].flags(away[:, None]).ravel().tolist() == [False] * 7 + [True]


def test_box_rule_on_normal_groups_flags_as_often_as_simulated_elsewhere():
    """A program apart: some value of a normal group of 10 is flagged in 0.281, a value in 0.0400."""
    flags = RULES["box_rule"].flags(np.random.default_rng(2).standard_normal((10, 100_000)))
    assert abs(flags.any(axis=0).mean() - 0.281) < 0.005 and abs(flags.mean() - 0.04) < 0.001


def test_dropping_knows_no_shift_of_groups():
    values = sample(100)
    base = Batch(values, SIZES)
    way = Dropping(RULES["box_rule"], F)
    shift = np.repeat([0.0, 3.0, -1.0], SIZES)
    with np.errstate(all="ignore"):
        moved = way.judge(base.shifted((0.0, 3.0, -1.0)), {})
    np.testing.assert_allclose(moved, judged(way, values + shift)[0], atol=1e-9)


@pytest.mark.parametrize(
    ("name", "limit", "trips"),
    [
        ("spread_ratio_over", 2.0, lambda groups: max(map(sd, groups)) > 2 * min(map(sd, groups))),
        ("smallest_size_below", 5, lambda groups: min(map(len, groups)) < 5),
        ("skewness_over", 0.7, lambda groups: abs(skewness(groups)) > 0.7),
    ],
)
def test_rules_of_thumb_trip_where_their_limit_is_passed(name, limit, trips):
    values = sample(100)
    check = CHECKS.make(name, {"limit": limit})
    found = check.p_values(values, SIZES)
    wanted = [0.0 if trips(groups_of(row)) else 1.0 for row in values]
    assert found.tolist() == wanted and 0 < sum(wanted) < 100
    taken = judged(Route(check, 0.05, F, WELCH), values)[1]
    assert np.array_equal(taken, 1 - found.astype(int))


def sd(group):
    """Sample standard deviation."""
    return group.std(ddof=1)


def skewness(groups):
    """Third standardised moment of the residuals."""
    away = np.concatenate([group - group.mean() for group in groups])
    return (away**3).mean() / (away**2).mean() ** 1.5


def test_a_log_transform_when_a_check_trips():
    values = sample(100)
    p, taken = judged(Route(CHECKS.make("skewness_over", {"limit": 0.7}), 0.05, F, LOG), values)
    logs = LOG.p_values(values, SIZES)
    np.testing.assert_allclose(p[taken == 1], logs[taken == 1])
    assert 0 < (taken == 1).sum() < 100


def test_content_keys_tell_procedures_apart():
    ways = [
        *(Smallest((F, WELCH)), Smallest((WELCH, F)), Smallest((F, RANKS))),
        *(Dropping(RULES["grubbs"], F), Dropping(RULES["box_rule"], F), Dropping(RULES["grubbs"], WELCH)),
    ]
    assert len({way.key() for way in ways}) == len(ways)
    assert Smallest((F, RANKS)).hypothesis == "mixed" and Dropping(RULES["grubbs"], F).hypothesis == "means"
    assert "Tukey" in Dropping(RULES["box_rule"], F).cite
