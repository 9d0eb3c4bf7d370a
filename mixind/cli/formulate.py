"""mixind formulate"""

from __future__ import annotations

import dataclasses
import os
from collections.abc import Callable
from itertools import product
from typing import Any

import click
import numpy as np

from mixind import quantities
from mixind.blend import DEFAULT_DOSE, Blend, blend_text
from mixind.cli import options, printing
from mixind.conditions import Conditions
from mixind.difference import METRICS
from mixind.errors import MixindError, NoAnswer
from mixind.figures import Verdict, check_rungs, check_suffix, page_date, write_chart
from mixind.files import check_target, write_whole
from mixind.library import Library
from mixind.prediction import Prediction, predict
from mixind.quantities import pH_text
from mixind.search.candidates import Choice, choose
from mixind.search.formulate import (
    DEFAULT_DARKEST,
    DEFAULT_DOSE_TOLERANCE,
    DEFAULT_PEAK_ABSORBANCE,
    Formulation,
    formulate,
)
from mixind.search.problem import Task
from mixind.search.subsets import PLANS
from mixind.version import VERSION

_MANY_RUNGS = 60


@click.command()
@click.option("--from", "low", type=float, required=True, metavar="PH", help="Lower end of the span.")
@click.option("--to", "high", type=float, required=True, metavar="PH", help="Upper end of the span.")
@click.option("--step", type=float, default=1.0, show_default=True, help="Smallest pH difference to tell apart.")
@click.option("--most-dyes", type=int, default=4, show_default=True, metavar="N", help="Most dyes in the blend.")
@click.option("--dyes", metavar="A,B,..", help="Use only these dyes.")
@click.option("--with", "with_", multiple=True, metavar="DYE", help="Must be in the blend; may be repeated.")
@click.option("--without", multiple=True, metavar="DYE", help="Must not be in the blend; may be repeated.")
@click.option("--allow-ion-pairs", is_flag=True, help="Combine cationic with anionic dyes, which can precipitate.")
@click.option("--dose", default=str(DEFAULT_DOSE), show_default=True, metavar="DOSE", help="Stock into sample.")
@click.option("--dose-tolerance", default=f"{DEFAULT_DOSE_TOLERANCE:.0%}", show_default=True, metavar="SHARE",
              help="How far the dose may be off.")
@click.option("--darkest", type=float, default=DEFAULT_DARKEST, show_default=True, help="Least L* of a colour.")
@click.option("--peak-absorbance", type=float, default=DEFAULT_PEAK_ABSORBANCE, show_default=True,
              help="Most that one dye may absorb.")
@options.sample_options
@options.viewer_options(several=True)
@options.metric_options
@click.option("--effort", type=click.Choice(list(PLANS)), default="normal", show_default=True, help="How hard to search.")
@click.option("--seed", type=click.IntRange(min=0), default=1, show_default=True, help="Of the random starts.")
@click.option("--save", type=click.Path(), metavar="FILE", help="Write the blend file.")
@click.option("--chart", type=click.Path(), metavar="FILE", help="Draw the chart (pdf, svg or png).")
@options.paper_option
@options.date_option
@options.replace_option
@options.library_option
@options.json_option
def command(as_json: bool, replace: bool, save: str | None, chart: str | None, date: str | None, **given: Any) -> None:
    """Find the blend that tells the pH steps of a span apart best.

    Example: mixind formulate --from 4 --to 10 --most-dyes 4 --save my.toml --chart my.pdf
    """
    choice = _choice(given)
    conditions, task = _task(given)
    threshold = options.chosen_threshold(given["metric"], given["threshold"])
    _check_targets(save, chart, replace, date, task)
    found = formulate(task, choice, threshold, given["effort"], given["seed"], printing.progress)
    # what is shown is what everybody sees; deficient eyes decide the separations
    shown = dataclasses.replace(conditions[0], eyes="normal", severity=1.0)
    blend = _titled(found, shown, conditions)
    prediction = predict(blend, task.pH, shown)
    unwritten = _write(save, chart, replace, lambda path: write_chart(
        path, prediction, replace, date, given["paper"], _verdict(found)), blend)
    if as_json:
        printing.as_json({"mixind": VERSION, "blend": blend.facts(), **found.facts(), "conditions": shown.facts(),
                          "viewers": [c.facts() for c in conditions], "rows": prediction.rows()})
    else:
        _print(found, blend, prediction, choice)
    if unwritten:
        raise unwritten
    if not found.told_apart:
        low, high = (pH_text(value) for value in found.worst.pair)
        raise NoAnswer(f"pH {low} and {high} are not told apart: separation {found.worst.separation:.1f}, {threshold:g} "
                       "needed. Try a coarser step, more dyes or a wider vessel.")


