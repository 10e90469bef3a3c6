"""Shown: simulated numbers as a page prints them, each with its full value beside it."""

import math
from dataclasses import dataclass

from markupsafe import Markup, escape

from workbench.numbers import decimals, limits, proportion
from workbench.texts import CLOSE, OPEN

MINUS = "\u2212"


@dataclass(frozen=True)
class Shown:
    """A number as people read it, and as it stands in a table."""

    value: float
    text: str

    def __str__(self):
        return self.text

    def __html__(self):
        return Markup('<data value="{}">{}</data>').format(plain(self.value), self.text)


@dataclass(frozen=True)
class Span:
    """The two ends of an interval, rounded outwards."""

    lower: float
    upper: float
    text: str

    def __str__(self):
        return self.text

    def __html__(self):
        low, high = self.text.split(" to ")
        ends = Shown(self.lower, low), Shown(self.upper, high)
        return Markup("{} to {}").format(*ends)


def plain(value):
    """A number with all its digits."""
    return repr(int(value)) if float(value).is_integer() and abs(value) >= 1 else repr(float(value))


def rate(value, digits, rejections=None, replications=None):
    """A rate; none at all, or all, in so many are told as such."""
    if rejections is not None and rejections in (0, replications):
        return Shown(value, f"{rejections:,} of {replications:,}")
    return Shown(value, proportion(value, digits) if value else "0")


def span(lower, upper, digits):
    """An interval of a rate, with one decimal more than the rate itself."""
    return Span(lower, upper, limits(lower, upper, digits + 1).replace("-", MINUS))


def signed(value, digits):
    """A difference with its sign."""
    text = f"{value:+.{digits}f}".replace("-", MINUS)
    return Shown(value, text if float(f"{value:.{digits}f}") else f"{0:.{digits}f}")


def signed_span(lower, upper, digits):
    """An interval of a difference."""
    return Span(lower, upper, limits(lower, upper, digits + 1).replace("-", MINUS))


def points(value, standard_error):
    """A difference of two shares in percentage points, for a sentence."""
    digits = max(0, decimals(standard_error) - 2)
    text = f"{100 * value:.{digits}f}"
    if value > 0 and not float(text):
        text = f"<\u00a0{10.0**-digits:.{digits}f}"
    return Shown(value, text.replace("-", MINUS))


def count(number):
    """A count with commas."""
    return Shown(number, f"{number:,}")


def quantities(group, names):
    """True quantities of a group as texts, with three digits of its standard deviation; a dash where one is none."""
    digits = decimals_of(group["sd"])
    return [
        true_value(group[name], 2 if name in ("skewness", "excess_kurtosis") else digits) for name in names
    ]


def decimals_of(sd):
    """Decimals that give a standard deviation three digits; two where there is none."""
    return 2 if not sd else max(0, 2 - math.floor(math.log10(sd)))


def true_value(value, digits):
    """A true quantity as a text; nought has no sign."""
    if value is None:
        return "–"
    text = f"{value:,.{digits}f}"
    return text.replace("-", MINUS) if float(text.replace(",", "")) else f"{0:.{digits}f}"


def prose(text):
    """A sentence for a page: escaped, with users' texts in elements that isolate their direction of writing."""
    found = str(escape(text)).replace(OPEN, '<bdi class="q">').replace(CLOSE, "</bdi>")
    return Markup(found)
