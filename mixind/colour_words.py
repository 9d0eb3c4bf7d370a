"""Colours in words: one small table from lightness, chroma and hue, used wherever the program names a colour."""

from __future__ import annotations

import numpy as np

# Upper end of each hue range, CIELAB hue angle under the viewer's white [degrees], starting from 0. Our own division,
# set so that saturated colours are called what painters and chemists call them.
HUES = ((20, "crimson"), (44, "red"), (58, "orange-red"), (72, "orange"), (86, "yellow-orange"), (106, "yellow"),
        (130, "yellow-green"), (172, "green"), (220, "blue-green"), (280, "blue"), (300, "indigo"), (328, "violet"),
        (346, "purple"), (360, "crimson"))

# A light purple or crimson is called pink, and so is a pale red up to this hue angle; beyond it, it leans to orange.
PINK_HUES, PINK_LIGHTNESS, PALE_PINK_UP_TO = ("purple", "crimson"), 65.0, 30.0

# What dark orange and dark yellow are called.
BROWN_HUES, OLIVE_HUES, BROWN_LIGHTNESS, BROWN_CHROMA = ("orange-red", "orange", "yellow-orange"), ("yellow",), 60.0, 65.0

# Position of each hue word on the way through the rainbow, for saying how many steps two words lie apart: the seven
# words that printed tables use (red, orange, yellow, green, blue, indigo, violet) stand one step apart.
RAINBOW = {"crimson": -0.25, "red": 0.0, "orange-red": 0.5, "orange": 1.0, "yellow-orange": 1.5, "yellow": 2.0,
           "yellow-green": 2.5, "green": 3.0, "blue-green": 3.5, "blue": 4.0, "indigo": 5.0, "violet": 6.0, "purple": 6.25,
           "pink": 6.5, "brown": 1.0, "olive": 2.25}

COLOURLESS_CHROMA, COLOURLESS_LIGHTNESS = 4.0, 92.0
GREY_CHROMA = 9.0
PALE_CHROMA, PALE_LIGHTNESS = 28.0, 72.0
DULL_CHROMA = 16.0
DARK_LIGHTNESS, BLACK_LIGHTNESS = 42.0, 12.0
DEEP_LIGHTNESS, DEEP_CHROMA = 60.0, 60.0


def hue_word(hue: float) -> str:
    """Return the word for a CIELAB hue angle [degrees], any finite value.

    Example:
        >>> hue_word(95.0), hue_word(-5.0)
        ('yellow', 'crimson')
    """
    angle = hue % 360
    return next(word for end, word in HUES if angle < end or end == 360)


def colour_word(Lab: np.ndarray) -> str:
    """Return a colour in words, such as "orange-red", "pale yellow-green", "colourless" or "nearly black".

    Args:
        Lab: CIELAB under the viewer's white, (3,).
    Example:
        >>> colour_word(np.array([90.0, -8.0, 20.0]))
        'pale yellow-green'
    """
    L, a, b = (float(value) for value in Lab)
    chroma = float(np.hypot(a, b))
    if chroma < COLOURLESS_CHROMA and L > COLOURLESS_LIGHTNESS:
        return "colourless"
    if L < BLACK_LIGHTNESS:
        return "nearly black"
    if chroma < GREY_CHROMA:
        return "pale grey" if L > PALE_LIGHTNESS else "dark grey" if L < DARK_LIGHTNESS else "grey"
    hue = float(np.degrees(np.arctan2(b, a)))
    word = hue_word(hue)
    adjective = _strength(L, chroma)
    if (word in PINK_HUES and L >= PINK_LIGHTNESS) or (word == "red" and adjective == "pale " and hue < PALE_PINK_UP_TO):
        word = "pink"
    elif L < BROWN_LIGHTNESS and chroma < BROWN_CHROMA and word in BROWN_HUES + OLIVE_HUES:
        word = "brown" if word in BROWN_HUES else "olive"
    return f"{adjective}{word}"


def _strength(L: float, chroma: float) -> str:
    if L < DARK_LIGHTNESS:
        return "dark "
    if chroma < PALE_CHROMA and L >= PALE_LIGHTNESS:
        return "pale "
    if chroma < DULL_CHROMA:
        return "greyish "
    if L < DEEP_LIGHTNESS and chroma > DEEP_CHROMA:
        return "deep "
    return ""


def hue_of(word: str) -> str:
    """Return the hue in a colour word, or "" for a colour without one.

    Example:
        >>> hue_of("pale blue-green"), hue_of("grey")
        ('blue-green', '')
    """
    last = word.split()[-1]
    return last if last in RAINBOW else ""


def steps_apart(word: str, other: str) -> float:
    """Return how many rainbow steps the hues of two colour words lie apart; red and violet are neighbours.

    Raises: KeyError when a word has no hue.
    """
    around = 7.0
    distance = abs(RAINBOW[hue_of(word)] - RAINBOW[hue_of(other)])
    return min(distance, around - distance)
