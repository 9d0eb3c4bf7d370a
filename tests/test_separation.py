"""Which pairs count, and which is worst."""

from __future__ import annotations

import numpy as np

from mixind.difference import METRICS
from mixind.separation import dose_pairs, separation_matrix, separations, step_pairs, worst_pair

METRIC = METRICS["ciede2000"]


def test_pairs_at_least_one_step_apart() -> None:
    pH = np.array([4.0, 5.0, 6.0, 6.6])
    assert step_pairs(pH, 1.0).tolist() == [[0, 1], [0, 2], [0, 3], [1, 2], [1, 3]]
    assert len(step_pairs(pH, 0.5)) == 6


def test_one_pH_at_two_doses_never_counts() -> None:
    pairs = dose_pairs(np.array([4.0, 5.0]), 1.0, 3)
    assert len(pairs) == 9
    assert all(a % 2 != b % 2 for a, b in pairs)


def test_the_worst_pair_is_found_across_doses() -> None:
    """pH 4 at the high dose looks like pH 5 at the low dose."""
    Lab = np.array([[[90.0, 0, 10], [90, 0, 40], [90, 0, 80]], [[90, 0, 41], [90, 0, 60], [90, 0, 99]]])
    worst = worst_pair(np.array([4.0, 5.0, 6.0]), Lab, 1.0, METRIC, 2.0)
    assert worst.pair == (4.0, 5.0)
    assert worst.separation < 1


def test_matrix_and_pairs_agree() -> None:
    Lab = np.random.default_rng(0).uniform(-50, 50, (6, 3)) + np.array([50, 0, 0])
    matrix = separation_matrix(Lab, METRIC, 2.0)
    pairs = step_pairs(np.arange(6.0), 1.0)
    np.testing.assert_allclose(matrix[pairs[:, 0], pairs[:, 1]], separations(Lab, pairs, METRIC, 2.0))
    np.testing.assert_allclose(matrix, matrix.T, rtol=1e-9)
