"""Methods on ranks against independent libraries, their definitions worked by brute force, and exact enumeration."""

import warnings
from itertools import product
from statistics import NormalDist

import numpy as np
import pytest
import scipy.stats
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from scipy.integrate import quad
from scipy.optimize import brentq
from scipy.special import chdtrc
from statsmodels.stats.oneway import anova_oneway

from workbench.groups import Batch
from workbench.limits import anderson_darling_tail, log_tail
from workbench.methods import METHODS
from workbench.methods.anderson_darling_k import standardised, variance

steady = settings(
    derandomize=True, deadline=None, max_examples=150, suppress_health_check=[HealthCheck.too_slow]
)


def p_of(name, groups):
    """The p-value a method gives one dataset of k groups."""
    return METHODS.make(name).p_values([np.concatenate(groups)], [len(group) for group in groups])[0]


def ranks_by_counting(groups):
    """Mid-ranks of k groups among all values: how many are smaller, half of those equal, and a half."""
    pooled = np.concatenate(groups)
    return [np.array([(pooled < x).sum() + (pooled == x).sum() / 2 + 0.5 for x in group]) for group in groups]


def varies(group):
    """Whether not all values are equal."""
    return len(set(group)) > 1


def rank_welch(groups):
    """SciPy's rankdata and statsmodels' Welch test; None where a group does not vary."""
    if not all(map(varies, groups)):
        return np.nan
    ranks = scipy.stats.rankdata(np.concatenate(groups))
    parts = np.split(ranks, np.cumsum([len(group) for group in groups])[:-1])
    return float(anova_oneway(parts, use_var="unequal").pvalue)


def brunner_dette_munk(groups):
    """The matrix form of the paper: relative effects Q, their covariance V, the centring matrix M, and traces."""
    if min(map(len, groups)) < 2 or not any(map(varies, groups)):
        return np.nan
    ranks, sizes = ranks_by_counting(groups), np.array([len(group) for group in groups])
    total, k = sizes.sum(), len(groups)
    effects = np.array([(part.mean() - 0.5) / total for part in ranks])
    v = total * np.diag([np.var(part, ddof=1) / total**2 / len(part) for part in ranks])
    m = np.eye(k) - np.ones((k, k)) / k
    d = np.diag(np.diag(m))
    f = total * effects @ m @ effects / np.trace(m @ v)
    numerator = np.trace(m @ v) ** 2 / np.trace(m @ v @ m @ v)
    denominator = np.trace(d @ v) ** 2 / np.trace(d @ d @ v @ v @ np.diag(1 / (sizes - 1)))
    return scipy.stats.f.sf(f, numerator, denominator)


def normal_scores(groups):
    """Conover (1999, section 5.10) less the scores' mean, as ties need it; quantiles of the standard library."""
    if not varies(np.concatenate(groups)):
        return np.nan
    total = sum(map(len, groups))
    scores = [[NormalDist().inv_cdf(r / (total + 1)) for r in part] for part in ranks_by_counting(groups)]
    mean = sum(map(sum, scores)) / total
    spread = sum((a - mean) ** 2 for part in scores for a in part) / (total - 1)
    between = sum(len(part) * (sum(part) / len(part) - mean) ** 2 for part in scores)
    return scipy.stats.chi2.sf(between / spread, len(groups) - 1)


def median_test(groups):
    """SciPy's median_test, which raises ValueError where nothing lies above the median."""
    try:
        return scipy.stats.median_test(*groups).pvalue
    except ValueError:
        return np.nan


REFERENCES = {
    "rank_welch": rank_welch,
    "brunner_dette_munk": brunner_dette_munk,
    "normal_scores": normal_scores,
    "median_test": median_test,
}
"""The p-value of k groups by the name of a method; anderson_darling_k is compared by its statistic."""

every_reference = pytest.mark.parametrize("name", REFERENCES)

MANY = st.integers(-4000, 4000).map(lambda whole: whole / 100)
FEW = st.integers(0, 3).map(lambda whole: whole / 10)
TWO = st.sampled_from([0.0, 1.0])


