"""CIEDE2000 against its published test data and colour-science; its derivatives against differences."""

from __future__ import annotations

import numpy as np
import pytest

from mixind import viewing
from mixind.difference import METRICS, ciede2000, ciede2000_and_slopes
from tests import published


def pairs() -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    data = np.array([[float(value) for value in row.values()] for row in published.rows("ciede2000")])
    return data[:, :3], data[:, 3:6], data[:, 6]


def test_published_test_data() -> None:
    """Sharma, Wu and Dalal (2005), table 1, 34 pairs, to the four printed digits, both ways round."""
    one, two, expected = pairs()
    assert expected.size == 34
    np.testing.assert_allclose(ciede2000(one, two, kL=1.0), expected, atol=5.1e-5)
    np.testing.assert_allclose(ciede2000(two, one, kL=1.0), expected, atol=5.1e-5)


def random_pairs(count: int) -> tuple[np.ndarray, np.ndarray]:
    rng = np.random.default_rng(11)
    one, two = (np.column_stack([rng.uniform(5, 99, count), rng.uniform(-90, 90, (count, 2))]) for _ in range(2))
    chroma = np.minimum(np.hypot(one[:, 1], one[:, 2]), np.hypot(two[:, 1], two[:, 2]))
    turn = np.degrees(np.arctan2(one[:, 2], one[:, 1]) - np.arctan2(two[:, 2], two[:, 1]))
    apart = np.abs((turn + 180) % 360 - 180)
    kept = (chroma > 1) & (apart < 179) & (ciede2000(one, two) > 0.1)
    return one[kept], two[kept]


def test_agrees_with_colour_science() -> None:
    one, two = random_pairs(3000)
    colour = viewing.colour_science()
    np.testing.assert_allclose(ciede2000(one, two, kL=1.0), colour.difference.delta_E_CIE2000(one, two), atol=1e-8)
    np.testing.assert_allclose(
        ciede2000(one, two, kL=2.0), colour.difference.delta_E_CIE2000(one, two, textiles=True), atol=1e-8)


@pytest.mark.parametrize("kL", [1.0, 2.0])
def test_slopes_are_exact(kL: float) -> None:
    """Central differences on 1 000 random pairs with chroma > 1, dE > 0.1 and hues less than 179 degrees apart."""
    one, two = (side[:1000] for side in random_pairs(1300))
    assert one.shape[0] == 1000
    value, by_one, by_two = ciede2000_and_slopes(one, two, kL)
    np.testing.assert_allclose(value, ciede2000(one, two, kL), rtol=1e-6)
    for axis in range(3):
        step = np.zeros(3)
        step[axis] = 1e-5
        np.testing.assert_allclose(
            by_one[:, axis], (ciede2000(one + step, two, kL) - ciede2000(one - step, two, kL)) / 2e-5, atol=2e-4)
        np.testing.assert_allclose(
            by_two[:, axis], (ciede2000(one, two + step, kL) - ciede2000(one, two - step, kL)) / 2e-5, atol=2e-4)


def test_slopes_are_finite_where_the_formula_has_kinks() -> None:
    awkward = np.array([[50.0, 0, 0], [50, 10, 0], [50, -10, 0], [0, 0, 0], [100, 0, 0], [50, 1e-12, 0]])
    one, two = (side.reshape(-1, 3) for side in np.broadcast_arrays(awkward[:, None], awkward[None]))
    for part in ciede2000_and_slopes(one, two):
        assert np.all(np.isfinite(part))


def test_exactly_opposite_hues() -> None:
    """On both axes and both ways round, against colour-science."""
    ends = np.array([[50.0, 10, 0], [50, -10, 0], [50, 0, 10], [50, 0, -10]])
    one, two = ends[[0, 1, 2, 3]], ends[[1, 0, 3, 2]]
    colour = viewing.colour_science()
    np.testing.assert_allclose(ciede2000(one, two, kL=1.0), colour.difference.delta_E_CIE2000(one, two), atol=1e-9)


def test_lightness_counts_half_by_default() -> None:
    dark, light = np.array([50.0, 0, 0]), np.array([52.0, 0, 0])
    assert ciede2000(dark, light) == pytest.approx(ciede2000(dark, light, kL=1.0) / 2)


@pytest.mark.parametrize("metric", METRICS.values(), ids=list(METRICS))
def test_a_difference_is_symmetric_and_zero_for_equal_colours(metric: object) -> None:
    one, two = random_pairs(200)
    difference = metric.difference  # type: ignore[attr-defined]
    np.testing.assert_allclose(difference(one, two, 2.0), difference(two, one, 2.0), rtol=1e-9)
    assert np.all(difference(one, one, 2.0) == 0)


def test_long_arrays_are_cut_into_chunks_without_a_trace() -> None:
    one, two = random_pairs(9000)
    whole = ciede2000(one, two)
    assert whole.size > 8192
    np.testing.assert_array_equal(whole[4090:4110], ciede2000(one[4090:4110], two[4090:4110]))
