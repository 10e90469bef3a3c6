"""Calibration: observed rate by nominal level, over a range of levels."""

import numpy as np

from workbench.measures.rate import clopper_pearson
from workbench.report.axes import Axis, bottom_axis, left_axis, pushed_apart
from workbench.report.book import POINTWISE
from workbench.report.drawing import Drawing
from workbench.report.figure import Sheet
from workbench.sentences import CURIOSITY

WIDTH, HEIGHT, LEFT, RIGHT, TOP, FOOT = 288, 236, 50, 214, 8, 40

LEVELS = (0.005, 0.01, 0.02, 0.05, 0.1)
"""Levels that the axis shows."""

RATIOS = (0.06, 0.125, 0.25, 0.5, 1, 2, 4, 8, 16)

OTHER = (0.01, 0.1)
"""Levels at which the title says whether the choice would hold."""


def calibration(book):
    """The Sheet of calibration curves; None without null conditions."""
    if not book.nulls:
        return None
    curves = Curves(book)
    some = book.deciding(book.nulls)
    panels = [(book.name(one), panel(book, curves, one)) for one in some]
    return Sheet(
        book, "calibration", title(book, curves), panels, most=len(book.nulls), told={"shown": len(some)}
    )


class Curves:
    """The curves of all methods in all null conditions."""

    def __init__(self, book):
        table = book.outcome.calibration
        self.levels = np.unique(table["alpha"])
        self.replications = int(table["replications"].iloc[0])
        self.rejections = {
            place: rows["rejections"].to_numpy(dtype=float)
            for place, rows in table.groupby(["condition", "method"], sort=False)
        }
        low, high = 0.5, 2.0
        for place, counts in self.rejections.items():
            if place[1] in book.drawn:
                ratios = self.ratios(counts)
                low, high = min(low, ratios.min()), max(high, ratios.max())
        self.y = Axis(max(low / 1.15, 1 / 20), min(high * 1.15, 20), HEIGHT - FOOT, TOP, log=True)
        self.x = Axis(self.levels[0], self.levels[-1], LEFT, RIGHT, log=True)

    def ratios(self, counts):
        """(levels,) observed rates by nominal levels; at least what one rejection in two would give."""
        return np.maximum(counts, 0.5) / self.replications / self.levels

    def limits(self, counts):
        """((levels,) lower, upper) limits of the ratios, each by itself."""
        lower, upper = clopper_pearson(counts, self.replications, POINTWISE)
        return lower / self.levels, upper / self.levels

    def at(self, condition, method, level):
        """(rate, lower, upper) at a level of the curve."""
        counts = self.rejections[condition, method]
        place = int(np.argmin(np.abs(self.levels - level)))
        lower, upper = clopper_pearson(counts[place], self.replications, POINTWISE)
        return float(counts[place] / self.replications), float(lower), float(upper)


def title(book, curves):
    """Whether the leading method would hold at other levels: not at the first that breaks it, open, or at all."""
    method, label = book.lead.name, book.called(book.lead.name)
    undefined = (book.lead.errors["undefined"] / book.lead.errors["replications"]).max()
    if book.lead.size is None or book.lead.size.value != "meets" or undefined > CURIOSITY:
        return book.findings.rates_at_other_levels()
    still_open = []
    for level in (level for level in OTHER if level != book.level):
        low, high = book.study.criteria.size.band(level)
        if book.study.criteria.size.upper is not None:
            low, high = (limit * level / book.level for limit in book.band)
        found = {one.number: curves.at(one.number, method, level) for one in book.nulls}
        broken = [number for number, (_, lower, upper) in found.items() if lower > high or upper < low]
        if broken:
            worst = max(broken, key=lambda number: abs(np.log(max(found[number][0], 1e-9) / level)))
            ratio = f"{found[worst][0] / level:.2g}"
            return book.findings.would_not_hold(
                label, f"{level:g}", ratio, book.at(book.conditions[worst]), len(broken)
            )
        if any(lower < low or upper > high for _, lower, upper in found.values()):
            still_open.append(f"{level:g}")
    if still_open:
        return book.findings.would_be_open(label, still_open)
    return book.findings.would_hold(label, [f"{level:g}" for level in OTHER if level != book.level])


def panel(book, curves, condition):
    """The Drawing of one condition's curves."""
    drawing = Drawing(WIDTH, HEIGHT, panel_label(book, condition))
    low, high = (limit / book.level for limit in book.band)
    top, bottom = curves.y(high), curves.y(low) if low > 0 else HEIGHT - FOOT
    drawing.box(LEFT, top, RIGHT - LEFT, bottom - top, "tint")
    drawing.lines([[(LEFT, curves.y(x)), (RIGHT, curves.y(x))] for x in (low, high) if x > 0], "ink", 1.1)
    drawing.line([(LEFT, curves.y(1)), (RIGHT, curves.y(1))], "edge", 0.8)
    if curves.x.low < book.level < curves.x.high:
        at = curves.x(book.level)
        drawing.line([(at, TOP), (at, HEIGHT - FOOT)], "edge", 1, (2, 2))
    names = sorted(book.drawn, key=lambda name: name == book.lead.name)
    for name in names:
        curve(book, drawing, curves, condition, name)
    end_labels(book, drawing, curves, condition, names)
    ratios = [ratio for ratio in RATIOS if curves.y.low <= ratio <= curves.y.high]
    left_axis(drawing, curves.y, LEFT, ratios, lambda ratio: f"×\u00a0{ratio:g}")
    bottom_axis(
        drawing, curves.x, HEIGHT - FOOT, book.words.nominal_level(), [x for x in LEVELS if x >= curves.x.low]
    )
    return drawing


def curve(book, drawing, curves, condition, name):
    """One method's curve; the leading one with a band."""
    counts, slot = curves.rejections[condition.number, name], book.slot(name)
    x = curves.x(curves.levels)
    leads = name == book.lead.name
    if leads:
        lower, upper = curves.limits(counts)
        points = np.r_[np.column_stack([x, curves.y(upper)]), np.column_stack([x, curves.y(lower)])[::-1]]
        drawing.area(points, "fill")
    drawing.line(
        np.column_stack([x, curves.y(curves.ratios(counts))]), slot.role, 2.6 if leads else 1.5, slot.dash
    )


def end_labels(book, drawing, curves, condition, names):
    """Names at the right ends of the curves, pushed apart, each with a hair line and its mark."""
    ends = [float(curves.y(curves.ratios(curves.rejections[condition.number, name])[-1])) for name in names]
    for name, end, y in zip(names, ends, pushed_apart(ends, 12, TOP + 4, HEIGHT - FOOT), strict=True):
        slot = book.slot(name)
        drawing.line([(RIGHT + 1, end), (RIGHT + 9, y)], "edge", 0.7)
        drawing.mark(slot.mark, RIGHT + 14, y, slot.role, 6)
        drawing.text(RIGHT + 21, y + 3.5, book.short(name), "ink", 10, bold=name in book.decision.chosen)


def panel_label(book, condition):
    """What a reader who cannot see the panel is told."""
    rates = [(book.label(name), book.error(condition.number, name)) for name in book.drawn]
    return book.words.calibration_panel(book.name(condition), f"{book.level:g}", rates)
