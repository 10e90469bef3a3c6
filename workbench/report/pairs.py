"""Paired differences: the leading method against each rival on the same data."""

from workbench.report import shown
from workbench.report.axes import Axis, bottom_axis, plain
from workbench.report.drawing import Drawing, fitted
from workbench.report.figure import Sheet

WIDTH, LEFT, RIGHT, TOP, ROW, FOOT = 288, 20, 268, 22, 25, 42

MOST_ROWS = 12
"""Conditions of a panel; the most telling ones where there are more."""

MOST_RIVALS = 11


def pairs(book):
    """The Sheet of paired differences; None where there is nothing to be compared."""
    rivals = [one for one in book.decision.standings if one is not book.lead]
    if not rivals or not book.targets:
        return None
    rivals = sorted(rivals, key=lambda one: not one.possible)[:MOST_RIVALS]
    some = book.deciding(book.targets, MOST_ROWS)
    top = max(
        abs(book.pairs[one.number, book.lead.name, rival.name][end])
        for one in some
        for rival in rivals
        for end in (2, 3)
    )
    axis = Axis(-max(top, 0.01) * 1.05, max(top, 0.01) * 1.05, LEFT, RIGHT)
    panels = [
        (
            book.words.against(book.label(rival.name), book.short(book.lead.name)),
            panel(book, axis, some, rival.name),
        )
        for rival in rivals
    ]
    told = {"conditions": len(some), "all": len(book.targets)}
    return Sheet(book, "pairs", title(book, rivals), panels, keyed=False, told=told)


def title(book, rivals):
    """How the leading method stands against the nearest rival that keeps its error rate."""
    kept = [one for one in rivals if one.possible]
    if not book.nulls or not book.lead.possible:
        return book.findings.on_the_same_data()
    if not kept:
        return book.findings.no_rival(book.called(book.lead.name))
    rival = max(kept, key=lambda one: one.detections["rate"].min())
    counted = outcomes(book, rival.name)
    return book.findings.against_rival(
        book.called(book.lead.name), book.called(rival.name), *counted, len(book.targets)
    )


def outcomes(book, rival):
    """(more, less, open): in how many conditions the leading method detects more or less, or neither is shown."""
    found = [book.pairs[one.number, book.lead.name, rival] for one in book.targets]
    more = sum(low > 0 for _, _, low, _ in found)
    less = sum(high < 0 for _, _, _, high in found)
    return more, less, len(found) - more - less


def panel(book, axis, conditions, rival):
    """The Drawing: a row a condition, the difference with its interval."""
    height = TOP + ROW * len(conditions) + FOOT
    foot = height - FOOT + 2
    drawing = Drawing(WIDTH, height, panel_label(book, conditions, rival))
    lead = book.lead.name
    drawing.text(
        axis(0) - 6,
        TOP - 6,
        book.words.finds_more(fitted(book.short(rival), 50, 9.5)),
        size=9.5,
        anchor="end",
    )
    drawing.text(axis(0) + 6, TOP - 6, book.words.finds_more(fitted(book.short(lead), 50, 9.5)), size=9.5)
    for place, condition in enumerate(conditions):
        row(book, drawing, axis, TOP + ROW * place + 17, condition, rival)
    ticks = axis.ticks(4)
    bottom_axis(drawing, axis, foot, book.words.difference_in_detection(), ticks, with_sign)
    return drawing


def with_sign(value):
    """A tick of a difference."""
    return f"+{value:g}" if value > 0 else plain(value)


def row(book, drawing, axis, y, condition, rival):
    """One condition's difference, with its interval and the rival's mark."""
    tie = min(book.study.criteria.tie, axis.high)
    drawing.box(axis(-tie), y - 4, axis(tie) - axis(-tie), 11, "tint")
    drawing.line([(axis(0), y - 4), (axis(0), y + 7)], "ink", 1.1)
    value, _, low, high = book.pairs[condition.number, book.lead.name, rival]
    drawing.text(2, y - 7, fitted(book.name(condition), WIDTH - 4, 9.5), "ink", 9.5)
    drawing.line([(axis(low), y), (axis(high), y)], "ink2", 1.3)
    hollow = not book.keeps_error(condition, rival)
    if rival in book.drawn:
        slot = book.slot(rival)
        drawing.mark(slot.mark, axis(value), y, slot.role, 6.5, hollow)
    else:
        drawing.disc(axis(value), y, 2.6, "paper" if hollow else "ink2", "ink2")


def panel_label(book, conditions, rival):
    """What a reader who cannot see the panel is told."""
    found = {one.number: book.pairs[one.number, book.lead.name, rival] for one in conditions}
    low, high = (pick(found, key=lambda number: found[number][0]) for pick in (min, max))
    ends = [
        (shown.signed(found[one][0], book.detection_digits), book.name(book.conditions[one]))
        for one in (low, high)
    ]
    return book.words.pairs_panel(book.label(book.lead.name), book.label(rival), ends, outcomes(book, rival))
