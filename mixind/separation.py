"""Telling pH steps apart: how different every two of them look, and where the ladder is weak."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from mixind.difference import Metric

_AT_ONCE = 4096
"""Pairs compared at once, so that they stay in the cache."""


def step_pairs(pH: np.ndarray, step: float) -> np.ndarray:
    """Return the index pairs (i, j), i < j, of all pH at least one step apart, (K, 2)."""
    first, second = np.triu_indices(pH.size, k=1)
    apart = pH[second] - pH[first] >= step - 1e-9
    return np.stack([first[apart], second[apart]], axis=1)


def dose_pairs(pH: np.ndarray, step: float, doses: int) -> np.ndarray:
    """Return index pairs into colours laid out as (doses, P): a pH at any dose against another pH at any dose.

    Returns: (K, 2), indices dose * P + position. One pH at two doses never counts.
    """
    pairs = step_pairs(pH, step)
    shifts = np.array([(a * pH.size, b * pH.size) for a in range(doses) for b in range(doses)])
    return np.asarray((pairs[None, :, :] + shifts[:, None, :]).reshape(-1, 2))


def separations(coordinates: np.ndarray, pairs: np.ndarray, metric: Metric, kL: float) -> np.ndarray:
    """Return the difference of each pair of colours.

    Args:
        coordinates: colours in the metric's space, (..., N, 3).
        pairs: indices into N, (K, 2).
    Returns: (..., K).
    """
    flat = coordinates.reshape(-1, *coordinates.shape[-2:])
    values = np.empty((flat.shape[0], len(pairs)))
    together = max(1, _AT_ONCE // max(len(pairs), 1))
    for start in range(0, flat.shape[0], together):
        part = flat[start:start + together]
        values[start:start + together] = metric.difference(part[:, pairs[:, 0]], part[:, pairs[:, 1]], kL)
    return values.reshape(*coordinates.shape[:-2], len(pairs))


def separation_matrix(coordinates: np.ndarray, metric: Metric, kL: float) -> np.ndarray:
    """Return the difference of every two colours, (N, N).

    Args:
        coordinates: colours in the metric's space, (N, 3).
        kL: weight of lightness, above zero.
    """
    return metric.difference(coordinates[:, None, :], coordinates[None, :, :], kL)


@dataclass(frozen=True)
class Worst:
    """The two pH that are hardest to tell apart, and how different they look."""

    separation: float
    pair: tuple[float, float]


def worst_pair(pH: np.ndarray, coordinates: np.ndarray, step: float, metric: Metric, kL: float) -> Worst:
    """Return the pair of pH at least one step apart with the smallest difference.

    Args:
        pH: (P,).
        coordinates: colours in the metric's space, (P, 3), or (D, P, 3) for several doses.
    """
    flat = coordinates.reshape(-1, 3)
    pairs = dose_pairs(pH, step, flat.shape[0] // pH.size)
    values = separations(flat, pairs, metric, kL)
    low, high = pairs[int(values.argmin())] % pH.size
    return Worst(float(values.min()), (float(pH[low]), float(pH[high])))
