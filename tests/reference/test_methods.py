"""p-values of methods and checks against independent libraries, certified values and worked examples."""

import csv
import re
import warnings
from fractions import Fraction
from importlib.resources import files
from itertools import product
from pathlib import Path

import numpy as np
import pytest
import scipy.stats
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from scipy.special import chdtrc, fdtrc
from statsmodels.stats.oneway import anova_oneway

from workbench.checks import CHECKS
from workbench.groups import Batch
from workbench.methods import METHODS

DATA = Path(__file__).parent / "data"

steady = settings(
    derandomize=True, deadline=None, max_examples=150, suppress_health_check=[HealthCheck.too_slow]
)


def part_called(name):
    """The method or check of that name."""
    return METHODS.make(name) if name in METHODS else CHECKS.make(name)


def residuals(groups):
    """Values less the means of their groups, worked in fractions."""
    found = []
    for group in groups:
        mean = sum(map(Fraction, group)) / len(group)
        found += [float(Fraction(value) - mean) for value in group]
    return found


REFERENCES = {
    "classical_f, SciPy": lambda groups: scipy.stats.f_oneway(*groups).pvalue,
    "welch_f, SciPy": lambda groups: scipy.stats.f_oneway(*groups, equal_var=False).pvalue,
    "welch_f, statsmodels": lambda groups: anova_oneway(groups, use_var="unequal").pvalue,
    # .pvalue is the variant of Mehrotra (1997); .pvalue2 the test of 1974.
    "brown_forsythe_f, statsmodels": lambda groups: anova_oneway(groups, use_var="bf").pvalue2,
    "kruskal_wallis, SciPy": lambda groups: scipy.stats.kruskal(*groups).pvalue,
    "log_f, SciPy": lambda groups: scipy.stats.f_oneway(*map(np.log, groups)).pvalue,
    "levene_median, SciPy": lambda groups: scipy.stats.levene(*groups, center="median").pvalue,
    "shapiro_residuals, SciPy": lambda groups: scipy.stats.shapiro(residuals(groups)).pvalue,
}
"""By "part, library": the p-value of k groups."""

TOLERANCES = {"shapiro_residuals": 2e-8}
"""SciPy's Shapiro-Wilk works in single precision in places and is about 4e-9 from Royston's own algorithm in R."""


def constant(group):
    """Whether all values are equal."""
    return len(set(group)) == 1


