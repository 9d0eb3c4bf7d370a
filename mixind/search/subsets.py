"""The best blend of at most so many dyes: relax, prune, then swap until no swap helps, from several sides."""

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
_CLEARLY_BETTER = 1.02
_FULL_ITERATIONS = 40
_MOST_VISITS = 2
_POLISH_RANK, _RANDOM_SETS_RANK = 10**6, 10**6 + 1


@dataclass(frozen=True)
class Mixture:
    """Chosen dyes, as rising positions among the candidates, with their shares and worst separation."""

    positions: tuple[int, ...]
    x: np.ndarray
    worst: float


NOTHING = Mixture((), np.zeros(0), -np.inf)


@dataclass(frozen=True)
class Plan:
    """How hard to look.

    Attributes:
        relaxed_starts: random starts without a limit on the number of dyes, per family of dyes that go together.
        pruned: distinct optima of these that are pruned and swapped.
        random_sets: random sets of dyes that are swapped as well.
        polish_starts: random starts with the dyes that won.
    """

    relaxed_starts: int
    pruned: int
    random_sets: int
    polish_starts: int


PLANS = {"quick": Plan(4, 1, 1, 2), "normal": Plan(8, 2, 4, 6)}


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
    explorer = _Explorer(problem, choice, effort, progress)
    relaxed.sort(key=lambda entry: -entry[0].worst)
    best, rng = NOTHING, np.random.default_rng([seed, _RANDOM_SETS_RANK])
    for _ in range(plan.random_sets):
        best = _better(best, explorer.swapped(relaxed[0][1], explorer.random_set(relaxed[0][1], rng)))
    for start, family in relaxed:
        # a rule of thumb, no bound: a family that did worse without a limit on the number of dyes is not looked at with one
        if start.worst <= best.worst + TIE:
            continue
        best = _better(best, explorer.swapped(family, explorer.pruned(family, start.x)))
    polished = best_of_starts(
        problem.restricted(best.positions), np.random.SeedSequence([seed, _POLISH_RANK]), plan.polish_starts, effort)
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


class _Explorer:
    """Walks from one set of dyes to neighbouring ones; a set is tried from at most two starts, then remembered."""

    def __init__(self, problem: Problem, choice: Choice, effort: Effort, progress: Progress) -> None:
        self.problem, self.choice, self.effort, self.progress = problem, choice, effort, progress
        self.required = set(choice.required)
        self.known: dict[tuple[int, ...], Mixture] = {}
        self.visits: dict[tuple[int, ...], int] = {}

    def climbed(self, positions: Sequence[int], start: np.ndarray, most_iterations: int = _FULL_ITERATIONS) -> Mixture:
        """Return the local optimum of a set of dyes from a start that is first thinned until it breaks no limit."""
        part = self.problem.restricted(positions)
        start = start.copy()
        while score(part, start) == -np.inf and start.max() > 1e-3:
            start *= 0.8
        found = climb(part, start, self.effort, most_iterations)
        return Mixture(tuple(positions), found.x, found.worst)

    def glimpsed(self, positions: Sequence[int], start: np.ndarray) -> Mixture:
        """Return what a short climb reaches, or what is remembered of a set that was tried often enough."""
        key = tuple(positions)
        if self.visits.get(key, 0) < _MOST_VISITS:
            self.visits[key] = self.visits.get(key, 0) + 1
            self.remember(self.climbed(positions, start, _SCREENING_ITERATIONS))
        return self.known[key]

    def remember(self, mixture: Mixture) -> Mixture:
        """Keep the better of this and what is known of the same dyes, and return it."""
        self.known[mixture.positions] = _better(self.known.get(mixture.positions, mixture), mixture)
        return self.known[mixture.positions]

    def random_set(self, family: Sequence[int], rng: np.random.Generator) -> Mixture:
        """Return the optimum of a random set of the full number of dyes, the required ones among them."""
        free = [p for p in family if p not in self.required]
        size = min(self.choice.most - len(self.required), len(free))
        chosen = sorted([*self.required, *rng.choice(free, size=size, replace=False).tolist()])
        return self.remember(self.climbed(chosen, 0.1 + 0.5 * rng.random(len(chosen))))

    def pruned(self, family: Sequence[int], start: np.ndarray) -> Mixture:
        """Drop the dyes that do nothing, then those whose loss costs least, until few enough are left."""
        shares = dict(zip(family, start, strict=True))
        positions = [p for p in family if shares[p] > _NEGLIGIBLE or p in self.required]
        mixture = self.climbed(positions, np.array([shares[p] for p in positions]))
        while len(mixture.positions) > self.choice.most:
            smaller = []
            for leaving in mixture.positions:
                if leaving not in self.required:
                    keep = [i for i, p in enumerate(mixture.positions) if p != leaving]
                    smaller.append(self.climbed([mixture.positions[i] for i in keep], mixture.x[keep]))
            mixture = max(smaller, key=lambda m: m.worst)
        return self.remember(mixture)

    def swapped(self, family: Sequence[int], mixture: Mixture) -> Mixture:
        """Add dyes while there is room and exchange them one by one until no exchange helps."""
        while True:
            better = self._stepped(family, mixture)
            if better is mixture:
                return mixture
            mixture = better
            names = ", ".join(self.problem.dyes[p].name for p in mixture.positions)
            self.progress(f"worst separation {mixture.worst:.2f} with {names}")

    def _stepped(self, family: Sequence[int], mixture: Mixture) -> Mixture:
        """Return the first neighbour that a short climb shows to be clearly better, else the best after full climbs."""
        near = []
        for dyes in self.neighbours(family, mixture):
            found = self.glimpsed(dyes, _carried(mixture, dyes))
            if found.worst > _CLEARLY_BETTER * max(mixture.worst, 0.0) + TIE:
                return self.finished(found)
            near.append(found)
        best = mixture
        for promising in sorted(near, key=lambda m: -m.worst)[:_SCREENED]:
            best = _better(best, self.finished(promising))
        return best

    def finished(self, mixture: Mixture) -> Mixture:
        """Return the optimum of the dyes of a glimpsed mixture; each set is finished once."""
        if self.visits.get(mixture.positions, 0) > _MOST_VISITS:
            return self.known[mixture.positions]
        self.visits[mixture.positions] = _MOST_VISITS + 1
        return self.remember(self.climbed(mixture.positions, mixture.x))

    def neighbours(self, family: Sequence[int], mixture: Mixture) -> list[list[int]]:
        """Return the sets of dyes one addition or one exchange away."""
        outside = [p for p in family if p not in mixture.positions]
        sets = []
        if len(mixture.positions) < self.choice.most:
            sets += [sorted((*mixture.positions, entering)) for entering in outside]
        for leaving in mixture.positions:
            if leaving not in self.required:
                kept = [p for p in mixture.positions if p != leaving]
                sets += [sorted((*kept, entering)) for entering in outside]
        return sets


def _carried(mixture: Mixture, positions: Sequence[int]) -> np.ndarray:
    """Return the shares of a mixture for another set of dyes."""
    shares = dict(zip(mixture.positions, mixture.x, strict=True))
    return np.array([shares.get(p, _ENTRY_SHARE) for p in positions])