@st.composite
def datasets(draw, most=7, least=1):
    """k groups, from 2 to the most, of the least size to 10: few ties, many, or two values; at times one constant."""
    sizes = draw(st.lists(st.integers(least, 10), min_size=2, max_size=most))
    kind = draw(st.sampled_from([MANY, FEW, TWO]))
    groups = [np.array(draw(st.lists(kind, min_size=size, max_size=size))) for size in sizes]
    if draw(st.integers(0, 3)) == 0:
        groups[0][:] = groups[0][0]
    return groups


@every_reference
@steady
@given(groups=datasets())
def test_any_data_are_judged_as_the_reference_does(name, groups):
    """SciPy 1.17 and statsmodels 0.15, or the definition worked by brute force: see REFERENCES."""
    assert p_of(name, groups) == pytest.approx(REFERENCES[name](groups), rel=1e-8, abs=1e-12, nan_ok=True)


def awkward(sizes, replications=40):
    """(R, N) values: as drawn, in halves, in twos, with gaps, by turns; no group is emptied."""
    rng = np.random.default_rng([1952, *sizes])
    drawn = rng.standard_normal((replications, sum(sizes))) * np.repeat(
        rng.uniform(0.5, 3, len(sizes)), sizes
    )
    gaps = rng.random(drawn.shape) < 0.25
    gaps[:, np.cumsum((0, *sizes))[:-1]] = False
    kinds = np.stack(
        [drawn, np.round(2 * drawn) / 2, np.round(drawn / 2), np.where(gaps, np.nan, np.round(drawn, 1))]
    )
    return kinds[np.arange(replications) % 4, np.arange(replications)]


every_layout = pytest.mark.parametrize("sizes", [(2, 2), (1, 4, 2), (3, 12), (10, 20, 30), (4,) * 9], ids=str)


def present(row, sizes):
    """The groups of a row of values, missing ones left out."""
    return [part[~np.isnan(part)] for part in np.split(row, np.cumsum(sizes)[:-1])]


@every_layout
@every_reference
def test_a_batch_with_gaps_is_judged_as_the_reference_judges_what_is_left(name, sizes):
    """SciPy 1.17 and statsmodels 0.15, or the definition worked by brute force: see REFERENCES."""
    values = awkward(sizes)
    for row, p in zip(values, METHODS.make(name).p_values(values, sizes), strict=True):
        expected = REFERENCES[name](present(row, sizes))
        assert p == pytest.approx(expected, rel=1e-8, abs=1e-12, nan_ok=True)


def anderson_darling_t(groups):
    """SciPy's standardised statistic in mid-ranks; NaN where it has none, or divides by a variance of 0."""
    if not varies(np.concatenate(groups)) or max(map(len, groups)) < 2 or sum(map(len, groups)) < 4:
        return np.nan
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        return scipy.stats.anderson_ksamp(groups, midrank=True).statistic


def assert_statistics_are_those_of_scipy(values, sizes):
    """T of every dataset of a batch, missing values left out."""
    with np.errstate(all="ignore"):
        found = standardised(Batch(values, sizes))
    for row, t in zip(np.asarray(values), found, strict=True):
        assert t == pytest.approx(anderson_darling_t(present(row, sizes)), rel=1e-9, abs=1e-9, nan_ok=True)


@steady
@given(groups=datasets())
def test_the_anderson_darling_statistic_of_any_data_is_that_of_scipy(groups):
    """SciPy 1.17, anderson_ksamp with mid-ranks."""
    assert_statistics_are_those_of_scipy([np.concatenate(groups)], [len(group) for group in groups])


@every_layout
def test_the_anderson_darling_statistics_of_a_batch_with_gaps_are_those_of_scipy(sizes):
    """SciPy 1.17, anderson_ksamp with mid-ranks."""
    assert_statistics_are_those_of_scipy(awkward(sizes), sizes)


