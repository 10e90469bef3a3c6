"""Smaller pieces of evidence: hypotheses, theory, undefined results, ends of routes."""

import numpy as np

from workbench import texts
from workbench.grid import HYPOTHESES, holds_as_recorded, recorded_quantities
from workbench.measures.rate import clopper_pearson
from workbench.numbers import decimals
from workbench.report import shown
from workbench.report.book import POINTWISE
from workbench.theory.exact import distances

ALL_HYPOTHESES = (*HYPOTHESES, "distributions", "stochastic size")

MOST_ROWS = 12
"""Rows of a small table; the annex has all of them."""


def hypotheses(book):
    """[(what holds, [condition number])]: conditions by which hypotheses are true as recorded."""
    patterns = {}
    for condition in book.nulls:
        holds = holding(condition)
        patterns.setdefault(holds, []).append(condition)
    return {
        "names": ALL_HYPOTHESES,
        "compare": book.study.question.compare,
        "patterns": [
            {
                "holds": holds,
                "numbers": ranges([one.number for one in some]),
                "shared": shared_levels(book, some),
            }
            for holds, some in patterns.items()
        ],
        "methods": [
            (book.label(one.name), one.hypothesis, one.answers, one.admitted)
            for one in book.decision.standings
        ],
        "unequal": [one.number for one in book.nulls if not book.equal_as_recorded[one.number]],
    }


def holding(condition):
    """Which of ALL_HYPOTHESES are true of a condition as recorded; None where what one speaks of does not exist."""
    true, groups = holds_as_recorded(condition), recorded_quantities(condition)
    missing = {
        name for name, quantity in HYPOTHESES.items() if any(group[quantity] is None for group in groups)
    }
    return tuple(None if name in missing else name in true for name in ALL_HYPOTHESES)


def shared_levels(book, some):
    """[(factor, level)] that some conditions have in common and the other null conditions have not."""
    others = [one for one in book.nulls if one not in some]
    found = []
    for factor in book.varied:
        levels = list(dict.fromkeys(one.levels[factor] for one in some))
        if len(levels) == 1 and any(one.levels[factor] != levels[0] for one in others):
            found.append((factor, texts.cleaned(levels[0])))
    return found


def ranges(numbers):
    """Whole numbers as people list them: 1–4, 7."""
    found = []
    for number in numbers:
        if found and found[-1][1] == number - 1:
            found[-1][1] = number
        else:
            found.append([number, number])
    return ", ".join(str(low) if low == high else f"{low}–{high}" for low, high in found)


def theory(book):
    """Simulated rates beside those that theory gives, the farthest apart first."""
    agreement = book.outcome.agreement
    rates = book.outcome.tables.rates
    known = rates[rates["exact"].notna()].copy()
    counts = (known[name].to_numpy(dtype=float) for name in ("rejections", "replications", "exact"))
    known["distance"] = distances(*counts)
    known = known.reindex(known["distance"].abs().sort_values(ascending=False, kind="stable").index)
    rows = [theory_row(book, row) for row in known.head(MOST_ROWS).itertuples()]
    return {
        "sentence": agreement.sentence,
        "rows": rows,
        "all": len(known),
        "wrong": len(agreement.disagreeing),
    }


def theory_row(book, row):
    """One rate beside the one from theory."""
    digits = decimals(row.mcse)
    return {
        "condition": row.condition,
        "name": book.name(book.conditions[row.condition], difference=True),
        "method": book.label(row.method),
        "alpha": f"{row.alpha:g}",
        "rate": shown.rate(row.rate, digits),
        "mcse": shown.Shown(row.mcse, f"{row.mcse:.{digits + 1}f}"),
        "exact": shown.rate(row.exact, digits + 1),
        "distance": f"{row.distance:+.1f}".replace("-", shown.MINUS),
    }


def undefined(book):
    """[(method, results without a p-value, the largest share, where)] of methods that have some."""
    found = []
    for one in book.decision.standings:
        rows = [row for (_, method), row in book.rows.items() if method == one.name and row.undefined]
        if rows:
            worst = max(rows, key=lambda row: row.undefined / row.replications)
            found.append(
                {
                    "label": book.label(one.name),
                    "total": shown.count(sum(row.undefined for row in rows)),
                    "conditions": len(rows),
                    "worst": shown.count(worst.undefined),
                    "replications": f"{worst.replications:,}",
                    "place": book.name(book.conditions[worst.condition], difference=True),
                    "rate": shown.rate(worst.rate, book.error_digits),
                    "bound": shown.rate(worst.rate_if_undefined_rejected, book.error_digits),
                    "when": getattr(book.study.judge(one.name).method, "undefined_when", ""),
                }
            )
    return found


def branches(book):
    """For each route its ends: how often they are taken, and the largest error within."""
    table = book.outcome.tables.branches
    table = table[(table["reading"] == "error") & (table["alpha"] == book.level)]
    found = []
    for route, rows in table.groupby("route", sort=False):
        ends = dict(book.study.judge(route).method.ends())
        worst = [worst_within(some) for _, some in rows.groupby("end", sort=False)]
        digits = min((decimals(one["mcse_within"]) for one in worst if one is not None), default=3)
        told = [
            branch(book, ends[end], end, some, one, digits)
            for (end, some), one in zip(rows.groupby("end", sort=False), worst, strict=True)
        ]
        found.append({"label": book.label(route), "ends": told, "title": branch_title(book, route, told)})
    return found


def worst_within(rows):
    """The row of the error within an end that is shown to be largest; None where no dataset came there."""
    taken = rows[rows["taken"] > 0]
    if taken.empty:
        return None
    lower, _ = clopper_pearson(taken["rejections"], taken["taken"], POINTWISE)
    return taken.assign(lower=lower).iloc[int(np.argmax(lower))]


def branch(book, method, end, rows, worst, digits):
    """One end of a route over the null conditions."""
    found = {
        "path": end.replace("_", " "),
        "method": method.label,
        "low": shown.rate(rows["share"].min(), 3),
        "high": shown.rate(rows["share"].max(), 3),
        "unchecked": shown.count(int(rows["unchecked"].sum())),
        "within": None,
        "mcse": None,
        "place": None,
        "shown": 0.0,
    }
    if worst is None:
        return found
    return found | {
        "within": shown.rate(worst["rate_within"], digits, worst["rejections"], worst["taken"]),
        "mcse": shown.Shown(worst["mcse_within"], f"{worst['mcse_within']:.{digits + 1}f}"),
        "place": book.name(book.conditions[worst["condition"]]),
        "shown": float(worst["lower"]),
    }


def branch_title(book, route, ends):
    """Whether the data that lead to some end make the test there err more often than the limit."""
    worst = max(ends, key=lambda one: one["shown"])
    if worst["shown"] > book.band[1]:
        return book.findings.end_errs(
            book.called(route), worst["method"], worst["within"], f"{book.band[1]:g}"
        )
    return book.findings.ends_keep(book.called(route), f"{book.band[1]:g}")
