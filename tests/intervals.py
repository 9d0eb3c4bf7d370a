"""Visual transition intervals as the model sees them, by one rule for all two-coloured indicators."""

from __future__ import annotations

from collections import defaultdict
from dataclasses import dataclass

import numpy as np

from mixind import viewing
from mixind.colorimetry import cielab
from mixind.difference import ciede2000
from mixind.dyes import Dye, visible_peak
from mixind.equilibria import Solution, fractions
from mixind.library import Library
from tests import published

FRACTION = 0.10
"""Share of the whole colour change that an eye needs to notice at either end; fitted once to the frozen list below."""

PEAK_ABSORBANCE = 0.8

# Frozen before the fraction was chosen: every dye of the library with a printed interval that spans one step between two
# coloured forms. Crystal violet is not on it: it passes through three colours, yellow, green and violet.
TWO_COLOURED = (
    ("alizarin red S", 1), ("alizarin yellow R", 1), ("bromocresol green", 1), ("bromocresol purple", 1),
    ("bromophenol blue", 1), ("bromothymol blue", 1), ("chlorophenol red", 1), ("cresol red", 1), ("cresol red", 2),
    ("indigo carmine", 1), ("m-cresol purple", 1), ("m-cresol purple", 2), ("malachite green", 1), ("methyl orange", 1),
    ("methyl red", 2), ("methyl yellow", 1), ("neutral red", 1), ("orange IV", 1), ("phenol red", 2), ("thymol blue", 1),
    ("thymol blue", 2))

_GRID = np.arange(-2.0, 16.0, 0.01)


@dataclass(frozen=True)
class Compared:
    """One step of one dye: the interval of the model beside the mean of the printed ones."""

    dye: str
    step: int
    ours: tuple[float, float]
    printed: tuple[float, float]

    @property
    def midpoint_error(self) -> float:
        return (sum(self.ours) - sum(self.printed)) / 2


def model_interval(dye: Dye, step: int, fraction: float = FRACTION) -> tuple[float, float]:
    """Return the visual interval of a step, seen in daylight with peak absorbance 0.8 in the stronger form, I = 0.1."""
    heights = np.array([form.absorptivity for form in dye.forms[step - 1:step + 1]])
    scale = PEAK_ABSORBANCE / visible_peak(heights).max()
    viewer = viewing.viewer()

    def colours(shares: np.ndarray) -> np.ndarray:
        return cielab(10 ** -(shares @ heights * scale) @ viewer.weights, viewer.white)

    acid, base = colours(np.eye(2))
    between = colours(fractions(_GRID, np.array([dye.steps[step - 1].working_pka(Solution())])))
    whole = ciede2000(acid, base)
    low = _GRID[np.argmax(ciede2000(acid, between) >= fraction * whole)]
    high = _GRID[::-1][np.argmax(ciede2000(between, base)[::-1] >= fraction * whole)]
    return float(low), float(high)


def compared(fraction: float = FRACTION) -> list[Compared]:
    """Return the comparison for every step of the frozen list."""
    printed = defaultdict(list)
    for row in published.rows("intervals"):
        printed[row["dye"], int(row["first_step"])].append((float(row["low"]), float(row["high"])))
    library = Library()
    return [Compared(name, step, model_interval(library.find(name), step, fraction),
                     tuple(np.mean(printed[name, step], axis=0))) for name, step in TWO_COLOURED]


def rms_errors(rows: list[Compared]) -> tuple[float, float]:
    """Return the rms error of the midpoints and of the ends [pH]."""
    ends = np.array([np.subtract(row.ours, row.printed) for row in rows])
    return float(np.sqrt((ends.mean(axis=1) ** 2).mean())), float(np.sqrt((ends**2).mean()))


def main() -> None:
    """Print the comparison."""
    rows = compared()
    for row in sorted(rows, key=lambda r: -abs(r.midpoint_error)):
        print(f"{row.dye:20} step {row.step}  ours {row.ours[0]:5.2f}-{row.ours[1]:5.2f}  printed {row.printed[0]:5.2f}-"
              f"{row.printed[1]:5.2f}  midpoint {row.midpoint_error:+.2f}")
    print("rms of midpoints {:.3f}, of ends {:.3f} pH".format(*rms_errors(rows)))


if __name__ == "__main__":
    main()
