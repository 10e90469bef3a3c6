"""Annexes: every number, every condition, what was not examined, how to repeat it, references."""

from itertools import groupby
from pathlib import Path

from workbench import texts
from workbench.disturbances import DISTURBANCES
from workbench.grid import equal_as_recorded, holds_as_recorded, recorded_quantities
from workbench.methods import METHODS
from workbench.outcome import manifest
from workbench.population import QUANTITIES
from workbench.report import shown
from workbench.routes.procedure import parts_of
from workbench.shapes import SHAPES

A_TABLE = 6
"""Conditions in one table of an annex."""


def every_number(book):
    """[[(condition, name, [row])]]: the rows of the table, by condition."""
    digits = {"error": book.error_digits, "detection": book.detection_digits}
    rates = book.outcome.tables.rates
    found = []
    for condition, rows in by_condition(book, rates):
        told = {"number": condition.number, "name": book.name(condition, difference=True)}
        cells = [rate_row(book, row, digits[row.reading]) for row in rows]
        found.append(told | {"reading": rows[0].reading, "rows": cells})
    return slices(found)


def by_condition(book, table):
    """(condition, [row]) of a table for each condition that is listed, in the order of the file."""
    listed = {one.number: one for one in book.listed(book.outcome.conditions)}
    here = table[table["condition"].isin(list(listed))]
    for number, rows in groupby(here.itertuples(), key=lambda row: row.condition):
        yield listed[number], list(rows)


def slices(conditions):
    """Conditions in tables of a few, so that a browser lays out only those in view."""
    return [conditions[start : start + A_TABLE] for start in range(0, len(conditions), A_TABLE)]


def rate_row(book, row, digits):
    """One row of the table."""
    return {
        "label": book.cell_label(row.method),
        "chosen": row.method in book.decision.chosen,
        "alpha": f"{row.alpha:g}",
        "rejections": f"{row.rejections:,}",
        "replications": f"{row.replications:,}",
        "rate": shown.rate(row.rate, digits, row.rejections, row.replications).text,
        "mcse": f"{row.mcse:.{digits + 1}f}",
        "interval": shown.span(row.lower, row.upper, digits).text,
        "undefined": f"{row.undefined:,}",
        "verdict": book.verdict(row.condition, row.method) if row.alpha == book.level else "",
    }


def every_difference(book):
    """[[(condition, name, [row])]]: the paired differences at the first level, by condition."""
    table = book.outcome.tables.differences
    found = []
    for condition, rows in by_condition(book, table[table["alpha"] == book.level]):
        digits = book.error_digits if condition.is_null else book.detection_digits
        told = {"number": condition.number, "name": book.name(condition, difference=True)}
        found.append(told | {"rows": [difference_row(book, row, digits) for row in rows]})
    return slices(found)


def difference_row(book, row, digits):
    """One row of the paired differences."""
    return {
        "method": book.cell_label(row.method),
        "rival": book.cell_label(row.rival),
        "only_method": f"{row.only_method:,}",
        "only_rival": f"{row.only_rival:,}",
        "difference": shown.signed(row.difference, digits).text,
        "mcse": f"{row.mcse:.{digits + 1}f}",
        "interval": shown.signed_span(row.lower, row.upper, digits).text,
    }


def settings(book):
    """Every level of every factor as the file has it, and every condition's true quantities as recorded."""
    levels = [
        (factor, [(texts.cleaned(name), level_text(value)) for name, value in levels.items()])
        for factor, levels in book.study.factors.levels.items()
    ]
    populations = {}
    for condition in book.listed(book.outcome.conditions):
        setting = condition.setting
        kind = setting.shapes, setting.spreads, setting.disturbances, condition.difference
        populations.setdefault(kind, []).append(condition)
    return {
        "levels": levels,
        "groups": [texts.cleaned(name) for name in book.study.group_names],
        "quantities": QUANTITIES,
        "populations": [population(book, some) for some in populations.values()],
        "unit": texts.cleaned(book.study.question.unit),
    }


def level_text(value):
    """A level's value as people read it."""
    if isinstance(value, tuple):
        return " / ".join(level_text(item) for item in value) if value else "–"
    if hasattr(value, "settings"):
        told = ", ".join(f"{name} {setting}" for name, setting in value.settings().items())
        name = value.name.replace("_", " ")
        return f"{name} ({told})" if told else name
    return f"{value:g}".replace("-", shown.MINUS)


def population(book, some):
    """The true quantities of conditions that share their populations."""
    condition = some[0]
    factors = [factor for factor in book.varied if factor != "sizes"]
    return {
        "numbers": [one.number for one in some],
        "name": book.name(condition, factors, difference=True),
        "holds": holds_as_recorded(condition),
        "equal": equal_as_recorded(condition, book.study.question.compare),
        "groups": [shown.quantities(group, QUANTITIES) for group in recorded_quantities(condition)[:20]],
    }


def not_examined(book):
    """What the conditions do not reach, as facts for sentences."""
    settings = [condition.setting for condition in book.outcome.conditions]
    sizes = [size for setting in settings for size in setting.sizes]
    ratios = [max(setting.spreads) / min(setting.spreads) for setting in settings]
    quantities = [group for one in book.outcome.conditions for group in recorded_quantities(one)]
    skewness = [abs(group["skewness"]) for group in quantities if group["skewness"] is not None]
    kurtosis = [group["excess_kurtosis"] for group in quantities if group["excess_kurtosis"] is not None]
    used = {part.name for setting in settings for part in setting.disturbances}
    return {
        "smallest": min(sizes),
        "largest": max(sizes),
        "ratio": f"{max(ratios):.2g}",
        "skewness": f"{max(skewness, default=0.0):.2g}",
        "kurtosis": f"{max(kurtosis, default=0.0):.2g}".replace("-", shown.MINUS),
        "shapes": missing(SHAPES, {shape.name for setting in settings for shape in setting.shapes}),
        "disturbances": missing(DISTURBANCES, used),
        "methods": missing(
            METHODS, {part.name for judge in book.study.judges for part in parts_of(judge.method)}
        ),
        "left_out": [
            ", ".join(f"{factor} {texts.isolated(name)}" for factor, name in out.items())
            for out in book.study.factors.left_out
        ],
        "levels": [f"{level:g}" for level in book.study.levels],
        "differences": [texts.cleaned(name) for name in book.study.factors.levels["difference"]],
    }


def missing(shelf, used):
    """Names on a shelf that a study does not use."""
    return [name.replace("_", " ") for name in shelf.names() if name not in used]


def repeat(book):
    """How to do it again: file, seed, versions, hashes, commands."""
    found = manifest(book.outcome)
    return found | {
        "stem": Path(book.study.file).stem,
        "text": texts.printable(book.study.text.replace("\r\n", "\n")),
        "title": texts.cleaned(book.study.title),
    }


def references(book):
    """Sources of exactly the parts that ran, each with what it was used for."""
    study, found = book.study, {}
    used = [(judge.name, part) for judge in study.judges for part in parts_of(judge.method)]
    used += [("", shape) for condition in book.outcome.conditions for shape in condition.setting.shapes]
    used += [("", part) for condition in book.outcome.conditions for part in condition.setting.disturbances]
    used += [("", criterion) for criterion in study.criteria.fixed if needs_source(criterion)]
    for _, part in used:
        names = found.setdefault(part.cite, [])
        name = getattr(part, "label", part.name.replace("_", " "))
        if name not in names:
            names.append(name)
    return sorted(found.items())


def needs_source(criterion):
    """Whether a criterion is a published one; limits that a file gives itself are not."""
    return criterion.name != "size" or criterion.upper is None
