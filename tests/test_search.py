"""The search: its derivatives, its limits, its choice of dyes, and that it finds what an exhaustive search finds."""

from __future__ import annotations

from dataclasses import replace
from itertools import combinations

import numpy as np
import pytest

from mixind import viewing
from mixind.blend import blend_text
from mixind.difference import METRICS
from mixind.dyes import Dye, visible_peak
from mixind.errors import MixindError
from mixind.library import Library
from mixind.quantities import pH_grid
from mixind.search.candidates import Choice, choose, conflict
from mixind.search.formulate import Formulation, formulate
from mixind.search.local import Effort, best_of_starts
from mixind.search.problem import Problem, Task
from mixind.search.rounding import LARGEST_LOSS, rounded
from mixind.search.subsets import PLANS, search
from tests.recipes import task

SOME = ("bromothymol blue", "methyl red", "phenolphthalein", "thymol blue", "cresol red", "bromocresol green")


def some_dyes(library: Library) -> tuple[Dye, ...]:
    return tuple(library.find(name) for name in SOME)


TASKS = {
    "plain": task(4, 10),
    "doses": task(4, 10, tolerance=0.2),
    "viewers": task(4, 10, viewers=(viewing.viewer(), viewing.viewer("A", "10", "deutan"))),
    "on white": task(4, 9, vessel=viewing.vessel("on-white", 2.0)),
    "cam16-ucs": task(4, 10, metric=METRICS["cam16-ucs"], kL=1.0),
}


@pytest.mark.parametrize("asked", TASKS.values(), ids=list(TASKS))
def test_the_jacobian_is_exact_through_the_whole_chain(library: Library, asked: Task) -> None:
    problem = Problem(asked, some_dyes(library))
    rng = np.random.default_rng(4)
    for _ in range(3):
        x = 0.05 + 0.4 * rng.random(6)
        _, slopes = problem.values_and_slopes(x, problem.pairs)
        for position in range(6):
            h = np.zeros(6)
            h[position] = 1e-6
            up, down = (problem.values_and_slopes(x + sign * h, problem.pairs)[0] for sign in (1, -1))
            np.testing.assert_allclose(slopes[:, position], (up - down) / 2e-6, rtol=1e-4, atol=2e-4)


@pytest.mark.parametrize("asked", TASKS.values(), ids=list(TASKS))
def test_values_are_the_true_differences(library: Library, asked: Task) -> None:
    problem = Problem(asked, some_dyes(library))
    x = np.full(6, 0.2)
    values, _ = problem.values_and_slopes(x, problem.pairs)
    count = len(problem.pairs)
    np.testing.assert_allclose(values[:count], problem.separations(x), atol=1e-4)
    assert values[count:].min() + asked.darkest == pytest.approx(problem.darkest(x), abs=1e-9)


def test_the_most_of_a_dye_is_its_peak_absorbance_or_its_limit(library: Library) -> None:
    asked = task(4, 10)
    names = ("bromothymol blue", "thymolphthalein", "methylene blue", "alizarin yellow R")
    problem = Problem(asked, [library.find(name) for name in names])
    peaks = visible_peak(problem.full).max(axis=1)
    assert peaks[0] == pytest.approx(1.5)
    assert problem.largest[1] == pytest.approx(library.find("thymolphthalein").largest_concentration)
    assert problem.largest[2] == pytest.approx(5e-6)
    on_white = Problem(replace(asked, vessel=viewing.vessel("on-white", 1.0)), [library.find("bromothymol blue")])
    assert on_white.largest[0] == pytest.approx(problem.largest[0] / 2)


@pytest.fixture(scope="module")
def found() -> Formulation:
    return formulate(task(4, 10), choose(Library(), most=4), threshold=3.0)


def test_a_faint_dye_is_not_drowned_in(library: Library) -> None:
    """m-Nitrophenol shows almost nothing below pH 6: no stock beyond 1 %, no sample beyond 0.5 mmol/L."""
    dye = library.find("m-nitrophenol")
    for asked in (task(3, 6), task(4, 10), task(3, 6, tolerance=0.2)):
        problem = Problem(asked, [dye])
        assert problem.largest[0] <= 5e-4
        assert problem.largest[0] * dye.molar_mass <= 10.0 * asked.dose.share() * (1 + 1e-9)


def test_a_bound_such_as_solubility_holds_for_the_largest_dose(library: Library) -> None:
    dye = library.find("thymolphthalein")
    problem = Problem(task(4, 12, tolerance=0.2), [dye])
    assert problem.largest[0] * problem.factors.max() == pytest.approx(dye.largest_concentration)


def test_a_step_that_nearly_fits_keeps_its_neighbours() -> None:
    for step in (2 / 3, 0.6666667, 0.33333):
        pH = pH_grid(4, 10, step)
        exact = float(np.diff(pH)[0])
        assert [0, 1] in Problem(replace(task(4, 10), pH=pH, step=min(step, exact)), [Library().find("BTB")]).pairs.tolist()


def test_a_formulation_keeps_its_limits(found: Formulation) -> None:
    problem = Problem(found.task, found.blend.dyes)
    x = found.blend.sample_concentrations() / problem.largest
    assert problem.allowed(x)
    assert visible_peak(problem.full * x[:, None, None]).max() <= 1.5 * (1 + 1e-6)
    assert problem.darkest(x) >= 30 - 1e-6
    assert found.worst.separation == pytest.approx(problem.worst(x))
    assert found.told_apart


