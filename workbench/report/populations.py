"""Populations: how the values of every group are distributed, with one dataset below."""

import numpy as np

from workbench import texts
from workbench.chunk import first_dataset
from workbench.grid import recorded_quantities
from workbench.mechanism import populations as undisturbed
from workbench.report import shown
from workbench.report.axes import Axis, bottom_axis
from workbench.report.book import MOST_PANELS
from workbench.report.drawing import Drawing, fitted, width_of
from workbench.report.figure import Sheet

WIDTH, HEIGHT, RIGHT, TOP, FOOT = 288, 268, 282, 6, 36

NARROWEST, WIDEST = 44, 108
"""Room for the names of groups, left of the axis."""

MOST_GROUPS = 8
"""A panel shows at most so many groups: the first ones and the last."""

POINTS = 120
"""Bins of a density over the width of a panel."""

COARSE = 40
"""A population with at most so many values over the bulk of it is drawn as separate bars."""

TAIL = 0.005
"""Share of every group that may lie beyond either end of the axis."""

MOST_FURTHER = 120
"""Settings that the annex draws; tables have the true quantities of all."""

MOST_DOTS = 60
"""Values of the example dataset that are drawn in each group."""


def kinds(book):
    """Conditions that differ in what their populations are: one for each shape, spread and disturbance."""
    found = {}
    for condition in book.nulls or book.outcome.conditions:
        setting = condition.setting
        found.setdefault(
            (setting.shapes, setting.spreads, setting.disturbances, condition.difference), condition
        )
    return list(found.values())


def kind_name(book, condition):
    """The levels that make a kind of data."""
    factors = [factor for factor in book.varied if factor != "sizes"]
    return book.name(condition, factors)


def settings(book):
    """A condition for each setting: without a difference, where there is one."""
    found = {}
    for condition in book.nulls or book.outcome.conditions:
        found.setdefault((condition.setting.key, condition.difference), condition)
    return list(found.values())


class Populations:
    """The populations of a study: the kinds of data that decide in one Sheet, all other settings for the annex."""

    def __init__(self, book):
        self.book, found = book, kinds(book)
        self.scale, first = Scale(book, found), book.deciding(found)
        shown = {one.number for one in first}
        self.rest = [one for one in settings(book) if one.number not in shown]
        panels = [(kind_name(book, one), panel(book, self.scale, one)) for one in first]
        self.sheet = population_sheet(self.scale, first, panels, book, "populations", title(book, found))
        self.sheet.most = len(found)

    def further(self):
        """[Sheet] of the settings that the first figure leaves out; of very many the first."""
        book, starts = self.book, range(0, min(len(self.rest), MOST_FURTHER), MOST_PANELS)
        found = []
        for place, start in enumerate(starts, 2):
            some = self.rest[start : start + MOST_PANELS]
            panels = [(book.name(one), panel(book, self.scale, one)) for one in some]
            heading = book.findings.further_settings(place, len(starts))
            found.append(population_sheet(self.scale, some, panels, book, f"populations_{place}", heading))
        return found


def population_sheet(scale, some, panels, book, name, title):
    """The Sheet of some settings, given their panels."""
    shifted = scale.shift is not None and bool(book.nulls)
    smooth = any(scale.lattice(one) is None and one.setting.disturbances for one in some)
    told = {"shifted": shifted, "smooth": smooth, "fewer_groups": book.study.factors.groups > MOST_GROUPS}
    return Sheet(book, name, title, panels, keyed=False, told=told)


def title(book, found):
    """What the populations have in common."""
    compare = book.study.question.compare
    if not book.nulls:
        return book.findings.kinds_of_data(len(found))
    unequal = sum(not book.equal_as_recorded[one.number] for one in found)
    return book.findings.equal_kinds(compare, len(found), unequal)


class Scale:
    """The one axis of all panels, and the difference whose groups are outlined."""

    def __init__(self, book, found):
        widths = [9.5 * sum(map(width_of, texts.cleaned(name))) for name in book.study.group_names]
        left = min(max(14 + max(widths), NARROWEST), WIDEST)
        self.log = book.study.question.scale == "multiplicative"
        self.shift = largest_target(book)
        ends = []
        for condition in found:
            differences = {condition.difference, self.shift or condition.difference}
            for difference in differences:
                for population in undisturbed(condition.setting, difference):
                    ends.append([float(population.quantile(share)) for share in (TAIL, 1 - TAIL)])
        low, high = min(low for low, _ in ends), max(high for _, high in ends)
        if self.log:
            room = (high / low) ** 0.02
            self.axis = Axis(low / room, high * room, left, RIGHT, log=True)
        else:
            room = 0.02 * (high - low)
            self.axis = Axis(low - room, high + room, left, RIGHT)

    def lattice(self, condition):
        """The unit of a population that takes few values; None where it is as good as continuous."""
        units = [part.to for part in condition.setting.disturbances if part.name == "round"]
        if not units or self.log:
            return None
        spread = (self.axis.high - self.axis.low) / max(units)
        return max(units) if spread <= COARSE else None


def largest_target(book):
    """The difference that must not be missed; else the largest there is; None without alternatives."""
    return max(
        (one.difference for one in book.targets),
        key=lambda difference: max(difference) - min(difference),
        default=None,
    )


def shown_groups(book):
    """Numbers of the groups that a panel shows."""
    k = book.study.factors.groups
    return list(range(k)) if k <= MOST_GROUPS else [*range(MOST_GROUPS - 1), k - 1]


