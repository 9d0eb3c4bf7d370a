"""How different two colours look: CIEDE2000 and CAM16-UCS, each with its exact derivatives."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from mixind import colorimetry

DEFAULT_KL = 2.0
"""Weight of lightness: a shade lighter or darker, which a drop more of indicator also makes, counts half."""

SMOOTHING = 1e-8
"""Added to the squared difference where a derivative is taken, which has a kink at zero."""

_25_7 = 25.0**7

# T of CIEDE2000 is 1 + Re(sum of k_n z^n), n = 1 to 4, z the unit vector of the mean hue; second row: dT/dhue is
# -Im(sum of n k_n z^n). ISO/CIE 11664-6, eq. 15.
_T_TERMS = np.array([-0.17, 0.24, 0.32, -0.20]) * np.exp(1j * np.radians([-30, 0, 6, -63]))
_T_TERMS = np.array([_T_TERMS, _T_TERMS * np.arange(1, 5)])

# At or below this share of C1 C2 the hues count as exactly opposite (or a colour as having none).
_OPPOSITE = 1e-13
_TINY = 1e-150
"""Keeps a colour without chroma from dividing by zero; its hue then counts as none."""


def ciede2000(Lab1: np.ndarray, Lab2: np.ndarray, kL: float = DEFAULT_KL) -> np.ndarray:
    """Return the CIEDE2000 difference of CIELAB colours, broadcast over the leading axes.

    Args:
        Lab1, Lab2: (..., 3).
        kL: weight of lightness, above zero; kC = kH = 1. The standard's reference value is 1, ours is 2.
    Source: ISO/CIE 11664-6:2014; Sharma, Wu and Dalal, Color Res. Appl. 30 (2005) 21, doi:10.1002/col.20070.
    """
    Lab1, Lab2 = np.broadcast_arrays(np.asarray(Lab1, dtype=float), np.asarray(Lab2, dtype=float))
    shape = Lab1.shape[:-1]
    flat1, flat2 = Lab1.reshape(-1, 3), Lab2.reshape(-1, 3)
    squared = np.empty(flat1.shape[0])
    for start in range(0, squared.size, _CHUNK):
        part = slice(start, start + _CHUNK)
        squared[part] = _Terms(flat1[part], flat2[part], kL).squared
    return np.asarray(np.sqrt(np.maximum(squared, 0.0)).reshape(shape))


_CHUNK = 4096
"""Pairs handled at once: the two dozen intermediate arrays then stay in the cache."""


class _Terms:
    """The quantities of CIEDE2000 for P pairs of colours, (2, P) or (P,), kept for the derivative.

    The hue difference is written without angles: dH = (a1 b2 - a2 b1) sqrt(2 / (C1 C2 + a1 a2 + b1 b2)) equals
    2 sqrt(C1 C2) sin(dh / 2), and the mean hue is the bisector of the two hues on the shorter arc.
    """

    def __init__(self, Lab1: np.ndarray, Lab2: np.ndarray, kL: float) -> None:
        pair = np.array([Lab1.T, Lab2.T])
        L, self.plain_a, self.b = pair[:, 0], pair[:, 1], pair[:, 2]
        b_squared = self.b * self.b
        self.c = np.sqrt(self.plain_a * self.plain_a + b_squared) + _TINY
        self.c_mean = 0.5 * (self.c[0] + self.c[1])
        self.root7 = np.sqrt(_saturation(self.c_mean))
        self.stretch = 1.5 - 0.5 * self.root7
        self.a = self.plain_a * self.stretch
        self.C = np.sqrt(self.a * self.a + b_squared) + _TINY
        self.dL, self.dC, self.kL = L[1] - L[0], self.C[1] - self.C[0], kL
        self.unit = (self.a + 1j * self.b) / self.C
        self._hue()
        self._weights(0.5 * (L[0] + L[1]) - 50)

    def _hue(self) -> None:
        (a1, a2), (b1, b2), product = self.a, self.b, self.C[0] * self.C[1]
        cross, dot = a1 * b2 - a2 * b1, a1 * a2 + b1 * b2
        # C1 C2 + dot, written so that it does not cancel for nearly opposite hues
        both = np.where(dot < 0, cross * cross / (product + np.abs(dot)), product + dot)
        self.opposite = both <= _OPPOSITE * product
        bisector = self.unit[0] + self.unit[1]
        self.both = np.maximum(both, _TINY)
        self.root = np.sqrt(2 / self.both)
        self.dH = cross * self.root
        self.some_opposite = bool(self.opposite.any())
        if self.some_opposite:
            # the standard's mean of two opposite angles lies a quarter turn on from the smaller one
            first_is_smaller = (b1 > 0) | ((b1 == 0) & (a1 > 0))
            upper = 1j * np.where(first_is_smaller, self.unit[0], self.unit[1])
            bisector = np.where(self.opposite, upper, bisector)
            self.dH = np.where(self.opposite, 2 * np.sqrt(product), self.dH)
        self.z = bisector / (np.abs(bisector) + _TINY)

    def _weights(self, u: np.ndarray) -> None:
        z2 = self.z * self.z
        T = _T_TERMS @ np.array([self.z, z2, z2 * self.z, z2 * z2])
        self.T, self.dT = 1 + T[0].real, -T[1].imag
        self.u, self.v = u, 20 + u * u
        self.SL = 1 + 0.015 * u * u / np.sqrt(self.v)
        self.C_mean = 0.5 * (self.C[0] + self.C[1])
        self.SC = 1 + 0.045 * self.C_mean
        self.SH = 1 + 0.015 * self.C_mean * self.T
        # deviation of the mean hue, 0 to 360 degrees, from 275 degrees, in units of 25 degrees
        hue = np.arctan2(self.z.imag, self.z.real)
        self.deviation = hue * (180 / np.pi / 25) + (14.4 * (hue < 0) - 11)
        self.twist = (np.pi / 3) * np.exp(-self.deviation * self.deviation)
        self.RC = 2 * np.sqrt(_saturation(self.C_mean))
        self.RT = -self.RC * np.sin(self.twist)
        self.x, self.y, self.w = self.dL / (self.kL * self.SL), self.dC / self.SC, self.dH / self.SH
        self.squared = self.x * self.x + self.y * self.y + self.w * (self.w + self.RT * self.y)


def _saturation(C: np.ndarray) -> np.ndarray:
    """Return C^7 / (C^7 + 25^7)."""
    square = C * C
    seventh = square * square * square * C
    return np.asarray(seventh / (seventh + _25_7))


def ciede2000_and_slopes(Lab1: np.ndarray, Lab2: np.ndarray,
                         kL: float = DEFAULT_KL) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return the smoothed CIEDE2000 difference and its derivatives with respect to both colours.

    The value is sqrt(dE^2 + 1e-8), which has no kink where the colours meet. At opposite hues, where CIEDE2000 jumps,
    the derivative is that of one side.

    Args:
        Lab1, Lab2: (P, 3).
    Returns: difference (P,), slopes by Lab1 (P, 3), slopes by Lab2 (P, 3).
    """
    t = _Terms(Lab1, Lab2, kL)
    value = np.sqrt(np.maximum(t.squared, 0.0) + SMOOTHING)
    half = 0.5 / value
    gx, gy, gw = 2 * t.x * half, (2 * t.y + t.RT * t.w) * half, (2 * t.w + t.RT * t.y) * half
    by_dL = gx / (kL * t.SL)
    by_L_mean = gx * t.x / t.SL * (-0.015) * t.u * (40 + t.u * t.u) / (t.v * np.sqrt(t.v))
    by_a, by_b = _through_chroma_and_hue(t, gy, gw, t.y * t.w * half)
    # both stretched a* depend on the mean of the plain chromas
    by_stretch = (by_a * t.plain_a).sum(axis=0)
    by_chroma = by_stretch * -0.875 * t.root7 * (1 - t.root7 * t.root7) / t.c_mean / t.c
    slopes = np.empty((2, value.size, 3))
    slopes[0, :, 0], slopes[1, :, 0] = 0.5 * by_L_mean - by_dL, 0.5 * by_L_mean + by_dL
    slopes[:, :, 1] = by_a * t.stretch + by_chroma * t.plain_a
    slopes[:, :, 2] = by_b + by_chroma * t.b
    return value, slopes[0], slopes[1]


