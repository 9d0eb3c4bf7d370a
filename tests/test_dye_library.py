"""Every bundled dye file: readable, sourced, and true to what it states of itself."""

from __future__ import annotations

from pathlib import Path

import molmass
import numpy as np
import pytest

from mixind import dyes, spectra
from mixind.dye_files import read_dye
from mixind.library import bundled_folder

FILES = sorted(bundled_folder().glob("*.toml"))
ISOSBESTIC_TOLERANCE = 4.0


def absorptivity(form: dyes.Form, wavelength: np.ndarray) -> np.ndarray:
    """Return the absorptivity of a form off the grid, from its bands or between the grid points of its table."""
    if form.bands:
        return spectra.sum_of_bands(form.bands, wavelength)
    return np.interp(wavelength, spectra.WAVELENGTH, form.absorptivity)


@pytest.fixture(params=FILES, ids=lambda path: path.stem)
def dye(request: pytest.FixtureRequest) -> dyes.Dye:
    return read_dye(request.param)


def test_file_is_named_after_the_dye(dye: dyes.Dye) -> None:
    folded = "".join(c if c.isalnum() else "_" for c in dye.name.lower())
    assert (bundled_folder() / f"{folded}.toml").exists()


def test_each_maximum_is_as_stated(dye: dyes.Dye) -> None:
    """Wavelength to the 0.1 nm of the scan, height to half a per mille; a table to its own 5 nm and 2 %."""
    for form in dye.forms:
        if form.peak is None:
            assert not form.coloured, f"{form.label} is coloured and states no maximum"
            continue
        stated, height = form.peak
        scan = np.arange(max(stated - 60, 300), stated + 60, 0.1)
        values = absorptivity(form, scan)
        assert abs(scan[values.argmax()] - stated) <= (0.11 if form.bands else 5.0)
        assert values.max() == pytest.approx(height, rel=5e-4 if form.bands else 0.02)


def test_published_ratios_are_honoured(dye: dyes.Dye) -> None:
    for ratio in dye.ratios:
        forms = {form.label: form for form in dye.forms}
        over = absorptivity(forms[ratio.form], np.array([ratio.wavelength]))[0]
        under = absorptivity(forms[ratio.to_form], np.array([ratio.to_wavelength]))[0]
        assert over / under == pytest.approx(ratio.value, abs=ratio.sd), ratio


def test_isosbestic_points_lie_where_sourced(dye: dyes.Dye, capsys: pytest.CaptureFixture[str]) -> None:
    """Points with a source within 4 nm; those from memory are only reported."""
    forms = {form.label: form for form in dye.forms}
    for point in dye.isosbestics:
        scan = np.arange(310.0, 760.0, 0.1)
        difference = absorptivity(forms[point.forms[0]], scan) - absorptivity(forms[point.forms[1]], scan)
        crossings = scan[:-1][np.sign(difference[:-1]) != np.sign(difference[1:])]
        nearest = crossings[np.abs(crossings - point.wavelength).argmin()]
        far = abs(nearest - point.wavelength) > ISOSBESTIC_TOLERANCE
        assert point.source == "memory" or not far, f"{point}: {nearest:.1f}"
        if far:
            with capsys.disabled():
                print(f"\n  {dye.name} {'/'.join(point.forms)}: isosbestic at {nearest:.0f} nm, "
                      f"{point.wavelength:g} nm from memory", end="")


def test_molar_masses_follow_from_the_formulas(dye: dyes.Dye) -> None:
    """Standard atomic weights of the molmass package; tolerance is the last printed digit."""
    for formula, mass in [(dye.formula, dye.molar_mass), *((s.formula, s.molar_mass) for s in dye.substances)]:
        assert molmass.Formula(formula).mass == pytest.approx(mass, abs=0.03), formula


def test_every_source_is_cited_and_used(dye: dyes.Dye) -> None:
    """The reader has already refused keys that do not resolve; here: no citation stands unused."""
    text = (bundled_folder() / f"{FILES[0].stem}.toml").parent / f"{dye.name.replace(' ', '_')}.toml"
    path = next((p for p in FILES if read_dye(p).name == dye.name), text)
    body = Path(path).read_text(encoding="utf-8").split("[sources]")[0]
    for key in dye.sources:
        assert f'"{key}"' in body, f"[sources] {key} is not used"


def test_names_and_aliases_are_unique() -> None:
    seen: dict[str, str] = {}
    for path in FILES:
        dye = read_dye(path)
        for name in (dye.name, *dye.aliases):
            assert name.casefold() not in seen, f"{name}: {dye.name} and {seen.get(name.casefold())}"
            seen[name.casefold()] = dye.name
