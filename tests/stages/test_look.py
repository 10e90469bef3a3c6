"""Colours stand out from their ground and from each other for four kinds of sight; marks and steps do as they say."""

import re
from itertools import combinations, pairwise

import numpy as np
import pytest

from workbench import look

THEMES = {"light": look.palette(), "dark": look.palette(dark=True)}

SIGHTS = {
    "normal": np.eye(3),
    "protanopia": np.array(
        [[0.152286, 1.052583, -0.204868], [0.114503, 0.786281, 0.099216], [-0.003882, -0.048116, 1.051998]]
    ),
    "deuteranopia": np.array(
        [[0.367322, 0.860646, -0.227968], [0.280085, 0.672501, 0.047413], [-0.011820, 0.042940, 0.968881]]
    ),
    "tritanopia": np.array(
        [[1.255528, -0.076749, -0.178779], [-0.078411, 0.930809, 0.147602], [0.004733, 0.691367, 0.303900]]
    ),
}
"""What each kind of sight makes of linear sRGB: Machado, Oliveira & Fernandes (2009), IEEE Transactions on
Visualization and Computer Graphics 15, 1291-1298, severity 1.0. Compared with machado2010.py of colour-science/colour;
the paper itself was not read."""

CONES = np.array(
    [
        [0.4122214708, 0.5363325363, 0.0514459929],
        [0.2119034982, 0.6806995451, 0.1073969566],
        [0.0883024619, 0.2817188376, 0.6299787005],
    ]
)
OPPONENTS = np.array(
    [
        [0.2104542553, 0.7936177850, -0.0040720468],
        [1.9779984951, -2.4285922050, 0.4505937099],
        [0.0259040371, 0.7827717662, -0.8086757660],
    ]
)
"""Linear sRGB to OKLab on both sides of a cube root: Ottosson (2020), A perceptual color space for image processing,
bottosson.github.io/posts/oklab (public copies that agree to the digit)."""

LINEAR_FROM_XYZ = np.array(
    [
        [3.2404542, -1.5371385, -0.4985314],
        [-0.9692660, 1.8760108, 0.0415560],
        [0.0556434, -0.2040259, 1.0572252],
    ]
)
"""CIE XYZ to linear sRGB: Lindbloom, RGB/XYZ Matrices, sRGB at D65 (from memory)."""

each_theme = pytest.mark.parametrize("theme", THEMES)
each_sight = pytest.mark.parametrize("sight", SIGHTS)


def linear(colour):
    """(3,) linear red, green and blue of a colour such as #171d22, shares of 1 (IEC 61966-2-1; from memory)."""
    channels = np.array([int(colour[place : place + 2], 16) / 255 for place in (1, 3, 5)])
    return np.where(channels <= 0.04045, channels / 12.92, ((channels + 0.055) / 1.055) ** 2.4)


def oklab(channels):
    """(3,) L, a, b of (3,) linear red, green and blue."""
    return OPPONENTS @ np.cbrt(CONES @ channels)


def distance(one, other, sight):
    """OKLab x 100 between two colours as a kind of sight has them, cut to what a screen can show."""
    seen = [oklab(np.clip(SIGHTS[sight] @ linear(colour), 0, 1)) for colour in (one, other)]
    return 100 * np.linalg.norm(seen[0] - seen[1])


def least(pairs, theme, sight):
    """(distance, name, name) of the two colours that lie closest among pairs of names in the palette."""
    return min((distance(THEMES[theme][a], THEMES[theme][b], sight), a, b) for a, b in pairs)


@pytest.mark.parametrize(
    ("colour", "wanted"),
    [
        ("#000000", 0),
        ("#ffffff", 1),
        ("#ff0000", 0.2126),
        ("#00ff00", 0.7152),
        ("#0000ff", 0.0722),
        ("#0a0a0a", 10 / 255 / 12.92),
        ("#777777", ((119 / 255 + 0.055) / 1.055) ** 2.4),
    ],
)
def test_luminance_is_the_weighted_sum_of_linear_channels(colour, wanted):
    """WCAG 2.2, definition of relative luminance, worked by hand (from memory)."""
    assert look.luminance(colour) == pytest.approx(wanted, abs=1e-12)