def test_the_anderson_darling_statistic_of_many_groups_and_values_is_that_of_scipy():
    """SciPy 1.17; more groups and longer datasets than are worked on at a time."""
    rng = np.random.default_rng(2)
    for sizes in ((3,) * 33, (9_000, 11_000)):
        assert_statistics_are_those_of_scipy(np.round(rng.standard_normal((2, sum(sizes))), 2), sizes)


@steady
@given(groups=datasets(most=2))
def test_for_two_groups_brunner_dette_munk_is_welch_on_ranks(groups):
    """Both are then the square of Welch's t on ranks with Satterthwaite's df; one constant group only stops Welch."""
    if all(map(varies, groups)):
        assert p_of("brunner_dette_munk", groups) == pytest.approx(p_of("rank_welch", groups), rel=1e-9)


EXAMPLE = [[1.2, 2.5, 0.7, 3.1], [2.2, 4.6, 3.9, 5.8, 2.7], [4.1, 9.3, 2.0, 7.7, 5.2, 6.6]]
EXAMPLE_P = {
    "rank_welch": (0.041455773008, 6e-13),
    "brunner_dette_munk": (0.022758721602, 6e-13),
    "normal_scores": (0.046818892768, 6e-13),
    "median_test": (0.032870536439, 6e-13),
    "anderson_darling_k": (0.0356857, 6e-8),
}


@pytest.mark.parametrize("name", EXAMPLE_P)
def test_an_invented_example_has_the_p_values_worked_beforehand(name):
    """Invented data, worked before these methods were written, with a plain program and in turn with SciPy and
    statsmodels, asbio 1.13 (BDM.test), coin (normal_test), SciPy, and kSamples (ad.test: .03569).
    """
    p, tolerance = EXAMPLE_P[name]
    assert p_of(name, EXAMPLE) == pytest.approx(p, rel=0, abs=tolerance)


SMOOTHNESS = [
    [38.7, 41.5, 43.8, 44.5, 45.5, 46.0, 47.7, 58.0],
    [39.2, 39.3, 39.7, 41.4, 41.8, 42.9, 43.3, 45.8],
    [34.0, 35.0, 39.0, 40.0, 43.0, 43.0, 44.0, 45.0],
    [34.0, 34.8, 34.8, 35.4, 37.2, 37.8, 41.2, 42.8],
]
"""Smoothness of paper measured by four laboratories: Lehmann, as in Scholz & Stephens (1987).

Read from SciPy 1.17, stats/tests/test_morestats.py, TestAndersonKSamp.test_example1b.
"""


def test_the_smoothness_of_paper_has_the_published_statistic():
    """Scholz & Stephens (1987): A2 = 8.3926, sigma = 1.2038, T = 4.480 and .0020 by their interpolation.

    The limit law gives .0022, as does kSamples (ad.test, version 2).
    """
    batch = Batch([np.concatenate(SMOOTHNESS)], (8,) * 4)
    t, sigma = standardised(batch)[0], np.sqrt(variance(batch.sizes, batch.total)[0])
    assert t == pytest.approx(4.480, abs=5e-4)
    assert sigma == pytest.approx(1.2038, abs=5e-5)
    assert 3 + t * sigma == pytest.approx(8.3926, abs=5e-5)
    assert p_of("anderson_darling_k", SMOOTHNESS) == pytest.approx(0.0022, abs=5e-5)


def plain_anderson_darling(labels, sizes):
    """A2 of untied values, equation 6 of the paper, from the group numbers in order: no mid-ranks."""
    total, found = len(labels), 0.0
    for j in range(1, total):
        below = [(labels[:j] == group).sum() for group in range(len(sizes))]
        found += sum((total * m - j * n) ** 2 / n for m, n in zip(below, sizes, strict=True)) / (
            j * (total - j)
        )
    return found / total


