"""Viewers and vessels."""

from __future__ import annotations

import subprocess
import sys
from importlib.metadata import version

import numpy as np
import pytest

from mixind import viewing
from mixind.errors import MixindError
from mixind.spectra import WAVELENGTH

ALL = [(lamp, observer) for lamp in viewing.ILLUMINANTS for observer in viewing.OBSERVERS]


@pytest.mark.parametrize(("lamp", "observer"), ALL)
def test_the_frozen_table_is_what_colour_science_gives(lamp: str, observer: str) -> None:
    made = viewing.weights_from_colour_science(lamp, observer)
    np.testing.assert_allclose(viewing.viewer(lamp, observer).weights, made, atol=1e-8)


@pytest.mark.parametrize(("lamp", "observer"), ALL)
@pytest.mark.parametrize("eyes", viewing.EYES)
@pytest.mark.parametrize("severity", [0.35, 1.0])
def test_every_white_stays_white(lamp: str, observer: str, eyes: str, severity: float) -> None:
    normal = viewing.viewer(lamp, observer)
    seen = viewing.viewer(lamp, observer, eyes, severity)
    np.testing.assert_allclose(seen.white, normal.white, atol=1e-12)
    assert normal.white[1] == pytest.approx(1.0, abs=1e-11)


def test_d65_has_the_published_white() -> None:
    """CIE 15:2018, table 4: x = 0.31272, y = 0.32903 for D65 and the 2 degree observer, to one and a half units of the last printed digit."""
    white = viewing.viewer("D65").white
    np.testing.assert_allclose(white[:2] / white.sum(), [0.31272, 0.32903], atol=1.5e-5)


def test_weights_agree_with_integration_at_one_nanometre() -> None:
    """A smooth filter given every 5 nm, against colour-science's integral of it at 1 nm."""
    colour = viewing.colour_science()
    centres = np.linspace(420, 660, 7)
    for centre in centres:
        def light(at: np.ndarray, centre: float = centre) -> np.ndarray:
            return np.asarray(10 ** (-np.exp(-(((at - centre) / 40) ** 2))))
        at = np.arange(360, 831.0)
        sd = colour.SpectralDistribution(dict(zip(at, light(at), strict=True)))
        lamp = colour.SDS_ILLUMINANTS["D65"].copy().interpolate(
            colour.SpectralShape(360, 780, 1), interpolator=colour.LinearInterpolator).extrapolate(colour.SpectralShape(360, 830, 1))
        expected = colour.sd_to_XYZ(sd, viewing.colour_science().MSDS_CMFS[viewing.OBSERVERS["2"]], lamp, method="Integration") / 100
        np.testing.assert_allclose(light(WAVELENGTH) @ viewing.viewer().weights, expected, atol=2e-4)


def test_machado_is_what_colour_science_tabulates() -> None:
    tables = viewing.colour_science().blindness.CVD_MATRICES_MACHADO2010
    for eyes, name in viewing.DEFICIENCIES.items():
        for tenth in range(11):
            frozen = viewing._deficiency_tables(eyes)[tenth]
            np.testing.assert_allclose(frozen, tables[name][tenth / 10], atol=2e-6)


def test_a_deficient_eye_confuses_red_with_green() -> None:
    """Machado et al. (2009): for a deutan the two are alike, for a normal eye they are not."""
    red_and_green = np.array([[0.9, 0.1, 0.1], [0.35, 0.5, 0.1]]) @ viewing.XYZ_FROM_RGB.T
    chroma = []
    for eyes in ("normal", "deutan"):
        matrix = np.eye(3) if eyes == "normal" else viewing.eye_matrix(eyes, 1.0, viewing.viewer().white)
        seen = red_and_green @ matrix.T
        chroma.append(np.abs(np.diff(seen / seen.sum(axis=1, keepdims=True), axis=0)).sum())
    assert chroma[1] < 0.25 * chroma[0]


def test_other_lamps_are_made_on_demand() -> None:
    assert viewing.viewer("C").white[1] == pytest.approx(1.0)


@pytest.mark.parametrize(("arguments", "message"), [
    (("D66", "2"), "did you mean"), (("D65", "3"), "observer"), (("D65", "2", "cat"), "eyes"), (("D65", "2", "deutan", 1.5), "severity"),
    (("D65", "2", "deutan", float("nan")), "severity")])
def test_unknown_viewers_are_refused(arguments: tuple[object, ...], message: str) -> None:
    with pytest.raises(MixindError, match=message):
        viewing.viewer(*arguments)  # type: ignore[arg-type]


def test_importing_colour_science_leaves_print_options_alone() -> None:
    code = ("import numpy as np; before = np.get_printoptions(); from mixind import viewing; viewing.colour_science(); "
            "assert np.get_printoptions() == before")
    subprocess.run([sys.executable, "-W", "ignore", "-c", code], check=True)


def test_the_table_names_its_origin() -> None:
    head = viewing.FROZEN_TABLE.read_text().splitlines()[1]
    assert "colour-science 0." in head
    assert version("colour-science").startswith("0.")


def test_vessels() -> None:
    clear, on_white = viewing.vessel("clear", 1.5), viewing.vessel("on-white", 1.5)
    absorbance = np.array([0.0, 0.2, 1.0])
    np.testing.assert_allclose(clear.light(absorbance), 10 ** (-1.5 * absorbance))
    np.testing.assert_allclose(on_white.light(absorbance), clear.light(2 * absorbance))
    for vessel in (clear, on_white):
        numeric = (vessel.light(absorbance + 1e-6) - vessel.light(absorbance - 1e-6)) / 2e-6
        np.testing.assert_allclose(vessel.light_slope(vessel.light(absorbance)), numeric, rtol=1e-6)
    for bad in (("cup", 1.0), ("clear", 0.0), ("clear", float("inf"))):
        with pytest.raises(MixindError):
            viewing.vessel(*bad)
