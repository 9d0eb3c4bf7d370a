"""Print the `peak` and `bands` lines of a form of which only the maximum is known, for pasting into a dye file.

    python .ci/place_form.py phenol_red_monoanion 433 18300 --at 558 0.00244
    python .ci/place_form.py dianion_narrow 558 50000 --at 433 0.0393
    python .ci/place_form.py triaryl_blue 638 116500 --also 412 17500 3200
    python .ci/place_form.py guess_4000 507 45000 --fwhm 4200

SHAPE is a table of band_shapes.toml. --at: published absorptivity at another wavelength as a share of the maximum; where
the shape alone gives more, the skew of the widest band is adjusted; else a weak band is added, at that wavelength on the
red side of the maximum, at 382 nm on its blue side. --also: a second band (wavelength, absorptivity, width in cm-1),
such as the blue band of a green dye.
"""

from __future__ import annotations

import argparse
import tomllib
from dataclasses import replace
from pathlib import Path

import numpy as np
from scipy.optimize import brentq

from mixind.spectra import CM1_PER_NM, Band, highest_point, place_bands, sum_of_bands

SHAPES = tomllib.loads(Path(__file__).with_name("band_shapes.toml").read_text(encoding="utf-8"))
WEAK_BAND = Band(wavenumber=26200.0, height=1.0, fwhm=3400.0, skew=1.0)


def placed(bands: tuple[Band, ...], peak: float, height: float, extra: tuple[Band, ...] = ()) -> tuple[Band, ...]:
    """Return the bands placed so that, with the fixed `extra` bands, the sum peaks at the stated maximum."""
    target = np.array([peak, height])
    aim = target.copy()
    for _ in range(30):
        result = place_bands(bands, *aim) + extra
        error = target - np.array(highest_point(result, peak - 60, peak + 60))
        if abs(error[0]) < 0.05 and abs(error[1]) < 1e-6 * height:
            break
        aim = aim + error
    return result


def share_at(bands: tuple[Band, ...], wavelength: float, height: float) -> float:
    """Return the absorptivity at a wavelength as a share of the maximum."""
    return float(sum_of_bands(bands, np.array([wavelength]))[0] / height)


def with_ratio(bands: tuple[Band, ...], peak: float, height: float, extra: tuple[Band, ...],
               wavelength: float, share: float) -> tuple[Band, ...]:
    """Return placed bands whose absorptivity at `wavelength` is the published share of the maximum."""
    widest = max(band.fwhm for band in bands)

    def skewed(factor: float) -> tuple[Band, ...]:
        return placed(tuple(replace(b, skew=b.skew * factor) if b.fwhm == widest else b for b in bands), peak, height, extra)

    weak = WEAK_BAND if wavelength < peak else replace(WEAK_BAND, wavenumber=CM1_PER_NM / wavelength)

    def weakly(part: float) -> tuple[Band, ...]:
        return placed(bands, peak, height, (*extra, replace(weak, height=part * height)))

    too_much = share_at(skewed(1.0), wavelength, height) > share
    change, low, high = (skewed, 0.5, 1.6) if too_much else (weakly, 0.0, 2.0)
    return change(brentq(lambda x: share_at(change(x), wavelength, height) - share, low, high, xtol=1e-7))


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("shape", choices=list(SHAPES))
    parser.add_argument("peak", type=float)
    parser.add_argument("height", type=float)
    parser.add_argument("--at", nargs=2, type=float, metavar=("WAVELENGTH", "SHARE"))
    parser.add_argument("--also", nargs=3, type=float, action="append", default=[], metavar=("WAVELENGTH", "EPS", "FWHM"))
    parser.add_argument("--fwhm", type=float)
    given = parser.parse_args()
    bands = tuple(
        Band(CM1_PER_NM / given.peak + row["offset"], row["height"], given.fwhm or row["fwhm"], row["skew"])
        for row in SHAPES[given.shape]["bands"])
    extra = tuple(Band(CM1_PER_NM / wavelength, height, fwhm, 1.2) for wavelength, height, fwhm in given.also)
    result = (with_ratio(bands, given.peak, given.height, extra, *given.at) if given.at
              else placed(bands, given.peak, given.height, extra))
    print(f'# source of the shape: {SHAPES[given.shape]["source"]}')
    print(f"peak = {{wavelength = {given.peak:g}, absorptivity = {given.height:g}, source = }}")
    print("bands = [")
    for band in result:
        print(f"    {{wavenumber = {band.wavenumber:.1f}, height = {band.height:.1f}, "
              f"fwhm = {band.fwhm:.1f}, skew = {band.skew:.4f}}},")
    print("]")


if __name__ == "__main__":
    main()
