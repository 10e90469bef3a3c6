"""The Alexander–Govern test, for groups of unequal spread."""

import numpy as np

from workbench.methods.method import METHODS, Method
from workbench.methods.welch_f import welch_squares
from workbench.tails import chi_square_tail


@METHODS.add
class AlexanderGovern(Method):
    """Alexander–Govern test: each group's t made normal, their squares added."""

    name = "alexander_govern"
    label = "Alexander–Govern test"
    short = "A–G"
    hypothesis = "means"
    assumes = "normal groups; spreads may differ"
    undefined_when = "all values of some group are equal, or a group has fewer than two"
    cite = (
        "Alexander, R. A. & Govern, D. M. (1994). A new and simpler approximation for ANOVA under variance "
        "heterogeneity. Journal of Educational Statistics 19(2), 91-101"
    )

    def kernel(self, batch, rng):
        z = normal_deviates(batch.shared(welch_squares), batch.sizes - 1)
        return chi_square_tail(batch.groups - 1, (z**2).sum(axis=1))


def normal_deviates(t_squared, freedom):
    """(R, k) absolute normal deviates as likely as Student's t with such squares and degrees of freedom.

    Hill's expansion (1970, Communications of the ACM 13, 617-619), as Alexander & Govern use it.
    """
    a = freedom - 0.5
    b = 48 * a**2
    square = a * np.log1p(t_squared / freedom)
    first = (square + 3) / b
    rest = ((4 * square + 33) * square + 240) * square + 855
    return np.sqrt(square) * (1 + first - rest / (b * (10 * b + 8 * square**2 + 1000)))
