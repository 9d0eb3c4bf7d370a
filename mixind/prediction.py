"""The forward model: the colour of a blend in a sample at each pH, and how sure it is."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np

from mixind import colorimetry, display, dyes, equilibria
from mixind.blend import Blend
from mixind.colour_words import colour_word
from mixind.conditions import Conditions
from mixind.difference import METRICS, ciede2000
from mixind.dyes import Dye
from mixind.equilibria import Solution
from mixind.separation import Worst, separation_matrix, worst_pair
from mixind.viewing import Vessel, Viewer

STRENGTH_SD = 0.05
"""Relative standard uncertainty of one dye in the stock, by weighing, dissolving and the content of its powder (once
corrected for): common practice, no source."""
DOSE_SD = 0.05
"""Relative standard uncertainty of the dose from a graduated pipette: common practice, no source."""

_PROBE = 1e-3
_BLOCK = 16
"""Mixtures coloured at once: their spectra then stay in the cache, which halves the time of a large batch."""


def absorptivities(used: Sequence[Dye], pH: np.ndarray, solution: Solution) -> np.ndarray:
    """Return the absorptivity of each dye at each pH on the wavelength grid.

    Args:
        used: n dyes.
        pH: (P,).
        solution: what the equilibria depend on.
    Returns: (n, P, 81) [L mol-1 cm-1].
    """
    return np.stack([dye.absorptivity_at(pH, solution) for dye in used])


def absorbance(absorptivity: np.ndarray, concentrations: np.ndarray) -> np.ndarray:
    """Return the decadic absorbance per centimetre of mixtures by the Beer-Lambert law.

    Args:
        absorptivity: of n dyes, (n, P, W) [L mol-1 cm-1].
        concentrations: of the dyes in the sample, (..., n), zero or more [mol/L].
    Returns: (..., P, W) [1/cm].
    Source: IUPAC Gold Book, "Beer-Lambert law", doi:10.1351/goldbook.B00626.
    """
    return np.asarray(np.tensordot(concentrations, absorptivity, axes=1))


def tristimulus(absorptivity: np.ndarray, concentrations: np.ndarray, vessel: Vessel, viewer: Viewer) -> np.ndarray:
    """Return the tristimulus values of mixtures, (..., P, 3); clear solvent has Y = 1. Arguments as `absorbance`."""
    flat = np.reshape(concentrations, (-1, absorptivity.shape[0]))
    XYZ = np.empty((flat.shape[0], absorptivity.shape[1], 3))
    for start in range(0, flat.shape[0], _BLOCK):
        part = slice(start, start + _BLOCK)
        XYZ[part] = vessel.light(absorbance(absorptivity, flat[part])) @ viewer.weights
    return XYZ.reshape(*np.shape(concentrations)[:-1], *XYZ.shape[1:])


@dataclass(frozen=True)
class Prediction:
    """The colours of a blend over pH.

    Attributes:
        blend, conditions: what was predicted and how it is looked at.
        pH: (P,), rising.
        XYZ: tristimulus values, (P, 3), Y = 1 for clear solvent.
        white: of the viewer, (3,).
        sd_dE00: standard uncertainty of each colour as CIEDE2000 (1:1:1), (P,).
        peak_absorbance: largest absorbance over 400-700 nm along the light's way, (P,).
        grades: worst grade among the forms that make the colour, per pH.
    """

    blend: Blend
    conditions: Conditions
    pH: np.ndarray
    XYZ: np.ndarray
    white: np.ndarray
    sd_dE00: np.ndarray
    peak_absorbance: np.ndarray
    grades: tuple[str, ...]

    @cached_property
    def Lab(self) -> np.ndarray:
        """CIELAB under the viewer's white, (P, 3)."""
        return colorimetry.cielab(self.XYZ, self.white)

    @cached_property
    def patch(self) -> display.Patch:
        """The colours ready for a screen or a page."""
        return display.patch(self.XYZ, self.white)

    @cached_property
    def words(self) -> list[str]:
        """The colours in words."""
        return [colour_word(Lab) for Lab in self.Lab]

    @property
    def dE00_next(self) -> np.ndarray:
        """CIEDE2000 (1:1:1) from each colour to the next, (P-1,)."""
        return ciede2000(self.Lab[:-1], self.Lab[1:], kL=1.0)

    def separation(self, metric: str = "ciede2000", kL: float | None = None) -> np.ndarray:
        """Return the separation of every two pH, (P, P), by a metric of `METRICS`."""
        chosen = METRICS[metric]
        return separation_matrix(chosen.space(self.XYZ, self.white), chosen, chosen.kL if kL is None else kL)

    def worst(self, step: float | None = None, metric: str = "ciede2000", kL: float | None = None) -> Worst:
        """Return the two pH hardest to tell apart among those at least one step apart.

        Args:
            step: smallest pH difference that counts, above zero; the smallest gap of `pH` unless given.
            metric: one of `METRICS`.
            kL: weight of lightness; that of the metric unless given.
        """
        chosen = METRICS[metric]
        gap = float(np.diff(self.pH).min()) if step is None else step
        return worst_pair(self.pH, chosen.space(self.XYZ, self.white), gap, chosen, chosen.kL if kL is None else kL)

    def rows(self) -> list[dict[str, Any]]:
        """Return one dictionary per pH with the keys that `--json` gives."""
        following = [*np.round(self.dE00_next, 3).tolist(), None]
        shown = self.patch.hex()
        return [{
            "pH": round(float(self.pH[i]), 6), "XYZ": np.round(self.XYZ[i], 6).tolist(),
            "Lab": np.round(self.Lab[i], 3).tolist(),
            "sRGB": np.round(self.patch.rgb[i], 5).tolist(), "hex": shown[i], "in_gamut": bool(self.patch.in_gamut[i]),
            "shown_dE00": round(float(self.patch.cost[i]), 3), "colour": self.words[i],
            "sd_dE00": round(float(self.sd_dE00[i]), 3), "peak_absorbance": round(float(self.peak_absorbance[i]), 4),
            "dE00_next": following[i], "grade": self.grades[i]} for i in range(self.pH.size)]


