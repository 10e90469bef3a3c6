"""Which rates theory gives, and how simulated ones stand against them."""

from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from scipy.special import bdtr, bdtrc, ndtri

from workbench import mechanism
from workbench.methods.classical_f import ClassicalF
from workbench.methods.log_f import LogF
from workbench.shapes.normal import Normal
from workbench.theory.normal_f import classical_f_rate

TOO_RARE = 3e-7
"""Chance of a count as far out on its side as one that is taken for a disagreement."""

TINY = 1e-300
"""Smaller shares are told as this one: a count 37 standard errors away."""

SETTLED = 1e-8
"""A numerical error from here on means that a rate is not known: of a million replications none would notice."""

SLACK = 5
"""How many times its numerical error a rate from theory is moved towards the count before it is judged."""


def exact_rate(condition, method, level):
    """(rejection rate from theory, bound on its numerical error); (NaN, NaN) where theory does not give it."""
    setting = condition.setting
    if setting.disturbances or set(setting.shapes) != {Normal()}:
        return np.nan, np.nan
    where = mechanism.locations(setting, condition.difference)
    if setting.scale == "additive" and method == ClassicalF():
        means = where
    elif setting.scale == "multiplicative" and method == LogF():
        means = np.log(where)
    else:
        return np.nan, np.nan
    # Group means alike up to rounding are alike: only differences matter, and the centre may be large.
    apart = tuple(float(mean) for mean in np.round(means - means[0], 12))
    return remembered(setting.sizes, setting.spreads, apart, level)


@lru_cache(maxsize=2**16)
def remembered(sizes, spreads, means, level):
    """classical_f_rate, worked out once; (NaN, NaN) where its integral does not settle."""
    rate, error = classical_f_rate(sizes, spreads, means, level)
    return (rate, error) if error < SETTLED else (np.nan, np.nan)


@dataclass(frozen=True)
class Agreement:
    """How simulated rates stand against theory, in Monte Carlo standard errors."""

    rows: int
    largest: float
    mean_square: float
    disagreeing: list
    """The rows of the table whose counts are as good as impossible if theory is right."""

    @property
    def sentence(self):
        """What the program says after each run."""
        if not self.rows:
            return "Theory gives no rate of this study, so none could be checked against it."
        text = (
            f"Simulation and theory: {self.rows:,} rates are known exactly; the simulated ones are at most "
            f"{self.largest:.1f} standard errors away, {self.mean_square:.2f} in the mean square (1 is expected)."
        )
        return (
            text if not self.disagreeing else f"{text} In {len(self.disagreeing):,} of them the two disagree."
        )


def agreement(rates):
    """The Agreement of a table's rates with the exact ones in it."""
    known = rates[np.isfinite(rates["exact"])]
    exact, n, x = (known[name].to_numpy(dtype=float) for name in ("exact", "replications", "rejections"))
    z = distances(x, n, exact)
    wrong = too_far(x, n, exact, known["exact_error"].to_numpy(dtype=float))
    return Agreement(
        len(known),
        float(np.abs(z).max(initial=0.0)),
        float((z**2).mean()) if len(known) else 0.0,
        [row for _, row in known[wrong].iterrows()],
    )


def distances(x, n, exact):
    """(rows,) how far counts are from what a rate leads one to expect, in standard errors.

    The standard normal value with the same share below it as the count has in its binomial distribution, half of
    its own included: for common events (x / n - rate) / standard error, and right for rare ones too.
    """
    whole = np.asarray(n).astype(int)
    own = bdtr(x, whole, exact) - np.where(x > 0, bdtr(np.maximum(x - 1, 0), whole, exact), 0.0)
    own_above = bdtrc(np.maximum(x - 1, 0), whole, exact) - bdtrc(x, whole, exact)
    below = np.where(x > 0, bdtr(np.maximum(x - 1, 0), whole, exact), 0.0) + own / 2
    above = bdtrc(x, whole, exact) + np.where(x > 0, own_above, own) / 2
    found = np.where(below < above, ndtri(np.maximum(below, TINY)), -ndtri(np.maximum(above, TINY)))
    return np.where((exact > 0) & (exact < 1), found, 0.0)


def too_far(x, n, exact, error):
    """(rows,) bool: a binomial count with the exact rate is as far out with chance below TOO_RARE on its side."""
    low = np.clip(exact - SLACK * error, 0, 1)
    high = np.clip(exact + SLACK * error, 0, 1)
    above = np.where(x > 0, bdtrc(np.maximum(x - 1, 0), n.astype(int), high), 1.0)
    below = bdtr(x, n.astype(int), low)
    return np.where(x > n * exact, above, below) < TOO_RARE
