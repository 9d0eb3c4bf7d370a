"""Dye files: what is read, what is refused, and what a dye knows."""

from __future__ import annotations

import re
from pathlib import Path

import numpy as np
import pytest

from mixind.dye_files import cas_check_digit_holds, read_dye
from mixind.dyes import Dye, Step
from mixind.equilibria import Solution, davies
from mixind.errors import MixindError
from mixind.library import Library


def spoiled(text: str, pattern: str, replacement: str) -> str:
    changed = re.sub(pattern, replacement, text, count=1, flags=re.S)
    assert changed != text
    return changed


@pytest.mark.parametrize(("pattern", "replacement", "message"), [
    (r"pka = 4\.90", "pka = 71.0", r"step 1: pka: is 71\.0, outside -5 to 20"),
    (r"pka = 4\.90", "pka = nan", "step 1: pka: is nan"),
    (r"\[\[step\]\].*?\n\n(?=\[\[step)", "", "2 forms for 0 steps"),
    (r"\[\[form\]\]", '[[step]]\npka = 3.0\nsd = 0.1\nkind = "mixed"\nionic_strength = 0.1\nsource = "memory"\n\n[[form]]',
     "2 forms for 2 steps.*step 2: pka 3 is not above the 4.9"),
    (r"height = 17700\.0", "height = -5", "form 1: band 1: height: is -5, outside 0"),
    (r"skew = 1\.1892", "skew = 0", "skew: is 0"),
    (r"charge = -2", "charge = -1", "In2- must have one charge less than HIn-"),
    (r'grade = "C"', 'grade = "D"', "grade: 'D' is not one of A, B, C"),
    (r'source = "usp32"', 'source = "usp33"', "'usp33' is not a key of .sources."),
    (r'cas = "76-60-8"', 'cas = "76-60-9"', "fails the check digit"),
    (r"sd = 0\.06", "sdd = 0.06", "sdd: is not a key that is known here; did you mean sd"),
    (r'kind = "thermodynamic"', 'kind = "practical"', "kind: 'practical' is not one of"),
    (r"molar_mass = 698\.01", 'molar_mass = "698"', "molar_mass: must be a number"),
    (r"low = 4\.0", "low = 6.0", "low: 6 is not below high"),
    (r'forms = \["HIn-", "In2-"\]', 'forms = ["HIn-"]', "forms: must name two"),
    (r"dpka_dt = -0\.004", "dpka_dt = -0.004\nenthalpy = 8", "enthalpy: stands beside dpka_dt"),
])
def test_a_faulty_file_is_refused(tmp_path: Path, dye_text: str, pattern: str, replacement: str, message: str) -> None:
    path = tmp_path / "dye.toml"
    path.write_text(spoiled(dye_text, pattern, replacement), encoding="utf-8")
    with pytest.raises(MixindError, match=message) as caught:
        read_dye(path)
    assert str(caught.value).startswith(str(path))
    assert "\n" not in str(caught.value)


def test_all_faults_are_reported_together(tmp_path: Path, dye_text: str) -> None:
    path = tmp_path / "dye.toml"
    text = spoiled(spoiled(dye_text, r"pka = 4\.90", "pka = 49"), r"height = 17700\.0", "height = -1")
    path.write_text(text, encoding="utf-8")
    with pytest.raises(MixindError) as caught:
        read_dye(path)
    assert len(caught.value.faults) == 2  # type: ignore[attr-defined]


def test_a_table_beside_bands_and_a_short_table_are_refused(tmp_path: Path, dye_text: str) -> None:
    path = tmp_path / "dye.toml"
    rows = "table = {wavelength = [400, 500, 600, 650], absorptivity = [1, 2, 3, 4]}"
    path.write_text(spoiled(dye_text, r"bands = \[", rows + "\nbands = ["), encoding="utf-8")
    with pytest.raises(MixindError, match=r"stands beside bands.*covers 400-650 nm"):
        read_dye(path)


@pytest.mark.parametrize(("number", "holds"), [("76-60-8", True), ("7732-18-5", True), ("76-60-9", False), ("x", False)])
def test_cas_check_digit(number: str, holds: bool) -> None:
    assert cas_check_digit_holds(number) is holds


