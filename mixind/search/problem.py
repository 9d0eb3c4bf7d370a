"""What a search maximises: the worst separation of a blend, with its exact derivatives."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from mixind import dyes, prediction
from mixind.difference import Metric
from mixind.dyes import Dye
from mixind.equilibria import Solution
from mixind.quantities import Dose
from mixind.separation import dose_pairs
from mixind.viewing import Vessel, Viewer

LARGEST_STOCK = 10.0
"""Most of one dye in a stock [g/L]: 1 % w/v, that of the strongest usual indicators; common practice, no source."""
LARGEST_IN_SAMPLE = 5e-4
"""Most of one dye in the sample [mol/L]: beyond it the dye itself would buffer the sample; our choice."""
_FAINT = 0.05

_WITHOUT_COLOUR = 1e-4
"""Most of a dye that absorbs nowhere in the visible [mol/L]."""


@dataclass(frozen=True)
class Task:
    """What a blend is asked to do; the same for every choice of dyes.

    Attributes:
        pH: to be told apart, (P,), rising; `step` is the smallest distance that counts.
        solution, vessel: what the sample is and what holds it.
        viewers: one or more; the separation must hold for each.
        dose: nominal; `tolerance` is the share by which the dose volume may be off, 0 to below 1.
        metric, kL: how difference is measured.
        peak_absorbance: most that one dye may absorb at its peak along the light's way, at the nominal dose.
        darkest: least lightness L* of any colour at the nominal dose.
    """

    pH: np.ndarray
    step: float
    solution: Solution
    vessel: Vessel
    viewers: tuple[Viewer, ...]
    dose: Dose
    tolerance: float
    metric: Metric
    kL: float
    peak_absorbance: float
    darkest: float

    @property
    def dose_factors(self) -> tuple[float, ...]:
        """Multiples of the nominal dose that are looked at."""
        return (1 - self.tolerance, 1.0, 1 + self.tolerance) if self.tolerance else (1.0,)


class Problem:
    """The worst separation of mixtures of given dyes, as a function of their shares.

    The variables x, (n,), run from 0 to 1: the concentration of each dye in the sample at the nominal dose over the
    most it may have. Everything is computed for all doses, pH and viewers at once.
    """

    def __init__(self, task: Task, used: Sequence[Dye]) -> None:
        self.task, self.dyes = task, tuple(used)
        table = prediction.absorptivities(used, task.pH, task.solution)
        self.largest = np.array([largest_concentration(task, dye, rows) for dye, rows in zip(used, table, strict=True)])
        self._setup(table * self.largest[:, None, None])

    def _setup(self, full: np.ndarray) -> None:
        """Prepare from the absorbance per cm of each dye at its most, (n, P, W)."""
        task = self.task
        self.full = full
        self.weights = np.concatenate([viewer.weights for viewer in task.viewers], axis=1)
        self.factors = np.array([task.dose.share(f) / task.dose.share() for f in task.dose_factors])
        self.nominal = int(np.argmin(np.abs(self.factors - 1)))
        doses, count = len(task.dose_factors), len(task.viewers)
        per_viewer = dose_pairs(task.pH, task.step, doses)
        # colours are laid out viewer by viewer, each (doses x P)
        shift = np.arange(count)[:, None, None] * doses * task.pH.size
        self.pairs = (per_viewer[None] + shift).reshape(-1, 2)

    def restricted(self, positions: Sequence[int]) -> Problem:
        """Return the problem of some of the dyes, sharing what is already computed."""
        part = object.__new__(Problem)
        chosen = list(positions)
        part.task, part.dyes = self.task, tuple(self.dyes[i] for i in chosen)
        part.largest, part.full = self.largest[chosen], self.full[chosen]
        part.weights, part.factors, part.nominal, part.pairs = self.weights, self.factors, self.nominal, self.pairs
        return part

    def coordinates(self, x: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Return the colours, (V * D * P, 3), in the metric's space, and L* at the nominal dose, (V * P,)."""
        light = self._light(x)
        XYZ = self._by_viewer(light @ self.weights)
        parts = [self.task.metric.space(XYZ[v], viewer.white) for v, viewer in enumerate(self.task.viewers)]
        return np.concatenate(parts), self._lightness(XYZ)

    def _light(self, x: np.ndarray) -> np.ndarray:
        """Return the light at each dose and pH, (D, P, W)."""
        absorbance = (x @ self.full.reshape(x.size, -1)).reshape(self.full.shape[1:])
        return self.task.vessel.light(self.factors[:, None, None] * absorbance)

    def _by_viewer(self, XYZ: np.ndarray) -> np.ndarray:
        """Return (..., D, P, 3V) as (V, ..., D * P, 3)."""
        shaped = XYZ.reshape(*XYZ.shape[:-3], XYZ.shape[-3] * XYZ.shape[-2], len(self.task.viewers), 3)
        return shaped.transpose(shaped.ndim - 2, *range(shaped.ndim - 2), shaped.ndim - 1)

    def _lightness(self, XYZ: np.ndarray) -> np.ndarray:
        P = self.task.pH.size
        Y = XYZ[:, self.nominal * P:(self.nominal + 1) * P, 1]
        return np.asarray((116 * np.cbrt(np.maximum(Y, 1e-9)) - 16).ravel())

    def separations(self, x: np.ndarray) -> np.ndarray:
        """Return the true difference of every pair that counts, (K,)."""
        points, _ = self.coordinates(x)
        return self.task.metric.difference(points[self.pairs[:, 0]], points[self.pairs[:, 1]], self.task.kL)

    def worst(self, x: np.ndarray) -> float:
        """Return the smallest difference of any pair that counts."""
        return float(self.separations(x).min())

    def darkest(self, x: np.ndarray) -> float:
        """Return the least L* at the nominal dose."""
        return float(self.coordinates(x)[1].min())

    def allowed(self, x: np.ndarray, slack: float = 1e-6) -> bool:
        """Return whether no limit is broken: shares in the unit box and no colour too dark."""
        return bool(np.all(x >= 0) and np.all(x <= 1 + slack) and self.darkest(x) >= self.task.darkest - slack)

    def values_and_slopes(self, x: np.ndarray, pairs: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Return the differences of `pairs` and the room above the darkest lightness, with their derivatives.

        Args:
            x: (n,).
            pairs: indices into the colours, (K, 2).
        Returns: (K + V * P,) and (K + V * P, n).
        """
        task, n = self.task, x.size
        light = self._light(x)
        slope = task.vessel.light_slope(light) * self.factors[:, None, None]
        doses, P, W = light.shape
        dlight = (self.full[:, None] * slope).reshape(-1, W)
        XYZ = self._by_viewer(light @ self.weights)
        dXYZ = self._by_viewer((dlight @ self.weights).reshape(n, doses, P, -1))
        points, jacobians = [], []
        for v, viewer in enumerate(task.viewers):
            point, by_XYZ = task.metric.space_and_jacobian(XYZ[v], viewer.white)
            points.append(point)
            jacobians.append(by_XYZ @ dXYZ[v].transpose(1, 2, 0))
        point, jacobian = np.concatenate(points), np.concatenate(jacobians)
        one, two = pairs[:, 0], pairs[:, 1]
        value, by_one, by_two = task.metric.difference_and_slopes(point[one], point[two], task.kL)
        slopes = (by_one[:, None] @ jacobian[one] + by_two[:, None] @ jacobian[two])[:, 0]
        room, room_slopes = self._room(XYZ, dXYZ)
        return np.concatenate([value, room]), np.concatenate([slopes, room_slopes])

    def _room(self, XYZ: np.ndarray, dXYZ: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Return L* minus the darkest allowed at the nominal dose, (V * P,), and its derivative, (V * P, n)."""
        P = self.task.pH.size
        at = slice(self.nominal * P, (self.nominal + 1) * P)
        Y = np.maximum(XYZ[:, at, 1], 1e-9).ravel()
        dY = dXYZ[:, :, at, 1].transpose(0, 2, 1).reshape(Y.size, -1)
        return 116 * np.cbrt(Y) - 16 - self.task.darkest, (116 / 3) * (Y ** (-2 / 3))[:, None] * dY


def largest_concentration(task: Task, dye: Dye, absorptivity: np.ndarray) -> float:
    """Return the most of a dye the sample may hold at the nominal dose [mol/L].

    Set by its peak absorbance over the pH span (of its strongest form when it shows next to no colour there), by solubility,
    aggregation and the like where the file says so, and by the strongest stock one makes.

    Args:
        absorptivity: of the dye over the span, (P, W) [L mol-1 cm-1].
    """
    own = float(dyes.visible_peak(np.array([form.absorptivity for form in dye.forms])).max())
    here = float(dyes.visible_peak(absorptivity).max())
    peak = here if here > _FAINT * own else own
    by_colour = task.peak_absorbance / (peak * task.vessel.optical_length) if peak > 0 else _WITHOUT_COLOUR
    # a bound such as solubility has to hold for the largest dose, too; peak absorbance is judged at the nominal one
    most = task.dose.share(max(task.dose_factors)) / task.dose.share()
    by_stock = LARGEST_STOCK / dye.molar_mass * task.dose.share()
    return min(by_colour, dye.largest_concentration / most, by_stock, LARGEST_IN_SAMPLE)
