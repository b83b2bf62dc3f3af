import math

import numpy as np
import pytest
from PySide6.QtGui import QColor, QFont

from gainbench_app.theme import BODY_PX, DARK, LIGHT, SMALL_PX, body_font, palette, sized, style_sheet

THEMES = {"light": LIGHT, "dark": DARK}
GROUNDS = ("paper", "card")
TEXTS = ("ink", "muted", "speed", "current", "voltage", "breaks", "thin", "holds")
QUANTITIES = ("speed", "current", "voltage")

LEAST_TEXT, LEAST_LINE = 4.5, 3.0
"""WCAG 2.1, success criteria 1.4.3 and 1.4.11 (from memory)."""
LEAST_APART = 19.0
"""CIEDE2000; what the project asks of its three curves."""

# Full-strength matrices on linear RGB: G. M. Machado, M. M. Oliveira, L. A. F. Fernandes, A physiologically-based
# model for simulation of color vision deficiency, IEEE Trans. Vis. Comput. Graph. 15(6), 2009 (from memory).
DEFICIENCIES = {
    "none": np.eye(3),
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


def linear(colour):
    """sRGB text to linear RGB (IEC 61966-2-1, from memory)."""
    channels = np.array([int(colour[at : at + 2], 16) / 255.0 for at in (1, 3, 5)])
    return np.where(channels <= 0.04045, channels / 12.92, ((channels + 0.055) / 1.055) ** 2.4)


def contrast(one, other):
    first, second = (float(np.dot((0.2126, 0.7152, 0.0722), linear(colour))) + 0.05 for colour in (one, other))
    return max(first, second) / min(first, second)


def lab(rgb):
    """Linear RGB to CIELAB, white D65 (from memory)."""
    to_xyz = np.array(
        [[0.4124564, 0.3575761, 0.1804375], [0.2126729, 0.7151522, 0.0721750], [0.0193339, 0.1191920, 0.9503041]]
    )
    ratio = to_xyz @ np.clip(rgb, 0.0, 1.0) / np.array([0.95047, 1.0, 1.08883])
    f = np.where(ratio > (6 / 29) ** 3, np.cbrt(ratio), ratio / (3 * (6 / 29) ** 2) + 4 / 29)
    return np.array([116 * f[1] - 16, 500 * (f[0] - f[1]), 200 * (f[1] - f[2])])


def ciede2000(one, other):
    """Distance of two colours: G. Sharma, W. Wu, E. N. Dalal, Color Res. Appl. 30(1), 2005 (from memory)."""
    (l1, a1, b1), (l2, a2, b2) = one, other
    mean = (math.hypot(a1, b1) + math.hypot(a2, b2)) / 2
    g = 0.5 * (1 - math.sqrt(mean**7 / (mean**7 + 25.0**7)))
    c1, c2 = math.hypot((1 + g) * a1, b1), math.hypot((1 + g) * a2, b2)
    h1, h2 = (math.degrees(math.atan2(b, (1 + g) * a)) % 360 for a, b in ((a1, b1), (a2, b2)))
    turn = (h2 - h1 + 180) % 360 - 180 if c1 * c2 else 0.0
    hue = 2 * math.sqrt(c1 * c2) * math.sin(math.radians(turn) / 2)
    h_mean = (h1 + turn / 2) % 360 if c1 * c2 else h1 + h2
    l_mean, c_mean = (l1 + l2) / 2, (c1 + c2) / 2
    t = (
        1
        - 0.17 * math.cos(math.radians(h_mean - 30))
        + 0.24 * math.cos(math.radians(2 * h_mean))
        + 0.32 * math.cos(math.radians(3 * h_mean + 6))
        - 0.20 * math.cos(math.radians(4 * h_mean - 63))
    )
    s_l = 1 + 0.015 * (l_mean - 50) ** 2 / math.sqrt(20 + (l_mean - 50) ** 2)
    s_c, s_h = 1 + 0.045 * c_mean, 1 + 0.015 * c_mean * t
    spread = 30 * math.exp(-(((h_mean - 275) / 25) ** 2))
    r_t = -2 * math.sqrt(c_mean**7 / (c_mean**7 + 25.0**7)) * math.sin(math.radians(2 * spread))
    dl, dc, dh = (l2 - l1) / s_l, (c2 - c1) / s_c, hue / s_h
    return math.sqrt(dl**2 + dc**2 + dh**2 + r_t * dc * dh)


def test_the_distance_is_that_of_the_published_pairs():
    # Sharma, Wu and Dalal 2005, table 1, pairs 1, 7 and 25 (from memory).
    assert ciede2000((50, 2.6772, -79.7751), (50, 0, -82.7485)) == pytest.approx(2.0425, abs=1e-4)
    assert ciede2000((50, 0, 0), (50, -1, 2)) == pytest.approx(2.3669, abs=1e-4)
    assert ciede2000((60.2574, -34.0099, 36.2677), (60.4626, -34.1751, 39.4387)) == pytest.approx(1.2644, abs=1e-4)


def test_contrast_of_black_on_white_is_the_largest():
    assert contrast("#000000", "#FFFFFF") == pytest.approx(21.0)


@pytest.mark.parametrize("name", THEMES)
@pytest.mark.parametrize("ground", GROUNDS)
@pytest.mark.parametrize("text", TEXTS)
def test_every_text_can_be_read(name, ground, text):
    theme = THEMES[name]
    assert contrast(getattr(theme, text), getattr(theme, ground)) >= LEAST_TEXT


@pytest.mark.parametrize("name", THEMES)
@pytest.mark.parametrize("ground", GROUNDS)
def test_lines_and_controls_can_be_seen(name, ground):
    theme = THEMES[name]
    for line in ("outline", *QUANTITIES, "breaks"):
        assert contrast(getattr(theme, line), getattr(theme, ground)) >= LEAST_LINE


@pytest.mark.parametrize("name", THEMES)
@pytest.mark.parametrize("deficiency", DEFICIENCIES)
def test_the_three_quantities_stay_apart(name, deficiency):
    seen = [lab(DEFICIENCIES[deficiency] @ linear(getattr(THEMES[name], one))) for one in QUANTITIES]
    for first, second in ((0, 1), (0, 2), (1, 2)):
        assert ciede2000(seen[first], seen[second]) >= LEAST_APART


def test_a_line_stands_out_from_its_ripple():
    for theme in THEMES.values():
        for one in QUANTITIES:
            colour = getattr(theme, one)
            assert contrast(colour, theme.mixed(colour, 0.36)) > 1.8


def test_a_tint_is_between_its_colour_and_the_card():
    assert LIGHT.mixed("#000000", 0.0) == LIGHT.card
    assert LIGHT.mixed("#123456", 1.0) == "#123456"
    assert LIGHT.mixed("#000000", 0.5) == "#808080"


def test_no_text_is_smaller_than_twelve_pixels(qapp):
    assert BODY_PX == 13
    assert SMALL_PX == 12
    font = body_font()
    assert font.pixelSize() == BODY_PX
    assert sized(font, SMALL_PX, bold=True).weight() == QFont.Weight.DemiBold


def test_our_own_font_comes_along(qapp):
    assert body_font().families()[0] == "Inter"


@pytest.mark.parametrize("name", THEMES)
def test_qt_gets_the_colours_of_the_theme(qapp, name):
    theme = THEMES[name]
    assert palette(theme).windowText().color() == QColor(theme.ink)
    assert theme.paper in style_sheet(theme)
