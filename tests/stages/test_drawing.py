"""Panels: coordinates, scales, text that fits, and the same drawing as SVG and as PNG."""

import io
import re
from xml.etree import ElementTree

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from PIL import Image

from workbench import texts
from workbench.look import SLOTS, palette
from workbench.report import shown
from workbench.report.axes import Axis, log_ticks, pushed_apart
from workbench.report.drawing import MARKS, Drawing, document, fitted, inline, number, painted, png

tried = settings(max_examples=200, derandomize=True, deadline=None)


def sample():
    """A drawing with one item of each kind."""
    drawing = Drawing(100, 50, "A <sample> & more")
    drawing.box(10, 10, 20, 30, "high")
    drawing.line([(0, 0), (100, 50)], "ink", 2, (4, 2))
    drawing.disc(70, 25, 10, "low")
    drawing.text(50, 25, "a < b & $x^2$", "ink", 10)
    return drawing


def test_an_svg_file_is_well_formed_with_its_size_and_what_it_says():
    root = ElementTree.fromstring(document(sample(), palette(), 180))
    assert (
        root.get("width") == "180mm"
        and root.get("height") == "90.00mm"
        and root.get("viewBox") == "0 0 100 50"
    )
    assert root.find("{*}title").text == "A <sample> & more"
    assert root.find("{*}text").text == "a < b & $x^2$"


def test_a_page_colours_by_role_and_a_file_by_colour():
    assert 'fill="var(--high)"' in inline(sample()) and "#" not in inline(sample())
    assert palette()["high"] in document(sample(), palette(), 90) and "var(" not in document(
        sample(), palette(), 90
    )


def test_a_drawing_that_says_nothing_is_hidden_from_readers():
    assert 'aria-hidden="true"' in inline(Drawing(5, 5)) and 'role="img"' in inline(sample())


def test_a_painted_drawing_has_its_colours_at_its_places():
    image = np.asarray(painted(sample(), palette(), 100, 254)) / 255
    assert image.shape[:2] == (500, 1000)

    def colour(x, y):
        return "#" + "".join(f"{round(255 * part):02x}" for part in image[int(y * 10), int(x * 10), :3])

    assert colour(15, 30) == palette()["high"]  # inside the box, which hangs from y = 10 downwards
    assert colour(70, 20) == palette()["low"]
    assert colour(5, 45) == palette()["paper"]


@pytest.mark.parametrize("kind", [slot.mark for slot in SLOTS])
def test_a_hollow_mark_is_paper_within_and_its_own_colour_around(kind):
    for hollow in (False, True):
        drawing = Drawing(20, 20)
        drawing.mark(kind, 10, 10, "m1", 12, hollow)
        image = np.asarray(painted(drawing, palette(), 20, 254)) / 255
        middle = image[100, 100, :3]
        assert np.allclose(middle, 1.0) == hollow
    assert kind == "circle" or kind in MARKS


@tried
@given(st.floats(-1e5, 1e5))
def test_a_coordinate_keeps_one_decimal(value):
    text = number(value)
    assert re.fullmatch(r"-?\d*(\.\d)?", text) and abs(float(text) - value) <= 0.0501


@tried
@given(st.text(max_size=80), st.floats(20, 200), st.floats(8, 14))
def test_a_fitted_text_begins_like_the_text_and_ends_in_dots_where_it_was_cut(text, width, size):
    found = fitted(text, width, size)
    assert found == text or (found.endswith("…") and text.startswith(found[:-1]))


def test_wide_letters_take_more_room():
    assert len(fitted("i" * 50, 60, 10)) > len(fitted("n" * 50, 60, 10)) > len(fitted("M" * 50, 60, 10))
    assert len(fitted("漢" * 50, 60, 10)) <= 6


@tried
@given(st.floats(1e-6, 1e6), st.floats(1.01, 1e4), st.booleans())
def test_ticks_lie_on_their_axis_in_order(low, ratio, log):
    axis = Axis(low, low * ratio, 0, 200, log)
    ticks = axis.ticks()
    assert 1 <= len(ticks) <= 9 and ticks == sorted(ticks)
    assert all(-1e-6 <= axis(tick) <= 200 + 1e-6 for tick in ticks)


