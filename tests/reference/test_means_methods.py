"""Tests of means for groups of unequal spread, against libraries, definitions, printed values and rates."""

import csv
import warnings
from importlib.resources import files
from pathlib import Path

import numpy as np
import pytest
import scipy.stats
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from scipy.optimize import brentq
from scipy.special import betainc
from scipy.stats import chi2, norm
from statsmodels.regression.linear_model import OLS
from statsmodels.stats.oneway import anova_oneway

from workbench.groups import Batch
from workbench.methods import METHODS
from workbench.methods.james_second_order import critical_value

DATA = Path(__file__).parent / "data"

steady = settings(
    derandomize=True, deadline=None, max_examples=150, suppress_health_check=[HealthCheck.too_slow]
)


def method_called(name):
    """The method of that name; "mehrotra" is brown_forsythe_f with that setting."""
    return METHODS.make("brown_forsythe_f", {"df": name}) if name == "mehrotra" else METHODS.make(name)


def p_of(name, groups):
    """The p-value of a method on one dataset."""
    return method_called(name).p_values([np.concatenate(groups)], [len(group) for group in groups])[0]


def regression_on_groups(groups):
    """The p-value of equal cell means in a least-squares fit with the HC3 covariance."""
    k = len(groups)
    design = np.repeat(np.eye(k), [len(group) for group in groups], axis=0)
    fitted = OLS(np.concatenate(groups), design).fit(cov_type="HC3", use_t=True)
    return fitted.f_test(np.eye(k)[1:] - np.eye(k)[0]).pvalue


def box_by_matrices(groups):
    """Box (1954), theorem 3.1, on the projections between and within the groups, S the estimated covariance.

    A sum of squares x'Px is about g chi-square(h) with g h = tr PS and h = (tr PS)^2 / tr PSPS.
    """
    x, sizes = np.concatenate(groups), [len(group) for group in groups]
    total = sum(sizes)
    averages = scipy.linalg.block_diag(*(np.full((n, n), 1 / n) for n in sizes))
    variances = np.repeat([np.var(group - group[0], ddof=1) for group in groups], sizes)
    found = []
    for projection in (averages - 1 / total, np.eye(total) - averages):
        spread = projection * variances
        away = x - x[0]
        trace = np.trace(spread)
        found.append((away @ projection @ away / trace, trace**2 / np.trace(spread @ spread)))
    (between, df1), (within, df2) = found
    return betainc(df2 / 2, df1 / 2, df2 / (df2 + df1 * between / within))


def james_h2(c, shares, freedoms):
    """James (1951): the critical value at the chi-square quantile c, term by term as his formula is printed."""
    k = len(shares)

    def r(s, t):
        return sum(q**t / nu**s for q, nu in zip(shares, freedoms, strict=True))

    r10, r11, r12, r20, r21, r22, r23 = (
        r(s, t) for s, t in ((1, 0), (1, 1), (1, 2), (2, 0), (2, 1), (2, 2), (2, 3))
    )
    x2 = c / (k - 1)
    x4 = x2 * c / (k + 1)
    x6 = x4 * c / (k + 3)
    x8 = x6 * c / (k + 5)
    slack = sum((1 - q) ** 2 / nu for q, nu in zip(shares, freedoms, strict=True))
    bracket = (
        (8 * r23 - 10 * r22 + 4 * r21 - 6 * r12**2 + 8 * r12 * r11 - 4 * r11**2)
        + (2 * r23 - 4 * r22 + 2 * r21 - 2 * r12**2 + 4 * r12 * r11 - 2 * r11**2) * (x2 - 1)
        + (-(r12**2) + 4 * r12 * r11 - 2 * r12 * r10 - 4 * r11**2 + 4 * r11 * r10 - r10**2)
        * (3 * x4 - 2 * x2 - 1)
        / 4
    )
    return (
        c
        + (3 * x4 + x2) / 2 * slack
        + (3 * x4 + x2) ** 2 / 16 * (1 - (k - 3) / c) * slack**2
        + (3 * x4 + x2) / 2 * bracket
        + (r23 - 3 * r22 + 3 * r21 - r20) * (5 * x6 + 2 * x4 + x2)
        + 3 / 16 * (r12**2 - 4 * r23 + 6 * r22 - 4 * r21 + r20) * (35 * x8 + 15 * x6 + 9 * x4 + 5 * x2)
        + (-2 * r22 + 4 * r21 - r20 + 2 * r12 * r10 - 4 * r11 * r10 + r10**2)
        * (9 * x8 - 3 * x6 - 5 * x4 - x2)
        / 16
        + (-r22 + r11**2) * (27 * x8 + 3 * x6 + x4 + x2) / 4
        + (r23 - r12 * r11) * (45 * x8 + 9 * x6 + 7 * x4 + 3 * x2) / 4
    )


