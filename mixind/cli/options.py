"""Options that several commands share, and how they become values of the library."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, TypeVar

import click
import numpy as np

from mixind.blend import Blend, read_blend
from mixind.conditions import Conditions, differing
from mixind.difference import METRICS
from mixind.errors import MixindError
from mixind.figures import PAPERS
from mixind.library import Library
from mixind.quantities import path_length, pH_series
from mixind.viewing import EYES, OBSERVERS, VESSELS

F = TypeVar("F", bound=Callable[..., Any])

_CONDITION_KEYS = ("vessel", "path", "light", "observer", "eyes", "severity", "temperature", "ionic_strength", "aged")


def _several(*options: Callable[[F], F]) -> Callable[[F], F]:
    def decorate(command: F) -> F:
        for option in reversed(options):
            command = option(command)
        return command
    return decorate


LAMPS = "D65 or D50 (daylight), A (incandescent), FL2 or FL11 (fluorescent), LED-B1 to LED-B5, or another CIE illuminant"


def sample_options(command: F) -> F:
    """Add what the sample is and what holds it."""
    return _several(
        click.option("--vessel", type=click.Choice(list(VESSELS), case_sensitive=False),
                     help="Looked through, or standing on white so that light crosses twice. [default: clear]"),
        click.option("--path", metavar="LENGTH",
                     help='Length of liquid that one looks through, such as "16 mm". [default: 1 cm]'),
        click.option("--temperature", type=float, metavar="C", help="Of the sample. [default: 25]"),
        click.option("--ionic-strength", type=float, metavar="MOL/L", help="Of the sample. [default: 0.1]"),
        click.option("--aged", is_flag=True, default=None, help="Let slow steps (fading) come to rest."),
    )(command)


def viewer_options(several: bool) -> Callable[[F], F]:
    """Return what adds lamp, observer and eye: one of each, or several lamps and eyes."""
    again = "; may be repeated" if several else ""
    return _several(
        click.option("--light", multiple=several, metavar="LAMP", help=f"{LAMPS}{again}. [default: D65]"),
        click.option("--observer", type=click.Choice(list(OBSERVERS)), help="Degrees of field. [default: 2]"),
        click.option("--eyes", multiple=several, type=click.Choice(EYES, case_sensitive=False),
                     help=f"Colour vision{again}. [default: normal]"),
        click.option("--severity", type=float, help="Of a colour vision deficiency, 0 to 1. [default: 1]"),
    )


def metric_options(command: F) -> F:
    """Add how difference is measured."""
    return _several(
        click.option("--metric", type=click.Choice(list(METRICS)), default="ciede2000", show_default=True,
                     help="How different two colours look."),
        click.option("--threshold", type=float, help="Difference from which steps are told apart. [ciede2000: 3]"),
    )(command)


span_option = click.option("--ph", "span", metavar="FROM:TO[:STEP]",
                           help="Or a list: 4,5.5,7. [default: of the blend, else 4:10]")
library_option = click.option(
    "--library", "libraries", multiple=True, metavar="FOLDER", help="Folder with further dye files; may be repeated.")
json_option = click.option("--json", "as_json", is_flag=True, help="Print JSON instead of text.")
replace_option = click.option("--replace", is_flag=True, help="Overwrite files that exist.")
paper_option = click.option("--paper", type=click.Choice(list(PAPERS), case_sensitive=False), default="a4", show_default=True,
                            help="Size of the chart's page.")
date_option = click.option("--date", metavar="YYYY-MM-DD", help="Date on the page. [default: today]")


def given_conditions(given: dict[str, Any]) -> dict[str, Any]:
    """Return the conditions that were given on the command line, as keyword arguments of `Conditions`."""
    stated = {key: given[key] for key in _CONDITION_KEYS if given.get(key) is not None}
    if "path" in stated:
        stated["path"] = path_length(stated["path"])
    return stated


def blend_and_conditions(path: str, libraries: tuple[str, ...], given: dict[str, Any]) -> tuple[Blend, Conditions, list[str]]:
    """Return a blend, the conditions to look at it under, and remarks.

    What the command line does not give is taken from the blend's own conditions, then from the defaults.
    """
    blend = read_blend(path, Library(libraries))
    conditions = Conditions(**{**blend.conditions, **given_conditions(given)})
    remarks = [*blend.remarks, *differing(conditions, dict(blend.conditions)), *conditions.remarks(), *blend.beyond_limits()]
    return blend, conditions, remarks


def given_span(span: str | None, blend: Blend) -> np.ndarray:
    """Return the pH asked for, else those the blend is meant for, else 4 to 10."""
    return pH_series(blend.span or "4:10" if span is None else span)


def chosen_threshold(metric: str, threshold: float | None) -> float:
    """Return the threshold given, or that of the metric.

    Raises: MixindError when it is not above zero, or the metric has none and none is given.
    """
    value = METRICS[metric].threshold if threshold is None else threshold
    if value is None:
        raise MixindError(f"--metric {metric} has no threshold of its own. Give --threshold.")
    if not 0 < value < float("inf"):
        raise MixindError(f"--threshold {value} is not a finite number above zero.")
    return value