def test_strengths_have_few_figures_and_lose_little(found: Formulation, library: Library) -> None:
    problem = Problem(found.task, found.blend.dyes)
    best = best_of_starts(problem, np.random.SeedSequence(5), 8, Effort())
    assert found.worst.separation >= (1 - LARGEST_LOSS) * best.worst
    for component in found.blend.components:
        mg = component.grams_per_litre * 1e3
        assert float(f"{mg:.5g}") == pytest.approx(mg, rel=1e-9)


def test_rounding_breaks_no_limit(library: Library) -> None:
    """From shares that sit on their limits."""
    problem = Problem(task(4, 10), some_dyes(library)[:4])
    per_share = problem.largest * np.array([dye.molar_mass for dye in problem.dyes]) * 51e3
    final = rounded(problem, np.array([1.0, 0.7, 1.0, 0.2]), per_share)
    assert problem.allowed(final)
    assert np.all(final <= 1 + 1e-9)


def test_the_same_seed_gives_the_same_blend(library: Library) -> None:
    one, two = (formulate(task(4, 10), choose(library, most=3), threshold=3.0, effort="quick", seed=7) for _ in range(2))
    assert blend_text(one.blend) == blend_text(two.blend)


@pytest.mark.slow
def test_another_seed_finds_as_good_a_blend(found: Formulation) -> None:
    other = formulate(task(4, 10), choose(Library(), most=4), threshold=3.0, seed=99)
    assert other.worst.separation >= 0.995 * found.worst.separation


def test_swapping_finds_the_best_of_all_subsets(library: Library) -> None:
    """Every pair out of eight dyes, three starts each, against relax, prune and swap."""
    names = (*SOME, "methyl orange", "phenol red")
    choice = choose(library, only=names, most=2)
    problem = Problem(task(5, 9), choice.dyes)
    every = [best_of_starts(problem.restricted(pair), np.random.SeedSequence([7, *pair]), 3, Effort()).worst
             for pair in combinations(range(8), 2)]
    mixture = search(problem, choice, PLANS["normal"], 1, Effort())
    assert mixture.worst >= 0.995 * max(every)
    assert len(mixture.positions) <= 2


def test_the_effort_quick_spends_less(library: Library, found: Formulation) -> None:
    quick = formulate(task(4, 10), choose(library, most=4), threshold=3.0, effort="quick")
    assert quick.search["evaluations"] < found.search["evaluations"]
    assert quick.worst.separation >= 0.95 * found.worst.separation


@pytest.mark.slow
def test_dose_tolerance_costs_separation_and_is_honoured(library: Library, found: Formulation) -> None:
    tolerant = formulate(task(4, 10, tolerance=0.2), choose(library, most=4), threshold=3.0)
    assert tolerant.worst.separation <= found.worst.separation
    problem = Problem(tolerant.task, found.blend.dyes)
    fragile = problem.worst(found.blend.sample_concentrations() / problem.largest)
    assert tolerant.worst.separation >= fragile - 1e-6


def test_demands_are_met(library: Library) -> None:
    choice = choose(library, with_=["thymol blue"], without=["phenolphthalein", "PP"][:1], most=3)
    result = formulate(task(5, 9), choice, threshold=3.0, effort="quick")
    names = [dye.name for dye in result.blend.dyes]
    assert "thymol blue" in names
    assert "phenolphthalein" not in names
    assert len(names) <= 3


def test_unsuitable_dyes_stay_out_unless_named(library: Library) -> None:
    free = choose(library)
    names = {dye.name for dye in free.dyes}
    assert "2,4-dinitrophenol" not in names
    assert "eosin Y" not in names
    assert set(free.left_out) >= {"2,4-dinitrophenol", "eosin Y"}
    assert "eosin Y" in {dye.name for dye in choose(library, with_=["eosin Y"]).dyes}


def test_ion_pairs_are_kept_apart_unless_printed(library: Library) -> None:
    red, blue, green = (library.find(name) for name in ("methyl orange", "methylene blue", "bromocresol green"))
    assert conflict(red, blue)
    assert not conflict(library.find("methyl red"), blue)
    choice = choose(library)
    for family in choice.families():
        assert choice.compatible(family)
    with pytest.raises(MixindError, match="precipitate"):
        choose(library, with_=["methylene blue", "bromocresol green"])
    assert choose(library, with_=["methylene blue", "bromocresol green"], ion_pairs=True).compatible((0, 1))
    assert not conflict(red, green)


def test_families_cover_every_candidate(library: Library) -> None:
    choice = choose(library)
    covered = {position for family in choice.families() for position in family}
    assert covered == set(range(len(choice.dyes)))


@pytest.mark.parametrize(("demand", "message"), [
    ({"with_": ["methyl red", "thymol blue"], "most": 1}, "2 dyes are demanded"), ({"with_": ["BTB"], "without": ["BTB"]}, "with and without"),
    ({"most": 0}, "less than 1"), ({"only": ["no such dye"]}, "not in the library"), ({"only": ["BTB"], "without": ["BTB"]}, "no dye is left")])
def test_contradictions_are_refused(library: Library, demand: dict[str, object], message: str) -> None:
    with pytest.raises(MixindError, match=message):
        choose(library, **demand)  # type: ignore[arg-type]


def test_what_cannot_be_told_apart_says_so(library: Library) -> None:
    """Methyl red has turned long before pH 9."""
    choice = choose(library, only=["methyl red"], most=1)
    assert not formulate(task(9, 12), choice, threshold=3.0, effort="quick").told_apart
    with pytest.raises(MixindError, match="colour in this span"):
        formulate(task(0, 3), choose(library, only=["phenolphthalein"], most=1), threshold=3.0)


def test_demanded_dyes_are_in_every_family() -> None:
    choice: Choice = choose(Library(), with_=["neutral red"])
    assert choice.families()
    for family in choice.families():
        assert set(choice.required) <= set(family)
