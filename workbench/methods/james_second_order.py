"""James's second-order test, for groups of unequal spread."""

import numpy as np
from scipy.special import chdtri

from workbench.methods.method import METHODS, Method
from workbench.methods.welch_f import welch_squares, welch_weights
from workbench.tails import chi_square_tail

CLOSE, MOST_STEPS = 1e-10, 200
"""The root is found when a step is shorter than CLOSE."""

LEAST_P = 1e-300
"""A smaller p-value is given as this."""

LATER = ((1, 5, -1, 1, 3), (2, 9, -5, 1, 7), (5, 15, -3, 3, 9), (0, 35, 9, 27, 45))
"""How often each of James's last five sums enters the coefficients of c, c^2, c^3 and c^4."""


@METHODS.add
class JamesSecondOrder(Method):
    """James's second-order test: a critical value to terms of order 1 / n^2, turned into a p-value."""

    name = "james_second_order"
    label = "James second-order test"
    short = "James"
    hypothesis = "means"
    assumes = "normal groups; spreads may differ"
    undefined_when = "all values of some group are equal, or a group has fewer than two"
    cite = (
        "James, G. S. (1951). The comparison of several groups of observations when the ratios of the population "
        "variances are unknown. Biometrika 38(3/4), 324-329"
    )

    def kernel(self, batch, rng):
        distance = batch.shared(welch_squares).sum(axis=1)
        freedom = batch.groups - 1
        point = solved(batch.shift_free(critical_value), distance, chdtri(freedom, LEAST_P))
        return chi_square_tail(freedom, point)


def critical_value(batch):
    """[four (R,) coefficients of c, c^2, c^3 and c^4] of the critical value, c being the quantile of chi-square.

    James writes X_2s for c^s / ((k - 1) (k + 1) … (k + 2 s - 3)), so that his series to second order,
    c + h T + h^2 (1 - (k - 3) / c) T^2 / 4 + h [ … ] + …, with h = (3 X_4 + X_2) / 2, is a polynomial. Its third sum
    in the brackets, a quarter of -R_12^2 + 4 R_12 R_11 - …, is -T^2 / 4.
    """
    k = batch.groups
    x2, x4, x6, x8 = np.cumprod([1 / (k + step) for step in (-1, 1, 3, 5)])
    slack, at_zero, per_x2, later = james_sums(batch)
    square = slack**2 / 4
    least, first, second = slack + at_zero + square, (per_x2 + 2 * square) * x2, -3 * square * x4
    h1, h2 = x2 / 2, 3 * x4 / 2
    return [
        1 + h1 * least - (k - 3) * h1**2 * square + x2 * combined(LATER[0], later),
        h2 * least + h1 * first + (h1 - 2 * (k - 3) * h2) * h1 * square + x4 * combined(LATER[1], later),
        h2 * first + h1 * second + (2 * h1 - (k - 3) * h2) * h2 * square + x6 * combined(LATER[2], later),
        h2 * second + h2**2 * square + x8 * combined(LATER[3], later),
    ]


def combined(times, sums):
    """(R,) sum of (R,) sums, each taken so many times."""
    return sum(number * found for number, found in zip(times, sums, strict=True))


def james_sums(batch):
    """(T, first bracket sum less the second, the second, [the five sums of the later terms]), all of shape (R,).

    R_st is the sum over the groups of q^t / (n - 1)^s, q a group's share of the weights.
    """
    _, q, _, _ = batch.shift_free(welch_weights)
    once = 1 / (batch.sizes - 1)
    twice = once**2
    r10, r11, r12 = once.sum(axis=1), (q * once).sum(axis=1), (q**2 * once).sum(axis=1)
    r20, r21, r22 = twice.sum(axis=1), (q * twice).sum(axis=1), (q**2 * twice).sum(axis=1)
    r23 = (q**3 * twice).sum(axis=1)
    per_x2 = 2 * (r23 - 2 * r22 + r21 - (r12 - r11) ** 2)
    at_zero = 8 * r23 - 10 * r22 + 4 * r21 - 6 * r12**2 + 8 * r12 * r11 - 4 * r11**2 - per_x2
    later = [
        r23 - 3 * r22 + 3 * r21 - r20,
        3 / 16 * (r12**2 - 4 * r23 + 6 * r22 - 4 * r21 + r20),
        (4 * r21 - 2 * r22 - r20 + 2 * r12 * r10 - 4 * r11 * r10 + r10**2) / 16,
        (r11**2 - r22) / 4,
        (r23 - r12 * r11) / 4,
    ]
    return r10 - 2 * r11 + r12, at_zero, per_x2, later


def solved(polynomial, value, farthest):
    """(R,) places from 0 to the farthest at which polynomials without constant term reach the (R,) values.

    Newton's rule, each dataset until its own step is short, so that none depends on its neighbours.
    """
    c1, c2, c3, c4 = polynomial
    place = np.clip(value / c1, 0, farthest)
    moving = np.ones(len(place), dtype=bool)
    for _ in range(MOST_STEPS):
        height = (((c4 * place + c3) * place + c2) * place + c1) * place
        slope = ((4 * c4 * place + 3 * c3) * place + 2 * c2) * place + c1
        step = np.clip(place - (height - value) / slope, 0, farthest) - place
        place = np.where(moving, place + step, place)
        moving &= np.abs(step) >= CLOSE
        if not moving.any():
            break
    return place
