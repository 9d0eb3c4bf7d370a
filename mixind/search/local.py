"""Local search: from many starts to the best worst separation of given dyes."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from mixind.search.problem import Problem
from mixind.solvers import raise_the_lowest

TIE = 1e-9
_MOST_ROUNDS = 8


@dataclass
class Effort:
    """How many value-and-Jacobian evaluations and starts a search has used so far."""

    evaluations: int = 0
    starts: int = 0


@dataclass(frozen=True)
class Found:
    """A mixture: shares of the most allowed, (n,), and its worst separation (-inf when a limit is broken)."""

    x: np.ndarray
    worst: float


class _Memo:
    """Values and slopes of the working pairs at the point last asked for; SLSQP asks for both separately."""

    def __init__(self, problem: Problem, pairs: np.ndarray, effort: Effort) -> None:
        self.problem, self.pairs, self.effort = problem, pairs, effort
        self.at: np.ndarray | None = None

    def _update(self, x: np.ndarray) -> None:
        if self.at is None or not np.array_equal(x, self.at):
            self.both = self.problem.values_and_slopes(x, self.pairs)
            self.at = x.copy()
            self.effort.evaluations += 1

    def values(self, x: np.ndarray) -> np.ndarray:
        self._update(x)
        return self.both[0]

    def slopes(self, x: np.ndarray) -> np.ndarray:
        self._update(x)
        return self.both[1]


def climb(problem: Problem, start: np.ndarray, effort: Effort, most_iterations: int = 60) -> Found:
    """Return the local optimum reached from a start, on a working set of pairs that grows until none is violated.

    Args:
        start: in the unit box, (n,).
    """
    effort.starts += 1
    x, working = start, np.zeros(0, dtype=int)
    size = max(4 * start.size, 12)
    best = Found(start, score(problem, start))
    for _ in range(_MOST_ROUNDS):
        true = problem.separations(x)
        lowest = np.argsort(true, kind="stable")[:size]
        added = np.setdiff1d(lowest, working)
        level = true[working].min() if working.size else np.inf
        if working.size and true.min() >= level - 1e-3 * max(1.0, abs(level)):
            break
        working = np.union1d(working, added)
        memo = _Memo(problem, problem.pairs[working], effort)
        x = raise_the_lowest(memo.values, memo.slopes, x, working.size, most_iterations)
        found = Found(x, score(problem, x))
        best = found if found.worst > best.worst else best
    return best


def score(problem: Problem, x: np.ndarray) -> float:
    """Return the worst separation, or minus infinity where a colour is darker than allowed."""
    return problem.worst(x) if problem.allowed(x, slack=1e-3) else -np.inf


def random_start(problem: Problem, rng: np.random.Generator) -> np.ndarray:
    """Return a random start: shares spread evenly in their square, thinned until no colour is too dark."""
    x = rng.random(len(problem.dyes)) ** 2
    while problem.darkest(x) < problem.task.darkest and x.max() > 1e-3:
        x = x * 0.7
    return x


def best_of_starts(problem: Problem, seeds: np.random.SeedSequence, starts: int, effort: Effort) -> Found:
    """Return the best local optimum of so many random starts.

    Args:
        problem: of n dyes.
        seeds: the same seeds give the same optimum.
        starts: one or more.
        effort: is added to.
    """
    rng = np.random.default_rng(seeds)
    best = Found(np.zeros(len(problem.dyes)), -np.inf)
    for _ in range(starts):
        found = climb(problem, random_start(problem, rng), effort)
        if found.worst > best.worst + TIE:
            best = found
    return best
