"""The report in a real browser: every reader finds all of it, on every screen and on paper."""

import html
import re
import shutil
import subprocess
import unicodedata
from contextlib import contextmanager

import pytest

from workbench.look import contrast

sync_api = pytest.importorskip("playwright.sync_api", reason="playwright drives the browser")
CHROMIUM = shutil.which("chromium")

pytestmark = [
    pytest.mark.heavy,
    pytest.mark.skipif(CHROMIUM is None, reason="no chromium is installed, so no page can be looked at"),
]

QUIET = [
    "--no-sandbox",
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
]

WIDTHS = (320, 390, 1280, 1920)

PAPER = 665
"""Pixels between the margins of an A4 page: 210 mm less twice 17, at 96 to the inch."""

POINTS_A4 = (595.3, 841.9)


@pytest.fixture(scope="module")
def browser():
    """Chromium, for all tests of this module."""
    with sync_api.sync_playwright() as play:
        found = play.chromium.launch(executable_path=CHROMIUM, args=QUIET)
        yield found
        found.close()


@pytest.fixture
def opened(browser):
    """A function that opens a report: opened(report, width, **settings of the browser's context)."""

    @contextmanager
    def opening(report, width=1280, **settings):
        context = browser.new_context(viewport={"width": width, "height": 900}, **settings)
        page = context.new_page()
        seen = {"dialogs": [], "requests": [], "complaints": []}
        page.on("dialog", lambda dialog: (seen["dialogs"].append(dialog.message), dialog.dismiss()))
        page.on("request", lambda request: seen["requests"].append(request.url))
        page.on("console", lambda message: seen["complaints"].append(message.text))
        page.on("pageerror", lambda error: seen["complaints"].append(str(error)))
        page.seen = seen
        page.goto(report.path.as_uri())
        yield page
        context.close()

    return opening


@pytest.mark.parametrize("scheme", ["light", "dark"])
@pytest.mark.parametrize("name", ["ordinary", "logarithmic", "hostile", "all_undefined", "no_null"])
def test_axe_finds_no_violation(reports, opened, name, scheme):
    axe = pytest.importorskip("axe_playwright_python.sync_playwright", reason="axe looks for barriers")
    with opened(reports[name], color_scheme=scheme, bypass_csp=True) as page:
        found = axe.Axe().run(page).response["violations"]
    told = [(one["id"], len(one["nodes"]), one["nodes"][0]["html"][:200]) for one in found]
    assert not told


def test_the_page_never_scrolls_sideways(report, opened):
    with opened(report) as page:
        for width in WIDTHS:
            page.set_viewport_size({"width": width, "height": 900})
            root = "document.documentElement"
            assert page.evaluate(f"[{root}.scrollWidth, {root}.clientWidth]") == [width, width]


def test_nothing_is_wider_than_the_paper(report, opened):
    with opened(report, PAPER) as page:
        page.emulate_media(media="print")
        assert page.evaluate("document.documentElement.scrollWidth") <= PAPER


def test_nothing_runs_and_nothing_is_fetched(report, opened):
    with opened(report) as page:
        assert page.locator("script, img, iframe, link, object, embed, foreignObject").count() == 0
        assert page.seen == {"dialogs": [], "requests": [report.path.as_uri()], "complaints": []}


@pytest.mark.parametrize("name", ["ordinary", "no_null", "hostile"])
def test_the_same_is_said_without_javascript(reports, opened, name):
    with opened(reports[name]) as page, opened(reports[name], java_script_enabled=False) as bare:
        said = page.inner_text("body")
        assert len(said) > 2000
        assert bare.inner_text("body") == said


BOXES = """
() => [...document.querySelectorAll("svg")].filter(svg => svg.getClientRects().length).map(svg => {
    const box = one => { const b = one.getBoundingClientRect();
                         return {text: one.textContent, at: [b.left, b.top, b.right, b.bottom]} };
    return {svg: box(svg), texts: [...svg.querySelectorAll("text")].map(box),
            place: (svg.closest("[id]") || {}).id};
})
"""


def overlap(one, other, slack=1):
    """Whether two boxes share more than `slack` pixels in both directions."""
    (a, b, c, d), (e, f, g, h) = one["at"], other["at"]
    return min(c, g) - max(a, e) > slack and min(d, h) - max(b, f) > slack


def outside(one, frame, slack=1):
    """Whether a box goes over the edge of another."""
    (a, b, c, d), (e, f, g, h) = one["at"], frame["at"]
    return a < e - slack or b < f - slack or c > g + slack or d > h + slack


DRAWN = ["ordinary", "logarithmic", "hostile", "zero_rejections", "all_undefined"]


