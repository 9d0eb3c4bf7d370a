"""Seeing: the vessel that turns absorbance into light, and the viewer that turns light into colour.

A viewer (illuminant x observer x eye) is one matrix. Those of the standard lamps are frozen in viewers.csv; for any
other lamp or observer that colour-science knows the matrix is made when asked for. This module is the only door to
colour-science.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property, lru_cache
from pathlib import Path
from typing import Any

import numpy as np

from mixind.colorimetry import RGB_FROM_XYZ, XYZ_FROM_RGB, adaptation
from mixind.errors import MixindError, nearest
from mixind.spectra import WAVELENGTH

ILLUMINANTS = ("D65", "D50", "A", "FL2", "FL11", "LED-B1", "LED-B2", "LED-B3", "LED-B4", "LED-B5")
"""Lamps whose matrices are frozen: CIE 15:2018 daylight, incandescent, fluorescent and LED illuminants."""

OBSERVERS = {"2": "CIE 1931 2 Degree Standard Observer", "10": "CIE 1964 10 Degree Standard Observer"}

FROZEN_TABLE = Path(__file__).with_name("viewers.csv")

DEFICIENCIES = {"protan": "Protanomaly", "deutan": "Deuteranomaly", "tritan": "Tritanomaly"}
DEFICIENCY_TABLE = Path(__file__).with_name("deficiencies.csv")
EYES = ("normal", *DEFICIENCIES)
SIMULATION_REMARK = "simulation, not a test of a person"


@dataclass(frozen=True)
class Viewer:
    """Somebody looking at light: lamp, observer and eye.

    Attributes:
        illuminant, observer: names, such as "D65" and "2".
        eyes: "normal", "protan", "deutan" or "tritan".
        severity: of the deficiency, 0 to 1.
        weights: matrix from light on the wavelength grid to XYZ, (81, 3); full light gives the white with Y = 1.
    """

    illuminant: str
    observer: str
    eyes: str
    severity: float
    weights: np.ndarray

    @cached_property
    def white(self) -> np.ndarray:
        """Tristimulus values of clear solvent, (3,)."""
        return np.asarray(self.weights.sum(axis=0))

    def describe(self) -> str:
        """Return lamp, observer and eye in words."""
        eyes = f"{self.eyes} eyes"
        if self.eyes != "normal":
            about = ", approximate" if self.eyes == "tritan" else ""
            eyes += f" at severity {self.severity:g} ({SIMULATION_REMARK}{about})"
        return f"{self.illuminant}, {self.observer} degree observer, {eyes}"


def viewer(illuminant: str = "D65", observer: str = "2", eyes: str = "normal", severity: float = 1.0) -> Viewer:
    """Return the viewer for a lamp, an observer and an eye.

    Args:
        illuminant: one of `ILLUMINANTS`, or any other that colour-science knows.
        observer: "2" or "10".
        eyes: one of `EYES`.
        severity: 0 (normal) to 1 (a dichromat).
    Raises: MixindError for an unknown name or a severity outside 0 to 1.
    """
    check_viewer(observer, eyes, severity)
    weights = _frozen_weights(illuminant, observer)
    if weights is None:
        weights = weights_from_colour_science(illuminant, observer)
    if eyes != "normal":
        weights = weights @ eye_matrix(eyes, severity, weights.sum(axis=0)).T
    return Viewer(illuminant, observer, eyes, severity, weights)


def check_viewer(observer: str, eyes: str, severity: float) -> None:
    """Raise MixindError for an observer or eyes that are not known, or a severity outside 0 to 1."""
    if eyes not in EYES:
        raise MixindError(f"eyes: {eyes!r} is not one of {', '.join(EYES)}{nearest(eyes, EYES)}")
    if observer not in OBSERVERS:
        raise MixindError(f"observer: {observer!r} is not one of {', '.join(OBSERVERS)} (degrees).")
    if not (math.isfinite(severity) and 0 <= severity <= 1):
        raise MixindError(f"severity: {severity} is outside 0 to 1.")


@lru_cache(maxsize=32)
def _frozen_weights(illuminant: str, observer: str) -> np.ndarray | None:
    """Return the frozen matrix, (81, 3), or None when the lamp is not in the table."""
    rows = {}
    with FROZEN_TABLE.open(encoding="ascii") as lines:
        for line in lines:
            if line.startswith(f"{illuminant},{observer},"):
                _, _, axis, numbers = line.split(",", 3)
                rows[axis] = np.array(numbers.split(","), dtype=float)
    return np.stack([rows[axis] for axis in "XYZ"], axis=1) if rows else None


def eye_matrix(eyes: str, severity: float, white: np.ndarray) -> np.ndarray:
    """Return the matrix on XYZ, (3, 3), that shows what a colour-deficient eye is thought to see.

    The simulation acts on linear sRGB, so colours are adapted from the viewer's white to D65 and back (Bradford). Each
    row of the published matrix is divided by its sum, which is 1 within its printed digits, so that white stays white.
    Between the eleven published severities it is interpolated linearly; tritan is called approximate by the authors.
    Source: Machado, Oliveira and Fernandes, IEEE Trans. Vis. Comput. Graph. 15 (2009) 1291, table 1.
    """
    tables = _deficiency_tables(eyes)
    below = min(int(severity * (len(tables) - 1)), len(tables) - 2)
    share = severity * (len(tables) - 1) - below
    matrix = (1 - share) * tables[below] + share * tables[below + 1]
    to_d65 = adaptation(white)
    return np.asarray(np.linalg.solve(to_d65, XYZ_FROM_RGB @ matrix @ RGB_FROM_XYZ @ to_d65))


@lru_cache(maxsize=8)
def _deficiency_tables(eyes: str) -> np.ndarray:
    """Return the matrices for severities 0, 0.1, .., 1, (11, 3, 3), rows normalised to 1."""
    with DEFICIENCY_TABLE.open(encoding="ascii") as lines:
        rows = [line.split(",")[2:] for line in lines if line.startswith(f"{eyes},")]
    tables = np.array(rows, dtype=float).reshape(-1, 3, 3)
    return np.asarray(tables / tables.sum(axis=2, keepdims=True))


def weights_from_colour_science(illuminant: str, observer: str) -> np.ndarray:
    """Return the matrix of a lamp and an observer, (81, 3), computed from the tables of colour-science.

    Illuminant x colour-matching function at 1 nm (the lamp interpolated linearly, CIE 15:2018, section 4), each
    product given to the four nearest points of the 5 nm grid by cubic Lagrange interpolation; what lies outside
    380-780 nm goes to the end points.
    Raises: MixindError when colour-science does not know the lamp.
    """
    colour = colour_science()
    if illuminant not in colour.SDS_ILLUMINANTS:
        known = list(colour.SDS_ILLUMINANTS)
        usual = f"Usual: {', '.join(ILLUMINANTS)}."
        raise MixindError(f"light: {illuminant!r} is not known{nearest(illuminant, known) or '.'} {usual}")
    functions = colour.MSDS_CMFS[OBSERVERS[observer]]
    lamp = colour.SDS_ILLUMINANTS[illuminant]
    at = np.asarray(functions.wavelengths, dtype=float)
    power = np.interp(at, lamp.wavelengths, lamp.values)
    products = np.asarray(functions.values, dtype=float) * power[:, None]
    weights = _lagrange_shares(at).T @ products
    return np.asarray(weights / weights[:, 1].sum())


def colour_science() -> Any:
    """Return the module colour-science, undoing what its import does to numpy's print options and to the terminal."""
    import warnings

    options: Any = np.get_printoptions()
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        import colour
    np.set_printoptions(**options)
    return colour