def test_the_anderson_darling_statistic_is_measured_in_the_deviations_of_its_plain_form():
    """Scholz & Stephens (1987): mean k - 1, variance sigma^2 of the form without mid-ranks, equation 6.

    Over all 1,260 arrangements. They use the same sigma with mid-ranks, whose mean is k - 1 too.
    """
    sizes = (2, 3, 4)
    values = arrangements(sizes)
    labels = np.repeat(np.arange(3), sizes)[np.argsort(values, axis=1)]
    plain = np.array([plain_anderson_darling(row, sizes) for row in labels])
    batch = Batch(values, sizes)
    assert plain.mean() == pytest.approx(2, rel=1e-12)
    assert plain.var() == pytest.approx(variance(batch.sizes, batch.total)[0], rel=1e-12)
    assert standardised(batch).mean() == pytest.approx(0, abs=1e-12)


def imhof_tail(df, x, terms=3000):
    """P(sum of X_j / (j (j + 1)) > x) with df degrees of freedom each: Imhof (1961), the later terms as their mean."""
    weights = 1 / np.arange(1, terms + 1) / np.arange(2, terms + 2)
    rest = df / (terms + 1)

    def integrand(u):
        angle = df / 2 * np.arctan(weights * u).sum() - (x - rest) * u / 2
        return np.sin(angle) / u / np.exp(df / 4 * np.log1p((weights * u) ** 2).sum())

    end = brentq(lambda u: df / 4 * np.log1p((weights * u) ** 2).sum() + np.log(u) - 28, 1, 1e5)
    return 0.5 + quad(integrand, 1e-12, end, limit=4000, epsabs=1e-10)[0] / np.pi


@pytest.mark.parametrize("groups", [2, 3, 6, 15])
def test_the_limit_law_agrees_with_imhof_s_inversion(groups):
    """Imhof (1961, Biometrika 48, 419-426) on 3,000 of the weights: other path, other transform."""
    df = groups - 1
    x = df * np.array([0.2, 0.6, 1.0, 1.4, 2.2, 4.0])
    expected = [imhof_tail(df, one) for one in x]
    np.testing.assert_allclose(np.exp(log_tail(df, x)), expected, rtol=0, atol=2e-8)
    np.testing.assert_allclose(anderson_darling_tail(groups, x), expected, rtol=0, atol=3e-8)


@pytest.mark.parametrize("groups", [2, 3, 4, 10, 30])
def test_the_table_of_the_limit_law_follows_the_inversion(groups):
    """Between its nodes, far into the tail: the same digits, and never a rise."""
    df = groups - 1
    x = np.linspace(0.04 * df, 600 + 10 * df, 20_001)
    tail = anderson_darling_tail(groups, x)
    np.testing.assert_allclose(tail, np.exp(log_tail(df, x)), rtol=3e-7, atol=1e-300)
    assert (np.diff(tail) <= 0).all()


def test_the_limit_law_has_the_published_points_of_the_anderson_darling_statistic():
    """Anderson & Darling (1954, JASA 49, 765-769): 10, 5 and 1 % points 1.933, 2.492, 3.857 for one sample.

    The last is known to be low: the tail beyond it is .0102.
    """
    tail = anderson_darling_tail(2, np.array([1.933, 2.492, 3.857]))
    np.testing.assert_allclose(tail, [0.09999, 0.05002, 0.01024], rtol=0, atol=6e-6)


PERCENTILES = {0.25: (0.675, -0.245, -0.105), 0.10: (1.281, 0.25, -0.305), 0.05: (1.645, 0.678, -0.362)}
PERCENTILES |= {0.025: (1.96, 1.149, -0.391), 0.01: (2.326, 1.822, -0.396)}
"""Scholz & Stephens (1987, table 2): the standardised percentile is b0 + b1 / sqrt(k - 1) + b2 / (k - 1)."""


@pytest.mark.parametrize("level", PERCENTILES)
def test_the_limit_law_has_the_published_percentiles(level):
    """Scholz & Stephens (1987), k - 1 = 1, 2, 3, 4, 6, 8 and 10, as SciPy 1.17 has them.

    Their 1 % points for few groups are low, like that of one sample; the others agree to 1.5 % of the level.
    """
    for df in (1, 2, 3, 4, 6, 8, 10):
        t = np.dot(PERCENTILES[level], [1, df**-0.5, 1 / df])
        x = df + t * np.sqrt(2 * df * (np.pi**2 / 3 - 3))
        assert anderson_darling_tail(df + 1, np.array([x]))[0] == pytest.approx(level, rel=0.03)