def james_by_bisection(groups):
    """The p-value at which james_h2 equals James's J; 0 beyond the reach of chi-square."""
    sizes, means = np.array([len(group) for group in groups]), np.array([np.mean(group) for group in groups])
    weights = sizes / [np.var(group, ddof=1) for group in groups]
    shares = weights / weights.sum()
    j = (weights * (means - shares @ means) ** 2).sum()
    if j < 1e-9:
        return 1.0

    def gap(c):
        return james_h2(c, shares, sizes - 1) - j

    return chi2.sf(brentq(gap, 1e-12, 1200, xtol=1e-12), len(groups) - 1) if gap(1200) > 0 else 0.0


REFERENCES = {
    "alexander_govern, SciPy": lambda groups: scipy.stats.alexandergovern(*groups).pvalue,
    "hc3_wald, statsmodels": regression_on_groups,
    "brown_forsythe_f, statsmodels": lambda groups: anova_oneway(groups, use_var="bf").pvalue2,
    "mehrotra, statsmodels": lambda groups: anova_oneway(groups, use_var="bf").pvalue,
    "box_f, matrices": box_by_matrices,
    "james_second_order, bisection": james_by_bisection,
    "welch_log, statsmodels": lambda groups: (
        anova_oneway([np.log(group) for group in groups], use_var="unequal").pvalue
    ),
    "welch_log, SciPy": lambda groups: scipy.stats.f_oneway(*map(np.log, groups), equal_var=False).pvalue,
}
"""By "method, reference": the p-value of k groups."""


def constant(group):
    """Whether all values are equal."""
    return len(set(group)) == 1


SUMS_OF_SPREADS = ("brown_forsythe_f", "mehrotra", "box_f")
"""Methods that divide by a sum of variances, of which some may be 0."""


def expected_p(reference, groups):
    """The p-value a method must give: the reference's, or NaN where a variance that the method divides by is 0."""
    enough = all if reference.split(",")[0] in SUMS_OF_SPREADS else any
    if enough(map(constant, groups)):
        return np.nan
    with warnings.catch_warnings(), np.errstate(all="ignore"):
        warnings.simplefilter("ignore")
        return float(REFERENCES[reference](groups))


def assert_as_reference(reference, datasets, sizes, offset=0.0):
    """Every dataset of a batch is judged as the reference judges what is left of it, one at a time.

    Data that lie far from zero are handed to the reference with their offset taken off, which is exact.
    """
    found = method_called(reference.split(",")[0]).p_values(datasets, sizes)
    for row, p in zip(np.asarray(datasets) - offset, found, strict=True):
        groups = [part[~np.isnan(part)] for part in np.split(row, np.cumsum(sizes)[:-1])]
        if min(map(len, groups)) >= 2:
            assert p == pytest.approx(expected_p(reference, groups), rel=1e-8, abs=1e-10, nan_ok=True), groups


LAYOUTS = [(2, 2), (2, 12), (3, 4, 5), (12, 7, 2), (6, 6, 6, 6), (3, 8, 5, 2, 9), (4,) * 8]

every_reference = pytest.mark.parametrize("reference", REFERENCES)
every_layout = pytest.mark.parametrize("sizes", LAYOUTS, ids=str)


def awkward(sizes):
    """(R, N) positive values of every kind, R = 60: as drawn, rounded, with constant groups, with gaps, by turns."""
    rng = np.random.default_rng([1951, *sizes])
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
    """SciPy 1.17, statsmodels 0.15, or the definition in this file: see REFERENCES."""
    assert_as_reference(reference, awkward(sizes), sizes)


