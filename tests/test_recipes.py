"""The main job against print: blends found by the search against published wide-range recipes, in the same run."""

from __future__ import annotations

import re
from pathlib import Path

import numpy as np
import pytest

from mixind.blend import Blend, Component
from mixind.colour_words import hue_of, steps_apart
from mixind.conditions import Conditions
from mixind.library import Library
from mixind.prediction import predict
from mixind.quantities import dose, strength
from mixind.search.candidates import choose
from mixind.search.formulate import formulate
from tests import published
from tests.recipes import best_dose, recipe, task

RECIPES = ("U2", "U4", "U5", "U6")


@pytest.fixture(scope="module")
def library() -> Library:
    return Library()


README = (Path(__file__).parent.parent / "README.md").read_text(encoding="utf-8")


SPANS = [(4, 10, 4), (4, 10, 5), (3, 11, 5)]
HALF_A_DIGIT = 0.06  # of figures printed to one decimal, with a little room for another processor's last digits


def printed_figures() -> list[tuple[float, ...]]:
    """Return per span the README's separation, best recipe and ratio at the exact dose, then with the dose off."""
    rows = re.findall(r"([\d.]+) against ([\d.]+): ([\d.]+) times; .*?([\d.]+) against ([\d.]+), ([\d.]+) times", README)
    return [tuple(float(figure) for figure in row) for row in rows]


def found_and_best(library: Library, low: float, high: float, most: int, tolerance: float) -> tuple[float, float]:
    """Return the worst separation of the blend found, and that of the best recipe, each at its own best dose."""
    asked = task(low, high, tolerance=tolerance)
    found = formulate(asked, choose(library, most=most), threshold=3.0)
    assert len(found.blend.components) <= most
    return found.worst.separation, max(best_dose(recipe(name, library), asked)[0] for name in RECIPES)


@pytest.mark.parametrize(("span", "ratio"), list(zip(SPANS, (1.2, 1.3, 1.6), strict=True)))
def test_blends_beat_the_published_recipes(library: Library, span: tuple[int, int, int], ratio: float) -> None:
    """At the exact dose, under the same limits; sources in wide_range_recipes.csv. The README gives the same figures."""
    found, best = found_and_best(library, *span, 0.0)
    assert found >= ratio * best
    assert (found, best) == pytest.approx(printed_figures()[SPANS.index(span)][:2], abs=HALF_A_DIGIT)
    assert found / best == pytest.approx(printed_figures()[SPANS.index(span)][2], abs=HALF_A_DIGIT / 10)


@pytest.mark.slow
@pytest.mark.parametrize("span", SPANS)
def test_figures_of_the_readme_with_the_dose_off(library: Library, span: tuple[int, int, int]) -> None:
    found, best = found_and_best(library, *span, 0.2)
    assert (found, best) == pytest.approx(printed_figures()[SPANS.index(span)][3:5], abs=HALF_A_DIGIT)


def test_yamada_shows_the_printed_colours(library: Library) -> None:
    """Six of the seven pH within one rainbow step; red or orange at 4, green at 7, violet at 10."""
    stated = [row for row in published.rows("recipe_colours") if row["recipe"] == "U2"]
    pH = np.array([float(row["pH"]) for row in stated])
    words = predict(recipe("U2", library), pH, Conditions(path=1.5)).words
    near = [bool(hue_of(word)) and steps_apart(word, row["colour"]) <= 1 for word, row in zip(words, stated, strict=True)]
    assert sum(near) >= 6
    assert f"all {sum(near)} within one neighbouring hue" in README
    assert hue_of(words[0]) in ("red", "orange-red", "orange")
    assert hue_of(words[3]) == "green"
    assert hue_of(words[-1]) == "violet"


def test_four_dye_mixture_of_common_practice(library: Library) -> None:
    """Common practice, no source: red below pH 3, green at 7, bluish green near 8, purple above 11.

    Proportions are ours. Phenolphthalein is still colourless at pH 8.
    """
    parts = {"methyl orange": 60, "methyl red": 60, "bromothymol blue": 400, "phenolphthalein": 800}
    components = tuple(Component(library.find(name), strength(f"{mg} mg/L")) for name, mg in parts.items())
    pH = np.array([1.0, 2.0, 3.0, 7.0, 8.0, 11.0, 12.0])
    words = predict(Blend("four dyes", dose("0.2 mL in 10 mL"), components), pH, Conditions()).words
    assert [hue_of(word) for word in words[:5]] == ["red", "red", "red", "green", "blue-green"]
    assert all(hue_of(word) in ("violet", "purple") for word in words[5:])
    alone = predict(Blend("one dye", dose("0.2 mL in 10 mL"), components[3:]), np.array([7.9, 8.0]), Conditions())
    assert alone.words[1] == "colourless"