def distances(group):
    """Distances of the values from their median, as fractions."""
    ordered = sorted(map(Fraction, group))
    median = (ordered[(len(ordered) - 1) // 2] + ordered[len(ordered) // 2]) / 2
    return [abs(value - median) for value in ordered]


UNDEFINED = {
    "classical_f": lambda groups: all(map(constant, groups)),
    "welch_f": lambda groups: any(map(constant, groups)),
    "brown_forsythe_f": lambda groups: all(map(constant, groups)),
    "kruskal_wallis": lambda groups: constant([value for group in groups for value in group]),
    "log_f": lambda groups: min(map(min, groups)) <= 0 or all(map(constant, groups)),
    "levene_median": lambda groups: all(constant(distances(group)) for group in groups),
    "shapiro_residuals": lambda groups: all(map(constant, groups)) or not 3 <= sum(map(len, groups)) <= 5000,
}
"""Where a part has no p-value, although its reference may give one.

SciPy's F gives 0 for constant groups that differ; its and statsmodels' Welch F a number for a group of three 0.1,
whose mean is not quite 0.1; SciPy's Levene a number near 0 where rounding makes equal distances differ; SciPy's
Shapiro-Wilk 1 where nothing varies, and a p-value beyond 5,000 values with a warning.
"""


def expected_p(reference, groups):
    """The p-value a part must give: the reference's, or NaN where the part has none."""
    if UNDEFINED[reference.split(",")[0]](groups):
        return np.nan
    with warnings.catch_warnings(), np.errstate(all="ignore"):
        warnings.simplefilter("ignore")
        return float(REFERENCES[reference](groups))


def assert_as_reference(reference, datasets, sizes, offset=0.0):
    """Every dataset of a batch is judged as the reference judges what is left of it, one at a time.

    Data that lie far from zero are handed to the reference with their offset taken off, which is exact.
    """
    name = reference.split(",")[0]
    found = part_called(name).p_values(datasets, sizes)
    for row, p in zip(np.asarray(datasets) - offset, found, strict=True):
        groups = [part[~np.isnan(part)] for part in np.split(row, np.cumsum(sizes)[:-1])]
        if min(map(len, groups)) < 2:
            continue
        expected = expected_p(reference, groups)
        assert p == pytest.approx(expected, rel=1e-8, abs=TOLERANCES.get(name, 1e-10), nan_ok=True), groups


LAYOUTS = [(2, 2), (2, 12), (3, 4, 5), (12, 7, 2), (6, 6, 6, 6), (3, 8, 5, 2, 9), (4,) * 8]

every_reference = pytest.mark.parametrize("reference", REFERENCES)
every_layout = pytest.mark.parametrize("sizes", LAYOUTS, ids=str)


def awkward(sizes):
    """(R, N) positive values of every kind, R = 60: as drawn, rounded, with constant groups, with gaps, by turns."""
    rng = np.random.default_rng([1974, *sizes])
    spreads, places = np.repeat(rng.uniform(0.5, 3, (2, len(sizes))), sizes, axis=1)
    drawn = 12 + places + spreads * rng.standard_normal((60, sum(sizes)))
    rounded, coarse, alike = np.round(drawn, 1), np.round(drawn / 2) * 2, np.round(drawn, 1)
    alike[:, : sizes[0]] = 12.1
    constants = np.repeat(np.round(drawn[:, : len(sizes)], 1), sizes, axis=1)
    gappy = np.where(rng.random(drawn.shape) < 0.15, np.nan, rounded)
    kinds = np.stack([drawn, rounded, coarse, alike, gappy, constants])
    return np.maximum(kinds[np.arange(60) % 6, np.arange(60)], 0.1)


@every_layout
@every_reference
def test_awkward_data_are_judged_as_the_reference_does(reference, sizes):
    """SciPy 1.17, statsmodels 0.15: see REFERENCES, TOLERANCES and UNDEFINED."""
    assert_as_reference(reference, awkward(sizes), sizes)


@every_layout
@pytest.mark.parametrize("reference", [name for name in REFERENCES if not name.startswith("log_f")])
def test_data_far_from_zero_are_judged_as_those_near_it(reference, sizes):
    """10,000,000 added: the reference sees the same differences near zero."""
    assert_as_reference(reference, awkward(sizes) + 1e7, sizes, offset=1e7)


HUNDREDTHS = st.integers(1, 4000).map(lambda whole: whole / 100)
FEW = st.integers(1, 4).map(lambda whole: whole / 10)
DRAWN = st.floats(0.01, 50).map(lambda value: round(value, 9))


@st.composite
def batches(draw):
    """((R, N) positive values, sizes): k from 2 to 8, groups of 2 to 12."""
    sizes = draw(st.lists(st.integers(2, 12), min_size=2, max_size=8))
    kind = draw(st.sampled_from([HUNDREDTHS, FEW, DRAWN]))
    row = st.lists(kind, min_size=sum(sizes), max_size=sum(sizes))
    return np.array(draw(st.lists(row, min_size=1, max_size=2))), tuple(sizes)


@every_reference
@steady
@given(drawn=batches())
def test_any_data_are_judged_as_the_reference_does(reference, drawn):
    """SciPy 1.17, statsmodels 0.15: see REFERENCES, TOLERANCES and UNDEFINED."""
    assert_as_reference(reference, *drawn)


def test_brown_forsythe_is_the_test_of_1974_not_its_later_variant():
    """statsmodels 0.15 keeps both: .pvalue with Mehrotra's (1997) numerator degrees of freedom, .pvalue2 with k - 1."""
    groups = [np.array([1.2, 2.5, 0.7, 3.1]), np.array([2.2, 4.6, 3.9]), np.array([4.1, 29.3, 2.0, 7.7])]
    reference = anova_oneway(groups, use_var="bf")
    p = METHODS.make("brown_forsythe_f").p_values([np.concatenate(groups)], (4, 3, 4))[0]
    assert p == pytest.approx(reference.pvalue2, rel=1e-10)
    assert abs(p - reference.pvalue) > 0.001


def test_a_group_of_equal_decimals_leaves_welch_undefined():
    """Three times 0.1 has a variance of 3e-34 in SciPy and statsmodels, which give p = 0.0759 here."""
    row = [0.1, 0.1, 0.1, 0.3, 0.2, 0.5, 0.9, 0.4, 0.8, 0.1, 0.7]
    assert np.isnan(METHODS.make("welch_f").p_values([row], (3, 4, 4))[0])


@pytest.mark.parametrize("sizes", [(2, 2), (2, 2, 2), (4, 4), (2, 6, 4)], ids=str)
def test_equal_distances_from_the_median_leave_levene_undefined(sizes):
    """Half the values of each group lie at one place and half at another, so that no distance varies.

    In decimals such as 0.1 and 0.7 rounding must not make them vary.
    """
    places = np.round(np.random.default_rng(5).uniform(0, 9, (200, len(sizes), 2)), 2)
    rows = [
        np.concatenate([np.repeat(pair, n // 2) for pair, n in zip(row, sizes, strict=True)])
        for row in places
    ]
    assert np.isnan(CHECKS.make("levene_median").p_values(rows, sizes)).all()


@pytest.mark.parametrize("name", ["classical_f", "log_f"])
def test_a_group_of_one_value_still_counts_for_the_classical_f(name):
    """Fisher (1925): a single value adds nothing within, but its mean is one of those compared; SciPy agrees."""
    groups = [[2.1], [1.2, 2.5, 0.7, 3.1], [4.2, 4.6, 5.8]]
    reference = np.log if name == "log_f" else np.asarray
    expected = scipy.stats.f_oneway(*map(reference, groups)).pvalue
    found = METHODS.make(name).p_values([np.concatenate(groups)], (1, 4, 3))
    assert found[0] == pytest.approx(expected, rel=1e-10)


EXAMPLE = [1.2, 2.5, 0.7, 3.1, 2.2, 4.6, 3.9, 5.8, 2.7, 4.1, 9.3, 2.0, 7.7, 5.2, 6.6]
EXAMPLE_P = {
    "classical_f": 0.027845040842,
    "welch_f": 0.027622040804,
    "brown_forsythe_f": 0.020463319338,
    "kruskal_wallis": 0.049271144839,
    "log_f": 0.017621494908,
    "shapiro_residuals": 0.981592437712,
}


@pytest.mark.parametrize("name", EXAMPLE_P)
def test_an_invented_example_has_the_p_values_worked_beforehand(name):
    """Invented data, worked before these methods were written, with a plain program and with SciPy and statsmodels.

    The Shapiro-Wilk p-value is that of R 4.2.2, shapiro.test on the residuals.
    """
    p = part_called(name).p_values([EXAMPLE], (4, 5, 6))[0]
    assert p == pytest.approx(EXAMPLE_P[name], rel=0, abs=6e-13)


def worked_groups(name):
    """The groups of a worked example by the name of its data."""
    if name == "iris":
        table = np.loadtxt(files("scipy.spatial.tests").joinpath("data/iris.txt"))
        return np.split(table[:, 0], 3)
    with (DATA / "worked_data.csv").open(newline="", encoding="utf-8") as file:
        return [np.array(row["values"].split(), float) for row in csv.DictReader(file) if row["data"] == name]


def worked_values():
    """The rows of worked_values.csv."""
    with (DATA / "worked_values.csv").open(newline="", encoding="utf-8") as file:
        return list(csv.DictReader(file))


def ends(text):
    """The least and the largest number that is printed so, with one unit in the 15th digit for our rounding."""
    if not text:
        return (np.nan,)
    digits, _, power = text.partition("e")
    half = 0.5 * 10.0 ** (int(power or 0) - len(digits.partition(".")[2])) if "." in digits else 0.0
    half += 2e-14 * abs(float(text))
    return float(text) - half, float(text) + half


def printed_p(row):
    """(least, largest) p-value that agrees with what is printed: a p-value, or a statistic and its df."""
    if row["value"].startswith("p "):
        return ends(row["value"][2:])
    if row["df2"]:
        tails = [fdtrc(float(row["df1"]), df, f) for f, df in product(ends(row["value"]), ends(row["df2"]))]
    else:
        tails = [chdtrc(float(row["df1"]), x) for x in ends(row["value"])]
    return min(tails), max(tails)


@pytest.mark.parametrize("row", worked_values(), ids=lambda row: f"{row['id']}-{row['part']}-{row['data']}")
def test_worked_examples_come_out_to_every_digit_printed(row):
    """The source of each is in worked_values.csv, that of its data in worked_data.csv.

    A printed statistic is compared by its tail area. The measurements of iris are those that SciPy ships; their
    sepal lengths are as in Fisher (1936).
    """
    groups = worked_groups(row["data"])
    p = part_called(row["part"]).p_values([np.concatenate(groups)], [len(group) for group in groups])[0]
    least, largest = printed_p(row)
    assert least * (1 - 1e-12) <= p <= largest * (1 + 1e-12)


@every_reference
@pytest.mark.parametrize(
    "data", ["iris", "three_groups", "mussel_shells", "car_loans", "gear_diameter", "corn_yields"]
)
def test_real_data_are_judged_as_the_reference_does(reference, data):
    """Sources of the data: worked_data.csv."""
    groups = worked_groups(data)
    assert_as_reference(reference, [np.concatenate(groups)], [len(group) for group in groups])


def certified(name):
    """(groups, certified F) of a set of the NIST Statistical Reference Datasets as SciPy ships it."""
    text = files("scipy.stats.tests").joinpath(f"data/nist_anova/{name}.dat").read_text(encoding="ascii")
    f = float(re.search(r"^Between .*?(\S+)\s*$", text, re.MULTILINE)[1])
    rows = [line.split() for line in text.splitlines()[60:] if line.strip()]
    groups = {}
    for label, value in rows:
        groups.setdefault(label, []).append(float(value))
    return list(groups.values()), f


def digits_reached(found, expected):
    """The log relative error: how many digits agree, 15 at most."""
    return 15.0 if found == expected else min(15.0, -np.log10(abs(found - expected) / abs(expected)))


def f_ratio(groups):
    """F from the sums of squares of a batch that holds one dataset."""
    batch = Batch([np.concatenate(groups)], [len(group) for group in groups])
    freedom = batch.total[0] - batch.groups
    return batch.sum_between[0] / (batch.groups - 1) / (batch.sum_within[0] / freedom)


def exact_f_ratio(groups):
    """F of the binary numbers that a computer holds for the data, worked in fractions."""
    groups = [list(map(Fraction, group)) for group in groups]
    grand = sum(map(sum, groups)) / sum(map(len, groups))
    within = between = Fraction(0)
    for group in groups:
        mean = sum(group) / len(group)
        within += sum((value - mean) ** 2 for value in group)
        between += len(group) * (mean - grand) ** 2
    freedom = sum(map(len, groups)) - len(groups)
    return float(between / (len(groups) - 1) / (within / freedom))


CERTIFIED = {
    "AtmWtAg": 10.1,
    "SiRstv": 13.0,
    "SmLs01": 15.0,
    "SmLs02": 15.0,
    "SmLs03": 15.0,
    "SmLs04": 10.4,
    "SmLs05": 10.2,
    "SmLs06": 10.1,
    "SmLs07": 4.4,
    "SmLs08": 4.1,
    "SmLs09": 4.1,
}
"""Digits of the certified F that come out of each set."""

every_certified_set = pytest.mark.parametrize("name", CERTIFIED)


@every_certified_set
def test_the_classical_f_reaches_as_many_certified_digits_as_the_numbers_hold(name):
    """NIST Statistical Reference Datasets, one-way analysis of variance: F certified to 15 digits.

    SmLs01 to SmLs03 reach all 15. The others fall short, because their data are no exact binary numbers: of
    1000000000000.4 (SmLs07 to SmLs09) a double keeps steps of 0.00012, and F of the numbers it keeps has 4 digits in
    common with F of those written; of 1000000.4 (SmLs04 to SmLs06) 10, of 107.8681568 (AtmWtAg), whose groups differ
    in the fifth decimal, 10, of 196.3052 (SiRstv) 13. The next test shows that nothing else is lost.
    """
    groups, f = certified(name)
    assert digits_reached(f_ratio(groups), f) >= CERTIFIED[name]


@every_certified_set
def test_the_classical_f_of_the_numbers_held_is_exact_to_rounding(name):
    """The same data sets; F of the doubles themselves in rational arithmetic."""
    groups, _ = certified(name)
    assert digits_reached(f_ratio(groups), exact_f_ratio(groups)) >= 14


@every_certified_set
def test_the_certified_f_is_found_by_rational_arithmetic_on_the_numbers_as_written(name):
    """That the files are read aright: the decimals of the file give the certified value to its 15 digits."""
    groups, f = certified(name)
    written = [[Fraction(repr(float(value))) for value in group] for group in groups]
    assert exact_f_ratio(written) == pytest.approx(f, rel=1e-14)


def shapiro_p(values):
    """The p-value of one group, whose residuals are its values less their mean."""
    return CHECKS.make("shapiro_residuals").p_values([values], [len(values)])[0]


def test_shapiro_on_three_values_follows_the_exact_distribution():
    """Shapiro & Wilk (1965, Biometrika 52, 591-611): for n = 3, p = 6/pi (arcsin sqrt W - arcsin sqrt 3/4).

    For 0, 1, 3: W = (3 / sqrt 2)^2 / (14 / 3) = 27/28. Equal steps have W = 1 and p = 1, two equal values W = 3/4
    and p = 0.
    """
    expected = 6 / np.pi * (np.arcsin(np.sqrt(27 / 28)) - np.arcsin(np.sqrt(3 / 4)))
    assert shapiro_p([0.0, 1.0, 3.0]) == pytest.approx(expected, rel=1e-10)
    assert shapiro_p([1.0, 2.0, 3.0]) == pytest.approx(1, abs=1e-7)
    assert shapiro_p([0.0, 0.0, 3.0]) == pytest.approx(0, abs=1e-7)


@pytest.mark.parametrize("n", [4, 5, 6, 7, 9, 11, 12, 13, 20, 50, 200, 2000, 5000])
def test_shapiro_is_royston_s_at_every_size(n):
    """SciPy 1.17; the sizes 4 to 11 and those from 12 on have formulas of their own.

    SciPy takes normal quantiles to 7 digits: its p-values are about 4e-9 from R's, and some 2e-7 at 5,000 values.
    """
    tolerance = 2e-8 if n <= 200 else 5e-7
    rng = np.random.default_rng(n)
    for values in (rng.standard_normal(n), rng.exponential(size=n), np.round(rng.uniform(0, 9, n))):
        assert shapiro_p(values) == pytest.approx(
            expected_p("shapiro_residuals, SciPy", [values]), abs=tolerance
        )


def test_shapiro_has_no_p_value_beyond_its_sizes_or_without_variation():
    rng = np.random.default_rng(1)
    assert np.isnan(shapiro_p([1.0, 2.0]))
    assert np.isnan(shapiro_p(rng.standard_normal(5001)))
    assert not np.isnan(shapiro_p(rng.standard_normal(5000)))
    assert np.isnan(CHECKS.make("shapiro_residuals").p_values([[0.1] * 3 + [0.7] * 4], (3, 4))[0])


def test_shapiro_pools_the_residuals_of_all_groups():
    """Groups far apart, each with the same pattern: the same p-value as for the residuals in one group."""
    pattern = np.array([0.3, -1.2, 0.5, 2.0, -1.6])
    rows = [np.concatenate([pattern + 100, pattern * 2, pattern - 50])]
    together = np.concatenate([pattern, pattern * 2, pattern])
    p = CHECKS.make("shapiro_residuals").p_values(rows, (5, 5, 5))[0]
    assert p == pytest.approx(scipy.stats.shapiro(together).pvalue, abs=2e-8)