def predict(blend: Blend, pH: np.ndarray, conditions: Conditions, dose_factor: float = 1.0) -> Prediction:
    """Return the colours of a blend.

    Args:
        blend: what goes in.
        pH: of the samples, (P,), rising.
        conditions: sample, vessel, lamp and eye.
        dose_factor: multiple of the nominal dose, above zero [1].
    Raises: MixindError for a lamp that nobody knows.
    """
    vessel, viewer, solution = conditions.make_vessel(), conditions.make_viewer(), conditions.solution()
    concentrations = blend.sample_concentrations(dose_factor)
    per_cm = absorbance(absorptivities(blend.dyes, pH, solution), concentrations)
    changes = absorbance_changes(blend, pH, solution, dose_factor)
    return Prediction(
        blend, conditions, pH, vessel.light(per_cm) @ viewer.weights, viewer.white, colour_sd(per_cm, changes, vessel, viewer),
        dyes.visible_peak(per_cm) * vessel.optical_length, _grades(blend, pH, solution, concentrations))


def colour_sd(per_cm: np.ndarray, changes: np.ndarray, vessel: Vessel, viewer: Viewer) -> np.ndarray:
    """Return the standard uncertainty of each colour as CIEDE2000 (1:1:1), by linear propagation with exact derivatives.

    Args:
        per_cm: absorbance, (P, W) [1/cm].
        changes: what one standard uncertainty of each uncertain figure does to it, (Q, P, W) [1/cm]. An uncertainty that
            all pH share is one row, so that each colour gets it whole.
    Returns: (P,).
    """
    light = vessel.light(per_cm)
    Lab, slope = colorimetry.cielab_and_jacobian(light @ viewer.weights, viewer.white)
    shifts = np.einsum("pij,qpj->qpi", slope, (changes * vessel.light_slope(light)) @ viewer.weights)
    small = ciede2000(Lab[None], Lab[None] + _PROBE * shifts, kL=1.0) / _PROBE
    return np.asarray(np.sqrt((small**2).sum(axis=0)))


def absorbance_changes(blend: Blend, pH: np.ndarray, solution: Solution, dose_factor: float = 1.0) -> np.ndarray:
    """Return what one standard uncertainty of each uncertain figure does to the absorbance, (Q, P, 81) [1/cm].

    The figures are the constants and the heights of the forms as the dye files state them (the uncertainty of a shape is
    counted as one of height), each dye's strength and the dose.
    """
    changes, total = [], 0.0
    for dye, concentration in zip(blend.dyes, blend.sample_concentrations(dose_factor), strict=True):
        shares, heights = dye.fractions(pH, solution), dye.absorptivity(solution)
        slopes = equilibria.fraction_slopes(shares)
        for number, step in enumerate(dye.active_steps(solution)):
            changes.append(concentration * step.working_sd(solution) * (slopes[:, number] @ heights))
        for number, form in enumerate(dye.forms[:heights.shape[0]]):
            sd = np.hypot(form.sd, form.shape_sd)
            changes.append(concentration * sd * shares[:, number, None] * heights[number])
        own = concentration * (shares @ heights)
        changes.append(STRENGTH_SD * own)
        total = total + own
    # a dose larger by a per cent raises the concentration by less, since it dilutes the sample, too
    changes.append(DOSE_SD * (1 - blend.dose.share(dose_factor)) * np.asarray(total))
    return np.array(changes)


_TELLING_SHARE = 0.1


def _grades(blend: Blend, pH: np.ndarray, solution: Solution, concentrations: np.ndarray) -> tuple[str, ...]:
    """Return per pH the worst grade among forms that make at least a tenth of the strongest absorbance."""
    peaks, grades = [], []
    for dye, concentration in zip(blend.dyes, concentrations, strict=True):
        height = dyes.visible_peak(dye.absorptivity(solution))
        peaks.append(concentration * dye.fractions(pH, solution) * height)
        grades += [form.grade for form in dye.forms[:height.size]]
    share = np.concatenate(peaks, axis=1)
    telling = (share >= _TELLING_SHARE * share.max(axis=1, keepdims=True)) & (share > 0)
    return tuple(max((grade for grade, counts in zip(grades, row, strict=True) if counts), default="A") for row in telling)
