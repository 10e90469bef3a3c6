"""Wording: the nouns of a decision as a terminal shows them, with the rows they speak of."""

from workbench.numbers import NO_BREAK, decimals, limits, percent
from workbench.texts import bare, isolated


def plural(hypothesis):
    """A hypothesis as a noun in a sentence."""
    return "different things at its ends" if hypothesis == "mixed" else f"equal {hypothesis}"


def conditions(number):
    """A number of conditions in words."""
    return "1 condition" if number == 1 else f"{number:,} conditions"


def thousands(number):
    """A number rounded up to thousands, as people read it."""
    return f"{-(-number // 1000) * 1000:,}"


def rate_with_limits(row):
    """A rate and its interval as percentages; where none or all reject, also the count in so many."""
    digits = max(0, decimals(row["mcse"]) - 1)
    ends = limits(100 * row["lower"], 100 * row["upper"], digits)
    found = {"rate": percent(row["rate"], row["mcse"]), "limits": f"{ends}{NO_BREAK}%", "counted": ""}
    if row["rate"] in (0, 1):
        found["counted"] = f"{row['rejections']:,} of {row['replications']:,}"
    return found


def place(study, row):
    """Where a row stands, by the names of the levels of the factors that vary."""
    names = [bare(name) for name in levels_at(study, row)]
    return ", ".join(names) if names else f"condition {row['condition']}"


def levels_at(study, row):
    """The names of a row's levels of the factors that vary, apart from the difference, marked as users' texts."""
    varied = [factor for factor, levels in study.factors.levels.items() if len(levels) > 1]
    return [isolated(row[factor]) for factor in varied if factor != "difference"]


def excess(study, row):
    """How far a rate is from the level, as a share of the way to the limit on its side; above 1 is outside."""
    low, high = study.criteria.size.band(study.levels[0])
    level = min(max(row["alpha"], low), high)
    above = (row["rate"] - level) / max(high - level, 1e-12)
    below = (level - row["rate"]) / max(level - low, 1e-12) if low > 0 else 0.0
    return max(above, below)


def farthest(study, errors):
    """The row of errors that is farthest from the level, seen against the limits."""
    return max((row for _, row in errors.iterrows()), key=lambda row: excess(study, row))
