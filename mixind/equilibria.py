"""Acid-base equilibria of a dye: which share of it is in which form at a given pH."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from mixind.errors import MixindError

GAS_CONSTANT = 8.314462618
"""J mol-1 K-1; CODATA 2018."""
ZERO_CELSIUS = 273.15
REFERENCE_TEMPERATURE = 25.0
DEFAULT_IONIC_STRENGTH = 0.1
DAVIES_LIMIT = 0.5
"""Ionic strength beyond which the Davies equation is not extrapolated [mol/L]."""


@dataclass(frozen=True)
class Solution:
    """What the sample is, as far as the equilibria of a dye depend on it.

    Attributes:
        temperature: 0 to 100 [C].
        ionic_strength: 0 to 10 [mol/L]; above 0.5 the activity correction stays at its value for 0.5.
        aged: whether slow steps (fading, carbinol) have come to rest; a fresh solution leaves them out.
        medium: name of a medium for which some dyes state a constant of their own, or None.
    """

    temperature: float = REFERENCE_TEMPERATURE
    ionic_strength: float = DEFAULT_IONIC_STRENGTH
    aged: bool = False
    medium: str | None = None

    def __post_init__(self) -> None:
        for name, value, high in (("temperature", self.temperature, 100), ("ionic strength", self.ionic_strength, 10)):
            if not (math.isfinite(value) and 0 <= value <= high):
                raise MixindError(f"{name}: {value:g} is outside 0 to {high}.")


def debye_hueckel_slope(temperature: float = REFERENCE_TEMPERATURE) -> float:
    """Return A of the Debye-Hueckel limiting law in water, decadic [(L/mol)^0.5].

    Args:
        temperature: 0 to 100 [C].
    Source: A = 1.82e6 (eps T)^-1.5 (Stumm and Morgan, Aquatic Chemistry, 3rd ed. 1996, table 3.3, from memory);
        permittivity of water, Malmberg and Maryott, J. Res. Natl. Bur. Stand. 56 (1956) 1, eq. 2 (from memory).
    Example:
        >>> round(debye_hueckel_slope(25.0), 3)
        0.51
    """
    t = temperature
    permittivity = 87.740 - 0.40008 * t + 9.398e-4 * t**2 - 1.410e-6 * t**3
    return float(1.82e6 * (permittivity * (t + ZERO_CELSIUS)) ** -1.5)


def davies(ionic_strength: float, temperature: float = REFERENCE_TEMPERATURE) -> float:
    """Return -log10 of the activity coefficient of a singly charged ion.

    Args:
        ionic_strength: zero or more; taken as 0.5 beyond that, where the equation is not meant to reach [mol/L].
        temperature: 0 to 100 [C].
    Source: Davies, Ion Association, 1962, with the coefficient 0.3 (cited from memory).
    Example:
        >>> round(davies(0.1), 3)
        0.107
    """
    root = np.sqrt(min(ionic_strength, DAVIES_LIMIT))
    return float(debye_hueckel_slope(temperature) * (root / (1 + root) - 0.3 * root**2))


def fractions(pH: np.ndarray, pKa: np.ndarray) -> np.ndarray:
    """Return the share of each form, most protonated first; the shares sum to 1.

    Computed from logarithms, so that no pH however far from the constants overflows.

    Args:
        pH: (P,), any finite values.
        pKa: working constants of the steps, (S-1,), most acidic first; may be empty.
    Returns: (P, S).
    Example:
        >>> fractions(np.array([7.0]), np.array([7.0]))
        array([[0.5, 0.5]])
    """
    pH, pKa = np.asarray(pH, dtype=float), np.asarray(pKa, dtype=float)
    order = np.arange(pKa.size + 1)
    logarithm = pH[:, None] * order - np.concatenate([[0.0], np.cumsum(pKa)])
    weight = 10.0 ** (logarithm - logarithm.max(axis=1, keepdims=True))
    return np.asarray(weight / weight.sum(axis=1, keepdims=True))


def fraction_slopes(shares: np.ndarray) -> np.ndarray:
    """Return the derivative of each share with respect to the constant of each step.

    Args:
        shares: as returned by `fractions`, (P, S).
    Returns: (P, S-1, S): entry [p, m, k] is d share_k / d pKa_m. By pH, the slope is minus the sum over m.

    Raising pKa_m disfavours every form beyond step m alike, so that the slope is
    ln 10 x share_k x (share of all forms beyond m - [k beyond m]).
    """
    steps = shares.shape[1] - 1
    beyond = (np.arange(steps + 1) > np.arange(steps)[:, None]).astype(float)
    return np.asarray(np.log(10) * shares[:, None, :] * ((shares @ beyond.T)[:, :, None] - beyond))