def test_the_limit_law_goes_from_one_to_nothing():
    found = anderson_darling_tail(3, np.array([-2.0, 0.0, 0.01, 1e4, np.nan]))
    np.testing.assert_array_equal(found[:3], [1, 1, 1])
    assert 0 <= found[3] < 1e-300
    assert np.isnan(found[4])


PLAIN = [[1.0, 2.0, 5.0], [3.0, 4.0, 8.0], [6.0, 7.0, 9.0]]
ONE_CONSTANT = [[1.0, 1.0, 1.0], [3.0, 4.0, 8.0], [6.0, 7.0, 9.0]]
ALL_CONSTANT = [[1.0, 1.0, 1.0], [2.0, 2.0], [3.0, 3.0, 3.0]]
ALL_EQUAL = [[2.0, 2.0, 2.0], [2.0, 2.0], [2.0, 2.0, 2.0]]
ONE_SINGLE = [[1.0], [3.0, 4.0, 8.0], [6.0, 7.0, 9.0]]
SINGLES = [[1.0], [2.0], [3.0], [4.0]]
THREE = [[1.0, 2.0], [3.0]]
NONE_ABOVE = [[2.0, 2.0, 1.0], [2.0, 2.0, 2.0], [2.0, 1.0]]
EMPTY = [[np.nan, np.nan], [3.0, 4.0, 8.0], [6.0, 7.0, 9.0]]

UNDEFINED = {
    "rank_welch": (ONE_CONSTANT, ALL_CONSTANT, ALL_EQUAL, ONE_SINGLE, SINGLES, EMPTY),
    "brunner_dette_munk": (ALL_CONSTANT, ALL_EQUAL, ONE_SINGLE, SINGLES, EMPTY),
    "normal_scores": (ALL_EQUAL, EMPTY),
    "median_test": (ALL_EQUAL, NONE_ABOVE, EMPTY),
    "anderson_darling_k": (ALL_EQUAL, SINGLES, THREE, EMPTY),
}
DEFINED = {
    "rank_welch": (PLAIN, SMOOTHNESS),
    "brunner_dette_munk": (PLAIN, ONE_CONSTANT, NONE_ABOVE),
    "normal_scores": (PLAIN, ONE_CONSTANT, ALL_CONSTANT, ONE_SINGLE, SINGLES, THREE, NONE_ABOVE),
    "median_test": (PLAIN, ONE_CONSTANT, ALL_CONSTANT, ONE_SINGLE, SINGLES, THREE),
    "anderson_darling_k": (PLAIN, ONE_CONSTANT, ALL_CONSTANT, ONE_SINGLE, NONE_ABOVE),
}


@pytest.mark.parametrize("name", UNDEFINED)
def test_a_method_has_no_p_value_where_it_says_so_and_one_elsewhere(name):
    assert [p_of(name, groups) for groups in UNDEFINED[name]] == pytest.approx(
        [np.nan] * len(UNDEFINED[name]), nan_ok=True
    )
    assert not np.isnan([p_of(name, groups) for groups in DEFINED[name]]).any()


@pytest.mark.parametrize(
    ("groups", "above"),
    [
        ([[1.0, 2.0, 3.0], [4.0, 5.0, 6.0]], (0, 3)),
        ([[1.0, 2.0, 2.0], [2.0, 2.0, 6.0]], (0, 1)),
        ([[2.0, 2.0, 9.0], [2.0, 1.0, 6.0, 7.0]], (1, 2)),
        ([[1.0, 5.0, 5.0, 5.0], [5.0, 6.0, 7.0]], (0, 2)),
        ([[1.0, 5.0, 5.0, 5.0], [5.0, 5.0, 7.0]], (0, 1)),
    ],
)
def test_ties_with_the_median_lie_below_whatever_their_mid_rank(groups, above):
    """Worked by hand, with Yates' correction: a half less for each of the four cells."""
    n, counts = np.array([len(group) for group in groups]), np.array(above)
    share = counts.sum() / n.sum()
    away = np.maximum(abs(counts - share * n) - 0.5, 0)
    expected = chdtrc(1, (away**2 / n).sum() / (share * (1 - share)))
    assert p_of("median_test", groups) == pytest.approx(expected, rel=1e-12)


