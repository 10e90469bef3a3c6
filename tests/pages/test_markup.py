"""The report as a text: what a strict parser, a reader by ear and an attacker find in it."""

import re
from decimal import ROUND_CEILING, ROUND_FLOOR, Decimal
from functools import cache
from xml.etree import ElementTree

import html5lib
import pytest

from workbench.decide import Status

HTML, SVG = "{http://www.w3.org/1999/xhtml}", "{http://www.w3.org/2000/svg}"

STATUSES = {
    "ordinary": Status.CHOSEN,
    "none_eligible": Status.NONE_ELIGIBLE,
    "undecided": Status.UNDECIDED,
    "tie": Status.TIE,
    "all_undefined": Status.NONE_ELIGIBLE,
    "no_null": Status.UNDECIDED,
}

UNSAFE = {
    "script",
    "img",
    "iframe",
    "link",
    "object",
    "embed",
    "base",
    "form",
    "input",
    "foreignObject",
    "image",
}
"""Elements that no report holds, of HTML or SVG."""

UNSEEN = set("\u202a\u202b\u202c\u202d\u202e\u2066\u2067\u2068\u2069\u0085\u009b\u2028\ue000\ufdd0\U0001fffe")
"""Letters that turn the direction of writing, or that are none."""


@cache
def tree(text):
    """The parsed page; tests read it and change nothing in it."""
    return html5lib.parse(text)


def local(element):
    """An element's name without its namespace; comments have none."""
    return element.tag.rsplit("}", 1)[-1] if isinstance(element.tag, str) else ""


def texts(root):
    """Everything a page says, in one line."""
    body = root.find(f"{HTML}body")
    return " ".join("".join(body.itertext()).split())


@pytest.mark.parametrize("name", STATUSES)
def test_the_reports_are_of_the_kinds_they_are_called(reports, name):
    assert reports[name].outcome.decision.status is STATUSES[name]


def test_nothing_is_rejected_and_everything_undefined_where_it_should_be(reports):
    rates = reports["zero_rejections"].outcome.tables.rates
    assert rates["rejections"].sum() == rates["undefined"].sum() == 0
    rates = reports["all_undefined"].outcome.tables.rates
    assert (rates["undefined"] == rates["replications"]).all()
    assert not [one for one in reports["no_null"].outcome.conditions if one.is_null]


def test_a_strict_parser_accepts_it(report):
    html5lib.HTMLParser(strict=True).parse(report.text)


def test_one_first_heading_and_none_skipped(report):
    levels = [int(local(one)[1]) for one in tree(report.text).iter() if re.fullmatch("h[1-6]", local(one))]
    assert levels.count(1) == 1 and levels[0] == 1
    skipped = [place for place in range(1, len(levels)) if levels[place] > levels[place - 1] + 1]
    assert not skipped, [levels[place - 1 : place + 1] for place in skipped]


def test_every_id_is_there_once_and_every_reference_leads_somewhere(report):
    root = tree(report.text)
    names = [one.get("id") for one in root.iter() if one.get("id") is not None]
    assert len(names) == len(set(names))
    wanted = [one.get("href").removeprefix("#") for one in root.iter(f"{HTML}a")]
    wanted += [name for one in root.iter() for name in one.get("aria-labelledby", "").split()]
    assert not set(wanted) - set(names)


def test_links_lead_within_the_page_only(report):
    assert all(one.get("href").startswith("#") for one in tree(report.text).iter(f"{HTML}a"))


def test_every_drawing_says_what_it_shows_or_is_hidden(report):
    found = list(tree(report.text).iter(f"{SVG}svg"))
    assert found
    for one in found:
        hidden = one.get("aria-hidden") == "true"
        told = one.get("role") == "img" and (one.get("aria-label") or "").strip()
        assert bool(hidden) != bool(told), ElementTree.tostring(one)[:300]


def test_every_heading_cell_says_what_it_heads(report):
    tables = list(tree(report.text).iter(f"{HTML}table"))
    assert tables
    for table in tables:
        heads = list(table.iter(f"{HTML}th"))
        assert heads
        assert not [one for one in heads if one.get("scope") not in ("col", "row", "rowgroup", "colgroup")]


def test_every_row_of_a_table_is_as_wide_as_its_head(report):
    for table in tree(report.text).iter(f"{HTML}table"):
        cells = [[one for one in row if local(one) in ("th", "td")] for row in table.iter(f"{HTML}tr")]
        widths = {sum(int(one.get("colspan", 1)) for one in row) for row in cells}
        assert len(widths) == 1, table.get("class")


