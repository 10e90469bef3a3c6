"""Trimmed, power-transformed and resampling tests against libraries, enumeration, and their definitions."""

import itertools
import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import minimize_scalar
from scipy.stats import binom, chi2, f_oneway, kruskal
from scipy.stats import t as student
from statsmodels.stats.oneway import anova_oneway

from workbench.methods import METHODS
from workbench.methods.boxcox_f import likeliest

WORKED = ([1.2, 2.5, 0.7, 3.1], [2.2, 4.6, 3.9, 5.8, 2.7], [4.1, 9.3, 2.0, 7.7, 5.2, 6.6])
"""A small invented example of three groups."""

FURTHEST = 4.5
"""Monte Carlo standard errors allowed."""

steady = settings(derandomize=True, deadline=None, max_examples=120)


def p_value(name, groups, rng=None, **chosen):
    """The p-value of k groups."""
    values = np.concatenate([np.asarray(group, dtype=float) for group in groups])[None]
    return float(METHODS.make(name, chosen).p_values(values, [len(group) for group in groups], rng)[0])


def group_values(smallest):
    """A group of rounded or spread-out values, or of equal ones."""
    kinds = [st.integers(0, 4).map(lambda n: n / 4 + 1), st.floats(0.5, 50, width=32)]
    return st.one_of(*(st.lists(kind, min_size=smallest, max_size=12) for kind in kinds))


@steady
@given(
    st.lists(group_values(5), min_size=2, max_size=5),
    st.sampled_from([0.0, 1e6]),
    st.sampled_from([0.1, 0.2]),
)
def test_trimmed_welch_is_that_of_statsmodels(groups, offset, trim):
    """statsmodels 0.15, anova_oneway(use_var="unequal", trim_frac=…); where Winsorised values are equal ours is NaN."""
    groups = [[value + offset for value in group] for group in groups]
    found = p_value("trimmed_welch", groups, trim=trim)
    cut = [int(trim * len(group) + 1e-9) for group in groups]
    inner = [sorted(group)[g : len(group) - g] for g, group in zip(cut, groups, strict=True)]
    if any(len(set(part)) == 1 for part in inner):
        assert math.isnan(found)
    else:
        wanted = anova_oneway(groups, use_var="unequal", trim_frac=trim).pvalue
        assert found == pytest.approx(wanted, abs=2e-7 if offset else 1e-9)


def test_trimmed_welch_on_the_worked_example():
    """Twice by the definition and by statsmodels 0.15 and WRS2 1.1-7 (t1way), 20 %: 0.060395523543."""
    assert p_value("trimmed_welch", WORKED) == pytest.approx(0.060395523543, abs=1e-11)


def test_nothing_trimmed_is_welch():
    assert p_value("trimmed_welch", WORKED, trim=0.0) == pytest.approx(p_value("welch_f", WORKED), abs=1e-13)


def test_the_share_trimmed_is_not_one_value_short():
    """0.29 of 100 values are 29, though 0.29 * 100 is a little less in binary numbers; Yuen's t by its definition."""
    rng = np.random.default_rng(1)
    groups = rng.standard_t(3, (2, 100))
    cut = np.sort(groups, axis=1)[:, 29:71]
    means = cut.mean(axis=1)
    winsorised = np.clip(np.sort(groups, axis=1), cut[:, :1], cut[:, -1:])
    errors = winsorised.var(axis=1, ddof=1) * 99 / (42 * 41)
    t = (means[0] - means[1]) / np.sqrt(errors.sum())
    freedom = errors.sum() ** 2 / (errors**2 / 41).sum()
    assert p_value("trimmed_welch", groups, trim=0.29) == pytest.approx(
        2 * student.sf(abs(t), freedom), abs=1e-12
    )


def test_missing_values_are_trimmed_as_if_the_group_were_smaller():
    full = METHODS.make("trimmed_welch").p_values(np.array([[*WORKED[0], *WORKED[1], *WORKED[2]]]), [4, 5, 6])
    gappy = [*WORKED[0], np.nan, *WORKED[1], np.nan, np.nan, *WORKED[2]]
    assert METHODS.make("trimmed_welch").p_values(np.array([gappy]), [5, 7, 6]) == pytest.approx(
        full, abs=1e-14
    )


