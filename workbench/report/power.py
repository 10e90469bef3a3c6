"""Power: detection by the size of a difference, where differences form a series."""

import numpy as np

from workbench import texts
from workbench.measures.rate import clopper_pearson
from workbench.report.axes import Axis, bottom_axis, left_axis
from workbench.report.book import POINTWISE
from workbench.report.drawing import Drawing, fitted
from workbench.report.figure import Sheet

WIDTH, HEIGHT, LEFT, RIGHT, TOP, FOOT = 288, 236, 32, 172, 10, 40

SAME_DIRECTION = 1e-3
"""Largest part by which a difference may leave the direction of its series."""

SMALLEST = 3
"""Points that make a curve: none and two more."""


def series_of(book):
    """{level name: size} of a study's differences along one direction, none among them, by size.

    Of several directions the one with most differences; None where none has three points. The size is the largest
    difference of two groups, or on the multiplicative scale the largest ratio.
    """
    question, levels = book.study.question, book.study.factors.levels["difference"]
    multiplicative = question.scale == "multiplicative"
    effects = {name: effect(row, multiplicative) for name, row in levels.items()}
    none = [name for name, row in effects.items() if not row.any()]
    if not none:
        return None
    best = None
    for base in (row for row in effects.values() if row.any()):
        along = {name: row @ base / (base @ base) for name, row in effects.items() if row.any()}
        near = [name for name, times in along.items() if is_along(effects[name], times * base) and times > 0]
        if len(near) + 1 >= SMALLEST and (best is None or len(near) > len(best)):
            best = near
    if best is None:
        return None
    sizes = {name: extent(levels[name], multiplicative) for name in (none[0], *best)}
    return dict(sorted(sizes.items(), key=lambda item: item[1]))


def effect(row, multiplicative):
    """A difference as effects that add up, measured from the first group."""
    found = np.log(row) if multiplicative else np.asarray(row, dtype=float)
    return found - found[0]


def is_along(row, projected):
    """Whether a difference lies on a direction, given its projection onto it."""
    return np.abs(row - projected).max() <= SAME_DIRECTION * np.abs(row).max()


def extent(row, multiplicative):
    """The size of a difference: between the groups farthest apart."""
    return float(max(row) / min(row) if multiplicative else max(row) - min(row))


def power(book):
    """The Sheet of power curves; None where the differences form no series."""
    series = series_of(book)
    if series is None or not book.nulls:
        return None
    settings = {}
    for condition in book.outcome.conditions:
        if condition.levels["difference"] in series:
            settings.setdefault(condition.setting.key, {})[condition.levels["difference"]] = condition
    complete = {key: some for key, some in settings.items() if len(some) == len(series)}
    nulls = [
        one for one in book.nulls if one.setting.key in complete and one.number in complete_numbers(complete)
    ]
    if not nulls:
        return None
    some = book.deciding(nulls)
    panels = [
        (book.name(one, difference=False), panel(book, series, complete[one.setting.key])) for one in some
    ]
    told = {"points": len(series), "at": target(book, series)}
    return Sheet(book, "power", title(book, series, nulls), panels, most=len(nulls), told=told)


def complete_numbers(complete):
    """Numbers of all conditions of the settings that have every difference of the series."""
    return {one.number for some in complete.values() for one in some.values()}


def target(book, series):
    """The difference of the series at which methods are ranked: the one that must be found, else the largest."""
    criterion = book.study.criteria.power
    return criterion.at if criterion and criterion.at in series else list(series)[-1]


def title(book, series, nulls):
    """The smallest difference from which on the leading method finds all as often as asked for in every setting."""
    criterion, lead = book.study.criteria.power, book.lead.name
    if criterion is None:
        return book.findings.power_curves(len(nulls))
    keys = {one.setting.key for one in nulls}
    found = None
    for name in reversed(list(series)[1:]):
        rows = [
            book.rows[one.number, lead]
            for one in book.outcome.conditions
            if one.levels["difference"] == name and one.setting.key in keys
        ]
        if not all(row.lower >= criterion.least for row in rows):
            break
        found = name
    if found is None:
        return book.findings.never_found(book.called(lead), f"{criterion.least:g}")
    size = size_text(book, series[found])
    return book.findings.found_from(book.called(lead), f"{criterion.least:g}", size)


