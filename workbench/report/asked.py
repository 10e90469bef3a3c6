"""What was asked, and fixed before any result."""

from workbench import texts
from workbench.report import shown
from workbench.report.book import NAME_LENGTH


def asked(book):
    """What the section shows."""
    study, question, criteria = book.study, book.study.question, book.study.criteria
    return {
        "compare": question.compare,
        "outcome": texts.cleaned(question.outcome),
        "groups": [texts.cleaned(name)[:NAME_LENGTH] for name in study.group_names[:12]],
        "more_groups": max(0, len(study.group_names) - 12),
        "levels": [f"{level:g}" for level in study.levels],
        "low": f"{book.band[0]:g}",
        "high": f"{book.band[1]:g}",
        "word": criteria.size.word if criteria.size.upper is None else "",
        "power": criteria.power and {"at": criteria.power.at, "least": f"{criteria.power.least:g}"},
        "difference": difference(book),
        "tie": f"{criteria.tie:g}",
        "confidence": f"{criteria.confidence:g}",
        "admitted": [book.label(name) for name in criteria.admit if name in book.standings],
        "judged": int((book.outcome.tables.rates["verdict"] != "").sum()),
        "nulls": len(book.nulls),
        "conditions": len(book.outcome.conditions),
        "factors": [
            (factor, len(levels)) for factor, levels in study.factors.levels.items() if len(levels) > 1
        ],
        "left_out": bool(study.factors.left_out),
        "methods": [book.label(judge.name) for judge in study.judges],
        "replications": f"{study.simulation.replications:,}",
        "note": texts.cleaned(question.note),
        "unit": texts.cleaned(question.unit),
    }


def difference(book):
    """The difference that must not be missed, group by group; empty without a power criterion."""
    power = book.study.criteria.power
    if power is None:
        return ""
    row = book.study.factors.levels["difference"][power.at]
    sign = "×\u00a0" if book.study.question.scale == "multiplicative" else ""
    text = " / ".join(f"{sign}{value:g}".replace("-", shown.MINUS) for value in row[:12])
    return text if len(row) <= 12 else f"{text} / …"
