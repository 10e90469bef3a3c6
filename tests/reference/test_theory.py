"""Rates from theory against other theory, closed forms, and print."""

import csv
from fractions import Fraction
from itertools import pairwise
from math import exp, expm1, log, log1p, prod, sqrt
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import quad
from scipy.special import beta, betainc, betaincc, chdtr, chdtrc, gammaln
from scipy.stats import binom, norm

from workbench.theory import quadratic_form
from workbench.theory.exact import distances
from workbench.theory.normal_f import classical_f_rate, critical_ratio
from workbench.theory.quadratic_form import Form, best_tilt, positive_share

tried = settings(max_examples=150, derandomize=True, deadline=None)


def rows(name):
    """The rows of a file of data, as dictionaries; those of normal groups have their design made ready."""
    with open(Path(__file__).parent / "data" / name, encoding="utf-8", newline="") as file:
        return [dict(row, design=design(row)) for row in csv.DictReader(file)]


def design(row):
    """(sizes, spreads, means, alpha) of a row."""
    sizes, spreads, means = (tuple(float(x) for x in row[name].split()) for name in ("sizes", "sds", "means"))
    return sizes, spreads, means, float(row["alpha"])


def noncentral_f_tail(above, below, noncentrality, ratio):
    """Chance that a ratio of sums of squares exceeds a value: beta tails, mixed (Patnaik 1949)."""
    j = np.arange(20 + int(noncentrality + 20 * sqrt(noncentrality)))
    logs = j * np.log(noncentrality / 2) if noncentrality else np.where(j == 0, 0.0, -np.inf)
    weights = np.exp(logs - noncentrality / 2 - gammaln(j + 1))
    return (weights * betainc(below / 2, above / 2 + j, 1 / (1 + ratio))).sum()


