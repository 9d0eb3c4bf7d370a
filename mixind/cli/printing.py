"""Text for the terminal: swatches, tables of colours, and how far to trust them."""

from __future__ import annotations

import os
import sys
from collections.abc import Iterable
from dataclasses import replace
from itertools import pairwise
from typing import Any

import click
import numpy as np

from mixind.blend import Blend, mg_per_litre
from mixind.difference import METRICS, PRINTED_CHART_THRESHOLD
from mixind.prediction import Prediction
from mixind.quantities import pH_text, significant

MODEL_REMARK = ("not modelled: the sample's own colour and turbidity, chlorine, proteins and metals, dimers of dyes, "
                "the acid of the indicator itself in a weakly buffered sample")
VALID_TEMPERATURE = "pH colours hold at the stated temperature +- 5 C"


def result(text: str = "") -> None:
    """Print a line of the result to stdout."""
    click.echo(text)


def remark(text: str) -> None:
    """Print a remark to stderr."""
    click.echo(f"note: {text}", err=True)


def progress(text: str) -> None:
    """Print progress to stderr when somebody watches."""
    if sys.stderr is not None and sys.stderr.isatty():
        click.echo(f"  {text}", err=True)


def as_json(facts: dict[str, Any]) -> None:
    """Print facts as JSON."""
    import json

    click.echo(json.dumps(facts, indent=1, ensure_ascii=False, allow_nan=False))


def colour_terminal() -> bool:
    """Return whether stdout is a terminal that shows 24-bit colours and may be used so (NO_COLOR is obeyed)."""
    truecolour = os.environ.get("COLORTERM", "") in ("truecolor", "24bit")
    return sys.stdout is not None and sys.stdout.isatty() and truecolour and not os.environ.get("NO_COLOR")


def swatches(colours: list[str], width: int = 6) -> list[str] | None:
    """Return a blank for a head line and a swatch for each "#rrggbb", or None for a terminal that cannot show them."""
    if not colour_terminal():
        return None
    levels = ([int(colour[i:i + 2], 16) for i in (1, 3, 5)] for colour in colours)
    return [" " * (width + 1)] + [f"\x1b[48;2;{red};{green};{blue}m{' ' * width}\x1b[0m " for red, green, blue in levels]


def table(rows: Iterable[Iterable[str]], indent: str = "  ", leads: Iterable[str] | None = None) -> None:
    """Print rows in columns; a cell that starts with a digit or sign is set to the right.

    Args:
        leads: what stands before each row, such as a swatch; its width is not counted.
    """
    cells = [list(row) for row in rows]
    widths = [max(len(cell) for cell in column) for column in zip(*cells, strict=True)]
    for row, lead in zip(cells, leads or [""] * len(cells), strict=True):
        shown = [cell.rjust(w) if cell[:1] in "0123456789+-." and cell else cell.ljust(w)
                 for cell, w in zip(row, widths, strict=True)]
        result((indent + lead + "  ".join(shown)).rstrip())


def print_blend(blend: Blend) -> None:
    """Print what goes into the stock and how it is dosed."""
    result(f"Blend: {blend.title}")
    rows = [["dye", "% w/v", "mg/L pure dye", "umol/L in sample", "grade"]]
    concentrations = blend.sample_concentrations()
    for component, concentration in zip(blend.components, concentrations, strict=True):
        form = f" ({component.form})" if component.form else ""
        rows.append([component.dye.name + form, significant(component.grams_per_litre / 10), mg_per_litre(component),
                     significant(concentration * 1e6), component.dye.grade])
    table(rows)
    result(f"  dose: {blend.dose}, {blend.dose.in_drops()}")
    total = significant(concentrations.sum() * 1e6)
    result(f"  in all {total} umol/L of dye in the sample, whose alkalinity has to be many times that")
    for component in blend.components:
        if component.content is not None:
            weighed = significant(component.grams_per_litre * 1e3 / component.content)
            result(f"  {component.dye.name}: weigh {weighed} mg of the {component.content:.0%} powder per litre of stock")


def print_colours(prediction: Prediction, metric: str, kL: float) -> None:
    """Print one line per pH: colour in words, hex, L*a*b*, uncertainty, separation from the next, grade."""
    result(f"Colours: {prediction.conditions.describe()}")
    rows = [["pH", "colour", "hex", "L*", "a*", "b*", "+- dE00", "to next", "grade"]]
    steps = [*(f"{value:.1f}" for value in np.diagonal(prediction.separation(metric, kL), offset=1)), ""]
    for row, following in zip(prediction.rows(), steps, strict=True):
        L, a, b = (f"{value + 0.0:.1f}" for value in np.round(row["Lab"], 1))
        mapped = "" if row["in_gamut"] else "*"
        sd = f"{row['sd_dE00']:.1f}"
        rows.append([pH_text(row["pH"]), row["colour"], row["hex"] + mapped, L, a, b, sd, following, row["grade"]])
    table(rows, leads=swatches(prediction.patch.hex()))
    if not prediction.patch.in_gamut.all():
        result(f"  * outside sRGB: shown with less chroma, dE00 up to {prediction.patch.cost.max():.1f} from the true colour")


