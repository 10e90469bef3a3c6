"""Tables of rates: the error-rate map and the detections, a row a condition, a column a method."""

from workbench import texts
from workbench.look import STEPS, centre, step
from workbench.numbers import proportion
from workbench.report import shown
from workbench.report.drawing import Drawing, fitted
from workbench.report.figure import Sheet

MOST_PAINTED = 40
"""Rows of a map for papers; the page has all of them."""

LEFT, TOP, CELL, LINE = 220, 36, 92, 24
"""Measures of a map for papers."""


def error_map(book):
    """What the map of error rates shows; None without null conditions."""
    if not book.nulls:
        return None
    sheet = Sheet(book, "error_map", map_title(book), [("", painted_map(book))], keyed=False)
    return {
        "sheet": sheet,
        "methods": heads(book),
        "groups": grouped(
            book, book.listed(book.nulls), lambda condition, name: error_cell(book, condition, name)
        ),
        "legend": [(k, proportion(centre(k, book.level), max(3, book.error_digits))) for k in STEPS],
        "level": f"{book.level:g}",
        "compare": book.study.question.compare,
        "unequal": [one.number for one in book.nulls if not book.equal_as_recorded[one.number]],
    }


def heads(book):
    """[(label, whether chosen, whether it answers another question)] of the columns."""
    standings = book.decision.standings
    return [(book.label(one.name), one.name in book.decision.chosen, not one.answers) for one in standings]


def map_title(book):
    """Which methods stay within the limits everywhere: only one, some, all, none, or not yet shown."""
    findings, standings = book.findings, book.decision.standings
    kept = [book.called(one.name) for one in standings if one.size is not None and one.size.value == "meets"]
    still_open = [
        book.called(one.name) for one in standings if one.size is not None and one.size.value == "undecided"
    ]
    limits = f"{book.band[0]:g}", f"{book.band[1]:g}"
    if len(kept) == len(standings):
        return findings.all_stay(*limits, len(kept))
    if len(kept) == 1 and not still_open:
        return findings.only_one_stays(kept[0], *limits)
    if kept:
        return findings.some_stay(kept, len(standings), still_open, *limits)
    return findings.none_is_shown_to_stay(still_open, *limits) if still_open else findings.none_stays(*limits)


def grouped(book, conditions, cell):
    """[(heading, sizes, [(whether a gap stands before, condition, name, [cell])])] by the first factor that varies."""
    first, inner = (book.varied[:1], book.varied[1:]) if len(book.varied) > 1 else ([], book.varied)
    groups, last = [], None
    for condition in conditions:
        key = [condition.levels[factor] for factor in first]
        if not groups or groups[-1]["key"] != key:
            groups.append(
                {"key": key, "name": ", ".join(map(texts.shortened, key)), "rows": [], "factor": first}
            )
            groups[-1]["sizes"] = condition.setting.sizes if first == ["sizes"] else None
            last = None
        second = condition.levels[inner[0]] if inner else None
        gap = last is not None and second != last and len(inner) > 1
        last = second
        cells = [cell(condition, judge.name) for judge in book.study.judges]
        groups[-1]["rows"].append(
            {"gap": gap, "condition": condition, "name": book.name(condition, inner), "cells": cells}
        )
    return groups


def error_cell(book, condition, name):
    """An error rate with its step and verdict; its interval where it rounds to a limit and is undecided."""
    row = book.rows[condition.number, name]
    verdict, text = book.verdict(condition.number, name), book.error(condition.number, name)
    close = verdict == "open" and any(str(text) == f"{limit:.{book.error_digits}f}" for limit in book.band)
    return {
        "text": text,
        "step": step(row.rate, book.level),
        "verdict": verdict,
        "interval": book.interval(condition.number, name) if close else None,
        "undefined": shown.count(row.undefined) if row.undefined else None,
    }


