"""Line and column of every setting, tried on texts whose writer kept note of where it put them."""

import json
import tomllib

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from workbench.places import Places, replace_setting, syntax_place

LITERALS = "0 -17 1_000 0xDEAD_beef 0o17 0b1_0 -0.0 +6.5e-3_0 1e6 inf -inf nan +nan true false".split()
LITERALS += [
    "1979-05-27",
    "1979-05-27 07:32:00",
    "1979-05-27T07:32:00.9-07:00",
    "1979-05-27 07:32:00.5Z",
    "07:32:00",
]
LITERALS += [
    '"# no comment"',
    '"[no.header]"',
    '"{ no = 1, table }"',
    r'"say \"no\" to \\"',
    r"'C:\no\escape\'",
    '""',
    "''",
    "'[\"mixed\"] # {'",
    '"é 😀 \\u00e9 \\U0001F600"',
    '""""""',
    "''''''",
    '"""\n[first]\nsecond = 2  # third "" \n"""',
    '""""two in front and behind"""""',
    '"""folded \\\n\n   \\""" [4, 5],\n"""',
    "'''\nit''s\n[[row]]\nkey = 1\n'''",
    "'''\\'''''",
]
NAMES = [
    "a",
    "b",
    "seed",
    "x-1",
    "_",
    "1",
    "true",
    "ä",
    "two words",
    "a.b",
    "",
    'say "hi"',
    "it's",
    "#",
    "[x]",
]
NAMES += ["tab\t", "del\x7f", "back\\slash", "line\nend", "😀"]


def tables_of(inner):
    """Small tables of what a strategy gives."""
    return st.dictionaries(names, inner, max_size=4)


literals = st.sampled_from(LITERALS)
names = st.sampled_from(NAMES)
nodes = st.recursive(
    literals,
    lambda inner: st.lists(inner, max_size=4) | tables_of(inner) | st.lists(tables_of(inner), max_size=3),
    max_leaves=30,
)


def quoted(name):
    """A name in double quotes."""
    return json.dumps(name, ensure_ascii=False).replace("\x7f", "\\u007f")


def meaning(node):
    """What a tree of literals stands for."""
    if isinstance(node, str):
        return tomllib.loads(f"value = {node}")["value"]
    if isinstance(node, list):
        return [meaning(item) for item in node]
    return {name: meaning(item) for name, item in node.items()}


def exact(content):
    """Content as a text: nan equals nan, and 1, 1.0 and true differ."""
    return json.dumps(content, sort_keys=True, default=repr)


def is_bare(name):
    return name != "" and name.isascii() and name.replace("-", "_").replace("_", "x").isalnum()


def may_have_header(node):
    return isinstance(node, dict) or (node != [] and all(isinstance(item, dict) for item in node))


