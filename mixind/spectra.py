"""The wavelength grid, and absorption spectra made of skewed bands or tables."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from mixind.errors import MixindError

WAVELENGTH = np.arange(380.0, 781.0, 5.0)
"""The grid of every spectrum inside the library, (81,) [nm]."""
WAVELENGTH.setflags(write=False)

CM1_PER_NM = 1e7
GAUSSIAN_LIMIT = 1e-4


@dataclass(frozen=True)
class Band:
    """One absorption band: a log-normal in wavenumber, steep on the red side when `skew` is above 1.

    Attributes:
        wavenumber: position of the maximum, above zero [cm-1].
        height: decadic molar absorptivity at the maximum, zero or more [L mol-1 cm-1].
        fwhm: full width at half maximum, above zero [cm-1].
        skew: half-width at half maximum on the blue side over that on the red side, above zero.
    Source: Siano and Metzler, J. Chem. Phys. 51 (1969) 1856, eq. 3.
    """

    wavenumber: float
    height: float
    fwhm: float
    skew: float

    def absorptivity(self, wavelength: np.ndarray) -> np.ndarray:
        """Return the decadic molar absorptivity at `wavelength` [nm], same shape [L mol-1 cm-1]."""
        offset = CM1_PER_NM / np.asarray(wavelength, dtype=float) - self.wavenumber
        if abs(self.skew - 1) < GAUSSIAN_LIMIT:
            return np.asarray(self.height * np.exp(-4 * np.log(2) * (offset / self.fwhm) ** 2))
        argument = 1 + offset * (self.skew**2 - 1) / (self.fwhm * self.skew)
        inside = argument > 0
        logarithm = np.log(np.where(inside, argument, 1.0)) / np.log(self.skew)
        return np.where(inside, self.height * np.exp(-np.log(2) * logarithm**2), 0.0)


def sum_of_bands(bands: tuple[Band, ...], wavelength: np.ndarray) -> np.ndarray:
    """Return the decadic molar absorptivity of a sum of bands at `wavelength` [nm] [L mol-1 cm-1]."""
    return sum((band.absorptivity(wavelength) for band in bands), np.zeros(np.shape(wavelength)))


def highest_point(bands: tuple[Band, ...], low: float = 300.0, high: float = 800.0) -> tuple[float, float]:
    """Return wavelength [nm] and absorptivity [L mol-1 cm-1] of the maximum on a 0.1 nm scan from `low` to `high`."""
    scan = np.round(np.arange(low, high + 0.05, 0.1), 1)
    values = sum_of_bands(bands, scan)
    best = int(np.argmax(values))
    return float(scan[best]), float(values[best])


def place_bands(bands: tuple[Band, ...], wavelength: float, absorptivity: float) -> tuple[Band, ...]:
    """Return the bands shifted together and scaled so that their sum peaks at the stated maximum.

    This is how a form is entered of which only the maximum is known: the shape comes from a related dye.

    Args:
        bands: the shape; only relative positions and heights matter.
        wavelength: where the maximum was seen [nm].
        absorptivity: how high it is [L mol-1 cm-1].
    """
    placed = bands
    for _ in range(20):
        peak, height = highest_point(placed)
        if abs(peak - wavelength) < 0.05 and abs(height / absorptivity - 1) < 1e-9:
            break
        shift = CM1_PER_NM / wavelength - CM1_PER_NM / peak
        placed = tuple(
            replace(band, wavenumber=band.wavenumber + shift, height=band.height * absorptivity / height)
            for band in placed)
    return placed


def from_table(wavelength: list[float], absorptivity: list[float]) -> np.ndarray:
    """Return a tabulated spectrum on the grid of the library, (81,) [L mol-1 cm-1].

    Rows on the grid are taken as they are; between rows a monotone cubic, which makes no bumps of its own; outside them
    the end value.

    Args:
        wavelength: rising, at least 4 values, covering 400-700 nm [nm].
        absorptivity: same length, zero or more [L mol-1 cm-1].
    Raises: MixindError when the table is too short, not rising or leaves out part of 400-700 nm.
    """
    if len(wavelength) != len(absorptivity) or len(wavelength) < 4:
        raise MixindError(f"table: {len(wavelength)} wavelengths for {len(absorptivity)} absorptivities, 4 or more needed.")
    if np.any(np.diff(wavelength) <= 0):
        raise MixindError("table: wavelengths must rise from row to row.")
    if wavelength[0] > 400 or wavelength[-1] < 700:
        raise MixindError(f"table: covers {wavelength[0]:g}-{wavelength[-1]:g} nm. Cover at least 400-700 nm.")
    inside = np.clip(WAVELENGTH, wavelength[0], wavelength[-1])
    if np.isin(inside, wavelength).all():
        return np.asarray(np.array(absorptivity)[np.searchsorted(wavelength, inside)])
    from scipy.interpolate import PchipInterpolator

    return np.asarray(PchipInterpolator(wavelength, absorptivity)(inside))