def test_an_axis_is_straight_on_its_own_scale():
    assert Axis(0, 10, 0, 100)(2.5) == 25 and Axis(1, 100, 0, 100, log=True)(10) == pytest.approx(50)
    assert Axis(0, 10, 100, 0)(12) == 0  # outside values lie on the nearer end
    assert log_ticks(0.002, 0.1, 5) == [0.002, 0.005, 0.01, 0.02, 0.05, 0.1]


@tried
@given(st.lists(st.floats(0, 200), min_size=1, max_size=6))
def test_labels_keep_their_distance_and_their_order(wanted):
    found = pushed_apart(wanted, 12, 0, 200)
    order = np.argsort(wanted, kind="stable")
    assert (
        (np.diff(found[order]) > 12 - 0.5).all() and found.min() > -0.5 and found.max() < 200.5
    )  # half a pixel


@pytest.mark.parametrize(
    ("value", "digits", "counts", "text"),
    [
        (0.0501, 3, (501, 10000), "0.050"),
        (0.0, 3, (0, 10000), "0 of 10,000"),
        (1.0, 2, (500, 500), "500 of 500"),
        (0.0001, 3, (1, 10000), "<\u00a00.001"),
        (0.9999, 3, (9999, 10000), ">\u00a00.999"),
        (0.0, 3, (None, None), "0"),
    ],
)
def test_a_rate_is_never_nought_or_one_unless_it_is(value, digits, counts, text):
    assert shown.rate(value, digits, *counts).text == text


def test_differences_carry_a_sign_and_intervals_are_rounded_outwards():
    assert shown.signed(0.0434, 3).text == "+0.043" and shown.signed(-0.0434, 3).text == "\u22120.043"
    assert shown.signed(0.0001, 3).text == "0.000"
    assert shown.span(0.04567, 0.05432, 3).text == "0.0456 to 0.0544"
    assert shown.signed_span(-0.00123, 0.0456, 3).text == "\u22120.0013 to 0.0456"


def test_a_number_on_a_page_has_its_full_value_beside_it():
    assert shown.rate(0.0501, 3).__html__() == '<data value="0.0501">0.050</data>'
    assert shown.span(0.04567, 0.05432, 3).__html__().count("<data") == 2


def test_texts_of_users_lose_what_cannot_be_seen_and_nothing_else():
    assert texts.cleaned(" a\u202eb\x00c\td\n ") == "abc d"
    assert texts.cleaned("a  b\u00a0c é 漢 שלום") == "a  b\u00a0c é 漢 שלום"
    assert texts.shortened("x" * 100) == "x" * 59 + "…"
    assert texts.bare(texts.isolated("name")) == "name"


def test_prose_is_escaped_and_isolates_users_texts():
    told = shown.prose(f"Use {texts.isolated('<b>')} & go")
    assert told == 'Use <bdi class="q">&lt;b&gt;</bdi> &amp; go'


def test_true_quantities_have_the_digits_of_their_spread_and_no_false_ones():
    group = {"mean": 18.0, "sd": 2.0, "skewness": 7.8e-15, "excess_kurtosis": -5.3e-8, "median": -0.001}
    names = ("mean", "median", "sd", "skewness", "excess_kurtosis")
    assert shown.quantities(group, names) == ["18.00", "0.00", "2.00", "0.00", "0.00"]
    wide = {"mean": 1234567.8, "sd": 4321.0, "skewness": None}
    assert shown.quantities(wide, ("mean", "sd", "skewness")) == ["1,234,568", "4,321", "–"]
    assert shown.quantities({"mean": -0.0123, "sd": None}, ("mean", "sd")) == ["\u22120.01", "–"]


def test_a_png_file_is_the_image_with_its_size_on_paper():
    image = painted(sample(), palette(), 90)
    kept = Image.open(io.BytesIO(png(image)))
    assert np.array_equal(np.asarray(kept), np.asarray(image)) and kept.mode == "RGB"
    assert kept.size[0] / kept.info["dpi"][0] * 25.4 == pytest.approx(90, abs=0.1)
