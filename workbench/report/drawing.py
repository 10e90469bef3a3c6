"""Drawing: lines, areas, marks and texts of a panel, written as SVG or painted as PNG."""

import io
import unicodedata
import warnings
from functools import lru_cache
from html import escape
from typing import NamedTuple

import numpy as np
from matplotlib.backends.backend_agg import RendererAgg
from matplotlib.colors import to_rgb
from matplotlib.font_manager import FontProperties, findfont, get_font
from matplotlib.path import Path
from matplotlib.textpath import TextPath
from matplotlib.transforms import Affine2D
from PIL import Image

from workbench.texts import bare

FONT = "system-ui, -apple-system, 'Segoe UI', Roboto, 'Noto Sans', 'Liberation Sans', Arial, sans-serif"

PAINTED_FONT = "DejaVu Sans"
"""Comes with matplotlib, so a painted figure is the same on every machine."""


class Outline(NamedTuple):
    """A line or area through points; several parts may share one style."""

    parts: list
    """Arrays (n, 2) of x and y, y pointing down."""
    stroke: str | None
    fill: str | None
    width: float
    dash: tuple
    closed: bool


class Disc(NamedTuple):
    """A circle."""

    x: float
    y: float
    radius: float
    stroke: str | None
    fill: str | None
    width: float


class Words(NamedTuple):
    """A line of text; anchor is start, middle or end."""

    x: float
    y: float
    text: str
    role: str
    size: float
    anchor: str
    bold: bool


class Drawing:
    """Items in the order in which they are drawn; one unit is a pixel at the size a panel is read at."""

    def __init__(self, width, height, label=""):
        self.width, self.height, self.label = width, height, label
        self.items = []

    def line(self, points, role, width=1.0, dash=()):
        """A line through points (n, 2)."""
        self.lines([points], role, width, dash)

    def lines(self, parts, role, width=1.0, dash=()):
        """Several lines of one style."""
        parts = [np.asarray(points, dtype=float) for points in parts if len(points)]
        if parts:
            self.items.append(Outline(parts, role, None, width, tuple(dash), False))

    def area(self, points, fill, stroke=None, width=1.0):
        """A closed area."""
        self.items.append(Outline([np.asarray(points, dtype=float)], stroke, fill, width, (), True))

    def box(self, x, y, width, height, fill):
        """A filled rectangle."""
        self.area([(x, y), (x + width, y), (x + width, y + height), (x, y + height)], fill)

    def disc(self, x, y, radius, fill, stroke=None, width=1.0):
        """A circle."""
        self.items.append(Disc(float(x), float(y), radius, stroke, fill, width))

    def mark(self, kind, x, y, role, size=8.0, hollow=False):
        """A method's mark, filled or hollow, about `size` wide."""
        fill, r = ("paper" if hollow else role), size / 2
        if kind == "circle":
            return self.disc(x, y, r - 0.4, fill, role, 1.2)
        points = np.array(MARKS[kind]) * r + (x, y)
        return self.area(points, fill, role, 1.2)

    def text(self, x, y, text, role="ink2", size=10.0, anchor="start", bold=False):
        """A line of text whose base line starts, is centred or ends at (x, y)."""
        self.items.append(Words(float(x), float(y), bare(text), role, size, anchor, bold))

    def place(self, other, x, y):
        """Another drawing's items, moved to (x, y)."""
        self.items += [moved(item, x, y) for item in other.items]


MARKS = {
    "square": [(-0.85, -0.85), (0.85, -0.85), (0.85, 0.85), (-0.85, 0.85)],
    "diamond": [(0, -1.15), (1.15, 0), (0, 1.15), (-1.15, 0)],
    "up": [(0, -1.05), (1.05, 0.85), (-1.05, 0.85)],
    "down": [(0, 1.05), (1.05, -0.85), (-1.05, -0.85)],
    "plus": [
        *[(-0.35, -1.1), (0.35, -1.1), (0.35, -0.35), (1.1, -0.35), (1.1, 0.35), (0.35, 0.35)],
        *[(0.35, 1.1), (-0.35, 1.1), (-0.35, 0.35), (-1.1, 0.35), (-1.1, -0.35), (-0.35, -0.35)],
    ],
}
"""Outlines of marks in units of half their width; a circle is drawn as one."""


