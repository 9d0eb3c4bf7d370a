"""What a screen or a page is given."""

from __future__ import annotations

import numpy as np
import pytest

from mixind import colorimetry, display, viewing

D65 = viewing.viewer().white


def test_white_is_shown_at_nine_tenths() -> None:
    shown = display.patch(D65[None], D65)
    assert shown.in_gamut.all()
    np.testing.assert_allclose(shown.rgb, colorimetry.srgb_encoded(np.full((1, 3), 0.9)), atol=1e-12)
    assert shown.hex() == ["#f3f3f3"]


def test_a_colour_outside_srgb_keeps_lightness_and_hue() -> None:
    """CSS Color 4: chroma is reduced at constant Oklch lightness and hue; the cost is reported."""
    laser = viewing.viewer().weights[26:27] * 8  # 510 nm
    shown = display.patch(laser, D65)
    assert not shown.in_gamut[0]
    assert shown.cost[0] > 1
    linear = np.where(shown.rgb <= 0.04045, shown.rgb / 12.92, ((shown.rgb + 0.055) / 1.055) ** 2.4)
    asked = colorimetry.oklab(0.9 * laser @ colorimetry.adaptation(D65).T)[0]
    given = colorimetry.oklab(linear @ colorimetry.XYZ_FROM_RGB.T)[0]
    assert given[0] == pytest.approx(asked[0], abs=1e-3)
    assert np.arctan2(given[2], given[1]) == pytest.approx(np.arctan2(asked[2], asked[1]), abs=2e-3)
    assert np.hypot(*given[1:]) < np.hypot(*asked[1:])