class Writer:
    """A TOML text in a style of chance, with the true place of every key and value."""

    def __init__(self, chance, tree):
        self.chance, self.tree, self.text = chance, tree, ""
        self.keys, self.spans = {(): 0}, {}
        self.line_end = chance.choice(["\n", "\r\n"])
        self.table((), tree)
        if chance.random() < 0.3:
            self.text = self.text.removesuffix(self.line_end)

    def write(self, *pieces):
        self.text += self.chance.choice(pieces).replace("\n", self.line_end)

    def flip(self):
        return self.chance.random() < 0.5

    def gap(self):
        self.write("", "", " ", "\n  ", "  # [4, 5], \"{'\n", "\t\n\n# ]\n", "#,\n")

    def name(self, name):
        spellings = [name] if is_bare(name) else [quoted(name)]
        if name.isprintable() and "'" not in name:
            spellings.append(f"'{name}'")
        self.write(*spellings, quoted(name))

    def key(self, path, parts):
        """Write a dotted key below a path; the numbers of list items have no letters."""
        between = ""
        for part in parts:
            path = (*path, part)
            if isinstance(part, str):
                self.write(between, between and " . ")
                start = len(self.text)
                self.keys.setdefault(path, start)
                self.name(part)
                between = "."
        return start

    def value(self, path, node):
        start = len(self.text)
        self.keys.setdefault(path, start)
        if isinstance(node, str):
            self.write(node)
        elif isinstance(node, list):
            self.list(path, node)
        else:
            self.inline_table(path, node)
        self.spans[path] = (start, len(self.text))

    def list(self, path, items):
        self.write("[")
        for number, item in enumerate(items):
            self.gap()
            self.value((*path, number), item)
            self.gap()
            self.write(*([","] if number < len(items) - 1 else ["", ","]))
        self.gap()
        self.write("]")

    def inline_table(self, path, node):
        self.write("{", "{ ")
        comma = ""
        for parts, leaf in self.parted(node):
            self.write(comma)
            self.key(path, parts)
            self.write("=", " = ", "\t= ")
            self.value((*path, *parts), leaf)
            self.write("", " ")
            comma = ", "
        self.write("}")

    def parted(self, node, parts=()):
        """(parts, leaf): the settings of a table, some reached by dotted keys."""
        for name, leaf in node.items():
            if isinstance(leaf, dict) and leaf and self.flip():
                yield from self.parted(leaf, (*parts, name))
            else:
                yield (*parts, name), leaf

    def table(self, path, node):
        later = []
        for parts, leaf in self.parted(node):
            if may_have_header(leaf) and self.flip():
                later.append((parts, leaf))
            else:
                self.write("", "  ", "# x = [\n")
                self.key(path, parts)
                self.write("=", " = ", "\t= ")
                self.value((*path, *parts), leaf)
                self.write("\n", "  # '\n", "#=\n", "\n\n")
        for parts, leaf in later:
            self.section((*path, *parts), leaf)

    def section(self, path, node):
        if isinstance(node, list):
            for number, item in enumerate(node):
                self.header((*path, number), "[[", "]]")
                self.table((*path, number), item)
        elif node and all(may_have_header(leaf) for leaf in node.values()) and self.flip():
            for name, leaf in node.items():
                self.section((*path, name), leaf)
            if self.flip():
                self.header(path, "[", "]")
        else:
            self.header(path, "[", "]")
            self.table(path, node)

    def header(self, path, opening, closing):
        self.write(opening, f"  {opening} ")
        self.keys[path] = self.key((), path)
        self.write(closing, f" {closing}")
        self.write("\n", "  # [b]\n", "#[b]\n", "\n\n")


@st.composite
def documents(draw):
    """A written document."""
    tree = draw(st.dictionaries(names, nodes, max_size=6))
    return Writer(draw(st.randoms(use_true_random=True)), tree)


def offset_at(text, place):
    """The offset of a (line, column)."""
    line, column = place
    above = text.split("\n")[: line - 1]
    return sum(len(row) + 1 for row in above) + column - 1


def tables(node, path=()):
    """Paths of all tables of a tree."""
    if isinstance(node, dict):
        yield path
    if not isinstance(node, str):
        for part, inner in node.items() if isinstance(node, dict) else enumerate(node):
            yield from tables(inner, (*path, part))


def set_in(content, path, value):
    """Set a value in nested tables and lists."""
    for part in path[:-1]:
        content = content[part] if isinstance(content, list) else content.setdefault(part, {})
    content[path[-1]] = value


def only_added(old, new):
    """Whether taking one stretch out of the new text gives the old one."""
    before = next((n for n, pair in enumerate(zip(old, new, strict=False)) if len(set(pair)) > 1), len(old))
    return new.endswith(old[before:])


tried = settings(deadline=None, derandomize=True, max_examples=90)


@tried
@given(documents())
def test_the_writer_of_these_tests_writes_the_document_it_was_given(document):
    assert exact(tomllib.loads(document.text)) == exact(meaning(document.tree))


@tried
@given(documents())
def test_every_key_is_found_where_it_was_written(document):
    places = Places(document.text)
    found = {path: offset_at(document.text, places.key(path)) for path in document.keys}
    assert found == document.keys


@tried
@given(documents())
def test_every_value_is_found_where_it_was_written(document):
    places = Places(document.text)
    assert {path: places.span(path) for path in document.spans} == document.spans
    found = {path: offset_at(document.text, places.find(path)) for path in document.spans}
    assert found == {path: start for path, (start, _) in document.spans.items()}


@tried
@given(documents())
def test_the_text_found_at_a_path_reads_back_to_the_value_at_that_path(document):
    places, content = Places(document.text), tomllib.loads(document.text)
    for path in document.spans:
        value = content
        for part in path:
            value = value[part]
        end = places.span(path)[1]
        written = document.text[offset_at(document.text, places.find(path)) : end]
        assert exact(tomllib.loads(f"value = {written}")["value"]) == exact(value)


@tried
@given(documents())
def test_a_table_with_lines_of_its_own_has_no_span_and_is_found_at_its_key(document):
    places = Places(document.text)
    for path in document.keys.keys() - document.spans.keys():
        assert places.span(path) is None
        assert offset_at(document.text, places.find(path)) == document.keys[path]