def _lagrange_shares(at: np.ndarray) -> np.ndarray:
    """Return how much each wavelength, (N,), gives to each grid point, (N, 81), by cubic Lagrange interpolation."""
    shares = np.zeros((at.size, WAVELENGTH.size))
    place = np.clip((at - WAVELENGTH[0]) / (WAVELENGTH[1] - WAVELENGTH[0]), 0, WAVELENGTH.size - 1)
    first = np.clip(np.floor(place).astype(int) - 1, 0, WAVELENGTH.size - 4)
    for node in range(4):
        share = np.ones(at.size)
        for other in range(4):
            if other != node:
                share *= (place - first - other) / (node - other)
        shares[np.arange(at.size), first + node] += share
    return shares


@dataclass(frozen=True)
class Vessel:
    """What holds the sample: light crosses it once or more and comes out as a share of that through clear solvent.

    Attributes:
        name: one of `VESSELS`.
        path_length: from wall to wall, above zero [cm].
        crossings: how many times light crosses the liquid.
    """

    name: str
    path_length: float
    crossings: int

    @property
    def optical_length(self) -> float:
        """Length of liquid that light crosses [cm]."""
        return self.path_length * self.crossings

    def light(self, absorbance: np.ndarray) -> np.ndarray:
        """Return the light that comes out, of absorbance per centimetre, same shape [1]; 1 is clear solvent."""
        return np.asarray(np.exp((-np.log(10) * self.optical_length) * absorbance))

    def light_slope(self, light: np.ndarray) -> np.ndarray:
        """Return the derivative of the light with respect to absorbance per centimetre, given the light."""
        return np.asarray((-np.log(10) * self.optical_length) * light)


VESSELS: dict[str, Callable[[float], Vessel]] = {
    "clear": lambda path_length: Vessel("clear", path_length, 1),
    "on-white": lambda path_length: Vessel("on-white", path_length, 2),
}


def vessel(name: str = "clear", path_length: float = 1.0) -> Vessel:
    """Return a vessel by name: "clear" (looked through) or "on-white" (standing on white, light crosses twice).

    Raises: MixindError for an unknown name or a path that is not above zero.
    """
    if name not in VESSELS:
        raise MixindError(f"vessel: {name!r} is not one of {', '.join(VESSELS)}{nearest(name, VESSELS)}")
    if not (math.isfinite(path_length) and path_length > 0):
        raise MixindError(f"path: {path_length} cm is not above zero.")
    return VESSELS[name](path_length)
