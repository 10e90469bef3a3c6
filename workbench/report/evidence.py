"""Smaller pieces of evidence: hypotheses, theory, undefined results, ends of routes."""

from workbench import texts
from workbench.grid import HYPOTHESES, holds_as_recorded
from workbench.numbers import decimals
from workbench.report import shown

ALL_HYPOTHESES = (*HYPOTHESES, "distributions", "stochastic size")

MOST_ROWS = 12
"""Rows of a small table; the annex has all of them."""


def hypotheses(book):
    """[(what holds, [condition number])]: conditions by which hypotheses are true as recorded."""
    patterns = {}
    for condition in book.nulls:
        holds = tuple(name in holds_as_recorded(condition) for name in ALL_HYPOTHESES)
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
    known["distance"] = (known["rate"] - known["exact"]) / (
        known["exact"] * (1 - known["exact"]) / known["replications"]
    ) ** 0.5
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
    found = {}
    for (route, end), rows in table.groupby(["route", "end"], sort=False):
        found.setdefault(route, []).append(branch(book, end, rows))
    return [
        {"label": book.label(route), "ends": ends, "title": branch_title(book, route, ends)}
        for route, ends in found.items()
    ]


def branch(book, end, rows):
    """One end of a route over the null conditions."""
    shares = rows["share"]
    taken = rows[rows["taken"] > 0]
    worst = None if taken.empty else taken.loc[taken["rate_within"].idxmax()]
    digits = 3 if worst is None else decimals(worst["mcse_within"])
    return {
        "path": end.replace("_", " "),
        "method": rows["method"].iloc[0].replace("_", " "),
        "low": shown.rate(shares.min(), 3),
        "high": shown.rate(shares.max(), 3),
        "unchecked": shown.count(int(rows["unchecked"].sum())),
        "within": None if worst is None else shown.rate(worst["rate_within"], digits),
        "mcse": None
        if worst is None
        else shown.Shown(worst["mcse_within"], f"{worst['mcse_within']:.{digits + 1}f}"),
        "place": None if worst is None else book.name(book.conditions[worst["condition"]]),
        "worst": 0.0 if worst is None else float(worst["rate_within"]),
    }


def branch_title(book, route, ends):
    """Whether the data that lead to some end make the test there err more often than the limit."""
    worst = max(ends, key=lambda one: one["worst"])
    if worst["worst"] > book.band[1]:
        return book.findings.end_errs(
            book.called(route), worst["method"], worst["within"], f"{book.band[1]:g}"
        )
    return book.findings.ends_keep(book.called(route), f"{book.band[1]:g}")
