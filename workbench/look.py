"""Look: colours by role, how each method is drawn, steps of a rate, marks of a verdict."""

import math
from dataclasses import dataclass

LIGHT = {
    "paper": "#ffffff",
    "tint": "#f2f4f3",
    "ink": "#171d22",
    "ink2": "#4a565f",
    "edge": "#77848d",
    "rule": "#cbd2d6",
    "fill": "#d9e0e3",
    "high": "#a63a0c",
    "low": "#1f4f9e",
}
"""Roles on a light ground. Colour is for data only: hue says which method, or to which side a rate is off."""

DARK = {
    "paper": "#14191e",
    "tint": "#1c2329",
    "ink": "#e9edef",
    "ink2": "#a9b4bc",
    "edge": "#7c8993",
    "rule": "#36414a",
    "fill": "#3a4650",
    "high": "#f4976a",
    "low": "#8db4f5",
}
"""The same roles on a dark ground."""

ON_DARK, ON_LIGHT = "#ffffff", "#171d22"
"""Ink on a coloured cell: whichever of the two stands out more."""


@dataclass(frozen=True)
class Slot:
    """How one method is drawn throughout a report."""

    light: str
    dark: str
    dash: tuple
    mark: str

    @property
    def role(self):
        """The name of its colour in a drawing."""
        return f"m{SLOTS.index(self) + 1}"


SLOTS = (
    Slot("#551e01", "#f19a40", (), "square"),
    Slot("#0b5a66", "#83f8f9", (7, 2.2), "circle"),
    Slot("#2b1972", "#5c71da", (), "diamond"),
    Slot("#1c91ee", "#98ace0", (2, 1.6), "up"),
    Slot("#bb7e83", "#b05f66", (7, 2, 1.6, 2), "down"),
    Slot("#756f05", "#edf76d", (4, 1.6, 1.2, 1.6, 1.2, 1.6), "plus"),
)
"""Methods take colour, dash and mark by their order in the file."""

MOST_DRAWN = len(SLOTS)
"""A figure of curves shows at most so many methods."""

STEPS = {
    -5: ("#0e599d", "#80bcfe"),
    -4: ("#3677bb", "#6499d4"),
    -3: ("#6aa5e7", "#466c96"),
    -2: ("#96c2f3", "#3e5977"),
    -1: ("#c4dcf7", "#334457"),
    0: ("#f3f4f6", "#272a2e"),
    1: ("#f3d1c0", "#543c30"),
    2: ("#ecae8e", "#724c39"),
    3: ("#dc8a60", "#8f5a3f"),
    4: ("#ae5a2a", "#ca815a"),
    5: ("#8e3c00", "#f69f72"),
}
"""Light and dark colour of each step of a rate; step k is centred on level * 4^(k / 5), and the ends are open."""


def step(rate, level):
    """The step of a rate: how far it is from the level on a scale of logarithms, from -5 to 5."""
    if not rate > 0:
        return -5
    return int(max(-5, min(5, round(5 * math.log(rate / level, 4)))))


def centre(k, level):
    """The rate in the middle of a step."""
    return level * 4 ** (k / 5)


def luminance(colour):
    """Relative luminance of a colour such as #171d22 (WCAG 2.2, definition of relative luminance)."""
    channels = [int(colour[place : place + 2], 16) / 255 for place in (1, 3, 5)]
    linear = [c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in channels]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


def contrast(one, other):
    """Contrast of two colours, from 1 to 21 (WCAG 2.2, definition of contrast ratio)."""
    dark, light = sorted((luminance(one), luminance(other)))
    return (light + 0.05) / (dark + 0.05)


def ink_on(colour):
    """The ink that stands out more on a colour."""
    return max((ON_DARK, ON_LIGHT), key=lambda ink: contrast(ink, colour))


def palette(dark=False):
    """Every colour of a drawing or page by its name: roles, m1 … m6, steps s-5 … s5 and the ink t-5 … t5 on them."""
    found = dict(DARK if dark else LIGHT)
    found |= {slot.role: slot.dark if dark else slot.light for slot in SLOTS}
    for k, colours in STEPS.items():
        found[f"s{k}"] = colours[dark]
        found[f"t{k}"] = ink_on(colours[dark])
    return found