def panel(book, scale, condition):
    """The Drawing of one kind of data."""
    drawing = Drawing(WIDTH, HEIGHT, panel_label(book, condition))
    groups = shown_groups(book)
    height = (HEIGHT - TOP - FOOT) / len(groups)
    found = undisturbed(condition.setting, condition.difference)
    moved = undisturbed(condition.setting, scale.shift) if scale.shift and condition.is_null else found
    data = np.split(
        first_dataset(book.study.simulation.seed, condition.setting, condition.difference),
        np.cumsum(condition.setting.sizes)[:-1],
    )
    profiles = [profile(scale, condition, found[group]) for group in groups]
    tallest = max(heights.max() for _, heights in profiles)
    for place, (group, outline) in enumerate(zip(groups, profiles, strict=True)):
        base = TOP + height * (place + 1) - height * 0.26
        unit = height * 0.70 / tallest
        group_outline(drawing, outline, base, unit, scale.lattice(condition) is not None)
        if scale.shift and moved[group] != found[group]:
            shifted_outline(drawing, scale, condition, moved[group], base, unit)
        position_marks(drawing, scale, condition, group, base, height)
        dots(drawing, scale, data[group], base, height)
        group_name(drawing, book, condition, group, base, scale.axis.start)
    unit = book.study.question.unit
    bottom_axis(drawing, scale.axis, HEIGHT - FOOT, axis_name(book, unit))
    return drawing


def axis_name(book, unit):
    """The outcome with its unit."""
    question = book.study.question
    name = fitted(texts.cleaned(question.outcome) or book.words.outcome(), 120, 10.5)
    return f"{name}, {fitted(texts.cleaned(unit), 60, 10.5)}" if unit else name


def profile(scale, condition, population):
    """(x pixels, heights) of a population: density in pixels of the axis, or shares of single values."""
    unit = scale.lattice(condition)
    low, high = scale.axis.low, scale.axis.high
    if unit is not None:
        values = np.arange(np.ceil(low / unit), np.floor(high / unit) + 1) * unit
        masses = population.cumulative(values + unit / 2) - population.cumulative(values - unit / 2)
        return scale.axis(values), masses / (scale.axis(low + unit) - scale.axis(low))
    edges = np.linspace(0, 1, POINTS + 1)
    edges = low * (high / low) ** edges if scale.log else low + (high - low) * edges
    mass = np.diff(population.cumulative(edges))
    pixels = scale.axis(edges)
    return (pixels[1:] + pixels[:-1]) / 2, mass / np.diff(pixels)


def group_outline(drawing, outline, base, unit, separate):
    """A population as an area, or as bars where it takes few values."""
    x, heights = outline
    if separate:
        for place, height in zip(x, heights, strict=True):
            if height * unit > 0.3:
                drawing.line([(place, base), (place, base - height * unit)], "ink2", 2.2)
        return
    x, y = trimmed(x, base - heights * unit, base)
    drawing.area(np.column_stack([np.r_[x[0], x, x[-1]], np.r_[base, y, base]]), "fill", "ink2", 0.8)


def trimmed(x, y, base):
    """Points without those that lie on the base line at either end."""
    raised = np.flatnonzero(base - y > 0.15)
    if len(raised) < 2:
        return x, y
    keep = slice(max(raised[0] - 1, 0), raised[-1] + 2)
    return x[keep], y[keep]


def shifted_outline(drawing, scale, condition, population, base, unit):
    """Where a group lies under the difference that must not be missed."""
    x, heights = profile(scale, condition, population)
    if scale.lattice(condition) is not None:
        bars = [[(at + 2, base), (at + 2, base - high * unit)] for at, high in zip(x, heights, strict=True)]
        return drawing.lines([bar for bar in bars if bar[0][1] - bar[1][1] > 0.3], "ink2", 1.2, (2.5, 2))
    x, y = trimmed(x, base - heights * unit, base)
    return drawing.line(np.column_stack([x, y]), "ink2", 0.9, (2.5, 2))


def position_marks(drawing, scale, condition, group, base, height):
    """Mean, median and standard deviation of a group as recorded."""
    true = recorded_quantities(condition)[group]
    mean, median, sd = true["mean"], true["median"], true["sd"]
    if mean is not None and sd is not None:
        ends = scale.axis(np.clip([mean - sd, mean + sd], scale.axis.low, scale.axis.high))
        drawing.line(np.column_stack([ends, [base, base]]), "ink", 2.6)
    if mean is not None:
        x = scale.axis(mean)
        drawing.line([(x, base), (x, base - height * 0.66)], "ink", 1.2)
    drawing.disc(scale.axis(median), base - height * 0.2, 2.4, "paper", "ink", 1.1)


def dots(drawing, scale, values, base, height):
    """One dataset as dots in two lanes."""
    some = np.sort(values[:MOST_DOTS][np.isfinite(values[:MOST_DOTS])])
    for place, x in enumerate(scale.axis(np.clip(some, scale.axis.low, scale.axis.high))):
        drawing.disc(x, base + 5 + 4 * (place % 2), 1.4, "ink2")


def group_name(drawing, book, condition, group, base, left):
    """The group and its size left of its row."""
    name = fitted(texts.cleaned(book.study.group_names[group]), left - 8, 9.5)
    drawing.text(left - 6, base - 6, name, "ink", 9.5, "end")
    drawing.text(left - 6, base + 5, book.words.size(condition.setting.sizes[group]), size=9.5, anchor="end")


def panel_label(book, condition):
    """What a reader who cannot see the panel is told."""
    true = recorded_quantities(condition)
    told = {name: [shown.quantities(group, [name])[0] for group in true] for name in ("mean", "median", "sd")}
    return book.words.population_panel(
        kind_name(book, condition), texts.cleaned(book.study.question.unit), told
    )