@tried
@given(documents())
def test_a_path_that_is_not_there_is_found_at_the_nearest_key_above_it(document):
    places = Places(document.text)
    for path, offset in document.keys.items():
        for missing in [(*path, "missing"), (*path, "missing", 3, "more"), (*path, 99)]:
            assert offset_at(document.text, places.find(missing)) == offset
            assert offset_at(document.text, places.key(missing)) == offset
            assert places.span(missing) is None


@tried
@given(documents(), st.data())
def test_replacing_a_value_changes_no_other_character(document, data):
    if not document.spans:
        return
    path = data.draw(st.sampled_from(sorted(document.spans, key=repr)))
    literal = data.draw(literals)
    changed = replace_setting(document.text, path, literal)
    start, end = document.spans[path]
    assert changed == document.text[:start] + literal + document.text[end:]
    wanted = meaning(document.tree)
    set_in(wanted, path, meaning(literal))
    assert exact(tomllib.loads(changed)) == exact(wanted)


@tried
@given(documents(), st.data())
def test_a_missing_setting_is_put_in_and_nothing_else_changes(document, data):
    table = data.draw(st.sampled_from(sorted(tables(document.tree), key=repr)))
    path = (*table, *data.draw(st.sampled_from([("new",), ("new 😀", "a.b"), ("new", "\x7f", "\n")])))
    literal = data.draw(literals)
    changed = replace_setting(document.text, path, literal)
    wanted = meaning(document.tree)
    set_in(wanted, path, meaning(literal))
    assert exact(tomllib.loads(changed)) == exact(wanted)
    assert only_added(document.text, changed)
    assert ("\r\n" in changed) <= ("\r\n" in document.text)


@tried
@given(documents(), st.data())
def test_a_table_with_lines_of_its_own_is_not_replaced(document, data):
    path = data.draw(st.sampled_from(sorted(document.keys.keys() - document.spans.keys(), key=repr)))
    with pytest.raises(ValueError, match="lines of its own"):
        replace_setting(document.text, path, "1")


@tried
@given(documents(), st.data())
def test_a_damaged_text_gives_a_place_inside_it_and_a_sentence(document, data):
    start = data.draw(st.integers(0, len(document.text)))
    piece = data.draw(
        st.sampled_from(["", "[", "]", "{", "}", '"', "'", "\\", "=", ",", ".", "\n", "#", "a", "\x01"])
    )
    text = document.text[:start] + piece + document.text[start + data.draw(st.integers(0, 3)) :]
    try:
        tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        line, column, sentence = syntax_place(error, text)
        assert 1 <= line <= text.count("\n") + 1
        assert 1 <= column <= len(text.split("\n")[line - 1]) + 1
        assert sentence
        assert "(at " not in sentence


@tried
@given(documents(), st.data())
def test_whatever_is_written_a_second_time_is_named_with_both_places(document, data):
    # The end of the text belongs to its last table; one of that table's settings is written there again.
    places = Places(document.text)
    last = max(places.headers, key=places.headers.get)
    again = [path for path in document.spans if path[: len(last)] == last and len(path) == len(last) + 1]
    if not again:
        return
    path = data.draw(st.sampled_from(sorted(again, key=repr)))
    text = f"{document.text}\n  {quoted(path[-1])} = [\n1]  # again\n"
    with pytest.raises(tomllib.TOMLDecodeError) as raised:
        tomllib.loads(text)
    line, column, sentence = syntax_place(raised.value, text)
    assert (line, column) == (document.text.count("\n") + 2, 3)
    assert "is written twice" in sentence
    assert sentence.endswith(f"line {places.key(path)[0]}")


