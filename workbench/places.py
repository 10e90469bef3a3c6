"""Line and column of every setting in a TOML text."""

import json
import re
import tomllib
from bisect import bisect_right

# A comma counts as a gap: outside texts it only ever parts items.
GAP = re.compile(r"(?:[ \t\r\n,]++|#[^\n]*+)*+")
BARE = re.compile(r"[A-Za-z0-9_-]++")
NAME = re.compile(r"""[A-Za-z0-9_-]++|"(?:[^"\\]|\\.)*+"|'[^']*+'""")
# A text in three quotes may end in up to two quotes of its own; a date and its time may be parted by a blank.
SINGLE = re.compile(
    r'''
    """(?:[^"\\]|\\.|""?(?!"))*+"{3,5}  |  "(?:[^"\\]|\\.)*+"
    |  \'{3}(?:[^']|''?(?!'))*+'{3,5}   |  '[^']*+'
    |  \d{4}-\d\d-\d\d[ ]\d\d:[^\s,\]}#]++
    |  [^\s,\]}#]++
    ''',
    re.VERBOSE | re.DOTALL,
)
ERROR = re.compile(r"(.*?)(?: \(at (?:line (\d+), column (\d+)|end of document)\))?", re.DOTALL)
UNCLOSED_TEXT = ("Unterminated", "Expected \"'", "Illegal character '\\n'", "Found invalid character '\\n'")
# Beginnings of what tomllib says, and what a user is told instead.
PLAIN_WORDS = {
    UNCLOSED_TEXT: "the closing quotes of a text are missing",
    "Invalid statement": "a line begins with a name, a [table] or a # comment",
    "Invalid initial": "a name is wanted here, in quotes if it holds more than letters, digits, _ and -",
    "Expected newline": "the value ends here; only a # comment may follow on its line",
    "Invalid value": "a value is wanted here; a text needs quotes around it",
    "Unclosed array": "a comma or the closing ']' of a list is missing",
    "Unclosed inline": "a comma or the closing '}' of a table is missing",
    "Unescaped": "write a backslash twice, or put the text in 'single quotes'",
    ("Invalid hex", "Escaped"): "no character has this number; write a backslash twice if one is meant",
}
# tomllib stops behind these mistakes; each begins at the last such character before.
BEGINNINGS = {"Unescaped": "\\", "Invalid hex": "\\", "Escaped": "\\", "Expected \"'": "'"}


class Places:
    """Where the keys and values of a TOML text stand, by paths such as ("vary", "spread", "equal", 2).

    `keys` holds offsets and `values` spans of characters; `headers` holds where the line below a table's
    header begins; `dotted` has the tables made by dotted keys; `closing` is the key that belongs to its end.
    The text has passed tomllib, or is the part of a text that tomllib had read when it met a repeated key.
    """

    def __init__(self, text):
        self.text, self.lines = text, line_starts(text)
        self.keys, self.values, self.headers, self.dotted, self.closing = {(): 0}, {}, {(): 0}, set(), []
        self._last_items = {}
        position, table = GAP.match(text).end(), ()
        while position < len(text):
            if text[position] == "[":
                position, table = self._header(position)
            else:
                position = self._setting(position, table)
            position = GAP.match(text, position).end()

    def find(self, path):
        """(line, column) of a value; of its key for a table with lines of its own; else as `key`."""
        span = self.span(path)
        return line_and_column(self.lines, span[0]) if span else self.key(path)

    def key(self, path):
        """(line, column) of a key, an item's value, or the nearest of these above a path not in the text."""
        return line_and_column(self.lines, self.keys[nearest(path, self.keys)])

    def span(self, path):
        """Offsets of a value's first character and of the one behind its last; None where no value stands."""
        return self.values.get(tuple(path))

    def _header(self, position):
        doubled = self.text.startswith("[[", position)
        self.closing, position = self._mention(position + 1 + doubled, ())
        table, offset = self.closing[-1]
        if doubled:
            self._last_items[table] = self._last_items.get(table, -1) + 1
            table = (*table, self._last_items[table])
        # [a] below [a.b] is where `a` is defined; the header above it only went through.
        if table not in self.headers and table not in self.dotted:
            self.keys[table] = offset
        self.headers[table] = self.text.find("\n", position) + 1 or len(self.text)
        return position + 1 + doubled, table

    def _setting(self, position, table):
        mentions, position = self._mention(position, table)
        self.dotted.update(path for path, _ in mentions[:-1])
        end = self._value(GAP.match(self.text, position + 1).end(), mentions[-1][0])
        if end == len(self.text):
            self.closing = mentions
        return end

    def _mention(self, position, table):
        """[(path, offset)] of the parts of a key below a table, and where the key ends."""
        mentions, separator = [], "."
        while separator == ".":
            found = NAME.match(self.text, GAP.match(self.text, position).end())
            name = found.group()
            table = (*table, tomllib.loads(f"name = {name}")["name"] if name[0] in "\"'" else name)
            self.keys.setdefault(table, found.start())
            mentions.append((table, found.start()))
            # A list of tables is entered at its last item.
            if table in self._last_items:
                table = (*table, self._last_items[table])
            end = GAP.match(self.text, found.end()).end()
            separator, position = self.text[end : end + 1], end + 1
        return mentions, end

    def _value(self, position, path):
        composed = self.text[position] in "[{"
        end = self._items(position, path) if composed else SINGLE.match(self.text, position).end()
        self.keys.setdefault(path, position)
        self.values[path] = (position, end)
        return end

    def _items(self, position, path):
        """Where the list or inline table ends that opens here."""
        in_table, item = self.text[position] == "{", 0
        position = GAP.match(self.text, position + 1).end()
        while position < len(self.text) and self.text[position] not in "]}":
            end = self._setting(position, path) if in_table else self._value(position, (*path, item))
            position, item = GAP.match(self.text, end).end(), item + 1
        return position + 1