def moved(item, x, y):
    """An item moved by (x, y)."""
    if isinstance(item, Outline):
        return item._replace(parts=[points + np.array((x, y)) for points in item.parts])
    return item._replace(x=item.x + x, y=item.y + y)


def fitted(text, width, size):
    """A text cut so that it is at most `width` wide in type of the given size."""
    widths = [size * width_of(letter) for letter in text]
    if sum(widths) <= width:
        return text
    room, kept = width - size * width_of("…"), 0
    while kept < len(text) and room >= widths[kept]:
        room -= widths[kept]
        kept += 1
    return text[: max(kept, 1)].rstrip() + "…"


@lru_cache(maxsize=4096)
def width_of(letter):
    """How wide a letter is, as a part of the size of type: that of a wide font, as others are narrower."""
    if unicodedata.east_asian_width(letter) in "WF":
        return 1.0
    font = get_font(findfont(FontProperties(family=PAINTED_FONT)))
    if not font.get_char_index(ord(letter)):
        return 1.0
    font.set_size(100, 72)
    return font.load_char(ord(letter)).linearHoriAdvance / 65536 / 100


def number(value):
    """A coordinate with one decimal at most."""
    return f"{value:.1f}".removesuffix(".0").replace("-0.", "-.") if abs(value) >= 0.05 else "0"


def inline(drawing):
    """The SVG element of a drawing for a page, in the page's colours; hidden from readers where it says nothing."""
    told = f'role="img" aria-label="{escape(bare(drawing.label))}"' if drawing.label else 'aria-hidden="true"'
    head = f'<svg viewBox="0 0 {number(drawing.width)} {number(drawing.height)}" {told}>'
    return f"{head}{body(drawing, variable)}</svg>"


def document(drawing, colours, width):
    """A drawing as an SVG file, `width` millimetres wide, coloured by a palette."""
    height = width * drawing.height / drawing.width
    head = f'<svg xmlns="http://www.w3.org/2000/svg" width="{width:g}mm" height="{height:.2f}mm" role="img"'
    head += f' viewBox="0 0 {number(drawing.width)} {number(drawing.height)}" font-family="{FONT}">'
    ground = f'<rect width="100%" height="100%" fill="{colours["paper"]}"/>'
    title = f"<title>{escape(bare(drawing.label))}</title>"
    return (
        f'<?xml version="1.0" encoding="UTF-8"?>\n{head}{title}{ground}{body(drawing, colours.get)}</svg>\n'
    )


def variable(role):
    """A role as a page names it."""
    return f"var(--{role})"


def body(drawing, colour):
    """The SVG elements of all items."""
    return "".join(ELEMENTS[type(item)](item, colour) for item in drawing.items)


def outline_element(item, colour):
    """An Outline as SVG."""
    end = "Z" if item.closed else ""
    path = "".join("M" + "L".join(f"{number(x)} {number(y)}" for x, y in part) + end for part in item.parts)
    return f'<path d="{path}"{style(item, colour)}{dashes(item)}/>'


def disc_element(item, colour):
    """A Disc as SVG."""
    place = f'cx="{number(item.x)}" cy="{number(item.y)}" r="{number(item.radius)}"'
    return f"<circle {place}{style(item, colour)}/>"


def words_element(item, colour):
    """Words as SVG."""
    anchor = "" if item.anchor == "start" else f' text-anchor="{item.anchor}"'
    weight = ' font-weight="700"' if item.bold else ""
    place = f'x="{number(item.x)}" y="{number(item.y)}" font-size="{number(item.size)}"'
    return f'<text {place} fill="{colour(item.role)}"{anchor}{weight}>{escape(item.text)}</text>'