LAP_SHEAR = """\
format = 1

[study]
title   = "Lap-shear strength of an adhesive over four cure schedules"
outcome = "lap-shear strength"
unit    = "MPa"
compare = "means"          # what the null hypothesis says is equal between the groups:
                           # "means" | "medians" | "trimmed means" | "geometric means" | "distributions"
scale   = "additive"       # "additive": value = location + spread * shape
                           # "multiplicative": value = location * exp(spread * shape)
centre  = 21.0             # the common location when nothing differs (default 0; 1 on the multiplicative scale)
alpha   = 0.05             # one level, or a list: criteria and decision use the first, every level is tabulated
note    = "Invented figures, for demonstration."

[groups]
names = ["20 C", "40 C", "60 C", "80 C"]     # optional; defaults 1, 2, 3 …

# A factor is a table under [vary]; its keys are the names the user gives to the levels.
# All levels of all factors are crossed. A factor left out has one level, its default.
[vary.sizes]                                  # required
even   = [12, 12, 12, 12]
uneven = [5, 8, 12, 20]

[vary.shape]                                  # default: normal
normal = { family = "normal" }
skewed = { family = "lognormal", sigma = 0.6 }

[vary.spread]                                 # standard deviations (of the logarithm on the multiplicative scale); default 1
equal  = [1.5, 1.5, 1.5, 1.5]
rising = [1.0, 1.5, 2.0, 3.0]

[vary.difference]                             # what is added to (multiplied onto) each group's compared quantity; default none
none     = [0, 0, 0, 0]
one_high = [0, 0, 0, 2.0]

[vary.disturbance]                            # what happens to the data on the way to the desk; default none
clean   = []
rounded = [{ kind = "round", to = 0.5 }]

[[leave_out]]                                 # combinations not wanted: every factor named must match
shape = "skewed"
disturbance = "rounded"

[methods]
use = ["classical_f", "welch_f", "brown_forsythe_f", "kruskal_wallis", "written_sop"]

[methods.routes.written_sop]                  # a two-stage rule, judged as one method
check     = "levene_median"
level     = 0.05
if_passed = "classical_f"                     # a method, or a further table with check / level / if_passed / if_failed
if_failed = "welch_f"

[criteria]
# admit = ["kruskal_wallis"]                  # let in methods that answer another question than the one asked
# tie   = 0.01                                # detection rates closer than this count as equal
size  = "liberal"                             # Bradley 1978: "liberal" 0.5–1.5 alpha, "stringent" 0.9–1.1 alpha,
                                              # or { lower = 0.0, upper = 0.06 }
power = { at = "one_high", least = 0.80 }     # the difference that must not be missed, and how often it must be found
confidence = 0.95                             # that every verdict, comparison and interval of one report is right at once

[simulation]
seed         = 20261201
replications = 100_000                        # per condition
"""  # noqa: E501


def standing_at(text, place, length):
    """The characters that begin at a place."""
    start = offset_at(text, place)
    return text[start : start + length]


@pytest.mark.parametrize(
    ("path", "place", "value"),
    [
        (("format",), (1, 10), "1"),
        (("study", "alpha"), (12, 11), "0.05"),
        (("groups", "names", 3), (16, 34), '"80 C"'),
        (("vary", "sizes", "uneven", 1), (22, 14), "8"),
        (("vary", "shape", "skewed", "sigma"), (26, 42), "0.6"),
        (("vary", "spread", "equal", 2), (29, 21), "1.5"),
        (("vary", "disturbance", "clean"), (37, 11), "[]"),
        (("vary", "disturbance", "rounded", 0, "to"), (38, 35), "0.5"),
        (("leave_out", 0, "shape"), (41, 9), '"skewed"'),
        (("methods", "routes", "written_sop", "level"), (49, 13), "0.05"),
        (("criteria", "power", "at"), (58, 16), '"one_high"'),
        (("simulation", "replications"), (63, 16), "100_000"),
    ],
)
def test_the_lap_shear_experiment_gives_the_place_of_its_values(path, place, value):
    places = Places(LAP_SHEAR)
    assert places.find(path) == place
    assert standing_at(LAP_SHEAR, place, len(value)) == value
    start, end = places.span(path)
    assert LAP_SHEAR[start:end] == value


@pytest.mark.parametrize(
    ("path", "place", "written"),
    [
        ((), (1, 1), "format"),
        (("vary",), (20, 2), "vary.sizes"),
        (("vary", "spread"), (28, 7), "spread]"),
        (("vary", "spread", "equal"), (29, 1), "equal"),
        (("vary", "spread", "sloping"), (28, 7), "spread]"),
        (("vary", "spred"), (20, 2), "vary.sizes"),
        (("leave_out",), (40, 3), "leave_out]]"),
        (("leave_out", 1), (40, 3), "leave_out]]"),
        (("methods", "routes"), (47, 10), "routes.written_sop]"),
        (("methods",), (44, 2), "methods]"),
        (("criteria", "power", "most"), (58, 1), "power"),
        (("nowhere", "at", "all"), (1, 1), "format"),
    ],
)
def test_the_lap_shear_experiment_gives_the_place_of_its_keys(path, place, written):
    assert Places(LAP_SHEAR).key(path) == place
    assert standing_at(LAP_SHEAR, place, len(written)) == written


