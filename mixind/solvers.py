"""The one door to scipy.optimize."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

Function = Callable[[np.ndarray], np.ndarray]


def raise_the_lowest(values: Function, slopes: Function, start: np.ndarray, count: int,
                     most_iterations: int = 60, tolerance: float = 1e-6) -> np.ndarray:
    """Return a point of the unit box, (n,), at which the lowest of several smooth functions is locally largest.

    Solved on the epigraph: maximise t with f_k(x) >= t, by sequential quadratic programming (SLSQP of scipy). Further
    conditions g(x) >= 0 may follow the f_k.

    Args:
        values: x, (n,), to the f_k followed by the g, (K,).
        slopes: x to the derivatives of the same, (K, n).
        start: in the unit box, (n,).
        count: how many of the K values are f_k.
    """
    from scipy.optimize import minimize

    n = start.size
    first = values(start)
    level = np.zeros(first.size)
    level[:count] = 1.0
    scale = max(1.0, float(np.abs(first[:count]).max()))
    objective = np.zeros(n + 1)
    objective[n] = -1.0
    epigraph = {
        "type": "ineq",
        "fun": lambda z: values(z[:n]) / scale - level * z[n],
        "jac": lambda z: np.column_stack([slopes(z[:n]) / scale, -level])}
    result = minimize(
        lambda z: -z[n], np.append(start, first[:count].min() / scale), jac=lambda z: objective, method="SLSQP",
        bounds=[(0.0, 1.0)] * n + [(None, None)], constraints=[epigraph],
        options={"maxiter": most_iterations, "ftol": tolerance})
    return np.asarray(np.clip(np.nan_to_num(result.x[:n]), 0.0, 1.0))