def _through_chroma_and_hue(t: _Terms, gy: np.ndarray, gw: np.ndarray,
                            by_RT: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Return the slopes by the stretched a* and by b* of both colours, each (2, P)."""
    by_dH = gw / t.SH
    by_SH = -by_dH * t.w
    by_dC = gy / t.SC
    RC_slope = 3.5 * t.RC * (1 - 0.25 * t.RC * t.RC) / t.C_mean
    by_C_mean = -0.045 * by_dC * t.y + 0.015 * by_SH * t.T - by_RT * np.sin(t.twist) * RC_slope
    twist_slope = t.twist * t.deviation * (-2 / 25 * 180 / np.pi)
    by_hue = 0.015 * by_SH * t.C_mean * t.dT - by_RT * t.RC * np.cos(t.twist) * twist_slope
    by_C = 0.5 * by_C_mean + np.array([-by_dC, by_dC])
    turn = 0.5 * by_hue / t.C
    # dH = cross root, with d root = -root / (2 both) d both; at opposite hues dH = 2 sqrt(C1 C2)
    along = by_C
    other_a, other_b, other_C = t.a[::-1], t.b[::-1], t.C[::-1]
    by_cross, by_both = by_dH * t.root, -0.5 * by_dH * t.dH / t.both
    if t.some_opposite:
        by_cross, by_both = np.where(t.opposite, 0.0, by_cross), np.where(t.opposite, 0.0, by_both)
        along = along + np.where(t.opposite, by_dH * np.sqrt(other_C / t.C), 0.0)
    along = along + by_both * other_C
    sign = np.array([[1.0], [-1.0]]) * by_cross
    by_a = along * t.unit.real - turn * t.unit.imag + by_both * other_a + sign * other_b
    by_b = along * t.unit.imag + turn * t.unit.real + by_both * other_b - sign * other_a
    return by_a, by_b


def euclidean_and_slopes(one: np.ndarray, two: np.ndarray, kL: float = 1.0) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return the smoothed distance of two colours in a uniform space and its derivatives; `kL` does not apply."""
    step = two - one
    value = np.sqrt((step**2).sum(axis=-1) + SMOOTHING)
    slope = step / value[..., None]
    return value, -slope, slope


def euclidean(one: np.ndarray, two: np.ndarray, kL: float = 1.0) -> np.ndarray:
    """Return the distance of two colours in a uniform space, (...); `kL` does not apply."""
    return np.asarray(np.sqrt(((np.asarray(two) - np.asarray(one)) ** 2).sum(axis=-1)))


@dataclass(frozen=True)
class Metric:
    """A way of telling colours apart: a colour space with its Jacobian, and a difference with its slopes.

    Attributes:
        space, space_and_jacobian: tristimulus values and white to coordinates.
        difference, difference_and_slopes: of two sets of coordinates and kL.
        kL: default weight of lightness.
        threshold: difference from which two colours are told apart side by side; None when the user has to say.
        source: where the threshold comes from.
    """

    name: str
    space: Callable[[np.ndarray, np.ndarray], np.ndarray]
    space_and_jacobian: Callable[[np.ndarray, np.ndarray], tuple[np.ndarray, np.ndarray]]
    difference: Callable[..., np.ndarray]
    difference_and_slopes: Callable[..., tuple[np.ndarray, np.ndarray, np.ndarray]]
    kL: float
    threshold: float | None
    source: str


METRICS = {
    "ciede2000": Metric(
        "ciede2000", colorimetry.cielab, colorimetry.cielab_and_jacobian, ciede2000, ciede2000_and_slopes, DEFAULT_KL, 3.0,
        "our choice: above the acceptability of 1.8 in CIEDE2000 (Paravina et al., J. Esthet. Restor. Dent. 2015, abstract), "
        "below the 3.5 in CIELAB from which reading scales of print shops call a difference clear (common practice); the "
        "formula was fitted to differences below about 5, larger ones only rank"),
    "cam16-ucs": Metric(
        "cam16-ucs", colorimetry.cam16_ucs, colorimetry.cam16_ucs_and_jacobian, euclidean, euclidean_and_slopes, 1.0, None,
        "no threshold of seeing is known to us"),
}

PRINTED_CHART_THRESHOLD = 5.0
"""Difference from which a colour is told apart from those of a printed chart or from memory: our choice, no source."""