@pytest.mark.parametrize("middle", [[0.0, 4.0, 4.0, 4.0, 9.0], [1.0]], ids=["equal", "one value"])
def test_too_little_left_or_nothing_that_varies_is_undefined(middle):
    assert math.isnan(
        p_value("trimmed_welch", [[1.0, 2.0, 3.0, 4.0, 5.0], middle, [1.0, 5.0, 6.0, 7.0, 8.0]])
    )


def ratio(groups, welch=False):
    """F or Welch's F by statsmodels 0.15; infinite where there is none."""
    with np.errstate(all="ignore"):
        found = anova_oneway(groups, use_var="unequal" if welch else "equal").statistic
    return found if np.isfinite(found) else np.inf


def enumerated(groups, statistic):
    """Share of all arrangements of the values whose statistic reaches that observed, by brute force."""
    values, sizes = np.concatenate(groups), [len(group) for group in groups]
    observed, reached, number = statistic(groups), 0, 0
    for order in arrangements(list(range(len(values))), sizes):
        number += 1
        reached += statistic([values[list(places)] for places in order]) >= observed * (1 - 1e-9)
    return reached / number


def arrangements(places, sizes):
    """Every way to divide places among groups of the given sizes."""
    if len(sizes) == 1:
        yield (tuple(places),)
        return
    for chosen in itertools.combinations(places, sizes[0]):
        rest = [place for place in places if place not in chosen]
        for others in arrangements(rest, sizes[1:]):
            yield (chosen, *others)


SMALL = {
    "distinct": ([1.0, 2.7], [3.1, 5.9, 4.2], [8.4, 2.2]),
    "tied": ([1.0, 2.0], [2.0, 2.0, 4.0], [5.0, 4.0]),
    "two groups": ([1.3, 0.2, 5.5, 2.2], [3.1, 7.2, 6.4]),
}


@pytest.mark.parametrize("data", SMALL)
@pytest.mark.parametrize(
    ("name", "statistic"),
    [
        ("permutation_f", ratio),
        ("permutation_welch", lambda groups: ratio(groups, welch=True)),
        ("kruskal_wallis_permuted", lambda groups: kruskal(*groups).statistic),
    ],
)
def test_permutations_come_near_full_enumeration(name, statistic, data):
    """All 210 or 35 arrangements by brute force, statistics by statsmodels 0.15 and SciPy 1.17."""
    groups = [np.array(group) for group in SMALL[data]]
    exact, many = enumerated(groups, statistic), 40_000
    found = p_value(name, groups, np.random.default_rng(5), permutations=many)
    error = math.sqrt(max(exact * (1 - exact), 1e-9) / many)
    assert abs(found - exact) < FURTHEST * error + 2 / many


@pytest.mark.parametrize(
    ("name", "exact"),
    [
        ("permutation_f", 0.027694527694),
        ("permutation_welch", 0.034116676974),
        ("kruskal_wallis_permuted", 0.041158841159),
    ],
)
def test_permutations_on_the_worked_example(name, exact):
    """All 630,630 arrangements of the worked example, by two programs."""
    many = 100_000
    found = p_value(name, WORKED, np.random.default_rng(6), permutations=many)
    assert abs(found - exact) < FURTHEST * math.sqrt(exact * (1 - exact) / many)