@pytest.mark.parametrize("seed", range(30))
def test_chi_squares_of_two_degrees_follow_the_sum_of_exponentials(seed):
    """Two degrees each: the chance is a sum of partial fractions (Box 1954), here exact."""
    rng = np.random.default_rng(seed)
    weights = rng.permutation(np.arange(1, 12))[: rng.integers(2, 8)] * rng.choice([-1, 1])
    weights[: len(weights) // 2] *= -1
    exact = sum(prod(Fraction(int(a), int(a - b)) for b in weights if b != a) for a in weights if a > 0)
    found, error = positive_share(weights, np.full(len(weights), 2), np.zeros(len(weights)))
    assert abs(found - float(exact)) <= error + 1e-16
    assert error < 1e-13


def imhof(weights, degrees, noncentralities):
    """The chance by Imhof's own integral (1961, equation 3.2) and an adaptive rule, with u = t / (1 - t)."""

    def integrand(t):
        slopes = weights * t / (1 - t)
        squares = slopes**2
        angle = (degrees * np.arctan(slopes) + noncentralities * slopes / (1 + squares)).sum() / 2
        modulus = (degrees / 4 * np.log1p(squares) + noncentralities / 2 * squares / (1 + squares)).sum()
        return np.sin(angle) * np.exp(-modulus) / (t * (1 - t))

    return 0.5 + quad(integrand, 0, 1, limit=1000, epsabs=1e-12, epsrel=1e-12)[0] / np.pi


@pytest.mark.parametrize("seed", range(40))
def test_a_form_of_any_terms_agrees_with_the_integral_of_imhof(seed):
    """SciPy's quad on the integral as printed; its own error is 1e-12."""
    rng = np.random.default_rng(seed)
    terms = rng.integers(2, 9)
    weights = rng.normal(size=terms) * np.exp(rng.normal(size=terms))
    degrees = rng.integers(1, 12, terms)
    noncentralities = rng.exponential(3, terms) * rng.integers(0, 2, terms)
    found, error = positive_share(weights, degrees, noncentralities)
    assert found == pytest.approx(imhof(weights, degrees, noncentralities), abs=1e-11)
    assert error < 1e-13


@pytest.mark.parametrize("ratio", [1e-9, 1e-3, 0.3, 1.0, 7.0, 1e3, 1e9])
@pytest.mark.parametrize(("above", "below"), [(1, 1), (1, 2), (2, 1), (3, 40), (19, 980), (40, 3)])
def test_two_terms_follow_the_f_distribution_down_to_the_smallest_chances(above, below, ratio):
    """SciPy's incomplete beta function, entered from its nearer end, where it is good to about 1e-13 of itself."""
    found, error = positive_share([1.0, -ratio], [above, below], [0, 0])
    if ratio < 1:
        tail = betaincc(above / 2, below / 2, ratio / (1 + ratio))
    else:
        tail = betainc(below / 2, above / 2, 1 / (1 + ratio))
    assert found == pytest.approx(tail, rel=1e-12, abs=1e-300)
    assert error <= 1e-13 * found + 3e-16


@pytest.mark.parametrize("degrees", [1, 30, 1001, 20_000, 300_000])
@pytest.mark.parametrize("wanted", [0.4, 0.01, 1e-6, 1e-40])
def test_many_degrees_cost_no_digits(degrees, wanted):
    """F with two degrees above: its tail is (1 + ratio) ** (-degrees / 2)."""
    ratio = expm1(-2 / degrees * log(wanted))
    found, error = positive_share([1.0, -ratio], [2, degrees], [0, 0])
    assert found == pytest.approx(exp(-degrees / 2 * log1p(ratio)), rel=1e-15, abs=error)
    assert error < 1e-12 * found


@pytest.mark.parametrize("noncentrality", [1e-6, 0.5, 20.0, 300.0, 4000.0])
@pytest.mark.parametrize(
    ("above", "below", "ratio"), [(1, 2, 0.5), (4, 10, 3.0), (19, 980, 0.05), (2, 300, 2.0)]
)
def test_two_terms_follow_the_noncentral_f_distribution(above, below, ratio, noncentrality):
    """Noncentral F as a Poisson mixture of beta tails, good to about 1e-13."""
    found, _ = positive_share([1.0, -ratio], [above, below], [noncentrality, 0])
    assert found == pytest.approx(noncentral_f_tail(above, below, noncentrality, ratio), rel=1e-11, abs=1e-13)


def test_terms_of_equal_weight_and_terms_that_are_always_zero_may_be_put_together():
    """From the definition: chi-squares add up, degrees and noncentralities alike."""
    apart, _ = positive_share([2, 2, -1, -1, 9, -9, 0], [1, 3, 4, 2, 0, 0, 5], [0.5, 1, 0, 3, 0, 0, 2])
    together, _ = positive_share([2, -1], [4, 6], [1.5, 3])
    assert apart == pytest.approx(together, abs=1e-15)


@pytest.mark.parametrize(
    ("weights", "degrees", "chance"),
    [
        ([1, 2], [1, 2], 1),
        ([-1, -2], [1, 2], 0),
        ([0, 0], [1, 2], 0),
        ([0, 3], [1, 2], 1),
        ([-1, 3], [2, 0], 0),
    ],
)
def test_a_sum_whose_terms_have_one_sign_has_that_sign(weights, degrees, chance):
    """From the definition: a chi-square is never negative, and one without degrees is always 0."""
    found, error = positive_share(weights, degrees, [0, 0])
    assert (found, error < 1e-15) == (chance, True)


numbers = st.floats(-4, 4).map(lambda power: 10**power)
terms = st.tuples(
    st.sampled_from([-1, 1]), st.floats(-3, 3), st.integers(1, 60), st.one_of(st.just(0.0), st.floats(0, 200))
)
forms = st.lists(terms, min_size=2, max_size=8).map(
    lambda found: Form(*np.array([(sign * 10**power, h, d) for sign, power, h, d in found], dtype=float).T)
)


def on_a_finer_grid(form, factor):
    """(chance, size of its rounding) on a path beside the usual one and 2 ** -8 from point to point."""
    if form.mean > 0:
        tail, rounding = on_a_finer_grid(form.times(-1), factor)
        return 1 - tail, rounding
    if form.largest_weight <= 0:
        return 0.0, 0.0
    form = form.times(1 / form.largest_weight)
    tilt = factor * best_tilt(form)
    cumulants = form.cumulants(tilt)
    path = quadratic_form.Path(form.tilted(tilt), tilt)
    values = path.integrand(np.arange(0, 128, 2.0**-8))
    scale = np.exp(cumulants.sum()) / np.pi * 2.0**-8
    rounding = 1e-15 * (64 + np.abs(cumulants).sum()) * scale * np.abs(values).sum()
    return scale * (values.sum() - values[0] / 2), rounding


@tried
@given(forms, st.floats(0.5, 1.0))
def test_the_error_told_is_a_bound_on_the_difference_from_a_finer_grid(form, factor):
    """The integral does not depend on the path, so another path with finer steps can be its judge."""
    found, error = positive_share(form.weights, form.degrees, form.noncentralities)
    finer, rounding = on_a_finer_grid(form, factor)
    assert 0 <= found <= 1
    assert abs(found - finer) <= error + rounding + 1e-16
    assert error < 1e-12


@tried
@given(forms, numbers)
def test_only_the_signs_and_the_ratios_of_the_weights_count(form, factor):
    """From the definition: a sum and its multiples are positive together, its negative when it is not."""
    found, error = positive_share(form.weights, form.degrees, form.noncentralities)
    larger, _ = positive_share(factor * form.weights, form.degrees, form.noncentralities)
    turned, _ = positive_share(-form.weights, form.degrees, form.noncentralities)
    assert larger == pytest.approx(found, abs=2 * error + 1e-14)
    if form.weights.any():
        assert turned == pytest.approx(1 - found, abs=2 * error + 1e-14)


@pytest.mark.parametrize("halvings", [1, 2, 3])
def test_an_integral_that_has_not_settled_says_so(monkeypatch, halvings):
    """The same form with enough halvings, which the tests above hold against other sources."""
    form = [1, -1e-5], [1, 100_000], [0, 0]
    settled, _ = positive_share(*form)
    monkeypatch.setattr(quadratic_form, "HALVINGS", halvings)
    found, error = positive_share(*form)
    assert error > 1e-3
    assert abs(found - settled) <= error


@pytest.mark.parametrize("alpha", [0.5, 0.05, 1e-3, 1e-6])
@pytest.mark.parametrize("degrees", [1, 2, 7, 30, 1000, 20000])
def test_the_critical_value_of_two_degrees_has_its_closed_form(degrees, alpha):
    """F with two degrees above or below: its tail is a power, so the point follows by logarithms."""
    assert critical_ratio(2, degrees, alpha) == pytest.approx(
        expm1(-2 / degrees * log(alpha)), rel=1e-13, abs=0
    )
    rest = -expm1(2 / degrees * np.log1p(-alpha))
    assert critical_ratio(degrees, 2, alpha) == pytest.approx((1 - rest) / rest, rel=1e-13, abs=0)


@pytest.mark.parametrize("alpha", [0.2, 0.05, 0.01, 1e-6])
@pytest.mark.parametrize(
    "sizes", [(2, 2), (1, 2), (2, 5, 9), (12,) * 4, (1000,) * 20, (3, 1000), (1, *(2,) * 30)]
)
def test_groups_that_hardly_differ_are_rejected_at_the_level(sizes, alpha):
    """From the definition of a level: means 1e-9 apart move the rate by less than 1e-14 of itself."""
    spreads, means = (3,) * len(sizes), (7,) * (len(sizes) - 1)
    assert classical_f_rate(sizes, spreads, (*means, 7), alpha) == (alpha, 0.0)
    found, error = classical_f_rate(sizes, spreads, (*means, 7 + 1e-9), alpha)
    assert found == pytest.approx(alpha, rel=1e-14, abs=error)
    assert error < 3e-12 * alpha


@pytest.mark.parametrize("row", rows("exact_f.csv"), ids=lambda row: row["id"])
def test_the_rate_agrees_with_theory_worked_out_elsewhere(row):
    """Numerical theory by an independent program, 12 digits or more.

    Family a: unequal spreads, a quadratic form in normals. Family b: equal spreads, noncentral F. Where the
    data are lognormal, spreads and means are those of the logarithms. Roots are given with 17 digits.
    """
    found, error = classical_f_rate(*row["design"])
    assert abs(found - float(row["value"])) <= float(row["abs_error"]) + error
    assert error < 3e-12


@pytest.mark.parametrize(
    ("sizes", "spreads", "means", "rate"),
    [
        ((5, 10, 20), (3, 2, 1), (0, 0, 0), 0.2050541),
        ((5, 10, 20), (1, 2, 3), (0, 0, 0), 0.0139111),
        ((10, 10, 10), (1, 1, 4), (0, 0, 0), 0.0858835),
        ((5, 8, 12, 20), (3, 2, 1.5, 1), (0, 0, 0, 0), 0.2003881),
        ((12,) * 4, (1.5,) * 4, (0, 0, 0, 2), 0.9097365),
        ((5, 8, 12, 20), (1, 1.5, 2, 3), (0, 0, 0, 2), 0.5119518),
        ((10, 20, 30), (1, 2, 3), (0, 0, 0), 0.0207133),
        ((5, 5, 5), (1, sqrt(2), sqrt(3)), (0, 0, 0), 0.0558201),
        ((5, 10, 15, 30), (4, 1, 1, 1), (0, 0, 0, 0), 0.33625),
    ],
)
def test_the_rate_agrees_with_the_numbers_of_the_design_notes(sizes, spreads, means, rate):
    """Imhof's integral worked out when the program was designed, at level 0.05, to the digits noted."""
    found, _ = classical_f_rate(sizes, spreads, means, 0.05)
    assert found == pytest.approx(rate, abs=0.5 * 10.0 ** -(len(str(rate)) - 2))


@pytest.mark.parametrize(
    ("groups", "effect", "for_80", "for_90"),
    [
        (3, 0.1, 323, 423),
        (3, 0.25, 53, 69),
        (3, 0.4, 22, 28),
        (4, 0.1, 274, 356),
        (4, 0.25, 45, 58),
        (4, 0.4, 19, 24),
        (5, 0.1, 240, 310),
        (5, 0.25, 40, 51),
        (5, 0.4, 16, 21),
    ],
)
def test_the_smallest_sizes_are_those_of_the_noncentral_f(groups, effect, for_80, for_90):
    """Noncentral F, noncentrality k n f^2, level 0.05; sizes worked out when the program was designed.

    Cohen (1992, Psychological Bulletin 112, 155-159, Table 2) prints some of them one smaller.
    """
    means = (-effect * sqrt(groups / 2),) + (0,) * (groups - 2) + (effect * sqrt(groups / 2),)

    def power(size):
        found, _ = classical_f_rate((size,) * groups, (1,) * groups, means, 0.05)
        ratio = critical_ratio(groups - 1, groups * (size - 1), 0.05)
        tail = noncentral_f_tail(groups - 1, groups * (size - 1), groups * size * effect**2, ratio)
        assert found == pytest.approx(tail, abs=1e-12)
        return found

    assert power(for_80 - 1) < 0.8 <= power(for_80)
    assert power(for_90 - 1) < 0.9 <= power(for_90)


def rate_of_two(sizes, spreads, difference, alpha):
    """Rejection rate of the pooled t, averaged over the first group's share of the sum of two chi-squares.

    Given that share the statistic is a noncentral t up to a factor, its square a noncentral F. The share is beta
    distributed; the integral runs over the angle of which it is the squared sine.
    """
    (n, m), (s, r), below = sizes, spreads, sum(sizes) - 2
    variance = s**2 / n + r**2 / m
    ratio = critical_ratio(1, below, alpha) * (1 / n + 1 / m) / variance

    def integrand(angle):
        share = np.sin(angle) ** 2
        chance = noncentral_f_tail(
            1, below, difference**2 / variance, ratio * (s**2 * share + r**2 * (1 - share))
        )
        return 2 * np.sin(angle) ** (n - 2) * np.cos(angle) ** (m - 2) * chance

    # A spread a hundred times the other makes a peak at one end, so both ends get panels of their own.
    panels = [0, 1e-3, 0.03, 0.3, 1.2, 1.54, np.pi / 2 - 1e-3, np.pi / 2]
    pieces = [quad(integrand, *ends, epsabs=1e-14, epsrel=1e-12)[0] for ends in pairwise(panels)]
    return sum(pieces) / beta((n - 1) / 2, (m - 1) / 2)


@pytest.mark.parametrize("alpha", [0.05, 1e-6])
@pytest.mark.parametrize("difference", [0.0, 1.5])
@pytest.mark.parametrize(
    ("sizes", "spreads"),
    [
        ((2, 2), (1, 3)),
        ((2, 2), (1, 100)),
        ((3, 12), (2, 1)),
        ((12, 3), (2, 1)),
        ((40, 25), (1, 8)),
        ((2, 200), (1, 2)),
    ],
)
def test_two_groups_agree_with_an_integral_over_the_variance_ratio(sizes, spreads, difference, alpha):
    """One-dimensional quadrature by SciPy, without any characteristic function."""
    found, _ = classical_f_rate(sizes, spreads, (0, difference), alpha)
    assert found == pytest.approx(rate_of_two(sizes, spreads, difference, alpha), rel=1e-10, abs=0)


PUBLISHED = rows("published_f.csv")
SIMULATED = [row for row in PUBLISHED if row["replications"]]
COMPUTED = [row for row in PUBLISHED if not row["replications"]]


def standard_errors(row):
    """How far a published simulated rate lies from theory, in its Monte Carlo standard errors."""
    rate, _ = classical_f_rate(*row["design"])
    return (float(row["value"]) - rate) / sqrt(rate * (1 - rate) / int(row["replications"]))


@pytest.mark.parametrize("row", SIMULATED, ids=lambda row: row["id"])
def test_published_simulations_agree_within_their_standard_error(row):
    """Delacre and others (2019), open workbook, a million replications a cell."""
    assert abs(standard_errors(row)) <= 4.5


def test_published_simulations_scatter_about_theory_as_simulations_do():
    """The same cells together: squared distances follow chi-square, 1e-4 left out at each end."""
    total = sum(standard_errors(row) ** 2 for row in SIMULATED)
    assert chdtrc(len(SIMULATED), total) > 1e-4
    assert chdtr(len(SIMULATED), total) > 1e-4


@pytest.mark.parametrize("row", COMPUTED, ids=lambda row: row["id"])
def test_published_rates_agree_to_the_digits_printed(row):
    """Box (1954), also in Scheffe (1959, Table 10.4.2); Brown & Forsythe (1974); quoted from memory."""
    found, _ = classical_f_rate(*row["design"])
    assert found == pytest.approx(float(row["value"]), abs=0.5 * 10.0 ** -(len(row["value"]) - 2))


def test_the_published_rows_are_all_there():
    """The file: eighteen simulated cells, three computed ones."""
    assert (len(SIMULATED), len(COMPUTED)) == (18, 3)


groups = st.tuples(st.integers(2, 200), st.floats(-2, 2).map(lambda power: 10**power), st.integers(-40, 40))
designs = st.lists(groups, min_size=2, max_size=7)
levels = st.sampled_from([0.2, 0.05, 0.01, 1e-6])


def rate_of(design, alpha, shift=0, factor=1):
    """classical_f_rate of (size, spread, mean in eighths) triples, means shifted, both multiplied."""
    sizes, spreads, means = zip(*design, strict=True)
    moved = [factor * (mean + shift) / 8 for mean in means]
    return classical_f_rate(sizes, [factor * spread for spread in spreads], moved, alpha)


@tried
@given(designs, levels, st.randoms(use_true_random=False))
def test_the_order_of_groups_does_not_matter(design, alpha, random):
    """From the definition of F."""
    found, error = rate_of(design, alpha)
    other, other_error = rate_of(random.sample(design, len(design)), alpha)
    assert 0 <= found <= 1
    assert found == pytest.approx(other, abs=error + other_error)


@tried
@given(designs, levels, st.integers(-(10**6), 10**6), numbers)
def test_neither_the_origin_nor_the_unit_of_the_values_matters(design, alpha, shift, factor):
    """From the definition of F; eighths are shifted without rounding."""
    found, error = rate_of(design, alpha)
    shifted, shifted_error = rate_of(design, alpha, shift=shift)
    scaled, scaled_error = rate_of(design, alpha, factor=factor)
    assert shifted == pytest.approx(found, abs=error + shifted_error)
    assert scaled == pytest.approx(found, abs=error + scaled_error)


def test_distances_are_standard_errors_for_common_events_and_right_for_rare_ones():
    """Normal quantiles of binomial mid-shares; binomial and normal of SciPy 1.17."""
    x, n, p = np.array([4985.0, 52000.0]), np.array([100000.0, 100000.0]), np.array([0.05, 0.52])
    assert np.allclose(distances(x, n, p), (x / n - p) / np.sqrt(p * (1 - p) / n), atol=0.01)
    # One event where 0.04 are expected happens once in 25 times; the normal formula calls that 4.7 standard errors.
    rare = binom.cdf(0, 4000, 1e-5) + binom.pmf(1, 4000, 1e-5) / 2
    assert distances(np.array([1.0]), np.array([4000.0]), np.array([1e-5]))[0] == pytest.approx(
        norm.ppf(rare)
    )
    assert distances(np.array([3999.0]), np.array([4000.0]), np.array([1 - 1e-5]))[0] == pytest.approx(
        -norm.ppf(rare)
    )
    assert np.isfinite(distances(np.array([0.0]), np.array([1e5]), np.array([0.5]))).all()