ELEMENTS = {Outline: outline_element, Disc: disc_element, Words: words_element}


def style(item, colour):
    """Fill and stroke of an item as SVG."""
    fill = f' fill="{colour(item.fill) if item.fill else "none"}"'
    if not item.stroke:
        return fill
    return f'{fill} stroke="{colour(item.stroke)}" stroke-width="{item.width:g}"'


def dashes(item):
    """The dash of an Outline as SVG."""
    return f' stroke-dasharray="{" ".join(f"{length:g}" for length in item.dash)}"' if item.dash else ""


def painted(drawing, colours, width, dots_per_inch=300):
    """A drawing as an image, `width` millimetres wide."""
    scale = width / 25.4 * dots_per_inch / drawing.width
    size = int(scale * drawing.width), int(scale * drawing.height)
    renderer = RendererAgg(*size, dots_per_inch)
    whole = Affine2D().scale(scale, -scale).translate(0, size[1])
    paint(renderer, Path.unit_rectangle(), Affine2D().scale(*size), colours["paper"])
    with warnings.catch_warnings():
        warnings.filterwarnings("ignore", "Glyph .* missing")  # letters the font lacks are painted as boxes
        for item in drawing.items:
            path, fill, stroke = PATHS[type(item)](item)
            line = (colours[stroke], item.width, getattr(item, "dash", ())) if stroke else None
            paint(renderer, path, whole, colours[fill] if fill else None, line, scale * 72 / dots_per_inch)
    image = Image.fromarray(np.asarray(renderer.buffer_rgba())).convert("RGB")
    image.info["dpi"] = (dots_per_inch, dots_per_inch)
    return image


def paint(renderer, path, transform, fill, line=None, point=1.0):
    """Paint a path: fill is a colour or none, line (colour, width, dash) in units of so many points."""
    context = renderer.new_gc()
    context.set_linewidth(0)
    if line is not None:
        colour, width, dash = line
        context.set_foreground(colour)
        context.set_linewidth(width * point)
        context.set_joinstyle("miter")
        if dash:
            context.set_dashes(0, [length * point for length in dash])
    renderer.draw_path(context, path, transform, to_rgb(fill) if fill else None)
    context.restore()


def png(image):
    """An image as the bytes of a PNG file."""
    target = io.BytesIO()
    image.save(target, "png", dpi=image.info["dpi"], compress_level=2)
    return target.getvalue()


def outline_path(item):
    """(path, fill, stroke) of an Outline."""
    codes, vertices = [], []
    for part in item.parts:
        vertices += [*part, part[0]] if item.closed else [*part]
        codes += [Path.MOVETO] + [Path.LINETO] * (len(part) - 1) + [Path.CLOSEPOLY] * item.closed
    return Path(np.array(vertices), codes), item.fill, item.stroke


def disc_path(item):
    """(path, fill, stroke) of a Disc."""
    circle = Path.unit_circle()
    return Path(circle.vertices * item.radius + (item.x, item.y), circle.codes), item.fill, item.stroke


def words_path(item):
    """(path, fill, stroke) of Words, as outlines: a figure repeats many of them, and outlines are laid out once."""
    path = letters(item.text, item.bold)
    width = path.vertices[:, 0].max(initial=0.0) * item.size
    start = item.x - {"start": 0.0, "middle": width / 2, "end": width}[item.anchor]
    return Path(path.vertices * (item.size, -item.size) + (start, item.y), path.codes), item.role, None


@lru_cache(maxsize=4096)
def letters(text, bold):
    """The outlines of a text in type of size 1, y pointing up."""
    if not text.strip():
        return Path(np.empty((0, 2)))
    font = FontProperties(family=PAINTED_FONT, weight="bold" if bold else "normal")
    return TextPath((0, 0), text.replace("$", r"\$"), size=1, prop=font)


PATHS = {Outline: outline_path, Disc: disc_path, Words: words_path}
