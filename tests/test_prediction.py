"""Laws of the forward model, and its uncertainty."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from mixind.blend import DEFAULT_DOSE, Blend, Component, blend_of
from mixind.colorimetry import cielab
from mixind.conditions import Conditions, differing
from mixind.difference import ciede2000
from mixind.library import Library
from mixind.prediction import DOSE_SD, STRENGTH_SD, absorbance, absorptivities, predict, tristimulus
from mixind.quantities import strength
from mixind.viewing import EYES, ILLUMINANTS, VESSELS

LIBRARY = Library()
DYES = [LIBRARY.find(name) for name in ("methyl red", "bromothymol blue", "phenolphthalein", "thymol blue")]
PH = np.arange(2.0, 12.1, 0.5)


def blend(*concentrations: float) -> Blend:
    return blend_of(DYES[:len(concentrations)], np.array(concentrations), DEFAULT_DOSE, "test")


@pytest.mark.parametrize("vessel", VESSELS)
@pytest.mark.parametrize("light", ILLUMINANTS)
def test_clear_solvent_has_exactly_the_white(vessel: str, light: str) -> None:
    found = predict(blend(0.0, 0.0), PH, Conditions(vessel=vessel, light=light, path=3.0))
    np.testing.assert_allclose(found.XYZ, np.broadcast_to(found.white, found.XYZ.shape), rtol=1e-12)
    assert set(found.words) == {"colourless"}


def test_absorbances_add() -> None:
    solution = Conditions().solution()
    table = absorptivities(DYES, PH, solution)
    both = absorbance(table, np.array([1e-5, 2e-5, 3e-5, 0.0]))
    parts = sum(absorbance(table, np.diag([1e-5, 2e-5, 3e-5, 0.0])[i]) for i in range(3))
    np.testing.assert_allclose(both, parts, rtol=1e-12)


@settings(max_examples=40, deadline=None)
@given(st.floats(0, 5e-5), st.floats(0, 5e-5), st.floats(0.05, 0.95), st.floats(0.2, 4.0),
       st.sampled_from(sorted(VESSELS)), st.sampled_from(EYES))
def test_invariances(one: float, two: float, share: float, path: float, vessel: str, eyes: str) -> None:
    """Splitting a component, twice the path at half the strength, and the order of components change nothing."""
    conditions = Conditions(vessel=vessel, eyes=eyes, path=path)
    viewer, holder, solution = conditions.make_viewer(), conditions.make_vessel(), conditions.solution()
    table = absorptivities([DYES[0], DYES[1], DYES[0]], PH, solution)
    split = tristimulus(table, np.array([share * one, two, (1 - share) * one]), holder, viewer)
    whole = tristimulus(table, np.array([one, two, 0.0]), holder, viewer)
    np.testing.assert_allclose(split, whole, atol=1e-12)
    longer = replace(conditions, path=2 * path).make_vessel()
    np.testing.assert_allclose(tristimulus(table, np.array([one, two, 0.0]) / 2, longer, viewer), whole, atol=1e-12)
    np.testing.assert_allclose(tristimulus(table[::-1], np.array([0.0, two, one]), holder, viewer), whole, atol=1e-12)
    assert np.all(np.isfinite(whole))


def test_a_batch_equals_one_by_one() -> None:
    conditions = Conditions()
    table = absorptivities(DYES, PH, conditions.solution())
    batch = np.random.default_rng(3).random((20, 4)) * 4e-5
    together = tristimulus(table, batch, conditions.make_vessel(), conditions.make_viewer())
    single = [tristimulus(table, row, conditions.make_vessel(), conditions.make_viewer()) for row in batch]
    np.testing.assert_allclose(together, single, rtol=1e-12)


def test_strength_by_amount_equals_strength_by_mass() -> None:
    dye = DYES[0]
    by_mass = Blend("a", DEFAULT_DOSE, (Component(dye, strength(f"{dye.molar_mass} mg/L")),))
    by_amount = Blend("b", DEFAULT_DOSE, (Component(dye, strength("1 mmol/L")),))
    np.testing.assert_allclose(predict(by_mass, PH, Conditions()).XYZ, predict(by_amount, PH, Conditions()).XYZ, rtol=1e-12)


def test_a_form_pair_is_one_to_one_at_its_constant() -> None:
    """Law: at pH = pKa' the spectrum is the mean of the two forms' spectra."""
    dye = LIBRARY.find("bromothymol blue")
    solution = Conditions().solution()
    at = dye.absorptivity_at(np.array([dye.steps[0].working_pka(solution)]), solution)[0]
    np.testing.assert_allclose(at, dye.absorptivity(solution).mean(axis=0), rtol=1e-9)


def drawn(made: Blend, rng: np.random.Generator, conditions: Conditions, shrink: float) -> np.ndarray:
    """Return the colours, (P, 3), with every uncertain figure drawn once, its uncertainty multiplied by `shrink`."""
    solution, components = conditions.solution(), []
    for component in made.components:
        steps = tuple(replace(s, stated=s.stated + shrink * s.sd * rng.standard_normal()) for s in component.dye.steps)
        forms = tuple(replace(f, absorptivity=f.absorptivity * (1 + shrink * np.hypot(f.sd, f.shape_sd) * rng.standard_normal()))
                      for f in component.dye.forms)
        by = 1 + shrink * STRENGTH_SD * rng.standard_normal()
        components.append(Component(replace(component.dye, steps=steps, forms=forms),
                                    replace(component.strength, value=component.strength.value * by)))
    varied = replace(made, components=tuple(components))
    table = absorptivities(varied.dyes, PH, solution)
    dosed = varied.sample_concentrations(1 + shrink * DOSE_SD * rng.standard_normal())
    viewer = conditions.make_viewer()
    return cielab(tristimulus(table, dosed, conditions.make_vessel(), viewer), viewer.white)


def test_the_uncertainty_agrees_with_monte_carlo() -> None:
    """All uncertainties shrunk to a tenth, so that the linear law must hold: 600 draws, whose rms has itself 3 %."""
    made, conditions, rng = blend(2e-5, 2.5e-5), Conditions(), np.random.default_rng(8)
    predicted = predict(made, PH, conditions)
    Lab = np.array([drawn(made, rng, conditions, 0.1) for _ in range(600)])
    spread = np.sqrt((ciede2000(Lab, predicted.Lab[None], kL=1.0) ** 2).mean(axis=0))
    np.testing.assert_allclose(0.1 * predicted.sd_dE00, spread, rtol=0.12)


def test_rows_have_the_documented_keys() -> None:
    rows = predict(blend(2e-5), PH, Conditions()).rows()
    documented = {"pH", "XYZ", "Lab", "sRGB", "hex", "in_gamut", "colour", "sd_dE00", "peak_absorbance", "dE00_next"}
    assert documented <= set(rows[0])
    assert rows[-1]["dE00_next"] is None
    assert rows[0]["XYZ"][1] <= 1


def test_grades_are_those_of_the_forms_present() -> None:
    dye = LIBRARY.find("cresol red")
    found = predict(blend_of([dye], np.array([2e-5]), DEFAULT_DOSE, "x"), np.array([0.0, 5.0, 10.0]), Conditions())
    assert found.grades[0] == "C"
    assert found.grades[1:] == ("A", "A")


def test_conditions_that_differ_are_remarked() -> None:
    assert differing(Conditions(light="A"), {"light": "D65", "path": 1.0}) == ["the blend was made for light D65, shown is A"]