def size_text(book, size):
    """A difference's size with its unit, or as a ratio."""
    if book.study.question.scale == "multiplicative":
        return f"×\u00a0{size:.3g}"
    unit = texts.cleaned(book.study.question.unit)
    return f"{size:.3g}\u00a0{fitted(unit, 80, 10)}" if unit else f"{size:.3g}"


def panel(book, series, conditions):
    """The Drawing of one setting's curves: conditions by the name of their difference."""
    multiplicative = book.study.question.scale == "multiplicative"
    sizes = np.array(list(series.values()))
    x = Axis(float(sizes[0]), float(sizes[-1]), LEFT, RIGHT, log=multiplicative)
    y = Axis(0, 1, HEIGHT - FOOT, TOP)
    at = target(book, series)
    drawing = Drawing(WIDTH, HEIGHT, panel_label(book, series, conditions[at]))
    criterion = book.study.criteria.power
    if criterion is not None:
        drawing.line([(LEFT, y(criterion.least)), (RIGHT, y(criterion.least))], "edge", 1, (2, 2))
    drawing.line([(x(series[at]), TOP), (x(series[at]), HEIGHT - FOOT)], "edge", 0.8)
    for name in sorted(book.drawn, key=lambda name: name == book.lead.name):
        curve(
            book,
            drawing,
            x(sizes),
            y,
            [book.rows[conditions[one].number, name] for one in series],
            name,
        )
    ranking(book, drawing, conditions[at], size_text(book, series[at]))
    left_axis(drawing, y, LEFT)
    shown_ticks = list(sizes) if len(sizes) <= 6 else None
    bottom_axis(
        drawing, x, HEIGHT - FOOT, axis_name(book, multiplicative), shown_ticks, lambda size: f"{size:.3g}"
    )
    return drawing


def axis_name(book, multiplicative):
    """What the axis of differences is called."""
    unit = fitted(texts.cleaned(book.study.question.unit), 60, 10)
    return book.words.ratio_axis() if multiplicative else book.words.difference_axis(unit)


def curve(book, drawing, x, y, rows, name):
    """One method's curve with its band."""
    slot, leads = book.slot(name), name == book.lead.name
    counts = np.array([row.rejections for row in rows], dtype=float)
    lower, upper = clopper_pearson(counts, rows[0].replications, POINTWISE)
    drawing.area(np.r_[np.column_stack([x, y(upper)]), np.column_stack([x, y(lower)])[::-1]], "fill")
    points = np.column_stack([x, y([row.rate for row in rows])])
    drawing.line(points, slot.role, 2.6 if leads else 1.5, slot.dash)


def ranking(book, drawing, condition, heading):
    """Methods by detection at the target, right of the panel, each with its mark and number."""
    drawing.text(RIGHT + 12, TOP + 6, book.words.at(heading), size=9.5)
    ranked = sorted(book.drawn, key=lambda name: -book.rows[condition.number, name].rate)
    for place, name in enumerate(ranked):
        y, slot, bold = TOP + 22 + 15 * place, book.slot(name), name in book.decision.chosen
        drawing.mark(
            slot.mark, RIGHT + 17, y - 3.5, slot.role, 7, hollow=not book.keeps_error(condition, name)
        )
        drawing.text(RIGHT + 25, y, fitted(book.short(name), 50, 10), "ink", 10, bold=bold)
        drawing.text(WIDTH - 2, y, book.detection(condition.number, name), "ink", 10, "end", bold)


def panel_label(book, series, condition):
    """What a reader who cannot see the panel is told."""
    rates = [(book.label(name), book.detection(condition.number, name)) for name in book.drawn]
    at = size_text(book, series[condition.levels["difference"]])
    return book.words.power_panel(book.name(condition, difference=False), at, rates)
