"""p-values of checks against independent libraries, published tables, worked examples and brute force."""

import warnings
from fractions import Fraction
from itertools import chain

import numpy as np
import pytest
import scipy.stats
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from statsmodels.stats.multitest import multipletests

from workbench.checks import CHECKS

steady = settings(
    derandomize=True, deadline=None, max_examples=150, suppress_health_check=[HealthCheck.too_slow]
)


def p_value(name, groups, **options):
    """The p-value of a check on groups of values."""
    row = [np.concatenate(groups)]
    return CHECKS.make(name, options).p_values(row, [len(group) for group in groups])[0]


def constant(values):
    """Whether all values are equal."""
    return len(set(values)) == 1


def residuals(group):
    """The values less their mean, worked in fractions."""
    exact = list(map(Fraction, group))
    return [value - sum(exact) / len(exact) for value in exact]


def all_residuals(groups):
    """The residuals of all groups, as floats."""
    return [float(value) for group in groups for value in residuals(group)]


def distances(group):
    """Distances of the values from their median, as fractions."""
    ordered = sorted(map(Fraction, group))
    median = (ordered[(len(ordered) - 1) // 2] + ordered[len(ordered) // 2]) / 2
    return [abs(value - median) for value in ordered]


def skewness_and_kurtosis(groups):
    """D'Agostino's p-value of the residuals by SciPy's parts.

    scipy.stats.skewtest takes a skewness of exactly 0 for one of 1 on its scale, and normaltest with it; here it has
    z = 0. So have skewnesses that are 0 on paper.
    """
    values = np.array(all_residuals(groups))
    skewed = abs(scipy.stats.skew(values)) > 1e-12
    z = (
        scipy.stats.skewtest(values).statistic if skewed else 0.0,
        scipy.stats.kurtosistest(values).statistic,
    )
    return scipy.stats.chi2.sf(np.square(z).sum(), 2)


def as_written(groups):
    """The values as whole numbers of their last decimal, of which there are seven at most."""
    return [np.array([round(value * 10**7) for value in group], dtype=float) for group in groups]


REFERENCES = {
    "levene_mean": lambda groups: scipy.stats.levene(*groups, center="mean").pvalue,
    "bartlett": lambda groups: scipy.stats.bartlett(*groups).pvalue,
    # Whole numbers, since in decimals SciPy ranks the rounding of distances that are equal.
    "fligner_killeen": lambda groups: scipy.stats.fligner(*as_written(groups), center="median").pvalue,
    "shapiro_each_group": lambda groups: min(scipy.stats.shapiro(group).pvalue for group in groups),
    "dagostino_residuals": skewness_and_kurtosis,
}
"""By check: the p-value of k groups."""

UNDEFINED = {
    "levene_mean": lambda groups: all(constant(map(abs, residuals(group))) for group in groups),
    "bartlett": lambda groups: any(map(constant, groups)),
    "fligner_killeen": lambda groups: constant(chain(*map(distances, as_written(groups)))),
    "shapiro_each_group": lambda groups: any(constant(group) or len(group) < 3 for group in groups),
    "dagostino_residuals": lambda groups: all(map(constant, groups)) or sum(map(len, groups)) < 8,
}
"""Where a check has no p-value, although its reference may give one.

SciPy's Levene gives a number near 0 or 1 where rounding makes equal distances differ; its Bartlett 0 and its
Shapiro-Wilk 1 where a group is constant.
"""

TOLERANCES = {"shapiro_each_group": 2e-8}
"""SciPy's Shapiro-Wilk works in single precision in places and is about 4e-9 from Royston's own algorithm in R."""


def expected_p(name, groups):
    """The p-value a check must give: the reference's, or NaN where the check has none."""
    if UNDEFINED[name](groups):
        return np.nan
    with warnings.catch_warnings(), np.errstate(all="ignore"):
        warnings.simplefilter("ignore")
        return float(REFERENCES[name](groups))


def assert_as_reference(name, datasets, sizes, offset=0.0):
    """Every dataset of a batch is judged as the reference judges what is left of it, one at a time.

    Data that lie far from zero are handed to the reference as they were before the offset was added.
    """
    found = CHECKS.make(name).p_values(np.asarray(datasets) + offset, sizes)
    tolerance = TOLERANCES.get(name, 1e-10) + 1e-13 * offset
    for row, p in zip(np.asarray(datasets), found, strict=True):
        groups = [part[~np.isnan(part)] for part in np.split(row, np.cumsum(sizes)[:-1])]
        if min(map(len, groups)) < 2:
            continue
        assert p == pytest.approx(expected_p(name, groups), rel=1e-8, abs=tolerance, nan_ok=True), groups


HUNDREDTHS = st.integers(1, 4000).map(lambda whole: whole / 100)
QUARTERS = st.integers(-80, 80).map(lambda whole: whole / 4)
FEW = st.integers(1, 4).map(lambda whole: whole / 10)
DRAWN = st.floats(0.01, 50).map(lambda value: round(value, 7))


@st.composite
def batches(draw, kinds):
    """((R, N) values, sizes): k from 2 to 8, groups of 2 to 12, some of them constant."""
    sizes = draw(st.lists(st.integers(2, 12), min_size=2, max_size=8))
    kind = draw(st.sampled_from(kinds))
    row = st.lists(kind, min_size=sum(sizes), max_size=sum(sizes))
    values = np.array(draw(st.lists(row, min_size=1, max_size=2)))
    if draw(st.integers(0, 4)) == 0:
        values[:, : sizes[0]] = values[:, :1]
    return values, tuple(sizes)


every_reference = pytest.mark.parametrize("name", REFERENCES)


@every_reference
@steady
@given(drawn=batches([HUNDREDTHS, QUARTERS, FEW, DRAWN]))
def test_any_data_are_judged_as_the_reference_does(name, drawn):
    """SciPy 1.17: see REFERENCES, TOLERANCES and UNDEFINED."""
    assert_as_reference(name, *drawn)


@every_reference
@steady
@given(drawn=batches([QUARTERS]))
def test_data_far_from_zero_are_judged_as_those_near_it(name, drawn):
    """1,000,000 added, which is exact for quarters: the reference sees the same differences near zero."""
    assert_as_reference(name, *drawn, offset=1e6)


LAYOUTS = [(2, 2), (2, 12), (3, 4, 5), (12, 7, 2), (6, 6, 6, 6), (3, 8, 5, 2, 9), (4,) * 8, (10, 20, 30)]


def awkward(sizes):
    """(R, N) values of every kind, R = 60: as drawn, rounded, with constant groups, with gaps, by turns."""
    rng = np.random.default_rng([1937, *sizes])
    spreads, places = np.repeat(rng.uniform(0.5, 3, (2, len(sizes))), sizes, axis=1)
    drawn = np.round(12 + places + spreads * rng.standard_normal((60, sum(sizes))), 6)
    rounded, coarse, alike = np.round(drawn, 1), np.round(drawn / 2) * 2, np.round(drawn, 1)
    alike[:, : sizes[0]] = 12.1
    constants = np.repeat(np.round(drawn[:, : len(sizes)], 1), sizes, axis=1)
    gappy = np.where(rng.random(drawn.shape) < 0.15, np.nan, rounded)
    kinds = np.stack([drawn, rounded, coarse, alike, gappy, constants])
    return kinds[np.arange(60) % 6, np.arange(60)]


@pytest.mark.parametrize("sizes", LAYOUTS, ids=str)
@every_reference
def test_awkward_data_are_judged_as_the_reference_does(name, sizes):
    """SciPy 1.17: see REFERENCES, TOLERANCES and UNDEFINED."""
    assert_as_reference(name, awkward(sizes), sizes)


EXAMPLE = ([1.2, 2.5, 0.7, 3.1], [2.2, 4.6, 3.9, 5.8, 2.7], [4.1, 9.3, 2.0, 7.7, 5.2, 6.6])
EXAMPLE_P = {
    "levene_mean": 0.178296056493,
    "levene_median": 0.180045562710,
    "bartlett": 0.264165600359,
    "shapiro_residuals": 0.981592437712,
}


@pytest.mark.parametrize("name", EXAMPLE_P)
def test_an_invented_example_has_the_p_values_worked_beforehand(name):
    """Invented data, worked before these checks were written, with a plain program and with SciPy or R 4.2.2."""
    assert p_value(name, EXAMPLE) == pytest.approx(EXAMPLE_P[name], rel=0, abs=6e-13)


@pytest.mark.parametrize("name", ["levene_mean", "levene_median"])
@pytest.mark.parametrize("sizes", [(2, 2), (6, 6, 6), (10, 14), (2, 6, 4), (22, 26)], ids=str)
def test_equal_distances_from_the_centre_leave_levene_undefined(name, sizes):
    """Half the values of each group lie at one place and half at another: mean and median lie between them.

    In decimals such as 0.1 and 0.7 rounding must not make the distances vary.
    """
    places = np.round(np.random.default_rng(5).uniform(0, 9, (200, len(sizes), 2)), 2)
    rows = [
        np.concatenate([np.repeat(pair, n // 2) for pair, n in zip(row, sizes, strict=True)])
        for row in places
    ]
    assert np.isnan(CHECKS.make(name).p_values(rows, sizes)).all()


def test_one_constant_group_leaves_bartlett_undefined():
    """SciPy 1.17 gives p = 0: the logarithm of a variance of 0."""
    assert np.isnan(p_value("bartlett", ([0.1, 0.1, 0.1], [1.2, 2.5, 0.7], [4.1, 9.3, 2.0])))
    assert np.isnan(p_value("bartlett", ([0.1], [1.2, 2.5, 0.7], [4.1, 9.3, 2.0])))


def test_equal_variances_have_a_bartlett_p_of_1():
    """The likelihood ratio is 0, also where rounding takes it below."""
    rng = np.random.default_rng(2)
    for _ in range(50):
        group = rng.standard_normal(5)
        for k in (2, 3):
            p = p_value("bartlett", (group, -group, group)[:k])
            assert p == pytest.approx(1, abs=2e-7)
            assert p <= 1


def test_distances_that_are_equal_on_paper_are_ties_for_fligner():
    """The example in tenths has the p-value of the same data in whole numbers, 0.16587; SciPy 1.17 and R give 0.16666.

    They subtract the median from the decimals and rank what rounding leaves: 1.85 - 1.2 and 2.5 - 1.85 differ there.
    """
    whole = [np.round(np.multiply(group, 10)) for group in EXAMPLE]
    expected = scipy.stats.fligner(*whole, center="median").pvalue
    assert expected == pytest.approx(0.165869170525, abs=1e-12)
    assert p_value("fligner_killeen", EXAMPLE) == pytest.approx(expected, abs=1e-12)
    assert scipy.stats.fligner(*EXAMPLE, center="median").pvalue == pytest.approx(0.166655698339, abs=1e-12)
    for factor in (0.3, 1e-6, 7e8):
        scaled = [factor * group for group in whole]
        assert p_value("fligner_killeen", scaled) == pytest.approx(expected, abs=1e-12)


def test_equal_distances_leave_fligner_undefined():
    """Two values in each group, equally far apart in decimals: every rank is the same."""
    assert np.isnan(p_value("fligner_killeen", ([0.1, 0.3], [1.1, 1.3], [2.3, 2.5])))
    assert not np.isnan(p_value("fligner_killeen", ([0.1, 0.3], [1.1, 1.3], [2.3, 2.6])))


def pair_of_sums(freedoms, ratio):
    """Groups of values whose variances are 1, …, 1 and the ratio: each holds one value above and one below its mean."""
    groups = []
    for place, freedom in enumerate(freedoms):
        end = np.sqrt(freedom / 2 * (ratio if place == 0 else 1))
        groups.append(np.array([end, -end] + [0.0] * (freedom - 1)))
    return groups


FIVE_PERCENT = [
    ((2, 2), 39.0, 0.05),
    ((10, 10, 10), 4.845, 0.0005),
    ((10, 10, 10, 10), 5.670, 0.0005),
    ((9,) * 6, 7.793, 0.0005),
    ((60,) * 12, 2.351, 0.0005),
]
"""(degrees of freedom, point, half a unit of its last digit)."""


@pytest.mark.parametrize(("freedoms", "point", "half"), FIVE_PERCENT, ids=str)
def test_hartley_has_the_published_points_at_5_percent(freedoms, point, half):
    """Hartley (1950) and David (1952), to the digits that SuppDists for R gives: qmaxFratio(0.95, df, k).

    The point is where p passes 5 %: half a unit below its last digit p is larger, half a unit above smaller. David's
    table prints 2.36 for 12 groups and 60 degrees of freedom.
    """
    assert p_value("hartley_ratio", pair_of_sums(freedoms, point - half)) > 0.05
    assert p_value("hartley_ratio", pair_of_sums(freedoms, point + half)) < 0.05


@pytest.mark.parametrize("freedoms", [(1, 1), (2, 2), (1, 9), (30, 4), (99, 7), (200, 200)], ids=str)
def test_hartley_of_two_groups_is_the_f_test_at_both_ends(freedoms):
    """Of two variances either may be the larger: p is the sum of two tail areas of F (SciPy 1.17)."""
    f = scipy.stats.f
    for ratio in (1.0, 1.001, 1.1, 1.7, 3.0, 10.0, 90.0, 1e4):
        expected = f.sf(ratio, *freedoms) + f.sf(ratio, *freedoms[::-1])
        found = p_value("hartley_ratio", pair_of_sums(freedoms, ratio))
        assert found == pytest.approx(min(expected, 1), rel=2e-8, abs=1e-15)


@pytest.mark.parametrize("freedoms", [(3, 4, 5), (9, 19, 29), (2, 2, 2, 2), (1, 3, 12), (5,) * 9], ids=str)
def test_hartley_has_the_tail_areas_of_simulated_variances(freedoms):
    """400,000 ratios of the largest to the smallest of independent chi-square over their degrees of freedom."""
    draws = np.random.default_rng([1950, *freedoms]).chisquare(freedoms, (400_000, len(freedoms)))
    variances = draws / freedoms
    ratios = variances.max(axis=1) / variances.min(axis=1)
    for ratio in np.quantile(ratios, [0.1, 0.5, 0.8, 0.95, 0.99, 0.999]):
        p = p_value("hartley_ratio", pair_of_sums(freedoms, ratio))
        assert abs((ratios >= ratio).mean() - p) < 4.5 * np.sqrt(p * (1 - p) / len(ratios))


def test_hartley_on_the_invented_example_and_at_one_other_ratio():
    """Ratio 5.503152247, worked beforehand with p to five digits; sizes 10, 20, 30 at a ratio of 3, simulated .1035."""
    variances = [np.var(group, ddof=1) for group in EXAMPLE]
    assert max(variances) / min(variances) == pytest.approx(5.503152247, abs=5e-10)
    assert p_value("hartley_ratio", EXAMPLE) == pytest.approx(0.28575, abs=5e-6)
    assert p_value("hartley_ratio", pair_of_sums((9, 19, 29), 3)) == pytest.approx(0.103462, abs=5e-7)


def test_hartley_stays_a_share_for_any_ratio():
    """Beyond the end of the table p is below 1e-15; equal variances have p = 1; a constant group none."""
    for freedoms in ((1, 1, 1), (9, 19, 29), (1, 200)):
        assert p_value("hartley_ratio", pair_of_sums(freedoms, 1.0)) == pytest.approx(1, abs=1e-6)
        assert 0 <= p_value("hartley_ratio", pair_of_sums(freedoms, 1e100)) < 1e-14
    assert np.isnan(p_value("hartley_ratio", ([0.1, 0.1, 0.1], [1.2, 2.5, 0.7], [4.1, 9.3, 2.0])))


@settings(steady, max_examples=30)
@given(drawn=batches([HUNDREDTHS, DRAWN]))
def test_shapiro_of_each_group_adjusted_by_holm_is_the_smallest_adjusted_p(drawn):
    """statsmodels 0.15, multipletests(method="holm") on SciPy's Shapiro-Wilk p-values of the groups."""
    values, sizes = drawn
    found = CHECKS.make("shapiro_each_group", {"adjust": "holm"}).p_values(values, sizes)
    for row, p in zip(values, found, strict=True):
        groups = np.split(row, np.cumsum(sizes)[:-1])
        if UNDEFINED["shapiro_each_group"](groups):
            assert np.isnan(p)
            continue
        each = [scipy.stats.shapiro(group).pvalue for group in groups]
        assert p == pytest.approx(multipletests(each, method="holm")[1].min(), abs=2e-8 * len(groups))


def test_shapiro_of_each_group_takes_the_smallest_p_as_it_is_unless_told():
    """SciPy 1.17 gives the groups of the example .617, .852 and .996; three times the smallest is above 1."""
    each = [CHECKS.make("shapiro_residuals").p_values([group], [len(group)])[0] for group in EXAMPLE]
    assert p_value("shapiro_each_group", EXAMPLE) == pytest.approx(min(each), abs=1e-12)
    assert min(each) == pytest.approx(0.616894555, abs=2e-8)
    assert p_value("shapiro_each_group", EXAMPLE, adjust="holm") == 1


def test_shapiro_of_each_group_has_no_p_value_where_a_group_has_none():
    """A constant group (SciPy gives it 1), or one of two values."""
    others = [[1.2, 2.5, 0.7], [4.1, 9.3, 2.0]]
    for group in ([0.1, 0.1, 0.1], [0.1, 0.7]):
        for adjust in ("none", "holm"):
            assert np.isnan(p_value("shapiro_each_group", (group, *others), adjust=adjust))


def test_dagostino_of_one_group_is_that_of_its_values():
    """The values of the example in one group: .489867774128, worked beforehand; SciPy 1.17, normaltest."""
    values = np.concatenate(EXAMPLE)
    p = p_value("dagostino_residuals", [values])
    assert p == pytest.approx(0.489867774128, abs=6e-13)
    assert p == pytest.approx(scipy.stats.normaltest(values).pvalue, rel=1e-12)


def test_residuals_without_skewness_count_as_such_for_dagostino():
    """D'Agostino, Belanger & D'Agostino (1990): a skewness of 0 has z = 0, and p is that of the kurtosis.

    SciPy 1.17 gives z = 1.018 and p = .582 for these values, whose skewness is exactly 0.
    """
    values = np.array([-5.0, -3.0, -2.0, -1.0, 0.0, 1.0, 2.0, 3.0, 5.0])
    z = scipy.stats.kurtosistest(values).statistic
    assert p_value("dagostino_residuals", [values]) == pytest.approx(scipy.stats.chi2.sf(z**2, 2), rel=1e-10)
    assert scipy.stats.skewtest(values).statistic == pytest.approx(1.018, abs=5e-4)


@pytest.mark.parametrize("n", [8, 9, 20, 60, 1000])
def test_dagostino_is_scipy_s_at_every_size(n):
    """SciPy 1.17, normaltest; a p-value of 1e-12 keeps its digits."""
    rng = np.random.default_rng(n)
    for values in (
        rng.standard_normal(n),
        rng.exponential(size=n),
        rng.uniform(size=n),
        rng.standard_cauchy(n),
    ):
        expected = scipy.stats.normaltest(values).pvalue
        assert p_value("dagostino_residuals", [values]) == pytest.approx(expected, rel=1e-9)


def test_dagostino_has_no_p_value_for_few_or_constant_values():
    """The normal approximation of the skewness begins at 8 values."""
    assert np.isnan(p_value("dagostino_residuals", ([1.2, 2.5, 0.7], [4.1, 9.3, 2.0, 7.7])))
    assert not np.isnan(p_value("dagostino_residuals", ([1.2, 2.5, 0.7, 3.1], [4.1, 9.3, 2.0, 7.7])))
    assert np.isnan(p_value("dagostino_residuals", ([0.1] * 5, [0.7] * 7)))