@every_layout
@pytest.mark.parametrize("reference", [name for name in REFERENCES if not name.startswith("welch_log")])
def test_data_far_from_zero_are_judged_as_those_near_it(reference, sizes):
    """1,000,000 added: the reference sees the same differences near zero."""
    assert_as_reference(reference, awkward(sizes) + 1e6, sizes, offset=1e6)


HUNDREDTHS = st.integers(1, 4000).map(lambda whole: whole / 100)
FEW = st.integers(1, 4).map(lambda whole: whole / 10)
DRAWN = st.floats(0.01, 50).map(lambda value: round(value, 3))


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
    """SciPy 1.17, statsmodels 0.15, or the definition in this file: see REFERENCES."""
    assert_as_reference(reference, *drawn)


def iris_sepals():
    """Sepal lengths of three species, as SciPy ships them."""
    return np.split(np.loadtxt(files("scipy.spatial.tests").joinpath("data/iris.txt"))[:, 0], 3)


def worked_groups(name):
    """The groups of a worked example by the name of its data."""
    if name == "iris":
        return iris_sepals()
    with (DATA / "worked_data.csv").open(newline="", encoding="utf-8") as file:
        return [np.array(row["values"].split(), float) for row in csv.DictReader(file) if row["data"] == name]


@every_reference
@pytest.mark.parametrize(
    "data", ["iris", "three_groups", "mussel_shells", "car_loans", "gear_diameter", "corn_yields"]
)
def test_real_data_are_judged_as_the_reference_does(reference, data):
    """Sources of the data: worked_data.csv."""
    groups = worked_groups(data)
    assert_as_reference(reference, [np.concatenate(groups)], [len(group) for group in groups])


EXAMPLE = [[1.2, 2.5, 0.7, 3.1], [2.2, 4.6, 3.9, 5.8, 2.7], [4.1, 9.3, 2.0, 7.7, 5.2, 6.6]]
EXAMPLE_P = {
    "alexander_govern": 0.027085720055,
    "box_f": 0.029622572393,
    "brown_forsythe_f": 0.020463319338,
    "hc3_wald": 0.026165319807,
    "james_second_order": 0.023950714549,
    "mehrotra": 0.024902357925,
    "welch_log": 0.077541091300,
}


@pytest.mark.parametrize("name", EXAMPLE_P)
def test_an_invented_example_has_the_p_values_worked_beforehand(name):
    """Invented data, worked before these methods were written, with a plain program and, but for James, a library.

    The libraries: SciPy 1.17, statsmodels 0.15, and onewaytests 3.1 of R for Box.
    """
    assert p_of(name, EXAMPLE) == pytest.approx(EXAMPLE_P[name], rel=0, abs=6e-13)


def test_alexander_govern_on_iris_has_the_p_value_printed():
    """Dag, Dolgun & Konar (2018), The R Journal 10(1), 175-199, section Iris data: 1.655451e-32."""
    assert p_of("alexander_govern", iris_sepals()) == pytest.approx(1.655451e-32, rel=3.1e-7)


def test_alexander_govern_on_car_loans_has_the_statistic_printed():
    """Docstring of scipy.stats.alexandergovern (SciPy 1.17), data of NIST: A = 4.65087071883494 on 3 df."""
    expected = chi2.sf(4.65087071883494, 3)
    assert p_of("alexander_govern", worked_groups("car_loans")) == pytest.approx(expected, rel=1e-12)


def james_critical(groups, level):
    """James's critical value of a dataset by the method's own polynomial."""
    batch = Batch([np.concatenate(groups)], [len(group) for group in groups])
    c = chi2.isf(level, len(groups) - 1)
    return np.polynomial.polynomial.polyval(c, [0.0, *(float(each[0]) for each in critical_value(batch))])


@pytest.mark.parametrize(("pair", "printed"), [((0, 1), 5.959328), ((1, 2), 5.938643)])
def test_james_critical_values_of_two_species_are_those_printed(pair, printed):
    """Dag, Dolgun & Konar (2018), section Pairwise comparisons, level 0.05 / 3, iris sepal lengths."""
    groups = [iris_sepals()[species] for species in pair]
    assert james_critical(groups, 0.05 / 3) == pytest.approx(printed, rel=0, abs=5.1e-7)


