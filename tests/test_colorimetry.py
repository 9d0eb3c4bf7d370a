"""Colour spaces against colour-science, and their derivatives against differences."""

from __future__ import annotations

import numpy as np
import pytest

from mixind import colorimetry, viewing
from mixind.difference import METRICS

colour = viewing.colour_science()
D65 = viewing.viewer().white
WHITES = [viewing.viewer(lamp).white for lamp in ("D65", "A", "FL11")]


@pytest.fixture(scope="module")
def XYZ() -> np.ndarray:
    """Colours that mixtures of dyes have: light through random smooth filters."""
    rng = np.random.default_rng(5)
    absorbance = np.abs(np.cumsum(rng.normal(0, 0.12, (400, 81)), axis=1))
    return np.asarray(10**-absorbance @ viewing.viewer().weights)


@pytest.mark.parametrize("white", WHITES)
def test_cielab_agrees_with_colour_science(XYZ: np.ndarray, white: np.ndarray) -> None:
    expected = colour.XYZ_to_Lab(XYZ, colour.XYZ_to_xy(white))
    np.testing.assert_allclose(colorimetry.cielab(XYZ, white), expected, atol=1e-9)


@pytest.mark.parametrize("white", WHITES)
def test_cam16_ucs_agrees_with_colour_science(XYZ: np.ndarray, white: np.ndarray) -> None:
    seen = colour.XYZ_to_CAM16(100 * XYZ, 100 * white, colorimetry.ADAPTING_LUMINANCE, colorimetry.BACKGROUND)
    expected = colour.JMh_CAM16_to_CAM16UCS(np.stack([seen.J, seen.M, seen.h], axis=-1))
    np.testing.assert_allclose(colorimetry.cam16_ucs(XYZ, white), expected, atol=1e-9)


def test_srgb_agrees_with_colour_science(XYZ: np.ndarray) -> None:
    """The transform from the primaries; colour-science is asked to derive its matrices, too."""
    space = colour.models.RGB_COLOURSPACE_sRGB.copy()
    space.use_derived_transformation_matrices(True)
    linear = XYZ @ colorimetry.RGB_FROM_XYZ.T
    expected = colour.XYZ_to_RGB(XYZ, space, illuminant=None, apply_cctf_encoding=False)
    np.testing.assert_allclose(linear, expected, atol=1e-9)
    inside = np.clip(linear, 0, 1)
    np.testing.assert_allclose(colorimetry.srgb_encoded(inside), colour.cctf_encoding(inside, "sRGB"), atol=1e-9)


def test_oklab_agrees_with_colour_science_and_returns(XYZ: np.ndarray) -> None:
    """colour-science has the matrices of the original page, five to ten digits shorter than those of CSS Color 4."""
    np.testing.assert_allclose(colorimetry.oklab(XYZ), colour.XYZ_to_Oklab(XYZ), atol=2e-4)
    np.testing.assert_allclose(colorimetry.xyz_from_oklab(colorimetry.oklab(XYZ)), XYZ, atol=1e-12)


@pytest.mark.parametrize("metric", METRICS.values(), ids=list(METRICS))
def test_jacobians_are_exact(XYZ: np.ndarray, metric: object) -> None:
    point, jacobian = metric.space_and_jacobian(XYZ, D65)  # type: ignore[attr-defined]
    chromatic = np.hypot(point[:, 1], point[:, 2]) > 1
    for axis in range(3):
        step = np.zeros(3)
        step[axis] = 1e-6
        numeric = (metric.space(XYZ + step, D65) - metric.space(XYZ - step, D65)) / 2e-6  # type: ignore[attr-defined]
        error = np.abs(numeric - jacobian[..., axis]) / (1 + np.abs(numeric))
        assert error[chromatic].max() < 1e-4


@pytest.mark.parametrize("metric", METRICS.values(), ids=list(METRICS))
def test_negative_values_pass(metric: object) -> None:
    """A colour-deficient viewer's values can be negative; nothing may become nan."""
    point, jacobian = metric.space_and_jacobian(np.array([[-0.02, 0.01, -0.01], [0.0, 0.0, 0.0]]), D65)  # type: ignore[attr-defined]
    assert np.all(np.isfinite(point))
    assert np.all(np.isfinite(jacobian))


def test_adaptation_takes_white_to_white() -> None:
    for white in WHITES:
        np.testing.assert_allclose(colorimetry.adaptation(white) @ white, colorimetry.D65_WHITE, rtol=1e-12)
