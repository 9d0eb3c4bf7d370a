"""Blends and their files."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from mixind.blend import DEFAULT_DOSE, Blend, Component, blend_of, blend_text, read_blend
from mixind.errors import MixindError
from mixind.library import Library
from mixind.quantities import strength


def read(tmp_path: Path, text: str, library: Library) -> Blend:
    path = tmp_path / "b.toml"
    path.write_text(text, encoding="utf-8")
    return read_blend(path, library)


def test_a_blend_survives_writing(tmp_path: Path, library: Library) -> None:
    text = (
        'title = "Bench 3, \\"drip\\" line"\ndose = "0.1 mL in 5 mL"\nsolvent = "ethanol 50 % v/v"\nalkali = "1.0 mol/mol"\n'
        'stock_ph = 6.8\nremarks = ["shake"]\n[[component]]\ndye = "methyl red"\nstrength = "62.5 mg/L"\nform = "sodium salt"\n'
        'content = "85 %"\n[conditions]\nvessel = "on-white"\npath = "16 mm"\nlight = "A"\ntemperature = 20\n')
    blend = read(tmp_path, text, library)
    again = read(tmp_path, blend_text(blend), library)
    assert again == blend
    assert again.conditions["path"] == pytest.approx(1.6)


def test_concentrations_follow_from_strength_form_and_dose(library: Library) -> None:
    """By hand: 291.28 g/mol for the sodium salt; 0.2 mL in 10 mL dilutes by 0.2 / 10.2."""
    dye = library.find("methyl red")
    blend = Blend("x", DEFAULT_DOSE, (Component(dye, strength("291.28 mg/L"), form="sodium salt"),))
    np.testing.assert_allclose(blend.sample_concentrations(), [1e-3 * 0.2 / 10.2], rtol=1e-4)
    np.testing.assert_allclose(blend.sample_concentrations(1.5), [1e-3 * 0.3 / 10.3], rtol=1e-4)


def test_a_blend_made_for_concentrations_gives_them_back(library: Library) -> None:
    used = [library.find("methyl red"), library.find("bromothymol blue")]
    np.testing.assert_allclose(blend_of(used, np.array([2e-5, 3e-5]), DEFAULT_DOSE, "x").sample_concentrations(), [2e-5, 3e-5])


COMPONENT = '[[component]]\ndye = "methyl red"\nstrength = "60 mg/L"\n'


@pytest.mark.parametrize(("text", "message"), [
    ("", "component: is missing"), ("component = []", "has no component"), (COMPONENT + COMPONENT, "methyl red stands 2 times"),
    (COMPONENT + "colour = 1\n", "colour: is not a key"), ("titel = 'x'\n" + COMPONENT, "titel: is not a key.*did you mean title"),
    (COMPONENT.replace("60 mg/L", "-60 mg/L"), "is negative"), (COMPONENT.replace("60 mg/L", "nan mg/L"), "not a number"),
    (COMPONENT.replace("60 mg/L", "60"), "the unit is missing"), (COMPONENT.replace('"60 mg/L"', "60"), "strength: must be text"),
    (COMPONENT.replace("methyl red", "metyl red"), "did you mean methyl red"), ("dose = '3 drops'\n" + COMPONENT, "dose"),
    (COMPONENT + 'form = "oxalate"\n', "form 'oxalate' is not in its file"),
    (COMPONENT + '[conditions]\nvessel = "cup"\n', "vessel: 'cup' is not one of"),
    (COMPONENT + '[conditions]\npath = "0 cm"\n', "path"), (COMPONENT + 'content = "150 %"\n', "content"), ("a = [", "not valid TOML"),
    (COMPONENT.replace("[[component]]", "[component]"), "must be an array of tables"),
])
def test_a_faulty_blend_is_refused(tmp_path: Path, library: Library, text: str, message: str) -> None:
    with pytest.raises(MixindError, match=message) as caught:
        read(tmp_path, text, library)
    assert "\n" not in str(caught.value)


def test_the_digest_changes_with_the_data(library: Library) -> None:
    one = blend_of([library.find("methyl red")], np.array([1e-5]), DEFAULT_DOSE, "x")
    other = blend_of([library.find("methyl orange")], np.array([1e-5]), DEFAULT_DOSE, "x")
    assert len(one.digest()) == 12
    assert one.digest() != other.digest()
