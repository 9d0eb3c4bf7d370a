"""Colour spaces: tristimulus values to CIELAB, CAM16-UCS, Oklab and sRGB.

Tristimulus values have Y = 1 for the white. Nothing is clipped: a colour-deficient viewer can have negative values.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

_EPSILON = (6 / 29) ** 3
_LINEAR_SLOPE = (29 / 6) ** 2 / 3

# Rows L*, a*, b* over columns f(X/Xn), f(Y/Yn), f(Z/Zn). ISO/CIE 11664-4:2019.
_LAB_FROM_F = np.array([[0.0, 116.0, 0.0], [500.0, -500.0, 0.0], [0.0, 200.0, -200.0]])
_LAB_OFFSET = np.array([-16.0, 0.0, 0.0])

# Chromaticities of the primaries and of D65 as printed in IEC 61966-2-1:1999.
_SRGB_PRIMARIES = np.array([[0.64, 0.33], [0.30, 0.60], [0.15, 0.06]])
D65_CHROMATICITY = (0.3127, 0.3290)

# Cone-like responses of Bradford. ICC.1:2022, annex E.
_BRADFORD = np.array([[0.8951, 0.2664, -0.1614], [-0.7502, 1.7135, 0.0367], [0.0389, -0.0685, 1.0296]])

# Ottosson, "A perceptual color space for image processing" (2020), with the matrices of CSS Color 4, section 9.
_OK_LMS = np.array([[0.8190224379967030, 0.3619062600528904, -0.1288737815209879],
                    [0.0329836539323885, 0.9292868615863434, 0.0361446663506424],
                    [0.0481771893596242, 0.2642395317527308, 0.6335478284694309]])
_OK_LAB = np.array([[0.2104542683093140, 0.7936177747023054, -0.0040720430116193],
                    [1.9779985324311684, -2.4285922420485799, 0.4505937096174110],
                    [0.0259040424655478, 0.7827717124575296, -0.8086757549230774]])

# CAM16 cone responses. Li et al., Color Res. Appl. 42 (2017) 703, eq. 4.
_CAM16 = np.array([[0.401288, 0.650173, -0.051461], [-0.250268, 1.204414, 0.045854], [-0.002079, 0.048952, 0.953127]])

ADAPTING_LUMINANCE = 64.0
BACKGROUND = 20.0


def _xyz_from_xy(x: float, y: float) -> np.ndarray:
    return np.array([x / y, 1.0, (1 - x - y) / y])


D65_WHITE = _xyz_from_xy(*D65_CHROMATICITY)


def _rgb_to_xyz() -> np.ndarray:
    primaries = np.array([_xyz_from_xy(*xy) for xy in _SRGB_PRIMARIES]).T
    return np.asarray(primaries * np.linalg.solve(primaries, D65_WHITE))


XYZ_FROM_RGB = _rgb_to_xyz()
"""Linear sRGB to XYZ, (3, 3), from the primaries, so that RGB = 1, 1, 1 is D65 to the last digit. IEC 61966-2-1."""
RGB_FROM_XYZ = np.linalg.inv(XYZ_FROM_RGB)


def adaptation(white: np.ndarray, to: np.ndarray = D65_WHITE) -> np.ndarray:
    """Return the Bradford matrix, (3, 3), that takes colours seen under `white` to those under the white `to`."""
    gains = (_BRADFORD @ to) / (_BRADFORD @ white)
    return np.asarray(np.linalg.solve(_BRADFORD, gains[:, None] * _BRADFORD))


def cielab(XYZ: np.ndarray, white: np.ndarray) -> np.ndarray:
    """Return CIELAB, (..., 3), of tristimulus values under a white, (3,). ISO/CIE 11664-4:2019.

    Below (6/29)^3 of the white, and so for negative values, the straight branch goes on.
    """
    ratio = XYZ / white
    f = np.where(ratio > _EPSILON, np.cbrt(ratio), _LINEAR_SLOPE * ratio + 4 / 29)
    return np.asarray(f @ _LAB_FROM_F.T + _LAB_OFFSET)


def cielab_and_jacobian(XYZ: np.ndarray, white: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Return CIELAB, (..., 3), and its derivative with respect to XYZ, (..., 3, 3), rows L*, a*, b*."""
    ratio = XYZ / white
    root = np.cbrt(ratio)
    curved = ratio > _EPSILON
    f = np.where(curved, root, _LINEAR_SLOPE * ratio + 4 / 29)
    slope = np.where(curved, 1 / (3 * np.maximum(root, 0.1) ** 2), _LINEAR_SLOPE) / white
    return f @ _LAB_FROM_F.T + _LAB_OFFSET, _LAB_FROM_F * slope[..., None, :]


@dataclass(frozen=True)
class _Cam16Surround:
    """What CAM16 derives from the viewing conditions alone, for an average surround."""

    cones: np.ndarray
    FL: float
    n: float
    z: float
    Nbb: float
    Aw: float


def _compressed(x: np.ndarray, FL: float) -> np.ndarray:
    power = np.abs(FL * x / 100) ** 0.42
    return np.asarray(400 * np.sign(x) * power / (27.13 + power))


@lru_cache(maxsize=64)
def _cam16_surround(white: tuple[float, ...]) -> _Cam16Surround:
    LA, Yb, F = ADAPTING_LUMINANCE, BACKGROUND, 1.0
    k = 1 / (5 * LA + 1)
    FL = 0.2 * k**4 * 5 * LA + 0.1 * (1 - k**4) ** 2 * np.cbrt(5 * LA)
    Yw = 100 * white[1]
    D = np.clip(F * (1 - np.exp((-LA - 42) / 92) / 3.6), 0, 1)
    response = _CAM16 @ (100 * np.array(white))
    cones = (D * Yw / response + 1 - D)[:, None] * _CAM16 * 100
    n = Yb / Yw
    Nbb = 0.725 * n**-0.2
    Rw, Gw, Bw = _compressed(cones @ np.array(white), FL)
    return _Cam16Surround(cones, float(FL), n, 1.48 + np.sqrt(n), Nbb, float((2 * Rw + Gw + Bw / 20) * Nbb))


