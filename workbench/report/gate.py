"""Gate strip: the error rates of one method as marks on a line between its limits."""

from collections import Counter

from workbench.report.axes import Axis
from workbench.report.drawing import Drawing

WIDTH, HEIGHT, SIDE = 300, 30, 6

STEP_ASIDE = (0, -7, 7)
"""Where a mark goes when the middle of the strip is taken."""

MARK = 8.0

ROLES = {"meets": "ink", "high": "high", "low": "low", "open": "ink2"}
"""The colour of each verdict's mark."""

NEEDED = 31
"""Pixels between two numbers of the strip's head."""


def axis_of(book):
    """The strip's axis: logarithms from a quarter of the level to five times it."""
    return Axis(book.level / 4, book.level * 5, SIDE, WIDTH - SIDE, log=True)


def verdict_mark(drawing, verdict, x, y, size=MARK):
    """The mark of a verdict: filled disc, triangle up or down, hollow diamond."""
    if verdict == "open":
        return drawing.mark("diamond", x, y, ROLES[verdict], size * 0.8, hollow=True)
    if verdict in ("high", "low"):
        return drawing.mark({"high": "up", "low": "down"}[verdict], x, y, ROLES[verdict], size * 0.85)
    return drawing.disc(x, y, size * 0.36, "ink", "paper", 0.8)


def strip(book, standing):
    """The Drawing of one method's strip."""
    axis, drawing = axis_of(book), Drawing(WIDTH, HEIGHT, strip_label(book, standing))
    low, high = (float(axis(limit)) if limit > 0 else SIDE for limit in book.band)
    drawing.box(low, 3, high - low, HEIGHT - 6, "tint")
    drawing.line([(SIDE, HEIGHT / 2), (WIDTH - SIDE, HEIGHT / 2)], "edge", 0.8)
    drawing.lines([[(axis(x), 1), (axis(x), HEIGHT - 1)] for x in book.band if 0 < x < 1], "ink", 1.4)
    for x, y, verdict in places(book, standing, axis):
        verdict_mark(drawing, verdict, x, HEIGHT / 2 + y)
    return drawing


def places(book, standing, axis):
    """[(x, y from the middle, verdict)] of a method's marks, stepping aside where they are crowded."""
    wanted = sorted(
        (float(axis(max(row["rate"], 1e-9))), book.verdict(row["condition"], standing.name))
        for _, row in standing.errors.iterrows()
    )
    last, found = dict.fromkeys(STEP_ASIDE, -99.0), []
    for x, verdict in wanted:
        free = [lane for lane in STEP_ASIDE if x - last[lane] >= MARK * 0.8]
        lane = free[0] if free else min(STEP_ASIDE, key=last.get)
        if free or x - last[lane] > 0.5 or verdict != "meets":
            found.append((x, lane, verdict))
            last[lane] = x
    return found


def counts(book, standing):
    """{verdict: in how many conditions} of a method's error rates."""
    return Counter(book.verdict(row["condition"], standing.name) for _, row in standing.errors.iterrows())


def strip_label(book, standing):
    """What a reader who cannot see the strip is told."""
    found = counts(book, standing)
    rates = standing.errors["rate"]
    extremes = (standing.errors.loc[place, "condition"] for place in (rates.idxmin(), rates.idxmax()))
    ends = [str(book.error(condition, standing.name)) for condition in extremes]
    return book.words.gate(book.label(standing.name), len(rates), found, *ends)


def head(book):
    """The Drawing of the numbers above the strips: limits, level and three times the level, where there is room."""
    axis, drawing = axis_of(book), Drawing(WIDTH, 14, "")
    taken = []
    low, high = book.band
    for value in [x for x in (high, low, book.level, 3 * book.level) if 0 < x < 1]:
        x = float(axis(value))
        if axis.low < value < axis.high and all(abs(x - other) >= NEEDED for other in taken):
            taken.append(x)
            drawing.text(x, 11, f"{value:g}", size=11, anchor="middle")
    return drawing
