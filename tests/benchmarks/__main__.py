"""Speed, printed as a table: OMP_NUM_THREADS=1 python -m tests.benchmarks. Ratios within one run are what counts."""

from __future__ import annotations

import platform
import subprocess
import sys
import tempfile
import time
import warnings
from collections.abc import Callable
from pathlib import Path

import numpy as np

from mixind import viewing
from mixind.colorimetry import cielab
from mixind.difference import METRICS
from mixind.library import Library
from mixind.prediction import absorbance, absorptivities, tristimulus
from mixind.search.candidates import choose
from mixind.search.local import Effort, climb, random_start
from mixind.search.problem import Problem
from mixind.search.subsets import PLANS, search
from mixind.separation import separations, step_pairs
from mixind.spectra import WAVELENGTH
from tests.recipes import task

FIFTEEN = (
    "alizarin red S", "bromocresol green", "bromocresol purple", "bromophenol blue", "bromothymol blue", "chlorophenol red",
    "cresol red", "m-cresol purple", "methyl orange", "methyl red", "methyl yellow", "phenol red", "phenolphthalein",
    "thymol blue", "thymolphthalein")
BLENDS = 1000


def best_time(work: Callable[[], object], repeats: int) -> float:
    """Return the least time of several runs [s]."""
    times = []
    for _ in range(repeats):
        begun = time.perf_counter()
        work()
        times.append(time.perf_counter() - begun)
    return min(times)


def process_time(*command: str, repeats: int = 7) -> float:
    """Return the least time of a whole process [s]."""
    return best_time(lambda: subprocess.run(command, check=True, capture_output=True), repeats)


def line(what: str, measured: str, reference: str = "") -> None:
    """Print one row."""
    print(f"{what:66} {measured:>16}  {reference}")


def derivatives(library: Library) -> None:
    dyes = [library.find(name) for name in FIFTEEN]
    for step, count in ((1.0, 7), (0.5, 13)):
        problem = Problem(task(4, 10, step), dyes)
        x = np.full(15, 0.1)
        one = best_time(lambda p=problem, x=x: [p.values_and_slopes(x, p.pairs) for _ in range(50)], 7) / 50  # type: ignore[misc]
        line(f"value and Jacobian, 15 dyes, {count} pH, {len(problem.pairs)} pairs", f"{one * 1e3:.2f} ms",
             f"prototype {0.24 if count == 7 else 0.60:.2f} ms")


def starts(library: Library) -> None:
    problem = Problem(task(4, 10), [library.find(name) for name in FIFTEEN])

    def work() -> None:
        rng = np.random.default_rng(1)
        for _ in range(40):
            climb(problem, random_start(problem, rng), Effort())

    line("40 starts of the 15-dye problem", f"{best_time(work, 3):.2f} s", "prototype 0.65 s")


def batch(library: Library) -> None:
    pH = np.linspace(3, 10, 29)
    asked, viewer = task(3, 10, 0.25), viewing.viewer()
    table = absorptivities([library.find(name) for name in FIFTEEN], pH, asked.solution)
    blends = np.random.default_rng(1).random((BLENDS, 15)) * 5e-6
    metric, pairs = METRICS["ciede2000"], step_pairs(pH, 0.25)
    neighbours = pairs[pairs[:, 1] - pairs[:, 0] == 1]

    def coloured() -> np.ndarray:
        return cielab(tristimulus(table, blends, asked.vessel, viewer), viewer.white)

    def scored(which: np.ndarray) -> np.ndarray:
        return np.asarray(separations(coloured(), which, metric, 2.0).min(axis=1))

    colour_time = best_time(coloured, 5) / BLENDS
    line("batch of 1 000 blends at 29 pH, coloured (CIELAB)", f"{colour_time * 1e6:.0f} us a blend")
    for which, name in ((neighbours, "28 neighbouring pairs"), (pairs, f"all {len(pairs)} pairs")):
        line(f"  the same, scored on {name}", f"{best_time(lambda w=which: scored(w), 3) / BLENDS * 1e6:.0f} us a blend",  # type: ignore[misc]
             "prototype 18 us")
    one_by_one(table, blends, colour_time)


def one_by_one(table: np.ndarray, blends: np.ndarray, ours: float) -> None:
    """Time the same blends coloured one spectrum at a time through colour-science, as a user would script it."""
    colour = viewing.colour_science()
    functions = colour.MSDS_CMFS[viewing.OBSERVERS["2"]]
    lamp = colour.SDS_ILLUMINANTS["D65"]
    light = 10 ** -absorbance(table, blends[:2])

    def work() -> None:
        for blend in light:
            for spectrum in blend:
                sd = colour.SpectralDistribution(dict(zip(WAVELENGTH, spectrum, strict=True)))
                colour.XYZ_to_Lab(colour.sd_to_XYZ(sd, functions, lamp) / 100)

    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # colour-science says each time that it aligns the spectrum with its tables
        theirs = best_time(work, 2) / 2
    line("  the same, one spectrum at a time through colour-science", f"{theirs * 1e3:.0f} ms a blend",
         f"{theirs / ours:.0f} times ours")


def whole_search(library: Library) -> None:
    for effort in PLANS:
        choice, spent = choose(library, most=4), Effort()
        problem = Problem(task(4, 10), choice.dyes)
        seconds = best_time(lambda p=problem, c=choice, e=effort, s=spent: search(p, c, PLANS[e], 1, s), 1)  # type: ignore[misc]
        line(f"search, whole library, span 4-10, at most 4 dyes, effort {effort}", f"{seconds:.1f} s",
             f"{spent.evaluations} evaluations")


def commands() -> None:
    program = str(Path(sys.executable).with_name("mixind"))
    blend = str(Path(__file__).parents[2] / "examples" / "drip_line.toml")
    with tempfile.TemporaryDirectory() as folder:
        out = [str(Path(folder) / name) for name in ("my.toml", "my.pdf")]
        words = ("formulate", "--from", "4", "--to", "10", "--most-dyes", "4", "--save", out[0], "--chart", out[1], "--replace")
        whole = process_time(program, *words, repeats=1)
    line("mixind formulate, whole command with chart", f"{whole:.1f} s")
    pairs = ((("--help",), "click"), (("predict", blend), "numpy"))
    for given, module in pairs:
        reference = process_time(sys.executable, "-c", f"import {module}")
        ours = process_time(program, *given)
        line(f"mixind {given[0]} against importing {module}", f"{ours * 1e3:.0f} ms",
             f"{ours / reference:.2f} times {reference * 1e3:.0f} ms")


def main() -> None:
    """Print every benchmark."""
    library = Library()
    print(f"{platform.machine()}, Python {platform.python_version()}, numpy {np.__version__}")
    derivatives(library)
    starts(library)
    batch(library)
    whole_search(library)
    commands()


if __name__ == "__main__":
    main()
