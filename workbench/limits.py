"""The limit law of the Anderson–Darling statistic of k groups: tail areas from its transform in closed form."""

from functools import lru_cache

import numpy as np
from scipy.special import expit

LOGS = np.arange(-24, 24, 0.25)
"""Where the crossing of the real axis is looked for: log odds in (0, 1), logarithms below 0."""

ANGLES = np.arange(0, 12, 0.0625)
"""Steps along the path; twice as wide they would still give 12 digits for 10 groups, and 6 for 60."""

NODES = 1200
LEAST, MOST = 0.03, 900.0
"""Between k - 1 times the one and the other plus 20 (k - 1) tail areas are tabulated: from 1 to under 1e-300."""


def anderson_darling_tail(groups, x):
    """(R,) upper tail areas at (R,) values x of the sum of X_j / (j (j + 1)), X_j chi-square with k - 1 df each."""
    nodes, logs = tail_table(groups - 1)
    place = (np.log(np.clip(x, *np.exp(nodes[[0, -1]]))) - nodes[0]) / (nodes[1] - nodes[0])
    return np.exp(np.minimum(cubic(logs, place), 0.0))


@lru_cache(maxsize=64)
def tail_table(df):
    """(logarithms of values x in equal steps, logarithms of the tail areas there), for X_j with so many df."""
    nodes = np.linspace(np.log(LEAST * df), np.log(MOST + 20 * df), NODES)
    return nodes, log_tail(df, np.exp(nodes))


def cubic(y, place):
    """(R,) values between those in y, at (R,) places counted from the first: the cubic through the four about each."""
    start = np.clip(np.nan_to_num(place).astype(np.intp), 1, len(y) - 3)
    u = place - start
    outer = (u * (u - 1) / 6) * ((u + 1) * y[start + 2] - (u - 2) * y[start - 1])
    return outer + ((u + 1) * (u - 2) / 2) * ((u - 1) * y[start] - u * y[start + 1])


def log_tail(df, x):
    """(n,) logarithms of the tail areas at (n,) values x > 0, below the mean by way of the lower tail."""
    logs = np.empty(len(x))
    high = x > df
    logs[high] = log_integral(df, x[high], expit(LOGS))
    logs[~high] = np.log1p(-np.exp(log_integral(df, x[~high], -np.exp(LOGS))))
    return logs


def log_integral(df, x, points):
    """(n,) logarithms of the areas beyond (n,) values x: above them from points in (0, 1), below from negative ones.

    The mean of exp(s sum) is integrated times exp(-s x) / s along half a hyperbola that opens about the positive axis
    (its other half is the mirror image) and crosses the axis at the saddle point, as wide as the peak is there: on it
    the integrand hardly oscillates, falls faster than exponentially, and the trapezoid rule converges geometrically.
    """
    crossing, width = (column[:, None] for column in saddle(df, x, points))
    s = crossing + width * (np.cosh(ANGLES) - 1 + 1j * np.sinh(ANGLES))
    slope = width * (np.sinh(ANGLES) + 1j * np.cosh(ANGLES))
    logs = log_transform(df, s) - s * x[:, None]
    height = logs[:, 0].real
    values = (np.exp(logs - height[:, None]) * slope / s).imag
    integral = (values.sum(axis=1) - values[:, 0] / 2) * (ANGLES[1] / np.pi)
    return height + np.log(np.abs(integral))


def saddle(df, x, points):
    """((n,) points where the integrand over the real axis is least, (n,) widths of its peak across the axis)."""
    heights = log_transform(df, points + 0j).real - np.log(np.abs(points))
    crossing = points[(heights - np.multiply.outer(x, points)).argmin(axis=1)]
    places = np.arange(1, 200)
    # What the rest of the terms adds does not matter: a width near this one does as well.
    rest = places * (places + 1) / 2 - crossing[:, None]
    return crossing, 1 / np.sqrt((df / 2 / rest**2).sum(axis=1) + 1 / crossing**2)


def log_transform(df, s):
    """Logarithm of the mean of exp(s sum), s in the upper half of the plane or real and below 1.

    Each term brings 1 - 2 s / (j (j + 1)) to the power -df / 2, and the product over all j is
    -cos(pi w) / (2 pi s) with w^2 = 1/4 + 2 s (Anderson & Darling 1952, Annals of Mathematical Statistics 23,
    193-212). The logarithm of the cosine is taken apart so that it has no jump.
    """
    turn = np.exp(2j * np.pi * (w := np.sqrt(0.25 + 2 * s)))
    log_cosine = np.log1p(turn) - 1j * np.pi * w + 1j * np.pi
    return df / 2 * (np.log(4 * np.pi * s) - log_cosine)
