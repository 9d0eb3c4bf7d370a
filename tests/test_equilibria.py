"""Laws of the fractions, and the activity correction against print."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from mixind import equilibria
from mixind.equilibria import Solution
from mixind.errors import MixindError

constants = st.lists(st.floats(-5, 20), max_size=5).map(sorted)


@given(constants, st.lists(st.floats(-1e3, 1e3), min_size=1, max_size=5))
def test_fractions_sum_to_one_at_any_pH(pKa: list[float], pH: list[float]) -> None:
    shares = equilibria.fractions(np.array(pH), np.array(pKa))
    np.testing.assert_allclose(shares.sum(axis=1), 1.0, rtol=1e-12)
    assert np.all(shares >= 0)


@given(constants.filter(lambda pKa: len(pKa) > 0))
def test_neighbours_are_equal_at_their_constant(pKa: list[float]) -> None:
    shares = equilibria.fractions(np.array(pKa), np.array(pKa))
    for step in range(len(pKa)):
        assert shares[step, step] == pytest.approx(shares[step, step + 1], rel=1e-9)


def test_slopes_are_exact() -> None:
    pH, pKa, h = np.linspace(0, 14, 29), np.array([2.0, 6.5, 7.0]), 1e-6
    slopes = equilibria.fraction_slopes(equilibria.fractions(pH, pKa))
    for step in range(3):
        moved = np.zeros(3)
        moved[step] = h
        numeric = (equilibria.fractions(pH, pKa + moved) - equilibria.fractions(pH, pKa - moved)) / (2 * h)
        np.testing.assert_allclose(slopes[:, step], numeric, atol=1e-8)


def test_debye_hueckel_slope_and_davies() -> None:
    """A = 0.5092 at 25 C (Yao and Byrne, Environ. Sci. Technol. 35 (2001) 1197, abstract).

    Davies, -log gamma of a singly charged ion: 0.107 at I = 0.1 from A = 0.509 by hand.
    """
    assert equilibria.debye_hueckel_slope(25.0) == pytest.approx(0.5092, abs=0.002)
    assert equilibria.davies(0.1) == pytest.approx(0.509 * (0.1**0.5 / (1 + 0.1**0.5) - 0.03), abs=5e-4)
    assert equilibria.davies(0.0) == 0.0
    assert equilibria.davies(3.0) == equilibria.davies(0.5)


def test_solutions_out_of_range_are_refused() -> None:
    for bad in ({"temperature": -1}, {"temperature": 101}, {"ionic_strength": -0.1}, {"ionic_strength": float("nan")}):
        with pytest.raises(MixindError):
            Solution(**bad)