@pytest.mark.parametrize(("level", "worked"), [(0.05, 6.234855987179), (0.01, 9.755655968696)])
def test_james_critical_values_of_three_species_are_those_of_his_formula(level, worked):
    """Worked from James (1951) in a program of its own, iris sepal lengths.

    Dag, Dolgun & Konar (2018) print 6.233185 at 0.05, which is neither this nor what follows from their typeset
    formula, 6.244290, where the bracket about three terms is missing.
    """
    assert james_critical(iris_sepals(), level) == pytest.approx(worked, rel=1e-11)


def test_the_critical_value_of_james_on_the_example_is_the_one_worked_beforehand():
    """onewaytests 3.1 of R: 9.267313007."""
    assert james_critical(EXAMPLE, 0.05) == pytest.approx(9.267313007, rel=0, abs=6e-10)


@pytest.mark.parametrize("sizes", LAYOUTS, ids=str)
def test_james_rejects_by_p_value_where_the_statistic_reaches_his_critical_value(sizes):
    """James (1951) as printed, at four levels, on data whose statistic lies about the critical value."""
    values = awkward(sizes)[::6] + np.repeat(np.linspace(0, 6, len(sizes)), sizes)
    found = METHODS.make("james_second_order").p_values(values, sizes)
    freedoms = np.array(sizes) - 1
    for row, p in zip(values, found, strict=True):
        groups = np.split(row, np.cumsum(sizes)[:-1])
        means, weights = (
            np.array([group.mean() for group in groups]),
            np.array([len(group) / group.var(ddof=1) for group in groups]),
        )
        shares = weights / weights.sum()
        j = (weights * (means - shares @ means) ** 2).sum()
        for level in (0.2, 0.1, 0.05, 0.01):
            assert (p <= level) == (j >= james_h2(chi2.isf(level, len(sizes) - 1), shares, freedoms))


def evenly_spaced(size, variance):
    """Values of a given sample variance."""
    values = np.arange(size) - (size - 1) / 2
    return values * np.sqrt(variance / values.var(ddof=1))


def aspin(z, shares, freedoms):
    """Aspin (1948, Biometrika 35, 88-96): the critical value of t to terms of order 1 / nu^2.

    shares are the groups' parts in the variance of the difference of means.
    """
    v21, v22, v32 = ((shares**t / freedoms**s).sum() for t, s in ((2, 1), (2, 2), (3, 2)))
    return z * (
        1
        + (1 + z**2) / 4 * v21
        - (1 + z**2) / 2 * v22
        + (3 + 5 * z**2 + z**4) / 3 * v32
        - (15 + 32 * z**2 + 9 * z**4) / 32 * v21**2
    )


@pytest.mark.parametrize("level", [0.1, 0.05, 0.01])
def test_for_two_groups_james_is_aspin_s_series_to_second_order(level):
    """Twice the degrees of freedom, an eighth of the gap: the two differ in terms of third order only."""
    shares, gaps = np.array([0.3, 0.7]), []
    for scale in (20, 40, 80):
        freedoms = scale * np.array([2, 3])
        groups = [evenly_spaced(nu + 1, (nu + 1) * share) for nu, share in zip(freedoms, shares, strict=True)]
        gaps.append(james_critical(groups, level) - aspin(norm.isf(level / 2), shares, freedoms) ** 2)
    assert np.divide(gaps[:-1], gaps[1:]) == pytest.approx(8, rel=0.03)


def test_james_finds_the_ends_of_the_scale():
    """Equal means have p = 1; groups that lie 1e8 standard deviations apart the smallest p-value that is given."""
    alike, apart = (
        [-1, 0, 1, -2, 0, 2, -3, 0, 3],
        [-1e-8, 0, 1e-8, 1 - 1e-8, 1, 1 + 1e-8, 3 - 1e-8, 3, 3 + 1e-8],
    )
    p = METHODS.make("james_second_order").p_values([alike, apart], (3, 3, 3))
    assert p == pytest.approx([1, 1e-300], rel=1e-6, abs=0)


