"""Texts: what users wrote, made safe and short enough to print."""

import unicodedata

OPEN, CLOSE = "\u2068", "\u2069"
"""Marks around a user's text within a sentence, so that its direction of writing stays its own affair."""

CONTROLS = {"Cc", "Cs", "Co", "Cn", "Zl", "Zp"}
"""Classes of characters that no text is printed with: controls, lone surrogates, private and unassigned ones."""

DIRECTIONS = set("\u202a\u202b\u202c\u202d\u202e\u2066\u2067\u2068\u2069\u200e\u200f\u061c")
"""Characters that turn the direction of writing; a text's own letters do that well enough."""

LONGEST = 60
"""Letters of a name within a sentence."""


def cleaned(text):
    """A text on one line without characters that cannot be seen."""
    kept = (
        " " if letter.isspace() and letter != "\u00a0" else letter
        for letter in str(text)
        if letter.isspace() or not (letter in DIRECTIONS or unicodedata.category(letter) in CONTROLS)
    )
    return " ".join("".join(kept).split(" ")).strip()


def printable(text):
    """A text of several lines with a mark in the place of every character that a page cannot hold."""
    return "".join(
        "\ufffd" if unicodedata.category(letter) in CONTROLS and letter not in "\n\t" else letter
        for letter in text
    )


def shortened(text, most=LONGEST):
    """A cleaned text of at most so many letters."""
    found = cleaned(text)
    return found if len(found) <= most else found[: most - 1].rstrip() + "…"


def isolated(text, most=LONGEST):
    """A user's text for the middle of a sentence."""
    return f"{OPEN}{shortened(text, most)}{CLOSE}"


def bare(text):
    """A sentence without the marks around users' texts, for terminals and plain data."""
    return str(text).replace(OPEN, "").replace(CLOSE, "")