def step(stated: float, kind: str, ionic_strength: float, charge: int = -1, **rest: object) -> Step:
    return Step(stated, 0.05, kind, ionic_strength, charge, "memory", **rest)  # type: ignore[arg-type]


def test_activity_moves_the_constant_as_the_literature_says() -> None:
    """HIn-/In2-: -0.32 at I = 0.1 for a mixed, -0.43 for a concentration constant (Yao and Byrne 2001, Davies form)."""
    thermodynamic = step(8.05, "thermodynamic", 0)
    assert thermodynamic.working_pka(Solution()) - 8.05 == pytest.approx(-0.32, abs=0.005)
    assert step(8.05 - 0.43, "concentration", 0.1).pka == pytest.approx(8.05, abs=0.005)


def test_phenol_red_in_saline() -> None:
    """7.67 in 0.15 mol/L NaCl at 25 C, apparent (Sendroy and Rodkey 1961, abstract), within Davies' own error of 0.05."""
    dye = Library().find("phenol red")
    assert dye.steps[-1].working_pka(Solution(ionic_strength=0.15)) == pytest.approx(7.67, abs=0.06)


@pytest.mark.parametrize("kind", ["mixed", "concentration", "thermodynamic"])
def test_a_constant_comes_back_at_its_own_ionic_strength(kind: str) -> None:
    measured = step(6.0, kind, 0.1)
    back = measured.working_pka(Solution(ionic_strength=0.1))
    offset = {"mixed": 0.0, "concentration": davies(0.1), "thermodynamic": -3 * davies(0.1)}[kind]
    assert back == pytest.approx(6.0 + offset)


def test_total_scale_sea_water_constants_agree_with_fresh_water_ones() -> None:
    """m-cresol purple: 8.006 at S = 35 on the total scale (Clayton and Byrne 1993), 8.6606 at I = 0 (Lai et al. 2016).

    The conversion is rough; 0.05 is its stated uncertainty.
    """
    assert step(8.006, "total-scale", 0.7).pka == pytest.approx(8.6606, abs=0.05)


def test_salt_factor_medium_and_temperature() -> None:
    zwitterion = step(3.46, "mixed", 0.1, charge=0, salt_factor=0.0)
    assert zwitterion.working_pka(Solution(ionic_strength=0.0)) == pytest.approx(3.46)
    warm = step(7.0, "thermodynamic", 0, dpka_dt=-0.01)
    at_zero = Solution(temperature=35, ionic_strength=0)
    assert warm.working_pka(at_zero) == pytest.approx(6.9)
    sea = step(7.0, "thermodynamic", 0, media={"sea": (6.2, 0.02, "memory")})
    assert sea.working_pka(Solution(medium="sea")) == 6.2


def test_slow_steps_wait_for_age(library: Library) -> None:
    dye = library.find("phenolphthalein")
    fresh, aged = Solution(), Solution(aged=True)
    assert dye.fractions(np.array([13.5]), fresh).shape == (1, 3)
    assert dye.absorptivity_at(np.array([13.5]), fresh).max() > 4 * dye.absorptivity_at(np.array([13.5]), aged).max()


def test_grade_is_the_worst_coloured_form(library: Library) -> None:
    dye: Dye = library.find("phenolphthalein")
    assert dye.grade == "A"
    assert library.find("bromocresol green").grade == "C"


def test_names_are_found_whatever_their_dress(library: Library) -> None:
    for name in ("methyl red", "Methyl Red", "methyl-red", "BTB", "p-Nitrophenol"):
        assert library.find(name).name
    with pytest.raises(MixindError, match=r"did you mean methyl red"):
        library.find("methyl redd")
    with pytest.raises(MixindError, match="not in the library"):
        library.find("xqzwv")


def test_a_folder_of_ones_own_stands_in_front(tmp_path: Path, dye_text: str, monkeypatch: pytest.MonkeyPatch) -> None:
    (tmp_path / "bromocresol_green.toml").write_text(spoiled(dye_text, r"pka = 4\.90", "pka = 4.80"), encoding="utf-8")
    assert Library([tmp_path]).find("BCG").steps[0].stated == 4.8
    monkeypatch.setenv("MIXIND_LIBRARY", str(tmp_path))
    assert Library().find("bromocresol green").steps[0].stated == 4.8
    with pytest.raises(MixindError, match="not a folder"):
        Library([tmp_path / "no"])