def test_replacing_the_seed_of_the_lap_shear_experiment_leaves_its_comments_and_columns():
    changed = replace_setting(LAP_SHEAR, ("simulation", "seed"), "7")
    assert changed == LAP_SHEAR.replace("seed         = 20261201", "seed         = 7")


def test_a_row_that_looks_like_a_header_is_an_item_of_its_list():
    text = "a = [\n  [1, 2],\n  [4, 5]\n]\nb = 3\n"
    assert Places(text).find(("a", 1, 0)) == (3, 4)
    assert Places(text).key(("b",)) == (5, 1)


def test_a_header_of_its_own_is_the_place_of_a_table_that_an_earlier_header_went_through():
    assert Places("[a.b]\n[a]\n").key(("a",)) == (2, 2)


def test_the_settings_below_a_list_of_tables_belong_to_its_last_item():
    places = Places("[[a]]\nx = 1\n[a.b]\ny = 2\n[[a]]\n[[a.c]]\n[a.c.d]\nz = 3\n")
    assert places.find(("a", 0, "b", "y")) == (4, 5)
    assert places.find(("a", 1, "c", 0, "d", "z")) == (8, 5)
    assert places.key(("a", 1)) == (5, 3)


@pytest.mark.parametrize(
    ("text", "path", "changed"),
    [
        ("", ("seed",), "seed = 7\n"),
        ("", ("run", "seed"), "[run]\nseed = 7\n"),
        ("# note\nx = 1", ("seed",), "seed = 7\n# note\nx = 1"),
        ("[run] # here\nx = 1\n", ("run", "seed"), "[run] # here\nseed = 7\nx = 1\n"),
        ("[run]", ("run", "seed"), "[run]\nseed = 7\n"),
        ("run = { x = 1 }\n", ("run", "seed"), "run = { x = 1, seed = 7 }\n"),
        ("run = {}\n", ("run", "seed"), "run = { seed = 7 }\n"),
        ("run = {}\n", ("run", "a b", "seed"), 'run = { "a b".seed = 7 }\n'),
        ("# note\nrun.x = 1\n[other]\n", ("run", "seed"), "run.seed = 7\n# note\nrun.x = 1\n[other]\n"),
        ("[a]\nrun.x = 1\n", ("a", "run", "seed"), "[a]\nrun.seed = 7\nrun.x = 1\n"),
        ("[a]\nx = 1", ("run", "seed"), "[a]\nx = 1\n\n[run]\nseed = 7\n"),
        ("[run.a]\r\nx = 1\r\n", ("run", "seed"), "[run.a]\r\nx = 1\r\n\r\n[run]\r\nseed = 7\r\n"),
        ("[run]\nx = 1\n", ("run", "a", "seed"), "[run]\nx = 1\n\n[run.a]\nseed = 7\n"),
        ("[[a]]\n[[a]]\n", ("a", 0, "run", "seed"), "[[a]]\nrun.seed = 7\n[[a]]\n"),
        ("a = [{}, { x = 1 }]\n", ("a", 1, "seed"), "a = [{}, { x = 1, seed = 7 }]\n"),
    ],
)
def test_a_missing_setting_goes_where_its_table_is_written(text, path, changed):
    assert replace_setting(text, path, "7") == changed


@pytest.mark.parametrize(
    ("path", "literal"),
    [
        (("a",), ""),
        (("a",), "seven"),
        (("a",), "1, 2"),
        (("a",), "1\nc = 2"),
        (("new",), "1\n[table]"),
        (("b", 0), "1 # and the rest"),
        (("b", 2), "1"),
        (("b", -1), "1"),
        (("b", "x"), "1"),
        (("a", "x"), "1"),
        (("a", 0), "1"),
        (("new", 0), "1"),
        ((3,), "1"),
        ((3, "x"), "1"),
        ((), "1"),
    ],
)
def test_what_would_not_change_just_the_one_value_is_refused(path, literal):
    with pytest.raises(ValueError):
        replace_setting("a = 1\nb = [1, 2]\n", path, literal)


def told(text):
    """(line, column, sentence) of what is wrong in a text."""
    with pytest.raises(tomllib.TOMLDecodeError) as raised:
        tomllib.loads(text)
    return syntax_place(raised.value, text)


