"""Colours in words."""

from __future__ import annotations

import numpy as np
import pytest

from mixind import colorimetry, colour_words
from mixind.colour_words import colour_word, hue_of, hue_word, steps_apart


def word_of_rgb(hex_colour: str) -> str:
    encoded = np.array([int(hex_colour[i:i + 2], 16) for i in (1, 3, 5)]) / 255
    linear = np.where(encoded <= 0.04045, encoded / 12.92, ((encoded + 0.055) / 1.055) ** 2.4)
    return colour_word(colorimetry.cielab(linear @ colorimetry.XYZ_FROM_RGB.T, colorimetry.D65_WHITE))


@pytest.mark.parametrize(("shown", "hue"), [
    ("#ff0000", "red"), ("#ffa500", "yellow-orange"), ("#ffff00", "yellow"), ("#00ff00", "green"), ("#008080", "blue-green"),
    ("#1e90ff", "blue"), ("#4b0082", "violet"), ("#ee82ee", "violet"), ("#ff4500", "red"), ("#8b4513", "brown"), ("#808000", "olive")])
def test_named_css_colours_get_a_word_within_half_a_step(shown: str, hue: str) -> None:
    """Names of CSS Color 4, section 6.1: red, orange, yellow, lime, teal, dodgerblue, indigo, violet, orangered, saddlebrown,
    olive."""
    assert steps_apart(word_of_rgb(shown), hue) <= 0.5


@pytest.mark.parametrize(("Lab", "word"), [
    ((100, 0, 0), "colourless"), ((5, 3, 3), "nearly black"), ((50, 2, 2), "grey"), ((20, 1, 1), "dark grey"),
    ((80, 3, 3), "pale grey"), ((92, -3, 20), "pale yellow"), ((30, 40, 30), "dark red"), ((60, 8, 8), "greyish orange-red"),
    ((50, 60, 35), "deep red"), ((77, 55, -30), "pink"), ((90, 12, 3), "pale pink"), ((80, 20, 8), "pale pink"), ((85, 19, 18), "pale red"), ((57.6, 10, 26), "brown"), ((52, -10, 56), "olive")])
def test_lightness_and_chroma_make_the_adjective(Lab: tuple[float, float, float], word: str) -> None:
    assert colour_word(np.array(Lab, dtype=float)) == word


def test_every_hue_has_a_word_with_a_place_in_the_rainbow() -> None:
    for angle in range(-720, 720):
        assert hue_word(angle) in colour_words.RAINBOW
    assert hue_word(359.9) == hue_word(-0.1) == "crimson"


def test_steps_go_round_the_circle() -> None:
    assert steps_apart("red", "deep violet") == 1
    assert steps_apart("green", "pale blue-green") == 0.5
    assert hue_of("colourless") == ""