def print_separation(separation: float, pair: tuple[float, float], threshold: float | None, metric: str, kL: float) -> None:
    """Print the weakest step and what that means side by side and against a printed chart."""
    weight = f", kL {kL:g}" if metric == "ciede2000" else ""
    result(f"Worst pair: pH {pH_text(pair[0])} and {pH_text(pair[1])}, separation {separation:.1f} ({metric.upper()}{weight})")
    limits = [("side by side", threshold)] if threshold is not None else []
    if metric == "ciede2000":
        limits.append(("against a printed chart", PRINTED_CHART_THRESHOLD))
    readings = [f"{'told apart' if separation >= limit else 'NOT told apart'} {how} (from {limit:g})" for how, limit in limits]
    if readings:
        result(f"  {'; '.join(readings)}")


def too_close(prediction: Prediction) -> list[str]:
    """Return a remark when neighbouring rungs look alike side by side; empty when none do."""
    limit = METRICS["ciede2000"].threshold or 0.0
    steps = np.diagonal(prediction.separation(), offset=1)
    pairs = [f"{pH_text(low)}-{pH_text(high)}"
             for (low, high), value in zip(pairwise(prediction.pH), steps, strict=True) if value < limit]
    return [f"not told apart side by side: pH {', '.join(pairs)}"] if pairs else []


TAP_WATER = 0.005
"""Ionic strength of a fresh tap water [mol/L]: common practice, no source."""


def print_trust(prediction: Prediction) -> None:
    """Print how far the colours can be trusted, and why."""
    result("How far to trust it")
    about = {"A": "independent sources agree", "B": "one source", "C": "memory, analogy or a guessed band shape"}
    for grade in sorted(set(prediction.grades)):
        at = [pH_text(pH) for pH, g in zip(prediction.pH, prediction.grades, strict=True) if g == grade]
        result(f"  grade {grade} ({about[grade]}): pH {', '.join(at)}")
    result(f"  colours are known to about +- {prediction.sd_dE00.max():.1f} dE00 (standard uncertainty, largest of the ladder):"
           " check the batch with three buffers")
    result(f"  {VALID_TEMPERATURE}; {_salt_remark(prediction)}")
    result(f"  can be spoiled by {_spoilers(prediction.blend)}; details: mixind dye show NAME")
    result(f"  {MODEL_REMARK}")
    print_hazards(prediction.blend)


def _salt_remark(prediction: Prediction) -> str:
    """Return by how much the constants lie higher in tap water than in the sample assumed."""
    solution = prediction.conditions.solution()
    tap = replace(solution, ionic_strength=TAP_WATER)
    shifts = [step.working_pka(tap) - step.working_pka(solution)
              for dye in prediction.blend.dyes for step in dye.active_steps(solution)]
    largest = max(shifts, key=abs, default=0.0)
    return f"at ionic strength {TAP_WATER:g} (tap water) pKa lie up to {largest:+.2f} off: give --ionic-strength"


def _spoilers(blend: Blend) -> str:
    """Return what spoils the colours, each with the dyes it concerns."""
    kinds: dict[str, list[str]] = {}
    for dye in blend.dyes:
        for limit in dye.limits:
            if dye.name not in kinds.setdefault(limit.kind, []):
                kinds[limit.kind].append(dye.name)
    return ", ".join(f"{kind} ({', '.join(names)})" for kind, names in kinds.items()) or "nothing we know of"


def print_dissolving(blend: Blend) -> None:
    """Print how each dye of a blend is usually brought into solution."""
    result("How the dyes are usually dissolved")
    for dye in blend.dyes:
        made = dye.make_up
        alkali = f", {made.alkali} of NaOH" if made and made.alkali not in ("", "none") else ""
        result(f"  {dye.name}: {made.solvent if made and made.solvent else 'not known here'}{alkali}")


def print_hazards(blend: Blend) -> None:
    """Print the hazards of the dyes, and who decides."""
    for dye in blend.dyes:
        warning = "" if dye.hazards else ", which does not mean safe"
        result(f"  hazards of {dye.name}: {dye.hazard_text}{warning}")
    result("  the safety data sheet, local codes and licensed practice decide; ethanol is flammable, alkali is caustic")
