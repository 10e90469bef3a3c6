"""Figure: panels under one computed title, for the page and as files at print size."""

from dataclasses import dataclass, field

from workbench.look import palette
from workbench.report.drawing import Drawing, document, fitted, inline, painted, png

WIDE = 180
"""Millimetres of a figure in print: the width of a page's text."""

GAP, HEAD, MARGIN = 24, 18, 6


@dataclass
class Sheet:
    """A figure of a report: its panels, its title, and what its key shows."""

    book: object
    name: str
    title: str
    panels: list
    """[(title of a panel, Drawing)]"""
    keyed: bool = True
    """Whether methods are told apart by colour, dash and mark, so that a key is needed."""
    most: int = 0
    """How many panels there could be, where not all are shown."""
    told: dict = field(default_factory=dict)
    """What the caption needs to know."""

    def __post_init__(self):
        self.number = self.book.next_figure()

    @property
    def svgs(self):
        """[(title, SVG element)] of the panels."""
        return [(title, inline(drawing)) for title, drawing in self.panels]

    @property
    def left_out(self):
        """How many panels are not shown."""
        return max(0, self.most - len(self.panels))

    @property
    def key(self):
        """[(label, short name, slot, whether it leads)] of the methods drawn."""
        book = self.book
        return [
            (book.label(name), book.short(name), book.slot(name), name in book.decision.chosen)
            for name in book.drawn
        ]

    @property
    def undrawn(self):
        """Labels of the methods that curves leave out."""
        return [
            self.book.label(one.name) for one in self.book.study.judges if one.name not in self.book.drawn
        ]

    @property
    def columns(self):
        """Panels abreast on paper."""
        return 1 if len(self.panels) == 1 else 2 if len(self.panels) <= 6 else 3

    def composed(self):
        """One Drawing of all panels with their titles and the key."""
        width = max(drawing.width for _, drawing in self.panels)
        height = max(drawing.height for _, drawing in self.panels) + HEAD
        rows = -(-len(self.panels) // self.columns)
        key = self.drawn_key((width + GAP) * self.columns - GAP) if self.keyed else Drawing(0, 0)
        label = " ".join([self.title, *(drawing.label for _, drawing in self.panels)])
        whole = (width + GAP) * self.columns - GAP + 2 * MARGIN
        sheet = Drawing(whole, key.height + (height + GAP) * rows - GAP + 2 * MARGIN, label)
        sheet.place(key, MARGIN, MARGIN)
        for place, (title, drawing) in enumerate(self.panels):
            x = MARGIN + place % self.columns * (width + GAP)
            y = MARGIN + key.height + place // self.columns * (height + GAP)
            sheet.text(x, y + 12, fitted(title, width, 12), "ink", 12, bold=True)
            sheet.place(drawing, x, y + HEAD)
        return sheet

    def drawn_key(self, width):
        """The key as a Drawing so wide."""
        found, x, y = [], 0.0, 14.0
        for label, _, slot, leads in self.key:
            room = 60 + 6.6 * len(label)
            if x + room > width and x > 0:
                x, y = 0.0, y + 18
            found.append((x, y, label, slot, leads))
            x += room
        drawing = Drawing(width, y + 14)
        for x, y, label, slot, leads in found:
            swatch(drawing, x, y - 4, slot, leads)
            drawing.text(x + 42, y, label, "ink", 11, bold=leads)
        return drawing

    def files(self):
        """(file name, function that gives its bytes) of the figure as SVG and PNG; the PNG is painted already."""
        sheet, colours = self.composed(), palette()
        width = WIDE if self.columns > 1 else WIDE * min(1, sheet.width / 560)
        stem = f"{self.number:02d}_{self.name}"
        yield f"{stem}.svg", lambda: document(sheet, colours, width).encode("utf-8")
        image = painted(sheet, colours, width)
        yield f"{stem}.png", lambda: png(image)


def swatch(drawing, x, y, slot, leads):
    """A piece of a method's line with its mark."""
    drawing.line([(x, y), (x + 36, y)], slot.role, 2.6 if leads else 1.6, slot.dash)
    drawing.mark(slot.mark, x + 18, y, slot.role, 8)