@pytest.mark.parametrize("name", ["permutation_f", "permutation_welch", "kruskal_wallis_permuted"])
def test_a_permutation_test_errs_as_often_as_its_level_and_its_count_is_binomial(name):
    """Size floor(alpha (B + 1)) / (B + 1) for continuous data (Phipson & Smyth 2010), and an honest standard error.

    Datasets of a block share their relabellings; 200 blocks show that their counts vary no more than binomial ones.
    """
    method, rng = METHODS.make(name, {"permutations": 39}), np.random.default_rng(7)
    counts = np.array(
        [(method.p_values(rng.standard_normal((500, 12)), (4, 4, 4), rng) <= 0.05).sum() for _ in range(200)]
    )
    rate = counts.sum() / 100_000
    assert abs(rate - 0.05) < FURTHEST * math.sqrt(0.05 * 0.95 / 100_000)
    spread = counts.var(ddof=1) / (500 * 0.05 * 0.95)
    assert chi2.ppf(1e-5, 199) / 199 < spread < chi2.ppf(1 - 1e-5, 199) / 199


def test_ties_do_not_make_a_permutation_test_reject_more():
    method, rng = METHODS.make("permutation_f", {"permutations": 19}), np.random.default_rng(8)
    values = rng.integers(0, 3, (40_000, 9)).astype(float)
    rejected = (method.p_values(values, (3, 3, 3), rng) <= 0.05).sum()
    assert rejected <= binom.ppf(1 - 1e-6, 40_000, 0.05)


@pytest.mark.parametrize("name", ["permutation_f", "permutation_welch"])
def test_units_and_offsets_do_not_change_permutations(name):
    values = np.random.default_rng(9).standard_normal((30, 15))
    wanted = METHODS.make(name).p_values(values, (4, 5, 6), np.random.default_rng(1))
    for factor, offset in ((1e-6, 0), (1024.0, 0), (1.0, 1e6)):
        found = METHODS.make(name).p_values(values * factor + offset, (4, 5, 6), np.random.default_rng(1))
        assert np.abs(found - wanted).max() <= 0.0021


@pytest.mark.parametrize("name", ["permutation_f", "permutation_welch", "kruskal_wallis_permuted"])
def test_missing_values_count_as_absent(name):
    groups = [np.array(group) for group in SMALL["distinct"]]
    gappy = np.array([[1.0, np.nan, 2.7, 3.1, 5.9, 4.2, np.nan, 8.4, 2.2]])
    many = 40_000
    statistic = {"permutation_f": ratio, "permutation_welch": lambda g: ratio(g, welch=True)}
    exact = enumerated(groups, statistic.get(name, lambda g: kruskal(*g).statistic))
    found = METHODS.make(name, {"permutations": many}).p_values(gappy, (3, 4, 2), np.random.default_rng(4))[0]
    assert abs(found - exact) < FURTHEST * math.sqrt(exact * (1 - exact) / many) + 2 / many


def test_what_is_undefined_for_the_data_is_undefined_for_permutations():
    constant = ([2.0, 2.0], [3.0, 3.0], [5.0, 5.0])
    one = ([2.0, 2.0, 2.0], [3.0, 4.0, 5.0], [5.0, 7.0, 5.0])
    alike = ([1.0, 1.0], [1.0, 1.0], [1.0, 1.0])
    rng = np.random.default_rng(2)
    assert math.isnan(p_value("permutation_f", constant, rng)) and not math.isnan(
        p_value("permutation_f", one, rng)
    )
    assert math.isnan(p_value("permutation_welch", one, rng))
    assert math.isnan(p_value("kruskal_wallis_permuted", alike, rng))
    assert not math.isnan(p_value("kruskal_wallis_permuted", constant, rng))
    assert math.isnan(p_value("parametric_bootstrap_f", one, rng))


def resampled(groups, number, rng):
    """Share of resampled normal data whose statistic reaches the one observed, by the definition.

    Krishnamoorthy, Lu & Mathew (2007), section 2: means 0 and the variances observed, sizes as they are.
    """
    sizes = np.array([len(group) for group in groups])
    variances = np.array([np.var(group, ddof=1) for group in groups])

    def apart(means, spreads):
        weights = sizes / spreads
        centre = (weights * means).sum(axis=-1, keepdims=True) / weights.sum(axis=-1, keepdims=True)
        return (weights * (means - centre) ** 2).sum(axis=-1)

    observed = apart(np.array([np.mean(group) for group in groups]), variances)
    drawn = [rng.standard_normal((number, n)) * np.sqrt(v) for n, v in zip(sizes, variances, strict=True)]
    means = np.stack([some.mean(axis=1) for some in drawn], axis=1)
    spreads = np.stack([some.var(axis=1, ddof=1) for some in drawn], axis=1)
    return (apart(means, spreads) >= observed).mean()