@every_layout
def test_for_equal_sizes_box_and_mehrotra_are_one_test(sizes):
    """Box's (1954) denominator degrees of freedom are then Satterthwaite's for F*."""
    sizes = sizes[:1] * len(sizes)
    values = np.where(np.isnan(awkward(sizes)), 12.1, awkward(sizes))
    box, mehrotra = (method_called(name).p_values(values, sizes) for name in ("box_f", "mehrotra"))
    np.testing.assert_allclose(box, mehrotra, rtol=1e-10)


@pytest.mark.parametrize("name", ["brown_forsythe_f", "mehrotra"])
def test_for_two_groups_brown_forsythe_is_welch(name):
    """Brown & Forsythe (1974); Mehrotra's (1997) numerator degrees of freedom are then 1."""
    values = awkward((5, 9))
    welch, found = (method_called(each).p_values(values, (5, 9)) for each in ("welch_f", name))
    np.testing.assert_allclose(found[~np.isnan(welch)], welch[~np.isnan(welch)], rtol=1e-10)


ONE_CONSTANT = [[0.1, 0.1, 0.1], [0.3, 0.2, 0.5, 0.9], [0.4, 0.8, 0.1, 0.7]]
ALL_CONSTANT = [[0.1, 0.1, 0.1], [0.3, 0.3], [0.7, 0.7, 0.7]]
SINGLE = [[0.1], [0.3, 0.2, 0.5, 0.9], [0.4, 0.8, 0.1, 0.7]]

every_name = pytest.mark.parametrize("name", EXAMPLE_P)


@every_name
def test_a_constant_group_leaves_methods_undefined_that_divide_by_its_variance(name):
    """Three times 0.1 has a variance of about 3e-34 in libraries, and for a constant group HC3 gives a number there."""
    assert np.isnan(p_of(name, ONE_CONSTANT)) == (name not in SUMS_OF_SPREADS)


@every_name
def test_groups_that_are_all_constant_or_one_value_have_no_p_value(name):
    assert np.isnan(p_of(name, ALL_CONSTANT))
    assert np.isnan(p_of(name, SINGLE))


@pytest.mark.parametrize("value", [0.0, -0.0, -1.0])
def test_a_value_of_0_or_less_leaves_welch_on_logarithms_undefined(value):
    assert np.isnan(p_of("welch_log", [[value, 2.5, 0.7], *EXAMPLE[1:]]))


def test_the_default_of_brown_forsythe_has_the_content_of_a_part_without_settings():
    default = METHODS.make("brown_forsythe_f")
    assert default.content() == {"part": "brown_forsythe_f", "version": 1, "settings": {}}
    assert METHODS.make("brown_forsythe_f", {"df": "1974"}).key() == default.key()
    assert method_called("mehrotra").key() != default.key()


BLOCK, BLOCKS = 2000, 100
"""200,000 datasets of each design, in blocks of 2,000."""

FURTHEST = 4.5
"""Standard errors allowed for one rate."""


def normal_block(sizes, spreads, means, rng):
    """(R, N) normal values of one block."""
    scale, place = np.repeat(spreads, sizes), np.repeat(means, sizes)
    return rng.standard_normal((BLOCK, sum(sizes))) * scale + place


def share_rejected(names, sizes, block, seed):
    """{name: share of 200,000 datasets in which a method rejects at 0.05}; block(rng) draws 2,000 of them."""
    rng, methods = np.random.default_rng(seed), {name: method_called(name) for name in names}
    counts = dict.fromkeys(names, 0)
    for _ in range(BLOCKS):
        batch = Batch(block(rng), sizes)
        with np.errstate(all="ignore"):
            for name, method in methods.items():
                counts[name] += int((method.judge(batch, {}) <= 0.05).sum())
    return {name: count / (BLOCK * BLOCKS) for name, count in counts.items()}


def assert_rates_agree(found, expected, replications=np.inf):
    """Every rate lies within FURTHEST standard errors, its own and that of the expected one from so many datasets."""
    for name, rate in expected.items():
        error = np.sqrt(rate * (1 - rate) * (1 / (BLOCK * BLOCKS) + 1 / replications))
        assert abs(found[name] - rate) < FURTHEST * error, (name, found[name], rate)