@pytest.mark.parametrize(
    ("colour", "wanted"),
    [
        ("#000000", 21.00),
        ("#777777", 4.48),
        ("#767676", 4.54),
        ("#ff0000", 4.00),
        ("#0000ff", 8.59),
        ("#ffffff", 1),
    ],
)
def test_contrast_on_white_is_the_published_one(colour, wanted):
    """21 is the most that WCAG 2.2 defines; #777777 from davidmacd.com/test/check-color.html, the rest as WebAIM's
    contrast checker gives them (from memory). All are printed to two decimals."""
    assert look.contrast(colour, "#ffffff") == pytest.approx(wanted, abs=0.005)


def test_contrast_does_not_ask_which_colour_is_the_ground():
    assert look.contrast("#a63a0c", "#f2f4f3") == look.contrast("#f2f4f3", "#a63a0c")


@each_theme
@pytest.mark.parametrize("ground", ["paper", "tint"])
@pytest.mark.parametrize("role", ["ink", "ink2", "high", "low"])
def test_words_can_be_read_on_paper_and_tint(theme, ground, role):
    """4.5:1, WCAG 2.2, success criterion 1.4.3."""
    assert look.contrast(THEMES[theme][role], THEMES[theme][ground]) >= 4.5


@each_theme
@pytest.mark.parametrize("name", ["edge", "m1", "m2", "m3", "m4", "m5", "m6"])
def test_axes_and_methods_can_be_seen_on_paper(theme, name):
    """3:1, WCAG 2.2, success criterion 1.4.11."""
    assert look.contrast(THEMES[theme][name], THEMES[theme]["paper"]) >= 3


@each_theme
@pytest.mark.parametrize("k", look.STEPS)
def test_the_number_in_every_cell_can_be_read(theme, k):
    """4.5:1, WCAG 2.2, success criterion 1.4.3."""
    assert look.contrast(THEMES[theme][f"t{k}"], THEMES[theme][f"s{k}"]) >= 4.5


@pytest.mark.parametrize(
    ("xyz", "wanted"),
    [
        ((0.950, 1.000, 1.089), (1.000, 0.000, 0.000)),
        ((1, 0, 0), (0.450, 1.236, -0.019)),
        ((0, 1, 0), (0.922, -0.671, 0.263)),
        ((0, 0, 1), (0.153, -1.415, -0.449)),
    ],
)
def test_this_files_oklab_is_ottossons(xyz, wanted):
    """Ottosson (2020), table of example XYZ and Oklab pairs: three decimals, and one unit for the rounded matrices."""
    np.testing.assert_allclose(oklab(LINEAR_FROM_XYZ @ xyz), wanted, atol=1e-3)


def test_white_is_lightness_1_without_hue():
    """Ottosson (2020): L = 1 and a = b = 0 for D65 white; his ten decimals leave 4e-8."""
    np.testing.assert_allclose(oklab(linear("#ffffff")), (1, 0, 0), atol=1e-7)


@each_sight
def test_every_kind_of_sight_leaves_grey_grey(sight):
    """Each row of a matrix by Machado et al. adds up to 1, but for three roundings to six decimals."""
    np.testing.assert_allclose(SIGHTS[sight].sum(axis=1), 1, atol=1.5e-6)


@each_theme
@each_sight
def test_no_two_methods_have_colours_closer_than_10(theme, sight):
    assert least(combinations([slot.role for slot in look.SLOTS], 2), theme, sight) >= (10,)


@each_theme
@each_sight
def test_neighbouring_steps_can_be_told_apart(theme, sight):
    """5.9 is what the colours were chosen to reach: steps 2 and 3 in the dark under protanopia, 5.903 apart."""
    assert least(pairwise(f"s{k}" for k in sorted(look.STEPS)), theme, sight) >= (5.9,)