def _check_targets(save: str | None, chart: str | None, replace: bool, date: str | None, task: Task) -> None:
    """Refuse now what could only be refused after the search, so that nothing is written by halves."""
    page_date(date)
    if chart is not None:
        check_suffix(chart)
        check_rungs(task.pH.size)
    if save and chart and os.path.realpath(save) == os.path.realpath(chart):
        raise MixindError(f"--save and --chart both name {save}. Choose two files.")
    for target in (save, chart):
        if target is not None:
            check_target(target, replace)
    if task.pH.size > _MANY_RUNGS:
        printing.remark(f"{task.pH.size} pH to tell apart: this takes minutes")


def _write(save: str | None, chart: str | None, replace: bool, draw: Callable[[str], None], blend: Blend) -> MixindError | None:
    """Write what is to be written; return a fault instead of raising it, so that the result is printed all the same."""
    try:
        if chart:
            draw(chart)
        if save:
            write_whole(save, blend_text(blend).encode(), replace)
    except MixindError as error:
        return error
    return None


def _verdict(found: Formulation) -> Verdict | None:
    """Return what the chart is to say of the weakest pair; nothing when it was judged by another metric."""
    if found.task.metric.name != "ciede2000":
        return None
    held = f"with the dose off by up to {found.task.tolerance:.0%}" if found.task.tolerance else "at the exact dose"
    return Verdict(found.worst, found.threshold, held)


def _choice(given: dict[str, Any]) -> Choice:
    only = [name.strip() for name in (given["dyes"] or "").split(",") if name.strip()]
    if given["dyes"] is not None and not only:
        raise MixindError("--dyes names no dye. Write for instance --dyes 'methyl red,BTB'.")
    return choose(Library(given["libraries"]), only, given["with_"], given["without"], given["most_dyes"],
                  given["allow_ion_pairs"])


def _task(given: dict[str, Any]) -> tuple[list[Conditions], Task]:
    """Return the conditions, one per viewer, and the task."""
    pH = quantities.pH_grid(given["low"], given["high"], given["step"])
    if not 0.05 <= given["peak_absorbance"] <= 10:
        raise MixindError(f"--peak-absorbance {given['peak_absorbance']:g} is outside 0.05 to 10.")
    if not 0 <= given["darkest"] <= 90:
        raise MixindError(f"--darkest {given['darkest']:g} is outside 0 to 90.")
    shared = {key: value for key, value in given.items() if key not in ("light", "eyes")}
    stated = options.given_conditions(shared)
    conditions = [Conditions(**stated, light=light, eyes=eyes)
                  for light, eyes in product(given["light"] or ("D65",), given["eyes"] or ("normal",))]
    metric = METRICS[given["metric"]]
    first = conditions[0]
    # a step such as 0.333 is taken as the third that fits
    step = min(given["step"], float(np.diff(pH)[0]))
    return conditions, Task(
        pH, step, first.solution(), first.make_vessel(), tuple(c.make_viewer() for c in conditions),
        quantities.dose(given["dose"]), quantities.share(given["dose_tolerance"], "dose tolerance"), metric, metric.kL,
        given["peak_absorbance"], given["darkest"])


def _titled(found: Formulation, shown: Conditions, asked: list[Conditions]) -> Blend:
    """Return the blend with its title, the conditions it is shown under and for whom it was made."""
    title = found.blend.title if found.told_apart else f"{found.blend.title}: NOT told apart, best effort"
    keys = ("vessel", "path", "light", "observer", "temperature", "ionic_strength", "aged")
    remarks = (f"made for {'; '.join(c.make_viewer().describe() for c in asked)}",) if asked != [shown] else ()
    return dataclasses.replace(found.blend, title=title, conditions={key: getattr(shown, key) for key in keys}, remarks=remarks)


def _print(found: Formulation, blend: Blend, prediction: Prediction, choice: Choice) -> None:
    printing.print_blend(blend)
    metric, kL = found.task.metric.name, found.task.kL
    printing.print_colours(prediction, metric, kL)
    printing.print_separation(found.worst.separation, found.worst.pair, found.threshold, metric, kL)
    if found.task.tolerance:
        printing.result(f"  with the dose off by up to {found.task.tolerance:.0%}; {found.nominal.separation:.1f} at the exact "
                        f"dose (pH {pH_text(found.nominal.pair[0])} and {pH_text(found.nominal.pair[1])})")
    if len(found.by_viewer) > 1:
        printing.table([[f"worst for {key}", f"{value:.1f}"] for key, value in found.by_viewer.items()])
    printing.print_dissolving(blend)
    printing.print_trust(prediction)
    record = found.search
    printing.result(f"Search: {record['candidates']} dyes, at most {choice.most}; {record['starts']} climbs, "
                    f"{record['evaluations']} evaluations, {record['seconds']:.1f} s, seed {record['seed']}")
    if choice.left_out:
        printing.remark("left out unless named: " + "; ".join(f"{name} ({why})" for name, why in choice.left_out.items()))
    for text in [*blend.remarks, *prediction.conditions.remarks()]:
        printing.remark(text)
