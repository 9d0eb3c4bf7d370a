"""Published wide-range recipes as blends, and what they can do at their own best dose."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from mixind import viewing
from mixind.blend import DEFAULT_DOSE, Blend, Component
from mixind.difference import METRICS
from mixind.dyes import visible_peak
from mixind.equilibria import Solution
from mixind.library import Library
from mixind.quantities import Dose, pH_grid, strength
from mixind.search.formulate import DEFAULT_DARKEST, DEFAULT_PEAK_ABSORBANCE
from mixind.search.problem import Problem, Task
from tests import published

DOSES = np.geomspace(0.02, 3.0, 1000)
"""Doses tried for each recipe [mL in 10 mL]."""


def recipe(name: str, library: Library) -> Blend:
    """Return a recipe of the table, dosed 0.2 mL in 10 mL."""
    components = tuple(
        Component(library.find(row["dye"]), strength(f"{row['mg_per_L']} mg/L"))
        for row in published.rows("wide_range_recipes") if row["recipe"] == name)
    return Blend(name, DEFAULT_DOSE, components)


def task(low: float, high: float, step: float = 1.0, tolerance: float = 0.0, **changes: object) -> Task:
    """Return the task of telling a span apart with the program's defaults: clear 1 cm, D65, 2 degree, CIEDE2000 kL 2."""
    metric = METRICS["ciede2000"]
    usual = Task(pH_grid(low, high, step), step, Solution(), viewing.vessel(), (viewing.viewer(),), DEFAULT_DOSE, tolerance,
                 metric, metric.kL, DEFAULT_PEAK_ABSORBANCE, DEFAULT_DARKEST)
    return replace(usual, **changes)  # type: ignore[arg-type]


def best_dose(blend: Blend, asked: Task) -> tuple[float, float]:
    """Return the best worst separation of a blend over all doses within the limits of the task, and that dose [mL].

    The limits are the peak absorbance of each dye and the darkest lightness; solubility is not held against a recipe.
    """
    best = (-1.0, 0.0)
    for dose in DOSES:
        dosed = replace(blend, dose=Dose(float(dose), 10.0))
        problem = Problem(replace(asked, dose=dosed.dose), dosed.dyes)
        x = dosed.sample_concentrations() / problem.largest
        peaks = visible_peak(problem.full).max(axis=1) * x * asked.vessel.optical_length
        if np.all(peaks <= asked.peak_absorbance) and problem.darkest(x) >= asked.darkest:
            best = max(best, (problem.worst(x), float(dose)))
    return best
