"""Numbers for people, with the digits that their Monte Carlo error allows."""

import math

NO_BREAK = "\u00a0"


def decimals(standard_error):
    """Decimals of which one unit of the last is between 0.2 and 2 standard errors."""
    if not standard_error > 0:
        return 3
    return max(0, math.ceil(-math.log10(2 * standard_error) - 1e-9))


def proportion(rate, digits):
    """A rate as a number such as 0.050; never 0.000 or 1.000 unless it is exact."""
    smallest = 10.0**-digits
    if 0 < rate < smallest / 2:
        return f"<{NO_BREAK}{smallest:.{digits}f}"
    if 1 - smallest / 2 < rate < 1:
        return f">{NO_BREAK}{1 - smallest:.{digits}f}"
    return f"{rate:.{digits}f}"


def limits(lower, upper, digits):
    """The ends of an interval, rounded outwards."""
    unit = 10**digits
    low = math.floor(lower * unit + 1e-9) / unit
    high = math.ceil(upper * unit - 1e-9) / unit
    return f"{low:.{digits}f} to {high:.{digits}f}"


def percent(rate, standard_error):
    """A rate as a percentage for a sentence."""
    digits = max(0, decimals(standard_error) - 2)
    if rate in (0, 1):
        return f"{100 * rate:.0f}{NO_BREAK}%"
    shown = f"{100 * rate:.{digits}f}"
    if 0 < rate and float(shown) == 0:
        return f"less than {10.0**-digits:.{digits}f}{NO_BREAK}%"
    if rate < 1 and float(shown) == 100:
        return f"more than {100 - 10.0**-digits:.{digits}f}{NO_BREAK}%"
    return f"{shown}{NO_BREAK}%"


def duration(seconds):
    """A time as people say it: 40 s, 3 min, 2.5 h."""
    if seconds < 0.95:
        return f"{max(seconds, 0.1):.1f}{NO_BREAK}s"
    if seconds < 100:
        return f"{seconds:.0f}{NO_BREAK}s"
    if seconds < 5400:
        return f"{seconds / 60:.0f}{NO_BREAK}min"
    return f"{seconds / 3600:.1f}{NO_BREAK}h"


def storage(size):
    """A number of bytes as people say it."""
    for unit in ("bytes", "kB", "MB"):
        if size < 1000:
            return f"{size:.0f}{NO_BREAK}{unit}"
        size /= 1000
    return f"{size:.1f}{NO_BREAK}GB"


def listed(words):
    """Words joined as in a sentence: a, b and c."""
    words = list(words)
    return words[0] if len(words) == 1 else f"{', '.join(words[:-1])} and {words[-1]}"
