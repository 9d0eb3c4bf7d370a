"""Strengths that can be weighed: three significant figures that lose next to nothing."""

from __future__ import annotations

import math

import numpy as np

from mixind.search.problem import Problem

LARGEST_LOSS = 0.005
"""Share of the worst separation that rounding may cost before one more figure is used."""


def rounded(problem: Problem, x: np.ndarray, per_share: np.ndarray) -> np.ndarray:
    """Return shares near `x` whose strengths have three significant figures (more where three lose over 0.5 %).

    Each strength is first rounded to the nearest figure that breaks no limit, then moved by single last digits as long
    as that raises the worst separation.

    Args:
        x: shares, (n,), each above zero.
        per_share: strength in mg/L of a share of 1, (n,).
    """
    best = problem.worst(x)
    for figures in (3, 4, 5):
        found = _descended(problem, x, per_share, figures)
        if problem.allowed(found) and problem.worst(found) >= best * (1 - LARGEST_LOSS):
            return found
    return found


def _descended(problem: Problem, x: np.ndarray, per_share: np.ndarray, figures: int) -> np.ndarray:
    strengths = x * per_share
    digit = np.array([10.0 ** (math.floor(math.log10(s)) - figures + 1) for s in strengths])
    counts = np.rint(strengths / digit)
    counts = np.where(_shares(counts, digit, per_share) > 1, np.floor(strengths / digit + 1e-9), counts)
    while not problem.allowed(_shares(counts, digit, per_share)) and counts.max() > 1:
        counts = counts - (counts > 1)
    level = problem.worst(_shares(counts, digit, per_share))
    improved = True
    while improved:
        improved = False
        for position in range(counts.size):
            for change in (1, -1):
                moved = counts.copy()
                moved[position] += change
                trial = _shares(moved, digit, per_share)
                if moved[position] > 0 and problem.allowed(trial) and problem.worst(trial) > level + 1e-9:
                    counts, level, improved = moved, problem.worst(trial), True
    return _shares(counts, digit, per_share)


def _shares(counts: np.ndarray, digit: np.ndarray, per_share: np.ndarray) -> np.ndarray:
    # written the way a strength in mg/L is printed and read again, so that limits are judged on that number
    return np.asarray(np.array([float(f"{c * d:.10g}") for c, d in zip(counts, digit, strict=True)]) / per_share)