def test_scores_of_tied_values_are_centred():
    """With ties the scores do not add up to 0; code that takes it for granted gives another p-value here."""
    groups = [[1.0, 1.0, 1.0, 1.0], [1.0, 1.0, 2.0, 3.0, 4.0]]
    ranks = scipy.stats.rankdata(np.concatenate(groups))
    scores = scipy.stats.norm.ppf(ranks / 10)
    uncentred = 8 * (scores[:4].sum() ** 2 / 4 + scores[4:].sum() ** 2 / 5) / (scores**2).sum()
    assert abs(p_of("normal_scores", groups) - chdtrc(1, uncentred)) > 5e-4
    assert p_of("normal_scores", groups) == pytest.approx(normal_scores(groups), rel=1e-10)


def arrangements(sizes):
    """(R, N): every way in which 1 … N can fall into groups of these sizes."""

    def ways(left, counts):
        if not left:
            yield []
        for group in range(len(counts)):
            if counts[group]:
                rest = (*counts[:group], counts[group] - 1, *counts[group + 1 :])
                yield from ([group, *tail] for tail in ways(left - 1, rest))

    labels = np.array(list(ways(sum(sizes), tuple(sizes))))
    return np.argsort(labels, axis=1, kind="stable") + 1.0


def tied_outcomes(sizes):
    """(R, N): every outcome of N draws from three values."""
    return np.array(list(product([0.0, 1.0, 2.0], repeat=sum(sizes))))


def anderson_darling(groups):
    """SciPy's statistic and Imhof's inversion; tail areas of equal statistics are worked once."""
    t = anderson_darling_t(groups)
    if np.isnan(t):
        return np.nan
    df, key = len(groups) - 1, round(t, 9)
    if (df, key) not in TAILS:
        x = df + t * np.sqrt(2 * df * (np.pi**2 / 3 - 3))
        TAILS[df, key] = imhof_tail(df, x, 300) if x > 0.02 else 1.0
    return TAILS[df, key]


TAILS = {}

DRAWS = 60_000


@pytest.mark.heavy
@pytest.mark.parametrize("ties", [False, True], ids=["no ties", "ties"])
@pytest.mark.parametrize("name", [*REFERENCES, "anderson_darling_k"])
def test_simulated_sizes_are_those_of_all_outcomes(name, ties):
    """Identical distributions: a method's rates over random datasets are those of its reference over all outcomes.

    Sizes 2, 3, 3 without ties: 560 equally likely arrangements; 2, 2, 3 from three equally likely values: 2,187
    outcomes, some without a p-value. Within 4.5 standard errors.
    """
    sizes = (2, 2, 3) if ties else (2, 3, 3)
    rng = np.random.default_rng(1987)
    outcomes = tied_outcomes(sizes) if ties else arrangements(sizes)
    exact = np.array(
        [
            ({"anderson_darling_k": anderson_darling} | REFERENCES)[name](present(row, sizes))
            for row in outcomes
        ]
    )
    shape = (DRAWS, sum(sizes))
    values = rng.integers(0, 3, shape).astype(float) if ties else rng.standard_normal(shape)
    found = METHODS.make(name).p_values(values, sizes)
    for events, happened in ((exact <= level, found <= level) for level in (0.05, 0.1, 0.3)):
        within(happened.mean(), events.mean())
    within(np.isnan(found).mean(), np.isnan(exact).mean())


def within(rate, expected):
    """Assert that a rate over all draws is within 4.5 standard errors of what is expected."""
    assert abs(rate - expected) <= 4.5 * np.sqrt(expected * (1 - expected) / DRAWS)