# From compressed cone responses to: achromatic response, redness, yellowness, and the divisor of t.
_CAM16_OPPONENT = np.array([[2, 1, 1 / 20], [1, -12 / 11, 1 / 11], [1 / 9, 1 / 9, -2 / 9], [1, 1, 21 / 20]])


def cam16_ucs(XYZ: np.ndarray, white: np.ndarray) -> np.ndarray:
    """Return CAM16-UCS coordinates J', a', b', (..., 3), of tristimulus values under a white, (3,).

    Adapting luminance 64 cd/m2, background 20 %, average surround. Powers are odd functions, so that negative
    responses of a colour-deficient viewer pass.
    Source: Li et al., Color Res. Appl. 42 (2017) 703, with the uniform space of its eqs. 13-15.
    """
    return cam16_ucs_and_jacobian(XYZ, white)[0]


def cam16_ucs_and_jacobian(XYZ: np.ndarray, white: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Return CAM16-UCS, (..., 3), and its derivative with respect to XYZ, (..., 3, 3)."""
    s = _cam16_surround(tuple(float(w) for w in white))
    linear = XYZ @ s.cones.T
    magnitude = np.maximum(np.abs(s.FL * linear / 100), 1e-12)
    power = magnitude**0.42
    response = 400 * np.sign(linear) * power / (27.13 + power)
    response_slope = 400 * 27.13 * 0.42 * power / magnitude / (27.13 + power) ** 2 * s.FL / 100
    opponent = response @ _CAM16_OPPONENT.T
    slopes = _CAM16_OPPONENT * response_slope[..., None, :] @ s.cones
    return _ucs_from_opponent(opponent, slopes, s)


def _ucs_from_opponent(opponent: np.ndarray, slopes: np.ndarray, s: _Cam16Surround) -> tuple[np.ndarray, np.ndarray]:
    """Carry the opponent responses A/Nbb, a, b, u, (..., 4), and their slopes, (..., 4, 3), on to J', a', b'."""
    A, a, b, u = np.moveaxis(opponent, -1, 0)
    dA, da, db, du = np.moveaxis(slopes, -2, 0)
    relative = np.maximum(np.abs(A * s.Nbb / s.Aw), 1e-12)
    exponent = 0.69 * s.z
    J = 100 * np.sign(A) * relative**exponent
    dJ = (100 * exponent * relative ** (exponent - 1) * s.Nbb / s.Aw)[..., None] * dA
    radius = np.sqrt(a * a + b * b + 1e-24)
    cosine, sine = a / radius, b / radius
    dradius = cosine[..., None] * da + sine[..., None] * db
    # eccentricity e_t = (cos(h + 2) + 3.8) / 4 and its slope along the hue circle
    e = (cosine * np.cos(2) - sine * np.sin(2) + 3.8) / 4
    e_by_hue = -(sine * np.cos(2) + cosine * np.sin(2)) / 4
    dhue = (cosine[..., None] * db - sine[..., None] * da) / radius[..., None]
    divisor = u + 0.305
    t = 50000 / 13 * s.Nbb * e * radius / divisor
    dt = t[..., None] * (e_by_hue[..., None] * dhue / e[..., None] + dradius / radius[..., None] - du / divisor[..., None])
    root_J = np.sqrt(np.abs(J) / 100 + 1e-24)
    M = np.abs(t) ** 0.9 * root_J * (1.64 - 0.29**s.n) ** 0.73 * s.FL**0.25
    dM = M[..., None] * (0.9 * dt / (t + 1e-300)[..., None] + dJ / (2 * J + 1e-300)[..., None])
    stretched = np.log1p(0.0228 * M) / 0.0228
    dstretched = dM / (1 + 0.0228 * M)[..., None]
    coordinates = np.stack([1.7 * J / (1 + 0.007 * J), stretched * cosine, stretched * sine], axis=-1)
    jacobian = np.stack([
        1.7 * dJ / ((1 + 0.007 * J) ** 2)[..., None],
        dstretched * cosine[..., None] - (stretched * sine)[..., None] * dhue,
        dstretched * sine[..., None] + (stretched * cosine)[..., None] * dhue], axis=-2)
    return coordinates, jacobian


def oklab(XYZ: np.ndarray) -> np.ndarray:
    """Return Oklab, (..., 3), of tristimulus values under D65."""
    return np.asarray(np.cbrt(XYZ @ _OK_LMS.T) @ _OK_LAB.T)


_OK_LMS_INVERSE = np.linalg.inv(_OK_LMS)
_OK_LAB_INVERSE = np.linalg.inv(_OK_LAB)


def xyz_from_oklab(lab: np.ndarray) -> np.ndarray:
    """Return tristimulus values under D65 of Oklab colours; the inverse of `oklab`."""
    return np.asarray((lab @ _OK_LAB_INVERSE.T) ** 3 @ _OK_LMS_INVERSE.T)


def srgb_encoded(linear: np.ndarray) -> np.ndarray:
    """Return sRGB values of linear ones; odd below zero. IEC 61966-2-1:1999."""
    size = np.abs(linear)
    return np.asarray(np.sign(linear) * np.where(size <= 0.0031308, 12.92 * size, 1.055 * size ** (1 / 2.4) - 0.055))