def replace_setting(text, path, literal):
    """The text with one setting's value replaced by a TOML literal, or put in where there is none.

    Comments and layout stay. Raises ValueError where the result would not be the old document with this
    value alone changed: a literal that is not one value, a table with lines of its own, a list too short.
    """
    places, path = Places(text), tuple(path)
    wanted = with_value(tomllib.loads(text), path, tomllib.loads(f"value = {literal}")["value"])
    if places.span(path):
        start, end = places.span(path)
        changed = text[:start] + literal + text[end:]
    elif path in places.keys:
        raise ValueError(f"'{dotted_name(path)}' is a table with lines of its own, not a value")
    else:
        changed = with_setting(places, path, literal)
    if comparable(tomllib.loads(changed)) != comparable(wanted):
        raise ValueError(f"one TOML value wanted for '{dotted_name(path)}'; got {literal}")
    return changed


def with_setting(places, path, literal):
    """The text with a missing setting put where a reader would look for it."""
    table = path[:-1]
    home = nearest(table, places.headers.keys() | places.values.keys())
    setting = f"{dotted_name(path[len(home) :])} = {literal}"
    if home in places.values:
        return with_pair(places.text, places.values[home], setting)
    in_list = any(isinstance(part, int) for part in table)
    if home == table or in_list or nearest(table, places.keys) in places.dotted:
        return with_lines(places.text, places.headers[home], [setting])
    lines = ["", f"[{dotted_name(table)}]", f"{dotted_name(path[-1:])} = {literal}"]
    return with_lines(places.text, len(places.text), lines if places.text else lines[1:])


def with_pair(text, span, setting):
    """The text with a setting at the end of the inline table in this span."""
    start, end = span
    inside = text[start + 1 : end - 1].rstrip()
    if not inside:
        return f"{text[:start]}{{ {setting} }}{text[end:]}"
    behind = start + 1 + len(inside)
    return f"{text[:behind]}, {setting}{text[behind:]}"


def with_lines(text, offset, lines):
    """The text with lines put in at an offset where a line begins, or at its end."""
    line_end = "\r\n" if "\r\n" in text else "\n"
    before = text[:offset]
    if before and not before.endswith("\n"):
        before += line_end
    return before + "".join(line + line_end for line in lines) + text[offset:]


def with_value(holder, path, value):
    """A document with the value at the path; tables that are missing on the way are made."""
    if not path:
        return value
    part, rest = path[0], path[1:]
    if isinstance(holder, dict) and isinstance(part, str):
        return {**holder, part: with_value(holder.get(part, {}), rest, value)}
    if isinstance(holder, list) and part in range(len(holder)):
        return [*holder[:part], with_value(holder[part], rest, value), *holder[part + 1 :]]
    raise ValueError(f"nothing can be set at {part!r}: no table or list stands there that could hold it")


def comparable(document):
    """A document as a text that tells 1, 1.0 and true apart and finds nan equal to itself."""
    return json.dumps(document, sort_keys=True, default=repr)


def syntax_place(error, text):
    """(line, column, sentence) of what tomllib found wrong in a text; a repeated key at its second place."""
    message, line, column = ERROR.fullmatch(str(error)).groups()
    lines = line_starts(text)
    offset = lines[int(line) - 1] + int(column) - 1 if line else len(text)
    if message.startswith(("Cannot ", "Duplicate ")):
        return repeated_key(message, Places(text[:offset]))
    offset = min(offset, len(text.rstrip()))
    for start, mark in BEGINNINGS.items():
        if message.startswith(start):
            offset = text.rindex(mark, 0, offset)
    plain = [words for start, words in PLAIN_WORDS.items() if message.startswith(start)]
    return *line_and_column(lines, offset), plain[0] if plain else message[:1].lower() + message[1:]


def repeated_key(message, places):
    """(line, column, sentence) of the key that ends the text and must not stand there."""
    again = [(path, at) for path, at in places.closing if path in places.values and places.keys[path] < at]
    named = [(path, at) for path, at in places.closing if message.endswith(repr(names(path)))]
    path, offset = [*again, *named, places.closing[-1]][0]
    sentence = f"'{dotted_name(path)}' is written twice"
    if places.keys[path] < offset:
        sentence += f"; the first is in line {line_and_column(places.lines, places.keys[path])[0]}"
    return *line_and_column(places.lines, offset), sentence


def names(path):
    """A path without the numbers of list items."""
    return tuple(part for part in path if isinstance(part, str))


def dotted_name(path):
    """A path as a dotted key."""
    # JSON's escapes are TOML's, but for the one character that JSON leaves bare.
    quoted = (json.dumps(name, ensure_ascii=False).replace("\x7f", "\\u007f") for name in names(path))
    return ".".join(name[1:-1] if BARE.fullmatch(name[1:-1]) else name for name in quoted)


def nearest(path, known):
    """The path, or the nearest one above it, that is known."""
    return next(above for depth in range(len(path), -1, -1) if (above := tuple(path[:depth])) in known)


def line_starts(text):
    """Offsets at which lines begin."""
    return [0, *(found.end() for found in re.finditer("\n", text))]


def line_and_column(lines, offset):
    """(line, column) of a character, both counted from 1."""
    line = bisect_right(lines, offset)
    return line, offset - lines[line - 1] + 1
