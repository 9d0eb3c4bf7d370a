"""Quantities as people write them."""

from __future__ import annotations

import numpy as np
import pytest

from mixind import quantities as q
from mixind.errors import MixindError


@pytest.mark.parametrize(("text", "grams"), [
    ("62.5 mg/L", 0.0625), ("0.1 %", 1.0), ("0.1 % w/v", 1.0), ("1 g/100 mL", 10.0), ("25 µg/L", 25e-6), ("0 g/L", 0.0)])
def test_strength_by_mass(text: str, grams: float) -> None:
    assert q.strength(text).grams_per_litre(500.0) == pytest.approx(grams)


def test_strength_by_amount_and_back() -> None:
    found = q.strength("2 mmol/L")
    assert found.moles_per_litre(300.0) == pytest.approx(2e-3)
    assert found.grams_per_litre(300.0) == pytest.approx(0.6)
    assert q.strength("0.6 g/L").moles_per_litre(300.0) == pytest.approx(2e-3)


@pytest.mark.parametrize("text", ["5", "5 mg", "-1 mg/L", "nan mg/L", "1e400 mg/L", "mg/L", "", "5 mg/L extra", "1,5 g/L"])
def test_strength_refuses(text: str) -> None:
    with pytest.raises(MixindError, match="strength"):
        q.strength(text)


def test_an_unknown_unit_brings_the_nearest() -> None:
    with pytest.raises(MixindError, match="did you mean mmol/L"):
        q.strength("5 mmolL")


def test_dose() -> None:
    dose = q.dose("0.2 mL in 10 mL")
    assert dose.share() == pytest.approx(0.2 / 10.2)
    assert dose.share(1.2) == pytest.approx(0.24 / 10.24)
    assert str(dose) == "0.2 mL in 10 mL"
    assert dose.in_drops() == "about 4 drops of a watery or 10 of an alcoholic stock"


@pytest.mark.parametrize("text", ["0.2 mL", "0 mL in 10 mL", "0.2 in 10", "0.2 mL in 10 mL in 5 mL", "-1 mL in 10 mL"])
def test_dose_refuses(text: str) -> None:
    with pytest.raises(MixindError, match="dose"):
        q.dose(text)


@pytest.mark.parametrize(("low", "high", "step", "expected"), [
    (4, 10, 1, [4, 5, 6, 7, 8, 9, 10]), (4, 6.7, 1, [4, 5, 6, 6.7]), (0, 0.3, 0.1, [0, 0.1, 0.2, 0.3]), (6.8, 7.8, 0.5, [6.8, 7.3, 7.8])])
def test_grid(low: float, high: float, step: float, expected: list[float]) -> None:
    np.testing.assert_allclose(q.pH_grid(low, high, step), expected, atol=1e-12)


def test_thirds_fit() -> None:
    assert q.pH_grid(3, 11, 0.333333).size == 25


@pytest.mark.parametrize(("low", "high", "step", "message"), [
    (10, 4, 1, "lower pH first"), (4, 4, 1, "lower pH first"), (-2, 4, 1, "outside"), (4, 16, 1, "outside"), (4, 10, 0, "finer"),
    (4, 10, 0.01, "finer"), (4, 10, -1, "finer"), (4, 6.3, 1, "Use 1.15"), (4, 5, 2, "longer"), (float("nan"), 5, 1, "numbers")])
def test_grid_refuses(low: float, high: float, step: float, message: str) -> None:
    with pytest.raises(MixindError, match=message):
        q.pH_grid(low, high, step)


@pytest.mark.parametrize(("text", "expected"), [("4:10:3", [4, 7, 10]), ("4:6", [4, 5, 6]), ("7", [7]), ("4,5.5", [4, 5.5])])
def test_series(text: str, expected: list[float]) -> None:
    np.testing.assert_allclose(q.pH_series(text), expected)


@pytest.mark.parametrize("text", ["", "a", "4:5:6:7", "5,4", "4,4", "4,17", "nan", "4:inf:1"])
def test_series_refuses(text: str) -> None:
    with pytest.raises(MixindError):
        q.pH_series(text)


def test_share_and_path() -> None:
    assert q.share("0.2", "x") == q.share("20%", "x") == pytest.approx(0.2)
    assert q.path_length("16 mm") == pytest.approx(1.6)
    for text in ("100 %", "-5 %", "2"):
        with pytest.raises(MixindError):
            q.share(text, "x")
    for text in ("0 cm", "2 m", "3"):
        with pytest.raises(MixindError):
            q.path_length(text)


@pytest.mark.parametrize(("value", "shown"), [(0, "0"), (1234.5, "1230"), (0.01234, "0.0123"), (99.96, "100"), (0.9996, "1.00"), (5, "5.00"), (-0.5, "-0.500")])
def test_significant(value: float, shown: str) -> None:
    assert q.significant(value) == shown
