"""Visual transition intervals as the model sees them, by one rule for all two-coloured indicators."""

from __future__ import annotations

from collections import defaultdict
from dataclasses import dataclass

import numpy as np

from mixind import viewing
from mixind.blend import DEFAULT_DOSE
from mixind.colorimetry import cielab
from mixind.difference import ciede2000
from mixind.dyes import Dye, visible_peak
from mixind.equilibria import Solution, fractions
from mixind.library import Library
from tests import published

FRACTION = 0.10
"""Share of the whole colour change that an eye needs to notice at either end; fitted once to the frozen list below."""

PEAK_ABSORBANCE = 0.8

# Frozen before the fraction was chosen: every dye of the library with a printed interval in the table that spans one step
# between two coloured forms. Crystal violet is not on it: it passes through three colours, yellow, green and violet.
TWO_COLOURED = (
    ("alizarin red S", 1), ("alizarin yellow R", 1), ("bromocresol green", 1), ("bromocresol purple", 1),
    ("bromophenol blue", 1), ("bromothymol blue", 1), ("chlorophenol red", 1), ("cresol red", 1), ("cresol red", 2),
    ("indigo carmine", 1), ("m-cresol purple", 1), ("m-cresol purple", 2), ("malachite green", 1), ("methyl orange", 1),
    ("methyl red", 2), ("methyl yellow", 1), ("neutral red", 1), ("orange IV", 1), ("phenol red", 2), ("thymol blue", 1),
    ("thymol blue", 2))

NO_CHECK = {
    ("alizarin red S", 1): "the only printed interval of the table, 3.7-5.2, contradicts the constants in print (5.5-5.8); "
                           "other tables have 4.6-6.0 (memory)",
    ("indigo carmine", 1): "its constant was taken from the interval",
}
"""Steps of the list whose comparison says nothing about the model, with the reason; they are printed but not judged."""

ONE_COLOURED = (
    ("2,4-dinitrophenol", 1), ("m-nitrophenol", 1), ("p-nitrophenol", 1), ("phenolphthalein", 2), ("thymolphthalein", 2))
USUAL_STOCK = 1.0
"""Strength of the usual stock, 0.1 % w/v [g/L], dosed 0.2 mL in 10 mL: common practice, no source."""

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


def onset_interval(dye: Dye) -> tuple[float, float]:
    """Return from where a one-coloured indicator differs by 3 from solvent to where it has 90 % of its full colour.

    At the usual dose of the usual stock, clear 1 cm, daylight; what does not dissolve is left out.
    """
    viewer, solution = viewing.viewer(), Solution()
    concentration = min(USUAL_STOCK / dye.molar_mass * DEFAULT_DOSE.share(), dye.largest_concentration)
    light = 10 ** (-concentration * dye.absorptivity_at(_GRID, solution))
    change = ciede2000(cielab(viewer.white, viewer.white), cielab(light @ viewer.weights, viewer.white))
    return float(_GRID[np.argmax(change >= 3)]), float(_GRID[np.argmax(change >= 0.9 * change.max())])


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


def judged(rows: list[Compared]) -> list[Compared]:
    """Return the rows that say something about the model."""
    return [row for row in rows if (row.dye, row.step) not in NO_CHECK]


def main() -> None:
    """Print the comparison, largest misses first, and the one-coloured indicators apart."""
    rows = compared()
    for row in sorted(rows, key=lambda r: -abs(r.midpoint_error)):
        print(f"{row.dye:20} step {row.step}  ours {row.ours[0]:5.2f}-{row.ours[1]:5.2f}  printed {row.printed[0]:5.2f}-"
              f"{row.printed[1]:5.2f}  midpoint {row.midpoint_error:+.2f}  {NO_CHECK.get((row.dye, row.step), '')}")
    print("all {}: rms of midpoints {:.2f}, of ends {:.2f} pH".format(len(rows), *rms_errors(rows)))
    print("judged {}: rms of midpoints {:.2f}, of ends {:.2f} pH".format(len(judged(rows)), *rms_errors(judged(rows))))
    library = Library()
    for name, step in ONE_COLOURED:
        low, high = onset_interval(library.find(name))
        in_print = [f"{row['low']}-{row['high']}" for row in published.rows("intervals")
                    if (row["dye"], int(row["first_step"])) == (name, step)]
        print(f"one-coloured: {name:20} ours {low:5.2f}-{high:5.2f}  printed {', '.join(in_print)}")


if __name__ == "__main__":
    main()