def written(text):
    """(number, its last digit's unit) of a text."""
    plain = text.strip().replace(",", "").replace("\u2212", "-").removeprefix("+")
    number = Decimal(plain)
    return number, Decimal(1).scaleb(number.as_tuple().exponent)


def ends(root):
    """The <data> elements that end an interval: {element: how it is rounded}."""
    found = {}
    for parent in root.iter():
        for first, second in zip(parent, list(parent)[1:], strict=False):
            if local(first) == local(second) == "data" and (first.tail or "") == " to ":
                found |= {first: ROUND_FLOOR, second: ROUND_CEILING}
    return found


def rightly_rounded(text, value, end):
    """Whether a text tells a value: as a whole count of so many, else rounded to its own last digit."""
    if match := re.fullmatch(r"([\d,]+) of ([\d,]+)", text):
        part, whole = (int(number.replace(",", "")) for number in match.groups())
        return part / whole == float(value)
    number, unit = written(text)
    value = Decimal(value)
    if end is not None:
        # Ends may have been moved outwards by less than a unit, never inwards.
        away = value - number if end == ROUND_FLOOR else number - value
        return Decimal("-1e-12") <= away < unit + Decimal("1e-12")
    return abs(number - value) <= unit / 2 + Decimal("1e-12")


def test_every_number_with_a_value_rounds_it_rightly(report):
    root = tree(report.text)
    outward = ends(root)
    found = list(root.iter(f"{HTML}data"))
    assert found
    for one in found:
        text = "".join(one.itertext())
        assert rightly_rounded(text, one.get("value"), outward.get(one)), (text, one.get("value"))


def test_no_number_is_none_or_nan(report):
    assert not re.search(r"\b(None|nan|NaN|inf|Infinity)\b", texts(tree(report.text)))


def test_nothing_can_be_run_or_fetched(report):
    for one in tree(report.text).iter():
        assert local(one) not in UNSAFE
        for name, value in one.attrib.items():
            assert not name.lower().startswith("on")
            assert name == "href" or name.rsplit("}", 1)[-1] not in (
                "src",
                "srcset",
                "href",
                "action",
                "data",
            )
            assert "javascript:" not in value.lower()
    assert not re.search(r"url\(|@import", report.text.split("</style>")[0])


def test_hostile_texts_make_no_element_and_no_attribute_of_their_own(reports):
    """Whatever stands in the file, the page has the elements and attributes of an ordinary one."""

    def kinds(name):
        return {(local(one), key) for one in tree(reports[name].text).iter() for key in [None, *one.attrib]}

    assert not kinds("hostile") - kinds("ordinary") - kinds("undecided")


def test_hostile_texts_stand_in_the_page_escaped(reports):
    text = reports["hostile"].text
    assert "<script" not in text.lower() and "<img" not in text.lower() and "<iframe" not in text.lower()
    assert text.count("</style>") == text.count("<style>") == 1
    assert text.count("<svg ") == text.count("</svg>")
    assert text.count("<title>") == text.count("</title>") == 1
    assert "\x00" not in text and "\x07" not in text


def test_hostile_texts_are_read_as_they_were_written(reports):
    """Nothing is taken for a template or a formula, and nothing is escaped twice."""
    read = texts(tree(reports["hostile"].text))
    for piece in ("<script>alert(1)</script>", "{{ 7*7 }} {% raw %}", "{# gone #} &lt; &amp;#60;", "$x^2$"):
        assert piece in read
    assert "日本語の題名と水準の名前" in read and "שלום" in read
    assert "&amp;lt;script" not in reports["hostile"].text


def test_hostile_texts_of_the_style_sheet_end_nothing(reports):
    """The margins of a printed page hold the title as one string each."""
    sheet = reports["hostile"].text.split("<style>")[1].split("</style>")[0]
    assert "alert" in sheet and not re.search(r"[<>{]\s*script|onerror=", sheet)
    page = sheet[sheet.index("@page{") :]
    strings = re.findall(r'content:("(?:[^"\\\n]|\\.)*")', page)
    assert len(strings) >= 3
    assert sheet.count("{") == sheet.count("}")


@pytest.mark.parametrize("name", ["hostile", "unprintable"])
def test_letters_that_cannot_be_seen_stay_out_of_the_report(reports, name):
    """They stand at most where the file is shown as it was run, in an element of its own."""
    for one in tree(reports[name].text).iter():
        told = [*one.attrib.values(), one.tail or ""]
        if not (local(one) == "code" and "[simulation]" in (one.text or "")):
            told.append(one.text or "")
        assert not UNSEEN & set("".join(told)), told