def drawings(page):
    """Every drawing of a page with its texts and their boxes, at the width of a telephone and of a desk."""
    for width in (390, 1280):
        page.set_viewport_size({"width": width, "height": 900})
        yield from page.evaluate(BOXES)


@pytest.mark.parametrize("name", DRAWN)
def test_no_two_texts_of_a_drawing_overlap(reports, opened, name):
    with opened(reports[name]) as page:
        found = list(drawings(page))
    assert sum(len(one["texts"]) for one in found) > 3
    wrong = {
        f"{one['place']}: {first['text']} | {second['text']}"
        for one in found
        for place, first in enumerate(one["texts"])
        for second in one["texts"][place + 1 :]
        if overlap(first, second)
    }
    assert not wrong, "\n".join(sorted(wrong))


@pytest.mark.parametrize("name", DRAWN)
def test_no_text_leaves_its_drawing(reports, opened, name):
    with opened(reports[name]) as page:
        found = list(drawings(page))
    wrong = {
        f"{one['place']}: {text['text']}"
        for one in found
        for text in one["texts"]
        if outside(text, one["svg"])
    }
    assert not wrong, "\n".join(sorted(wrong))


CELLS = """
() => {
    const found = [];
    for (const cell of document.querySelectorAll("td, th")) {
        if (!cell.getClientRects().length) continue;
        const box = cell.getBoundingClientRect();
        const walk = document.createTreeWalker(cell, NodeFilter.SHOW_TEXT);
        while (walk.nextNode()) {
            const node = walk.currentNode;
            if (!node.data.trim() || node.parentElement.closest(".sr, svg")) continue;
            const range = document.createRange();
            range.selectNodeContents(node);
            for (const part of range.getClientRects()) {
                if (part.left < box.left - 1 || part.right > box.right + 1
                    || part.top < box.top - 1 || part.bottom > box.bottom + 1) {
                    found.push([cell.closest("table").className, cell.textContent.slice(0, 60),
                                [part.left - box.left, box.right - part.right,
                                 part.top - box.top, box.bottom - part.bottom].map(Math.round)]);
                    break;
                }
            }
        }
    }
    return found;
}
"""


def test_every_text_of_a_table_is_within_its_cell(report, opened):
    with opened(report) as page:
        for width in (320, 1280):
            page.set_viewport_size({"width": width, "height": 900})
            assert not page.evaluate(CELLS)


def test_every_text_of_a_table_is_within_its_cell_on_paper(report, opened):
    with opened(report, PAPER) as page:
        page.emulate_media(media="print")
        assert not page.evaluate(CELLS)


def test_the_first_key_leads_past_the_contents_to_the_decision(report, opened):
    with opened(report) as page:
        page.keyboard.press("Tab")
        skip = page.locator("a.skip")
        assert skip.evaluate("one => one === document.activeElement")
        box = skip.bounding_box()
        assert box["x"] >= 0 and box["y"] >= 0 and box["width"] > 50
        page.keyboard.press("Enter")
        assert page.evaluate("location.hash") == "#decision"


def test_the_keyboard_reaches_everything_that_scrolls(report, opened):
    with opened(report, 390) as page:
        page.evaluate(
            """() => document.querySelectorAll(".scroll, pre").forEach((one, at) => one.dataset.at = at)"""
        )
        wanted = page.locator(".scroll, pre").count()
        # Not every browser lets the keyboard into what scrolls unless it is told to.
        assert page.locator(".scroll[tabindex='0'], pre[tabindex='0']").count() == wanted
        reached = []
        for _ in range(page.locator("a, [tabindex]").count() + 1):
            page.keyboard.press("Tab")
            reached.append(page.evaluate("document.activeElement.dataset.at"))
    # After the last comes the first again.
    assert list(dict.fromkeys(int(one) for one in reached if one is not None)) == list(range(wanted))


def test_everything_that_scrolls_has_a_name(report, opened):
    """Any element that hides a part of itself sideways is one that the keyboard reaches, with a name."""
    with opened(report, 320) as page:
        nameless = page.evaluate("""
            () => [...document.querySelectorAll("body *")].filter(one =>
                one.scrollWidth > one.clientWidth + 1 && !one.closest("svg")
                && ["auto", "scroll", "hidden"].includes(getComputedStyle(one).overflowX)
                && !one.matches(".sr") && !(one.tabIndex === 0 && one.getAttribute("aria-label")))
            .map(one => one.outerHTML.slice(0, 100))""")
    assert not nameless


COLOURS = """
() => [getComputedStyle(document.documentElement).backgroundColor,
       [...new Set([...document.querySelectorAll("svg text")].map(one => getComputedStyle(one).fill))]]
"""


