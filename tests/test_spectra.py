"""Bands and tables."""

from __future__ import annotations

import numpy as np
import pytest

from mixind import spectra
from mixind.errors import MixindError
from mixind.spectra import Band


def test_a_band_has_its_height_width_and_skew() -> None:
    """Definition of the log-normal: half height at both ends of the FWHM, whose parts stand in the ratio of the skew."""
    band = Band(18000.0, 30000.0, 2500.0, 1.8)
    red, blue = 2500 / (1 + 1.8), 2500 * 1.8 / (1 + 1.8)
    ends = 1e7 / np.array([18000.0, 18000.0 - red, 18000.0 + blue])
    np.testing.assert_allclose(band.absorptivity(ends), [30000, 15000, 15000], rtol=1e-9)


def test_the_limit_of_no_skew_is_a_gaussian() -> None:
    scan = np.linspace(400, 700, 50)
    nearly = Band(18000.0, 1.0, 2500.0, 1.00011).absorptivity(scan)
    np.testing.assert_allclose(Band(18000.0, 1.0, 2500.0, 1.0).absorptivity(scan), nearly, atol=2e-4)


def test_a_band_ends_where_its_logarithm_does() -> None:
    band = Band(20000.0, 1.0, 2000.0, 1.5)
    edge = 20000.0 - 2000.0 * 1.5 / (1.5**2 - 1)
    assert band.absorptivity(np.array([1e7 / (edge - 1)]))[0] == 0.0
    assert np.all(np.isfinite(band.absorptivity(np.linspace(200, 2000, 500))))


def test_placing_meets_the_stated_maximum() -> None:
    shape = (Band(20000.0, 0.6, 2200.0, 2.1), Band(19400.0, 0.5, 1000.0, 0.96))
    placed = spectra.place_bands(shape, 573.0, 51000.0)
    peak, height = spectra.highest_point(placed)
    assert peak == pytest.approx(573.0, abs=0.051)
    assert height == pytest.approx(51000.0, rel=1e-6)


def test_a_table_on_the_grid_is_taken_as_it_is() -> None:
    values = np.linspace(0, 100, spectra.WAVELENGTH.size)
    np.testing.assert_array_equal(spectra.from_table(list(spectra.WAVELENGTH), list(values)), values)


def test_a_table_off_the_grid_is_interpolated_without_bumps() -> None:
    found = spectra.from_table([390.0, 500.5, 600.0, 710.0], [0.0, 10.0, 10.0, 2.0])
    assert found.min() >= 0
    assert found.max() <= 10
    assert found[0] == 0
    assert found[-1] == pytest.approx(2)


@pytest.mark.parametrize(("wavelength", "values"), [
    ([400, 500, 700], [1, 1, 1]), ([400, 500, 600, 700], [1, 1, 1]), ([400, 500, 500, 700], [1, 1, 1, 1]), ([450, 500, 600, 700], [1, 1, 1, 1])])
def test_a_bad_table_is_refused(wavelength: list[float], values: list[float]) -> None:
    with pytest.raises(MixindError, match="table"):
        spectra.from_table(wavelength, values)
