"""Numbers carry the digits that their Monte Carlo error allows, and are never rounded to 0 or 1."""

import pytest

from workbench import numbers


@pytest.mark.parametrize(
    ("rate", "replications", "wanted"),
    [
        (0.05, 100_000, 3),
        (0.5, 100_000, 3),
        (0.05, 10_000, 3),
        (0.5, 10_000, 2),
        (0.05, 1000, 2),
        (0.5, 1000, 2),
    ],
)
def test_one_unit_of_the_last_decimal_is_about_a_standard_error(rate, replications, wanted):
    error = (rate * (1 - rate) / replications) ** 0.5
    assert numbers.decimals(error) == wanted
    assert 0.2 <= 10.0**-wanted / error <= 5.01


@pytest.mark.parametrize(
    ("rate", "wanted"),
    [(0.0, "0.000"), (1.0, "1.000"), (0.0001, "<\u00a00.001"), (0.9999, ">\u00a00.999"), (0.0496, "0.050")],
)
def test_a_proportion_is_never_0_or_1_unless_it_is(rate, wanted):
    assert numbers.proportion(rate, 3) == wanted


def test_limits_are_rounded_outwards():
    assert numbers.limits(0.04741, 0.05262, 3) == "0.047 to 0.053"
    assert numbers.limits(0.0, 0.05, 2) == "0.00 to 0.05"


def test_percentages_and_times_are_as_people_say_them():
    assert numbers.percent(0.0736, 0.0007) == "7.4\u00a0%"
    assert numbers.percent(0.00001, 0.0007).startswith("less than")
    assert numbers.percent(0.99999, 0.0007).startswith("more than")
    assert numbers.duration(40) == "40\u00a0s" and numbers.duration(200) == "3\u00a0min"
    assert numbers.listed(["a", "b", "c"]) == "a, b and c"
    assert numbers.storage(2_500_000) == "2\u00a0MB"
