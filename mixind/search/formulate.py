"""From a task to a blend that can be weighed, and how good it is."""

from __future__ import annotations

import time
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from mixind import dyes
from mixind.blend import Blend, blend_of
from mixind.errors import MixindError
from mixind.quantities import pH_text
from mixind.search.candidates import Choice
from mixind.search.local import Effort
from mixind.search.problem import Problem, Task
from mixind.search.rounding import rounded
from mixind.search.subsets import PLANS, Progress, search
from mixind.separation import Worst, worst_pair

DEFAULT_PEAK_ABSORBANCE = 1.5
DEFAULT_DARKEST = 30.0
DEFAULT_DOSE_TOLERANCE = 0.2

_NEGLIGIBLE_SHARE = 1e-3
_COLOURLESS = 1e-3
"""Peak absorbance per cm below which nothing is seen."""


@dataclass(frozen=True)
class Formulation:
    """A blend found for a task.

    Attributes:
        blend: with strengths rounded for weighing; everything else is computed for these.
        worst: over all viewers and doses.
        by_viewer: the same for each viewer alone, keyed "light/observer/eyes".
        nominal: worst separation with the dose exactly as stated, over all viewers.
        threshold: separation from which steps are told apart.
        search: what the search did, for the record.
    """

    blend: Blend
    task: Task
    worst: Worst
    by_viewer: dict[str, float]
    nominal: Worst
    threshold: float
    search: dict[str, Any]

    @property
    def told_apart(self) -> bool:
        """Whether every two steps are told apart."""
        return self.worst.separation >= self.threshold

    def facts(self) -> dict[str, Any]:
        """Return separation and search for JSON."""
        return {
            "separation": {
                "worst": round(self.worst.separation, 4), "pair": list(self.worst.pair), "metric": self.task.metric.name,
                "kL": self.task.kL, "by_viewer": {key: round(value, 4) for key, value in self.by_viewer.items()},
                "dose_tolerance": self.task.tolerance, "nominal": round(self.nominal.separation, 4),
                "threshold": self.threshold, "told_apart": self.told_apart},
            "search": self.search}


def formulate(task: Task, choice: Choice, threshold: float, effort: str = "normal", seed: int = 1,
              progress: Progress = lambda text: None) -> Formulation:
    """Return the best blend found for a task.

    Args:
        task: what is to be told apart and how it is seen.
        choice: dyes that may go in and how many of them.
        threshold: separation from which steps count as told apart, above zero.
        effort: one of `PLANS`.
        seed: of the random starts; the same seed gives the same blend.
    Raises: MixindError when no candidate colours the sample at all.
    """
    if effort not in PLANS:
        raise MixindError(f"effort: {effort!r} is not one of {', '.join(PLANS)}.")
    begun, spent = time.perf_counter(), Effort()
    problem = Problem(task, choice.dyes)
    if dyes.visible_peak(problem.full).max() < _COLOURLESS:
        raise MixindError("none of the dyes has a colour in this span. Allow others.")
    mixture = search(problem, choice, PLANS[effort], seed, spent, progress)
    blend = _weighable(problem, mixture.positions, mixture.x, choice)
    record = {"seed": seed, "effort": effort, "starts": spent.starts, "evaluations": spent.evaluations,
              "candidates": len(choice.dyes), "seconds": round(time.perf_counter() - begun, 3)}
    return evaluated(task, blend, threshold, record)


def _weighable(problem: Problem, positions: tuple[int, ...], x: np.ndarray, choice: Choice) -> Blend:
    kept = [(p, share) for p, share in zip(positions, x, strict=True) if share > _NEGLIGIBLE_SHARE or p in choice.required]
    part = problem.restricted([p for p, _ in kept])
    share = part.task.dose.share()
    per_share = part.largest * np.array([dye.molar_mass for dye in part.dyes]) / share * 1e3
    final = rounded(part, np.maximum([s for _, s in kept], _NEGLIGIBLE_SHARE), per_share)
    ends = (part.task.pH[0], part.task.pH[-1], part.task.step)
    low, high, step = (pH_text(value) for value in ends)
    blend = blend_of(part.dyes, final * part.largest, part.task.dose, f"pH {low} to {high} in steps of {step}")
    # with all digits, for a step of a third rounded to two would not fit the span again
    return replace(blend, span=":".join(f"{value:.10g}" for value in ends))


def evaluated(task: Task, blend: Blend, threshold: float, record: dict[str, Any]) -> Formulation:
    """Return how well a blend, found or given, does a task.

    Args:
        task: what is asked; the dose is that of the blend.
        blend: at least one dye; whether it keeps the limits of the task is not checked.
        threshold: separation from which steps count as told apart, above zero.
        record: what led to the blend, for the record.
    """
    task = replace(task, dose=blend.dose)
    problem = Problem(task, blend.dyes)
    x = blend.sample_concentrations() / problem.largest
    points, _ = problem.coordinates(x)
    by_dose = points.reshape(len(task.viewers), len(task.dose_factors), task.pH.size, 3)

    def worst_of(colours: np.ndarray) -> Worst:
        return worst_pair(task.pH, colours, task.step, task.metric, task.kL)

    each = {f"{v.illuminant}/{v.observer}/{v.eyes}": worst_of(by_dose[i]) for i, v in enumerate(task.viewers)}
    nominal = [worst_of(by_dose[i, problem.nominal]) for i in range(len(task.viewers))]
    return Formulation(
        blend, task, min(each.values(), key=lambda w: w.separation), {key: w.separation for key, w in each.items()},
        min(nominal, key=lambda w: w.separation), threshold, record)