NAMES = (
    "james_second_order",
    "welch_f",
    "alexander_govern",
    "brown_forsythe_f",
    "mehrotra",
    "box_f",
    "hc3_wald",
)
SIMULATED = [
    ((6, 8, 10), (1, 2, 3), (0.04990, 0.04924, 0.04713, 0.05581, 0.04718, 0.04513, 0.05029)),
    ((6, 8, 10, 12), (3, 1, 2, 1), (0.05229, 0.05512, 0.05101, 0.06603, 0.05512, 0.06195, 0.06959)),
    ((10,) * 5, (1, 1, 2, 3, 4), (0.05088, 0.05315, 0.04946, 0.06904, 0.04874, 0.04874, 0.06714)),
]


@pytest.mark.heavy
@pytest.mark.parametrize(("sizes", "spreads", "rates"), SIMULATED, ids=str)
def test_sizes_under_unequal_spread_are_those_of_an_independent_simulation(sizes, spreads, rates):
    """Normal groups of equal means at 0.05: 2,000,000 datasets by a program of its own."""
    expected = dict(zip(NAMES, rates, strict=True))
    found = share_rejected(
        NAMES, sizes, lambda rng: normal_block(sizes, spreads, np.zeros(len(sizes)), rng), 1954
    )
    assert_rates_agree(found, expected, 2_000_000)


JAMES_AND_GOVERN = ("james_second_order", "alexander_govern")
EXACT = [
    ((20, 10), (2, 8), (0, 0), (0.050687642318098, 0.050573953122296)),
    ((3, 3), (1, 4), (0, 0), (0.068475608506764, 0.054652983458805)),
    ((5, 10), (1, 3), (0, 2.5), (0.59079505875318, 0.57641513713782)),
    ((8, 12), (1, 1), (0, 1), (0.53337912102813, 0.52215736676376)),
    ((20, 20, 10), (2, 2, 8), (0, 0, 0), (0.050496857297754, 0.049197694137645)),
    ((6, 9, 15), (1, 1, 1), (0, 0, 0), (0.050757454527707, 0.050953514394572)),
    ((5, 5, 5), (1, 2, 3), (0, 0, 0), (0.05352461549981, 0.05007440333546)),
    ((4, 6, 8), (1, 1, 3), (0, 0, 0), (0.049658849604404, 0.046492678170633)),
    ((20, 20, 10), (2, 2, 1), (0, 0, 1), (0.46404197210684,)),
    ((4, 8, 10, 12), (3, 2, 2, 1), (0, 0, 0, 0), (0.058298697549978,)),
    ((10, 15, 20, 25), (1, 2, 3, 4), (0, 1, 1, 2), (0.57007466837488,)),
]


@pytest.mark.heavy
@pytest.mark.parametrize(("sizes", "spreads", "means", "rates"), EXACT, ids=str)
def test_james_and_alexander_govern_have_their_exact_rates(sizes, spreads, means, rates):
    """Numerical integration over the sample variances of two to four normal groups, to 1e-10."""
    expected = dict(zip(JAMES_AND_GOVERN, rates, strict=False))
    found = share_rejected(list(expected), sizes, lambda rng: normal_block(sizes, spreads, means, rng), 1994)
    assert_rates_agree(found, expected)


SCORES = [
    ((4, 4, 4), (0.4, 0.3, 0.15, 0.1, 0.05), (0.0251984102625, 0.021109709144906)),
    ((5, 5, 5), (0.1, 0.2, 0.3, 0.4), (0.04016575947, 0.0381399378)),
]


@pytest.mark.heavy
@pytest.mark.parametrize(("sizes", "shares", "rates"), SCORES, ids=str)
def test_james_and_alexander_govern_have_their_exact_rates_on_scores(sizes, shares, rates):
    """Enumeration of all samples of whole scores with these shares; an undefined p-value does not reject."""
    expected = dict(zip(JAMES_AND_GOVERN, rates, strict=True))
    found = share_rejected(
        JAMES_AND_GOVERN,
        sizes,
        lambda rng: rng.choice(float(len(shares)) - np.arange(len(shares)), (BLOCK, sum(sizes)), p=shares),
        1951,
    )
    assert_rates_agree(found, expected)
