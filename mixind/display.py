"""Colours for a screen or a page: fitted into sRGB, with what that cost."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from mixind import colorimetry
from mixind.difference import ciede2000

WHITE_ON_SCREEN = 0.9
"""The white is shown at this share of the screen's or the paper's, so that pale colours keep room above them."""


@dataclass(frozen=True)
class Patch:
    """Colours ready for a screen or a page.

    Attributes:
        rgb: sRGB, each 0 to 1, (..., 3).
        in_gamut: whether the colour could be shown as it is, (...).
        cost: CIEDE2000 (1:1:1) between the colour and what is shown, 0 where it is in gamut, (...).
    """

    rgb: np.ndarray
    in_gamut: np.ndarray
    cost: np.ndarray

    def hex(self) -> list[str]:
        """Return "#rrggbb" for each colour of a one-dimensional patch."""
        levels = np.rint(np.atleast_2d(self.rgb) * 255).astype(int)
        return ["#" + "".join(f"{level:02x}" for level in row) for row in levels]


_GAMUT_SLACK = 1e-6


def patch(XYZ: np.ndarray, white: np.ndarray) -> Patch:
    """Return what to paint for colours seen under `white`.

    They are adapted to D65, the white is set to 0.9, and a colour outside sRGB loses chroma at constant Oklch lightness
    and hue until it fits, by bisection. Source of the method: CSS Color 4, section 13 (without its local clipping).
    """
    adapted = XYZ @ colorimetry.adaptation(white).T
    shown = WHITE_ON_SCREEN * adapted
    inside = _in_gamut(shown)
    mapped = np.where(inside[..., None], shown, _with_less_chroma(shown))
    lab_white = WHITE_ON_SCREEN * colorimetry.D65_WHITE
    cost = np.where(inside, 0.0, ciede2000(colorimetry.cielab(shown, lab_white), colorimetry.cielab(mapped, lab_white), kL=1.0))
    rgb = np.clip(colorimetry.srgb_encoded(mapped @ colorimetry.RGB_FROM_XYZ.T), 0.0, 1.0)
    return Patch(rgb, inside, cost)


def _in_gamut(XYZ: np.ndarray) -> np.ndarray:
    rgb = XYZ @ colorimetry.RGB_FROM_XYZ.T
    return np.asarray(np.all((rgb >= -_GAMUT_SLACK) & (rgb <= 1 + _GAMUT_SLACK), axis=-1))


def _with_less_chroma(XYZ: np.ndarray) -> np.ndarray:
    lab = colorimetry.oklab(XYZ)
    lab[..., 0] = np.clip(lab[..., 0], 0.0, 1.0)
    low, high = np.zeros(lab.shape[:-1]), np.ones(lab.shape[:-1])
    for _ in range(30):
        middle = (low + high) / 2
        fits = _in_gamut(colorimetry.xyz_from_oklab(_scaled_chroma(lab, middle)))
        low, high = np.where(fits, middle, low), np.where(fits, high, middle)
    return colorimetry.xyz_from_oklab(_scaled_chroma(lab, low))


def _scaled_chroma(lab: np.ndarray, factor: np.ndarray) -> np.ndarray:
    return np.concatenate([lab[..., :1], lab[..., 1:] * factor[..., None]], axis=-1)