@pytest.mark.parametrize(
    ("text", "line", "column", "name", "first"),
    [
        ("a = 1\nb = 2\n  a = 3 # c\nd = 4\n", 3, 3, "a", 1),
        ("a = 1\r\nb = 2\r\na = [\r\n3]\r\n", 3, 1, "a", 1),
        ("a = 1\na = 2", 2, 1, "a", 1),
        ("[x]\n[y]\n[ x ] # c\n", 3, 3, "x", 1),
        ("[x.y]\n[x]\n[x.y]", 3, 4, "x.y", 1),
        ("[x]\ny.z = 1\n[x.y]\n", 3, 4, "x.y", 2),
        ("x.y = 1\nx.z = 1\nx.'y' = 2\n", 3, 3, "x.y", 1),
        ("a = 1\n\na.b = 2\n", 3, 1, "a", 1),
        ("a.b = 1\na = 2\n", 2, 1, "a", 1),
        ("a = 1\n[a.b]\n", 2, 2, "a", 1),
        ("a = {b = 1}\n[a.b]\n", 2, 2, "a", 1),
        ("a = {b = 1}\na.b.c = 1\n", 2, 1, "a", 1),
        ("[a.b]\n[a]\nb.c = 1\n", 3, 1, "a.b", 1),
        ("[[a.b]]\n[a]\nb.c = 1\n", 3, 1, "a.b", 1),
        ("a = [1]\n[[a]]\n", 2, 3, "a", 1),
        ("[a]\n[[a]]\n", 2, 3, "a", 1),
        ("[[a]]\n[a]\n", 2, 2, "a", None),
        ("[[a]]\nx = 1\n[[a]]\nx = 1\nx = 2\n", 5, 1, "a.x", 4),
        ("[[a]]\n[a.b]\n[[a]]\n[a.b]\n[a.b]\n", 5, 4, "a.b", 4),
        ("t = { a = 1, b = 2, a = 3 }\n", 1, 21, "t.a", 1),
        ("t = { a.b = 1, a = 3 }\n", 1, 16, "t.a", 1),
        ("t = { a = { c = 1 }, a.b = 3 }\n", 1, 22, "t.a", 1),
        ("t = [\n{ a = 1 },\n{ 'a b' = 1, \"a b\" = 1 }]\n", 3, 14, 't."a b"', 3),
        ("t = { u = { a = 1, a = { v = 1 } }, w = 1 }\n", 1, 20, "t.u.a", 1),
    ],
)
def test_a_repeated_key_is_told_at_its_second_place(text, line, column, name, first):
    ending = f"; the first is in line {first}" if first else ""
    assert told(text) == (line, column, f"'{name}' is written twice{ending}")


@pytest.mark.parametrize(
    ("text", "line", "column", "words"),
    [
        ("a = 1\nb = liberal\n", 2, 5, "a text needs quotes"),
        ("a = 20 000\n", 1, 8, "the value ends here"),
        ("a = 'x\nb = 1\n", 1, 5, "closing quotes"),
        ("a = 'x\nb = 'y'\n", 1, 7, "closing quotes"),
        ('a = "x\nb = 1\n', 1, 7, "closing quotes"),
        ('a = """x\n\n', 1, 9, "closing quotes"),
        ("a = '''x\ny\n\n", 1, 7, "closing quotes"),
        ("a = [1,\n  2\n\n", 2, 4, "the closing ']' of a list is missing"),
        ("a = [1 2]\n", 1, 8, "a comma or the closing ']'"),
        ("a = { b = 1\n", 1, 12, "a comma or the closing '}'"),
        ("a = 1\n= 2\n", 2, 1, "a line begins with a name"),
        ("ä = 1\n", 1, 1, "a line begins with a name"),
        ("a. = 1\n", 1, 4, "a name is wanted here"),
        ('a = "C:\\data"\n', 1, 8, "write a backslash twice, or"),
        ('a = "C:\\users"\n', 1, 8, "no character has this number; write"),
        ('a = "\\', 1, 6, "write a backslash twice, or"),
        ('a = "\\ud800"\n', 1, 6, "no character has this number"),
        ("[a\n", 1, 3, "expected ']' at the end"),
        ("a\n", 1, 2, "expected '=' after"),
        ("# \x01\n", 1, 3, "found invalid character"),
    ],
)
def test_a_syntax_error_is_told_in_plain_words_at_its_place(text, line, column, words):
    found_line, found_column, sentence = told(text)
    assert (found_line, found_column) == (line, column)
    assert words in sentence
    assert sentence[0].islower()
    assert "(at " not in sentence


def test_an_error_without_a_place_is_told_at_the_end_of_the_text():
    assert syntax_place(tomllib.TOMLDecodeError("Something new"), "a = 1\n") == (1, 6, "something new")
