"""The chance that a weighted sum of chi-squares is positive, by inversion of its characteristic function."""

from dataclasses import dataclass

import numpy as np
from scipy.special import expit

LOG_ODDS = np.arange(-46, 30.5, 0.5)
"""Where the tilt is looked for, as a share of the largest that leaves the moments finite."""

NEGLIGIBLE = -45
"""Logarithm of a modulus of the characteristic function that no double number takes notice of."""

FIRST_STEP = 0.5
HALVINGS = 11

ENOUGH = 1e-14
"""Change under a halving of the step, as a share of the integral of moduli, at which halving ends."""

ROUNDING = float(np.finfo(float).eps)


def positive_share(weights, degrees, noncentralities):
    """(chance that Q > 0, bound on its numerical error): Q adds up weights times independent chi-squares.

    Chi-square j has degrees[j] degrees of freedom and noncentrality noncentralities[j], the sum of its squared
    means; all three are (m,) arrays. A chance near 0 has as many right digits as one near 1/2.
    """
    columns = np.array([weights, degrees, noncentralities], dtype=float)
    form = Form(*columns[:, columns[1] + columns[2] > 0])
    if form.mean <= 0:
        return upper_tail(form)
    tail, error = upper_tail(form.times(-1))
    return 1 - tail, error + ROUNDING


@dataclass(frozen=True)
class Form:
    """A weighted sum of independent chi-squares, none of them always 0, an (m,) array a field."""

    weights: np.ndarray
    degrees: np.ndarray
    noncentralities: np.ndarray

    @property
    def mean(self):
        """Expectation of the sum."""
        return self.weights @ (self.degrees + self.noncentralities)

    @property
    def variance(self):
        """Variance of the sum."""
        return self.weights**2 @ (2 * self.degrees + 4 * self.noncentralities)

    @property
    def largest_weight(self):
        """The largest of the weights."""
        return self.weights.max(initial=-np.inf)

    def times(self, factor):
        """The form of the sum times a factor."""
        return Form(factor * self.weights, self.degrees, self.noncentralities)

    def cumulants(self, tilt):
        """(..., m): logarithms of the mean of exp(tilt * term), a term each; tilt is a (..., 1) array."""
        part = tilt * self.weights
        return self.noncentralities * part / (1 - 2 * part) - self.degrees / 2 * np.log1p(-2 * part)

    def tilted(self, tilt):
        """The form whose density is that of the sum times exp(tilt * sum), brought back to area 1."""
        rest = 1 - 2 * tilt * self.weights
        return Form(self.weights / rest, self.degrees, self.noncentralities / rest)

    def characteristic(self, y):
        """(logarithm of the modulus, angle) of the mean of exp(i y sum) at n values y, (n,) each (Imhof 1961)."""
        slopes = np.multiply.outer(y, 2 * self.weights)
        squares = slopes**2
        halves, shifts = self.degrees / 2, self.noncentralities / 2
        modulus = np.log1p(squares) @ (halves / 2) + squares / (1 + squares) @ shifts
        angle = np.arctan(slopes) @ halves + slopes / (1 + squares) @ shifts
        return -modulus, angle


def upper_tail(form):
    """(chance that the sum is positive, bound on its numerical error) of a form whose mean is not positive.

    Imhof (1961, Biometrika 48, 419-426) integrates the characteristic function over i y divided by i y. Here
    the path is moved to c + i y through the saddle point of that integrand (Rice 1980, SIAM J. Sci. Stat.
    Comput. 1, 438-448): it then hardly oscillates, and no small chance is a difference of large ones.
    """
    if form.largest_weight <= 0:
        return 0.0, 0.0
    # With a largest weight of exactly 1, 1 - 2 * tilt is free of rounding however near the tilt is to 1/2.
    form = form.times(1 / form.largest_weight)
    tilt = best_tilt(form)
    cumulants = form.cumulants(tilt)
    scale = np.exp(cumulants.sum()) / np.pi
    integral, change, moduli = halved(Path(form.tilted(tilt), tilt))
    rounding = ROUNDING * (64 + np.abs(cumulants).sum()) * moduli
    return float(scale * integral), float(scale * (change + rounding))


def best_tilt(form):
    """The tilt near the saddle point of the integrand; whichever is taken, the integral is the same."""
    tilts = expit(LOG_ODDS) / 2
    heights = form.cumulants(tilts[:, None]).sum(axis=1) - np.log(tilts)
    return tilts[heights.argmin()]


@dataclass(frozen=True)
class Path:
    """The path of integration through a tilt, along which y = width * sinh(t)."""

    form: Form
    """The form tilted so, whose largest weight is positive."""

    tilt: float

    @property
    def width(self):
        """How far the integrand's peak reaches to each side."""
        return 1 / np.sqrt(1 / self.tilt**2 + self.form.variance)

    def reach(self):
        """The t beyond which the integrand is negligible."""
        t = np.arange(0, 128, FIRST_STEP)
        modulus, _ = self.form.characteristic(self.width * np.sinh(t))
        return t[np.searchsorted(-modulus, -NEGLIGIBLE).clip(max=len(t) - 1)]

    def integrand(self, t):
        """(n,) real part of the integrand at n values of t; the imaginary part cancels that at -t."""
        y = self.width * np.sinh(t)
        modulus, angle = self.form.characteristic(y)
        wave = self.tilt * np.cos(angle) + y * np.sin(angle)
        return np.exp(modulus) * wave / (self.tilt**2 + y**2) * self.width * np.cosh(t)


def halved(path):
    """(integral over t > 0, its last change, integral of moduli): trapezoids, steps halved until they agree.

    The integrand is analytic about the line, so that a halving about doubles the number of right digits, and
    the last change is the error of the sum before. If they never agree, as among ten million values, nothing
    but the moduli bounds the error.
    """
    step, end = FIRST_STEP, path.reach()
    values = path.integrand(np.arange(0, end + step, step))
    values[0] /= 2
    integral, moduli = step * values.sum(), step * np.abs(values).sum()
    for _ in range(HALVINGS):
        values = path.integrand(np.arange(step / 2, end + step, step))
        before = integral
        integral, moduli = (integral + step * values.sum()) / 2, (moduli + step * np.abs(values).sum()) / 2
        step /= 2
        change = abs(integral - before)
        if change <= ENOUGH * moduli:
            break
    else:
        change = 2 * moduli
    return integral, change, moduli
