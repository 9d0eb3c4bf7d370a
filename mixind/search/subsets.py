"""The best blend of at most so many dyes: relax, prune, then swap until no swap helps."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from mixind.search.candidates import Choice
from mixind.search.local import TIE, Effort, Found, best_of_starts, climb, score
from mixind.search.problem import Problem

Progress = Callable[[str], None]

_NEGLIGIBLE = 1e-4
_ENTRY_SHARE = 0.3
_SCREENING_ITERATIONS = 8
_SCREENED = 6


@dataclass(frozen=True)
class Mixture:
    """Chosen dyes, as rising positions among the candidates, with their shares and worst separation."""

    positions: tuple[int, ...]
    x: np.ndarray
    worst: float


@dataclass(frozen=True)
class Plan:
    """How hard to look: random starts of the relaxed problem, mixtures pruned from it, starts of the last polish."""

    relaxed_starts: int
    pruned: int
    polish_starts: int


PLANS = {"quick": Plan(6, 1, 4), "normal": Plan(16, 4, 12)}


def search(problem: Problem, choice: Choice, plan: Plan, seed: int, effort: Effort,
           progress: Progress = lambda text: None) -> Mixture:
    """Return the best mixture found of at most `choice.most` dyes.

    Args:
        problem: of all candidates of `choice`, in its order.
        seed: the same seed gives the same mixture.
    """
    relaxed = []
    for rank, family in enumerate(choice.families()):
        progress(f"family {rank + 1}: {len(family)} dyes that go together")
        seeds = np.random.SeedSequence([seed, rank])
        relaxed += [(found, family) for found in _relaxed(problem.restricted(family), plan, seeds, effort)]
    best = Mixture((), np.zeros(0), -np.inf)
    for start, family in sorted(relaxed, key=lambda pair: -pair[0].worst):
        # what a family reaches without a limit on the number of dyes, it does not exceed with one
        if start.worst > best.worst + TIE:
            mixture = _pruned(problem, choice, family, start.x, effort)
            best = _better(best, _swapped(problem, choice, family, mixture, effort, progress))
    polished = best_of_starts(
        problem.restricted(best.positions), np.random.SeedSequence([seed, 10**6]), plan.polish_starts, effort)
    return _better(best, Mixture(best.positions, polished.x, polished.worst))


def _better(one: Mixture, other: Mixture) -> Mixture:
    return other if other.worst > one.worst + TIE else one


def _relaxed(problem: Problem, plan: Plan, seeds: np.random.SeedSequence, effort: Effort) -> list[Found]:
    """Return the best distinct optima, without a limit on the number of dyes, best first."""
    found = [best_of_starts(problem, seed, 1, effort) for seed in seeds.spawn(plan.relaxed_starts)]
    distinct: list[Found] = []
    for one in sorted(found, key=lambda f: -f.worst):
        if all(np.abs(one.x - other.x).max() > 0.02 for other in distinct):
            distinct.append(one)
    return distinct[:plan.pruned]


def _pruned(problem: Problem, choice: Choice, family: Sequence[int], start: np.ndarray, effort: Effort) -> Mixture:
    """Drop the dyes that do nothing, then those whose loss costs least, until few enough are left."""
    required = set(choice.required)
    positions = [p for p, share in zip(family, start, strict=True) if share > _NEGLIGIBLE or p in required]
    shares = dict(zip(family, start, strict=True))
    mixture = _climbed(problem, positions, np.array([shares[p] for p in positions]), effort)
    while len(mixture.positions) > choice.most:
        smaller = []
        for leaving in mixture.positions:
            if leaving not in required:
                keep = [i for i, p in enumerate(mixture.positions) if p != leaving]
                smaller.append(_climbed(problem, [mixture.positions[i] for i in keep], mixture.x[keep], effort))
        mixture = max(smaller, key=lambda m: m.worst)
    return mixture


def _swapped(problem: Problem, choice: Choice, family: Sequence[int], mixture: Mixture, effort: Effort,
             progress: Progress) -> Mixture:
    """Add dyes while there is room and exchange them one by one until no exchange helps."""
    while True:
        screened = sorted(
            (_climbed(problem, near, _carried(mixture, near), effort, _SCREENING_ITERATIONS)
             for near in _neighbours(choice, family, mixture)), key=lambda m: -m.worst)
        better = mixture
        for near in screened[:_SCREENED]:
            better = _better(better, _climbed(problem, near.positions, near.x, effort))
        if better is mixture:
            return mixture
        mixture = better
        progress(f"worst separation {mixture.worst:.2f} with {', '.join(problem.dyes[p].name for p in mixture.positions)}")


def _neighbours(choice: Choice, family: Sequence[int], mixture: Mixture) -> list[list[int]]:
    """Return the sets of dyes one addition or one exchange away."""
    outside = [p for p in family if p not in mixture.positions]
    sets = []
    if len(mixture.positions) < choice.most:
        sets += [sorted((*mixture.positions, entering)) for entering in outside]
    for leaving in mixture.positions:
        if leaving not in choice.required:
            kept = [p for p in mixture.positions if p != leaving]
            sets += [sorted((*kept, entering)) for entering in outside]
    return sets


def _carried(mixture: Mixture, positions: Sequence[int]) -> np.ndarray:
    """Return the shares of a mixture for another set of dyes."""
    shares = dict(zip(mixture.positions, mixture.x, strict=True))
    return np.array([shares.get(p, _ENTRY_SHARE) for p in positions])


def _climbed(problem: Problem, positions: Sequence[int], start: np.ndarray, effort: Effort,
             most_iterations: int = 40) -> Mixture:
    part = problem.restricted(positions)
    start = start.copy()
    while score(part, start) == -np.inf and start.max() > 1e-3:
        start *= 0.8
    found = climb(part, start, effort, most_iterations)
    return Mixture(tuple(positions), found.x, found.worst)