@each_theme
@each_sight
def test_too_high_and_too_low_can_be_told_apart_from_the_first_step(theme, sight):
    """6 is asked; the closest pair, the first steps in the dark under protanopia, is 6.497 apart."""
    assert least([(f"s{k}", f"s{-k}") for k in range(1, 6)], theme, sight) >= (6,)


@pytest.mark.parametrize("level", [0.001, 0.01, 0.05, 0.1])
def test_a_rate_at_its_level_is_step_0(level):
    assert look.step(level, level) == 0


@pytest.mark.parametrize("k", look.STEPS)
def test_a_step_holds_its_centre(k):
    assert look.step(look.centre(k, 0.05), 0.05) == k


def test_five_steps_are_a_factor_of_four():
    assert [look.centre(k, 0.05) for k in (-5, 0, 5)] == [0.0125, 0.05, 0.2]


def test_a_rate_so_many_times_the_level_is_as_many_steps_up_as_its_inverse_is_down():
    times = np.geomspace(1.001, 20, 997)
    assert [look.step(0.05 * x, 0.05) for x in times] == [-look.step(0.05 / x, 0.05) for x in times]


def test_a_higher_rate_is_never_a_lower_step():
    steps = [look.step(rate, 0.05) for rate in [0, *np.geomspace(1e-4, 1, 5000)]]
    assert steps == sorted(steps)
    assert set(steps) == set(look.STEPS)


@pytest.mark.parametrize(("rate", "wanted"), [(0, -5), (1e-300, -5), (1e-5, -5), (0.5, 5), (1, 5)])
def test_the_last_steps_are_open(rate, wanted):
    assert look.step(rate, 0.05) == wanted


@pytest.mark.parametrize("level", [0.01, 0.05, 0.1])
def test_the_lower_limit_of_bradley_is_an_edge(level):
    """0.5 times the level, Bradley (1978) (from memory); 1e-9 is far above rounding, far below any real edge's miss."""
    assert [look.step(level * 0.5 * x, level) for x in (1 - 1e-9, 1 + 1e-9)] == [-3, -2]


@pytest.mark.parametrize("level", [0.01, 0.05, 0.1])
def test_the_upper_limit_of_bradley_lies_within_about_one_percent_of_an_edge(level):
    """1.5 times the level, Bradley (1978) (from memory); the edge is at 4 ** 0.3 = 1.5157, 1.05 percent above."""
    assert [look.step(level * 1.5 * x, level) for x in (1 - 0.011, 1 + 0.011)] == [1, 2]


def test_no_two_methods_share_a_mark():
    marks = [slot.mark for slot in look.SLOTS]
    assert len(set(marks)) == len(marks)


def test_no_two_methods_share_both_dash_and_mark():
    drawn = [(slot.dash, slot.mark) for slot in look.SLOTS]
    assert len(set(drawn)) == len(drawn)


def test_no_two_broken_lines_are_broken_alike():
    broken = [slot.dash for slot in look.SLOTS if slot.dash]
    assert len(set(broken)) == len(broken)


@each_theme
def test_a_palette_names_every_role_method_step_and_ink(theme):
    roles = "paper tint ink ink2 edge rule fill high low m1 m2 m3 m4 m5 m6".split()
    steps = [f"{letter}{k}" for letter in "st" for k in range(-5, 6)]
    assert sorted(THEMES[theme]) == sorted(roles + steps)


@each_theme
def test_every_colour_is_written_as_six_small_hex_digits(theme):
    assert not [name for name, colour in THEMES[theme].items() if not re.fullmatch("#[0-9a-f]{6}", colour)]


def test_light_and_dark_take_their_own_colours():
    assert not [
        name for name in THEMES["light"] if name[0] != "t" and THEMES["light"][name] == THEMES["dark"][name]
    ]


def test_light_paper_is_lighter_than_dark_paper():
    assert look.luminance(THEMES["light"]["paper"]) > look.luminance(THEMES["dark"]["paper"])