def hexadecimal(colour):
    """A computed colour as #rrggbb."""
    return "#" + "".join(f"{int(part):02x}" for part in re.findall(r"\d+", colour)[:3])


@pytest.mark.parametrize("name", ["ordinary", "logarithmic", "hostile"])
def test_dark_and_light_differ_and_the_words_of_drawings_stand_out_in_both(reports, opened, name):
    papers = []
    for scheme in ("light", "dark"):
        with opened(reports[name], color_scheme=scheme) as page:
            paper, inks = page.evaluate(COLOURS)
        assert inks
        papers.append(paper)
        assert not [ink for ink in inks if contrast(hexadecimal(ink), hexadecimal(paper)) < 3]
    assert len(set(papers)) == 2


def test_paper_is_white_whatever_the_screen_is(reports, opened):
    with opened(reports["ordinary"], color_scheme="dark") as page:
        page.emulate_media(media="print", color_scheme="dark")
        paper, inks = page.evaluate(COLOURS)
    assert hexadecimal(paper) == "#ffffff"
    assert not [ink for ink in inks if contrast(hexadecimal(ink), "#ffffff") < 3]


@pytest.fixture(scope="module")
def printed(browser, reports, tmp_path_factory):
    """A function that prints a report by name, once, and reads its pages: [(width, height, text)]."""
    if shutil.which("pdftotext") is None:
        pytest.skip("pdftotext, of poppler, reads the printed report and is not installed")
    done = {}

    def printing(name):
        if name not in done:
            page = browser.new_page()
            page.goto(reports[name].path.as_uri())
            path = tmp_path_factory.mktemp("printed") / f"{name}.pdf"
            page.pdf(path=path, prefer_css_page_size=True, print_background=True)
            page.close()
            done[name] = pages_of(path)
        return done[name]

    return printing


def pages_of(path):
    """[(width, height, text)] of the pages of a PDF file; widths and heights in points."""
    told = subprocess.run(["pdftotext", "-bbox", path, "-"], check=True, capture_output=True).stdout.decode()
    found = []
    for head, body in re.findall(r"<page ([^>]*)>(.*?)</page>", told, re.DOTALL):
        sides = dict(re.findall(r'(\w+)="([\d.]+)"', head))
        words = re.findall(r"<word [^>]*>(.*?)</word>", body)
        found.append((float(sides["width"]), float(sides["height"]), html.unescape(" ".join(words))))
    return found


def squeezed(text):
    """A text without spaces, which printing moves about, and without ligatures."""
    return "".join(unicodedata.normalize("NFKC", text).split())


PRINTED = ["ordinary", "logarithmic", "none_eligible", "undecided", "tie", "zero_rejections", "all_undefined"]
PRINTED += ["no_null"]


@pytest.mark.parametrize("name", [*PRINTED, "hostile"])
def test_it_prints_on_a4(printed, name):
    for width, height, _ in printed(name):
        assert (width, height) == pytest.approx(POINTS_A4, abs=1.5)


@pytest.mark.parametrize("name", [*PRINTED, "hostile"])
def test_no_printed_page_is_empty(printed, reports, name):
    """More is on every page than what stands in its margins."""
    pages = printed(name)
    digest = reports[name].outcome.tables.digest[:16]
    assert all(squeezed(digest) in squeezed(text) for _, _, text in pages)
    number = len(pages)
    for place, (_, _, text) in enumerate(pages, 1):
        margin = len(
            squeezed(
                f"{reports[name].outcome.study.title[:70]} Workbench report plan counts {place}/{number}"
            )
        )
        assert len(squeezed(text)) > margin + 32 + 60, (place, text)


@pytest.mark.parametrize("name", PRINTED)
def test_the_first_printed_page_holds_the_decision_and_all_that_was_asked(printed, reports, name):
    first, second = (squeezed(text) for _, _, text in printed(name)[:2])
    for wanted in (
        reports[name].outcome.study.title,
        re.sub("[\u2066-\u2069]", "", reports[name].outcome.decision.told[0]),
        "What it costs",
        "What would change this",
        "What was asked, and fixed before any result",
        "follow local codes and ask a qualified statistician",
    ):
        assert squeezed(wanted) in first
    assert "Evidence" not in first and "Whatthedatalooklike" in second


@pytest.mark.parametrize("name", ["ordinary", "hostile"])
def test_everything_on_the_screen_is_on_paper(printed, reports, opened, name):
    """Every heading of the page stands on some printed page."""
    whole = squeezed("".join(text for _, _, text in printed(name)))
    with opened(reports[name]) as page:
        heads = page.locator("h2, h3").all_inner_texts()
    assert len(heads) > 10
    assert not [head for head in heads if squeezed(head) not in whole]