@pytest.mark.parametrize("groups", [WORKED, ([1.0, 2.0, 4.0], [1.5, 9.0, 3.0, 2.0])], ids=["worked", "small"])
def test_the_parametric_bootstrap_is_its_definition(groups):
    rng, many = np.random.default_rng(3), 200_000
    wanted = resampled(groups, many, rng)
    found = p_value("parametric_bootstrap_f", groups, rng, resamples=100_000)
    error = math.sqrt(wanted * (1 - wanted) * (1 / many + 1 / 100_000))
    assert abs(found - wanted) < FURTHEST * error


@pytest.mark.heavy
def test_the_parametric_bootstrap_keeps_its_level():
    """0.0502 in 20,000 datasets of a program apart, n = 6/8/10, standard deviations 1/2/3."""
    rng, number = np.random.default_rng(4), 20_000
    values = rng.standard_normal((number, 24)) * np.repeat([1.0, 2.0, 3.0], [6, 8, 10])
    rate = (METHODS.make("parametric_bootstrap_f").p_values(values, (6, 8, 10), rng) <= 0.05).mean()
    assert abs(rate - 0.0502) < FURTHEST * math.sqrt(2 * 0.05 * 0.95 / number)


def variation(power, groups):
    """ln of the sum of squares within groups after a scaled power, by the definition (Box & Cox 1964, section 3)."""
    logs = [np.log(group) for group in groups]
    centre = np.concatenate(logs).mean()
    apart = [x - centre if abs(power) < 1e-12 else (np.exp(power * (x - centre)) - 1) / power for x in logs]
    return math.log(sum(((y - y.mean()) ** 2).sum() for y in apart))


@pytest.mark.parametrize("seed", range(30))
def test_the_power_is_the_likeliest_within_groups(seed):
    """scipy.optimize 1.17, bounded minimisation of the variation within groups."""
    rng = np.random.default_rng(seed)
    groups = [np.exp(rng.normal(0, rng.uniform(0.1, 0.8), n)) for n in rng.integers(3, 12, 3)]
    logs = np.log(np.concatenate(groups))
    found = likeliest((logs - logs.mean())[:, None], tuple(map(len, groups)))[0]
    best = minimize_scalar(
        variation, bounds=(-2, 2), args=(groups,), method="bounded", options={"xatol": 1e-9}
    )
    assert abs(found) <= 2.01
    if abs(best.x) < 1.98:
        assert found == pytest.approx(best.x, abs=1e-3)
    assert variation(found, groups) <= best.fun + 1e-4


def test_boxcox_on_the_worked_example():
    """Power 0.343790 (MASS 7.3, boxcox(y ~ g), grid of 0.001: 0.344), then the F of SciPy 1.17 on that power."""
    power = 0.343790
    wanted = f_oneway(*([value**power for value in group] for group in WORKED)).pvalue
    assert p_value("boxcox_f", WORKED) == pytest.approx(wanted, abs=1e-6)
    assert p_value("boxcox_f", WORKED) == pytest.approx(0.018997493351, abs=1e-6)


def test_boxcox_has_no_value_without_positive_values_or_variation():
    assert math.isnan(p_value("boxcox_f", ([1.0, 0.0, 2.0], [3.0, 4.0, 5.0])))
    assert math.isnan(p_value("boxcox_f", ([1.0, 1.0], [2.0, 2.0])))


def test_boxcox_of_lognormal_groups_is_near_the_f_on_logarithms():
    values = np.exp(np.random.default_rng(1).normal(0, 0.5, (50, 300)))
    apart = METHODS.make("boxcox_f").p_values(values, (100,) * 3) - METHODS.make("log_f").p_values(
        values, (100,) * 3
    )
    assert np.abs(apart).max() < 0.05