def painted_map(book):
    """The map as a Drawing for papers."""
    rows, standings = book.deciding(book.nulls, MOST_PAINTED), book.decision.standings
    label = book.words.map_panel(map_title(book), len(rows))
    foot = TOP + LINE * len(rows)
    drawing = Drawing(max(LEFT + CELL * len(standings), 480), foot + 32, label)
    for place, one in enumerate(standings):
        painted_head(book, drawing, one, LEFT + CELL * (place + 0.5))
    for place, condition in enumerate(rows):
        y = TOP + LINE * place
        name = fitted(f"{condition.number}  {book.name(condition)}", LEFT - 10, 10)
        drawing.text(LEFT - 8, y + 15, name, "ink", 10, "end")
        for column, one in enumerate(standings):
            painted_cell(book, drawing, condition, one.name, LEFT + CELL * column + 1, y + 1)
    for place, verdict in enumerate(("meets", "high", "low", "open")):
        x = 8 + 120 * place
        mark_in(drawing, verdict, x, foot + 20, "ink", "paper")
        drawing.text(x + 9, foot + 24, book.words.verdict(verdict), "ink", 10)
    return drawing


def painted_head(book, drawing, standing, x):
    """The name of a method above its column."""
    label = book.label(standing.name)
    name = label if fitted(label, CELL - 2, 10) == label else book.short(standing.name)
    drawing.text(x, TOP - 20, name, "ink", 10, "middle", standing.name in book.decision.chosen)
    if not standing.answers:
        drawing.text(x, TOP - 7, book.words.other_question(), "ink2", 9, "middle")


def painted_cell(book, drawing, condition, name, x, y):
    """One cell of the map for papers."""
    found = error_cell(book, condition, name)
    ink, verdict = f"t{found['step']}", found["verdict"]
    drawing.box(x, y, CELL - 2, LINE - 2, f"s{found['step']}")
    middle = y + LINE / 2 - 1
    mark_in(drawing, verdict, x + 16, middle, ink, f"s{found['step']}")
    drawing.text(x + 27, middle + 4, found["text"], ink, 11, bold=verdict in ("high", "low"))


def mark_in(drawing, verdict, x, y, ink, ground):
    """A verdict's mark in the ink of a coloured cell."""
    if verdict == "open":
        points = [(x, y - 4), (x + 4, y), (x, y + 4), (x - 4, y)]
        drawing.area(points, ground, ink, 1.3)
    elif verdict in ("high", "low"):
        drawing.mark({"high": "up", "low": "down"}[verdict], x, y, ink, 7)
    elif verdict:
        drawing.disc(x, y, 3, ink)


def detections(book):
    """What the table of detections shows; None without alternatives."""
    if not book.targets:
        return None
    criterion = book.study.criteria.power
    return {
        "title": detection_title(book),
        "methods": heads(book),
        "groups": grouped(
            book, book.listed(book.targets), lambda condition, name: detection_cell(book, condition, name)
        ),
        "at": criterion.at if criterion else None,
        "least": f"{criterion.least:g}" if criterion else None,
        "several": len(book.target_differences) > 1,
    }


def detection_cell(book, condition, name):
    """A detection rate with its verdict, and whether the method keeps its error rate there."""
    row = book.rows[condition.number, name]
    return {
        "text": book.detection(condition.number, name),
        "verdict": book.verdict(condition.number, name),
        "trusted": book.keeps_error(condition, name),
        "undefined": shown.count(row.undefined) if row.undefined else None,
    }


def detection_title(book):
    """What the leading method finds at least, against what was asked for."""
    findings, lead, criterion = book.findings, book.lead, book.study.criteria.power
    least = book.detection(lead.least["condition"], lead.name)
    label, place = book.called(lead.name), book.at(book.conditions[lead.least["condition"]])
    if criterion is None:
        return findings.finds_at_least(label, least, place, len(book.targets))
    asked = f"{criterion.least:g}"
    if lead.power.value == "meets":
        return findings.finds_as_asked(label, least, asked, len(book.targets))
    number = sum(book.verdict(one.number, lead.name) == "low" for one in book.targets)
    if number:
        return findings.finds_too_little(label, least, asked, number, len(book.targets))
    return findings.finds_perhaps(label, least, asked, len(book.targets))
