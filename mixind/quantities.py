"""Quantities with units, as people write them, to numbers and back.

Inside the library everything is in the units of the table in DEVELOPERS.md; this module is the edge where
"62.5 mg/L", "0.2 mL in 10 mL", "20 %" or "4:10:0.5" become numbers and numbers become words again.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass

import numpy as np

from mixind.errors import MixindError, nearest

PH_RANGE = (-1.0, 15.0)
SMALLEST_PH_STEP = 0.05
_STEP_SLACK = 1e-3

# Bounds beyond which a figure is a slip of the pen, not a quantity of a bench.
STRONGEST = (1000.0, 10.0)
"""Largest strength by mass [g/L] and by amount [mol/L]."""
VOLUMES = (1e-4, 1e5)
"""Range of the volumes of a dose [mL]."""
PATHS = (0.01, 100.0)
"""Range of an optical path [cm]."""

# Factor from each written unit to the unit used inside.
LENGTH = {"cm": 1.0, "mm": 0.1, "m": 100.0}
VOLUME = {"mL": 1.0, "ml": 1.0, "L": 1e3, "l": 1e3, "uL": 1e-3, "ul": 1e-3}
MASS_STRENGTH = {"g/L": 1.0, "mg/L": 1e-3, "ug/L": 1e-6, "mg/mL": 1.0, "g/100 mL": 10.0, "%": 10.0, "% w/v": 10.0}
AMOUNT_STRENGTH = {"mol/L": 1.0, "mmol/L": 1e-3, "umol/L": 1e-6, "M": 1.0, "mM": 1e-3, "uM": 1e-6}
SHARE = {"%": 0.01, "": 1.0}

# Volume of a drop [mL] of a watery and of an alcoholic solution: common practice, no source.
WATER_DROP = 0.05
ALCOHOL_DROP = 0.02

_QUANTITY = re.compile(r"\s*([+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?)\s*(.*?)\s*")


def quantity(text: str, units: dict[str, float], what: str) -> float:
    """Return the number written in `text`, in the unit used inside.

    Args:
        text: a number followed by a unit, such as "1 cm".
        units: factor from each accepted unit to the inner one, such as `LENGTH`.
        what: what the quantity is, for the error, such as "path".
    Raises: MixindError for anything but a finite number with one of the units.
    Example:
        >>> quantity("16 mm", LENGTH, "path")
        1.6
    """
    value, unit = _split(text, units, what)
    return value * units[unit]


def _split(text: str, units: dict[str, float], what: str) -> tuple[float, str]:
    match = _QUANTITY.fullmatch(str(text).replace("µ", "u").replace("μ", "u"))
    choices = ", ".join(unit for unit in units if unit)
    if not match:
        raise MixindError(f"{what}: {text!r} is not a number with a unit. Write for instance 2 {choices.split(', ')[0]}.")
    value, unit = float(match[1]), " ".join(match[2].split())
    if not math.isfinite(value):
        raise MixindError(f"{what}: {text!r} is too large a number. Check the exponent.")
    if unit not in units:
        fault = f"the unit {unit!r} is not known{nearest(unit, units)}" if unit else "the unit is missing"
        raise MixindError(f"{what}: {text!r}: {fault}. Use one of {choices}.")
    return value, unit


@dataclass(frozen=True)
class Strength:
    """How much dye a litre of stock holds, as it was written: by mass or by amount.

    Attributes:
        value: g/L when `by_mass`, else mol/L; zero or more.
        by_mass: whether `value` counts grams.
    """

    value: float
    by_mass: bool

    def grams_per_litre(self, molar_mass: float) -> float:
        """Return the strength in g/L of a substance of this molar mass [g/mol]."""
        return self.value if self.by_mass else self.value * molar_mass

    def moles_per_litre(self, molar_mass: float) -> float:
        """Return the strength in mol/L of a substance of this molar mass [g/mol]."""
        return self.value / molar_mass if self.by_mass else self.value


def strength(text: str) -> Strength:
    """Return the strength of a stock from "62.5 mg/L", "0.1 %" (w/v) or "25 umol/L".

    Raises: MixindError when the number is negative or not finite, or the unit missing or unknown.
    Example:
        >>> strength("0.1 %")
        Strength(value=1.0, by_mass=True)
    """
    units = MASS_STRENGTH | AMOUNT_STRENGTH
    value, unit = _split(text, units, "strength")
    if value < 0:
        raise MixindError(f"strength: {text!r} is negative. Give zero or more.")
    by_mass = unit in MASS_STRENGTH
    most = STRONGEST[0] if by_mass else STRONGEST[1]
    if value * units[unit] > most:
        raise MixindError(f"strength: {text!r} is more than {most:g} {'g/L' if by_mass else 'mol/L'}. Check the unit.")
    return Strength(value * units[unit], by_mass)


@dataclass(frozen=True)
class Dose:
    """How much stock goes into how much sample.

    Attributes:
        stock: volume of indicator stock, 0.0001 to 100 000 [mL].
        sample: volume of the sample it is added to, the same range [mL].
    """

    stock: float
    sample: float

    def __post_init__(self) -> None:
        for volume in (self.stock, self.sample):
            if not VOLUMES[0] <= volume <= VOLUMES[1]:
                raise MixindError(f"dose: {volume:g} mL is outside {VOLUMES[0]:g} to {VOLUMES[1]:g} mL.")

    def share(self, factor: float = 1.0) -> float:
        """Return the share of stock in the coloured sample when `factor` times the dose is given [1]."""
        return self.stock * factor / (self.stock * factor + self.sample)

    def __str__(self) -> str:
        return f"{self.stock:g} mL in {self.sample:g} mL"

    def in_drops(self) -> str:
        """Return the dose in drops of a watery and of an alcoholic stock, for the reader at the bench."""
        water, alcohol = (max(1, round(self.stock / drop)) for drop in (WATER_DROP, ALCOHOL_DROP))
        return f"about {water} drop{'s' if water > 1 else ''} of a watery or {alcohol} of an alcoholic stock"


def dose(text: str) -> Dose:
    """Return the dose written as "0.2 mL in 10 mL".

    Raises: MixindError when it is not two volumes above zero.
    Example:
        >>> dose("0.2 mL in 10 mL").stock
        0.2
    """
    parts = str(text).split(" in ")
    if len(parts) != 2:
        raise MixindError(f"dose: {text!r} is not of the form '0.2 mL in 10 mL'.")
    return Dose(quantity(parts[0], VOLUME, "dose"), quantity(parts[1], VOLUME, "dose"))


def share(text: str, what: str) -> float:
    """Return a share from 0 to 1, exclusive of 1, written as "20%" or "0.2".

    Raises: MixindError outside the range.
    Example:
        >>> share("20 %", "dose tolerance")
        0.2
    """
    value = quantity(text, SHARE, what)
    if not 0 <= value < 1:
        raise MixindError(f"{what}: {text!r} is outside 0 to below 100 %.")
    return value


def path_length(text: str) -> float:
    """Return an optical path [cm], 0.01 to 100, from "1 cm" or "16 mm".

    Raises: MixindError outside the range or without a unit.
    """
    value = quantity(text, LENGTH, "path")
    if not PATHS[0] <= value <= PATHS[1]:
        raise MixindError(f"path: {text!r} is outside {PATHS[0]:g} to {PATHS[1]:g} cm. Give the width of the vessel.")
    return value


def content(text: str) -> float:
    """Return the share of dye in a powder, above 0 to 1, from "85 %" or "0.85".

    Raises: MixindError outside the range.
    """
    value = quantity(text, SHARE, "content")
    if not 0 < value <= 1:
        raise MixindError(f"content: {text!r} is outside above 0 to 100 %.")
    return value


def pH_grid(low: float, high: float, step: float) -> np.ndarray:
    """Return the pH values low, low + step, .., and `high` itself.

    The last interval may be shorter than the others, down to half a step.

    Args:
        low, high: ends of the span, from -1 to 15, low below high.
        step: from 0.05 up to the span.
    Raises: MixindError when an end or the step is out of range or the step does not fit.
    Example:
        >>> pH_grid(4, 6, 1)
        array([4., 5., 6.])
    """
    _check_span(low, high, step)
    steps = (high - low) / step
    whole = round(steps) if abs(steps - round(steps)) < _STEP_SLACK else int(steps)
    if abs(steps - whole) < _STEP_SLACK:
        return np.round(np.linspace(low, high, whole + 1), 10)
    if steps - whole < 0.5:
        fits = (high - low) / whole
        raise MixindError(
            f"step: {step:g} does not fit pH {low:g} to {high:g}, {(steps - whole) * step:.3g} is left over. Use {fits:.7g}.",
            fits=fits)
    return np.append(np.round(low + step * np.arange(whole + 1), 10), high)


def _check_span(low: float, high: float, step: float) -> None:
    if not all(math.isfinite(value) for value in (low, high, step)):
        raise MixindError(f"pH span: got {low} to {high} in steps of {step}. Give numbers.")
    if not PH_RANGE[0] <= min(low, high) <= max(low, high) <= PH_RANGE[1]:
        raise MixindError(f"pH span: {low:g} to {high:g} reaches outside {PH_RANGE[0]:g} to {PH_RANGE[1]:g}.")
    if low >= high:
        raise MixindError(f"pH span: runs from {low:g} to {high:g}. Give the lower pH first.")
    if step < SMALLEST_PH_STEP:
        raise MixindError(f"step: {step:g} is finer than {SMALLEST_PH_STEP}. No eye tells such steps apart.")
    if step > high - low:
        raise MixindError(f"step: {step:g} is longer than the span {low:g} to {high:g}. Use at most {high - low:g}.")


def pH_series(text: str) -> np.ndarray:
    """Return the pH values written as "4:10:0.5", "4:10" (step 1) or "4,5.5,7", ascending.

    Raises: MixindError when it cannot be read or a value lies outside -1 to 15.
    Example:
        >>> pH_series("6.8,7.2")
        array([6.8, 7.2])
    """
    try:
        if "_" in text:
            raise ValueError
        if ":" in text:
            numbers = [float(part) for part in text.split(":")]
            if len(numbers) not in (2, 3):
                raise ValueError
            return pH_grid(numbers[0], numbers[1], numbers[2] if len(numbers) == 3 else 1.0)
        values = np.array([float(part) for part in text.split(",")]) + 0.0
    except MixindError:
        raise
    except ValueError:
        raise MixindError(f"pH: {text!r} is not of the form 4:10:0.5 or 4,5.5,7.") from None
    if not (np.all(values >= PH_RANGE[0]) and np.all(values <= PH_RANGE[1])):
        raise MixindError(f"pH: {text!r} has a value outside {PH_RANGE[0]:g} to {PH_RANGE[1]:g}.")
    if np.any(np.diff(values) < SMALLEST_PH_STEP - 1e-9):
        raise MixindError(f"pH: {text!r} must rise by at least {SMALLEST_PH_STEP} from value to value.")
    return values


def pH_text(value: float) -> str:
    """Return a pH with at most two decimals, as it is read at the bench.

    Example:
        >>> pH_text(4.0), pH_text(6.27272)
        ('4', '6.27')
    """
    return f"{value:.2f}".rstrip("0").rstrip(".")


def significant(value: float, digits: int = 3) -> str:
    """Return `value` with so many significant figures and no exponent, trailing zeros kept.

    Example:
        >>> significant(0.012), significant(1234.5)
        ('0.0120', '1230')
    """
    if value == 0:
        return "0"
    rounded = float(f"{value:.{digits - 1}e}")
    places = digits - 1 - math.floor(math.log10(abs(rounded)))
    return f"{rounded:.{max(places, 0)}f}"
