"""The chart: a ladder with one rung per pH, drawn true to size; the same input and date give the same bytes."""

from __future__ import annotations

import datetime
import os
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

import numpy as np

from mixind.blend import mg_per_litre
from mixind.difference import METRICS, PRINTED_CHART_THRESHOLD
from mixind.errors import MixindError
from mixind.files import check_target, write_whole
from mixind.paper import FAINT, INK, POINT, RAIL, Page, own_style, rendered
from mixind.prediction import Prediction, predict
from mixind.quantities import pH_text, significant
from mixind.separation import Worst
from mixind.version import VERSION
from mixind.viewing import SIMULATION_REMARK

PAPERS = {"a4": (210.0, 297.0), "letter": (215.9, 279.4)}
"""Width and height [mm]; ISO 216 and ANSI/ASME Y14.1."""
SUFFIXES = (".pdf", ".svg", ".png")
MOST_RUNGS = 25

_MARGIN = 14.0
_LADDER_FOOT = 84.0
_MOST_ROWS = 10
_TWIN_EYES = ("deutan", "protan", "normal")
_SOURCE_DATE = "SOURCE_DATE_EPOCH"


def check_suffix(path: str | Path) -> str:
    """Return the suffix of a chart's file name in lower case.

    Raises: MixindError when charts are not drawn in that format.
    """
    suffix = Path(path).suffix.lower()
    if suffix not in SUFFIXES:
        raise MixindError(f"{path}: a chart cannot be drawn as {suffix or 'a file without suffix'}. Use {', '.join(SUFFIXES)}.")
    return suffix


def page_date(given: str | None = None) -> str:
    """Return the date to print: the one given, else that of SOURCE_DATE_EPOCH, else today, as YYYY-MM-DD.

    Raises: MixindError when it is not a date.
    """
    printed = datetime.date.today()
    epoch = os.environ.get(_SOURCE_DATE)
    if epoch:
        try:
            printed = datetime.datetime.fromtimestamp(int(epoch), datetime.UTC).date()
        except (ValueError, OverflowError, OSError):
            raise MixindError(f"{_SOURCE_DATE}: {epoch!r} is not a date in seconds since 1970.") from None
    if given is not None:
        try:
            printed = datetime.date.fromisoformat(given)
        except ValueError:
            raise MixindError(f"date: {given!r} is not a date. Write it as 2026-03-01.") from None
    return printed.isoformat()


@dataclass(frozen=True)
class _Columns:
    """Left ends and widths of the ladder's columns [mm]."""

    pH: float
    swatch: float
    swatch_width: float
    joint: float
    words: float
    words_width: float
    twin: float
    twin_width: float


def _columns(width: float) -> _Columns:
    twin_width = 15.0
    twin = width - _MARGIN - 2 * twin_width - 2
    return _Columns(_MARGIN, 35, 62, 101.5, 119, twin - 119 - 3, twin, twin_width)


@dataclass(frozen=True)
class Verdict:
    """What the chart says of its weakest pair.

    Attributes:
        worst: the pair and its separation.
        threshold: separation from which steps are told apart side by side.
        held: under what it holds, such as "at the exact dose".
    """

    worst: Worst
    threshold: float
    held: str


def check_rungs(count: int) -> None:
    """Raise MixindError when a chart cannot have so many rungs."""
    if not 2 <= count <= MOST_RUNGS:
        raise MixindError(f"chart: {count} rungs; a chart has 2 to {MOST_RUNGS}. Choose another step.")


def draw_chart(prediction: Prediction, paper: str = "a4", date: str | None = None, verdict: Verdict | None = None) -> Any:
    """Return the chart of a prediction as a matplotlib figure of the exact size of the paper.

    Args:
        prediction: one rung per pH, 2 to 25.
        paper: one of `PAPERS`.
        date: as YYYY-MM-DD; see `page_date`.
        verdict: on the weakest pair; by default that of the prediction at the exact dose.
    Raises: MixindError for an unknown paper, too many rungs, or a bad date.
    """
    if paper not in PAPERS:
        raise MixindError(f"paper: {paper!r} is not one of {', '.join(PAPERS)}.")
    check_rungs(prediction.pH.size)
    printed = page_date(date)
    said = verdict or Verdict(prediction.worst(), METRICS["ciede2000"].threshold or 0.0, "at the exact dose")
    with own_style():
        page = Page(*PAPERS[paper])
        _head(page, prediction)
        _ladder(page, prediction, said.threshold)
        _foot(page, prediction, printed, said)
    return page.figure


def _head(page: Page, prediction: Prediction) -> None:
    room, top = page.width - 2 * _MARGIN, page.height
    page.text(_MARGIN, top - 17, prediction.blend.title, 17, room, fontweight="bold")
    blend = prediction.blend
    page.text(_MARGIN, top - 25.5, f"Add {blend.dose} of sample: {blend.dose.in_drops()}.", 9.5, room)
    page.text(_MARGIN, top - 31, prediction.conditions.describe(), 7, room, color=FAINT)


def _ladder(page: Page, prediction: Prediction, threshold: float) -> None:
    count, top = prediction.pH.size, page.height - 42.0
    pitch = (top - _LADDER_FOOT) / count
    height = pitch - min(4.0, 0.22 * pitch)
    columns = _columns(page.width)
    twins = [eyes for eyes in _TWIN_EYES if eyes != prediction.conditions.eyes][:2]
    _column_heads(page, columns, prediction, twins, top + 2.5)
    for x in (columns.swatch - 1.4, columns.swatch + columns.swatch_width + 1.4):
        page.line((x, x), (_LADDER_FOOT + 0.5, top - 0.5), 3.2)
    for number, row in enumerate(prediction.rows()):
        _rung(page, columns, row, top - (number + 1) * pitch + (pitch - height) / 2, height)
    _joints(page, columns, prediction, threshold, top, pitch)
    twin_at = columns.twin
    for eyes in twins:
        _twin(page, prediction, eyes, twin_at, columns.twin_width, top, pitch, height)
        twin_at += columns.twin_width + 2


def _column_heads(page: Page, columns: _Columns, prediction: Prediction, twins: list[str], y: float) -> None:
    for x, text in ((columns.pH, "pH"), (columns.swatch, _seen_by(prediction)), (columns.joint, "apart"),
                    (columns.words, "in words; L* a* b*; ± dE00; grade")):
        page.text(x, y, text, 6.5, color=FAINT)
    for number, eyes in enumerate(twins):
        page.text(columns.twin + number * (columns.twin_width + 2), y, f"{eyes} eye", 6.5, color=FAINT)


def _seen_by(prediction: Prediction) -> str:
    eyes = prediction.conditions.eyes
    return "colour in the vessel" if eyes == "normal" else f"colour as a {eyes} eye is thought to see it"


def _rung(page: Page, columns: _Columns, row: dict[str, Any], y: float, height: float) -> None:
    middle = y + height / 2
    size = float(np.clip(height * 1.5, 6.5, 22))
    page.text(columns.pH, middle, pH_text(row["pH"]), size, columns.swatch - columns.pH - 4, fontweight="bold")
    page.box(columns.swatch, y, columns.swatch_width, height, row["hex"])
    L, a, b = row["Lab"]
    numbers = f"{L:.0f} {round(a):d} {round(b):d};  ±{row['sd_dE00']:.1f};  {row['grade']}"
    if not row["in_gamut"]:
        numbers += f";  print off by {row['shown_dE00']:.1f}"
    if height > 7:
        page.text(columns.words, middle + 1.9, row["colour"], 10, columns.words_width, fontweight="bold")
        page.text(columns.words, middle - 2.4, numbers, 7, columns.words_width, color=FAINT)
    else:
        page.text(columns.words, middle, f"{row['colour']}: {numbers}", 6.5, columns.words_width)


def _joints(page: Page, columns: _Columns, prediction: Prediction, limit: float, top: float, pitch: float) -> None:
    """Write between two rungs how far they look apart; the weakest is set off, and what looks alike is said to."""
    steps = np.diagonal(prediction.separation(), offset=1)
    weakest = int(steps.argmin())
    for number, value in enumerate(steps):
        y = top - (number + 1) * pitch
        weak = number == weakest
        page.line((columns.joint - 1, columns.joint + 1, columns.joint + 1, columns.joint - 1),
                  (y + pitch * 0.3, y + pitch * 0.3, y - pitch * 0.3, y - pitch * 0.3), 1.4 if weak else 0.6,
                  INK if weak else RAIL)
        page.text(columns.joint + 2.5, y, f"{value:.1f}", float(np.clip(pitch * 0.8, 6, 9)),
                  fontweight="bold" if weak else "normal")
        if (weak or value < limit) and pitch > 7:
            page.text(columns.joint + 2.5, y - 3.4, "too close" if value < limit else "weakest", 5.5, color=FAINT)


def _twin(page: Page, prediction: Prediction, eyes: str, x: float, width: float, top: float, pitch: float,
          height: float) -> None:
    """Draw the same ladder as a colour-deficient eye is thought to see it."""
    seen = predict(prediction.blend, prediction.pH, replace(prediction.conditions, eyes=eyes, severity=1.0))
    steps = np.diagonal(seen.separation(), offset=1)
    for number, colour in enumerate(seen.patch.hex()):
        page.box(x, top - (number + 1) * pitch + (pitch - height) / 2, width, height, colour)
    for number, value in enumerate(steps):
        size = float(np.clip(pitch * 0.45, 4.5, 6.5))
        page.text(x + width / 2, top - (number + 1) * pitch, f"{value:.1f}", size, ha="center",
                  bbox={"facecolor": "white", "edgecolor": "none", "pad": 0.8})


def _foot(page: Page, prediction: Prediction, date: str, verdict: Verdict) -> None:
    y, middle = _LADDER_FOOT - 8.0, page.width / 2 + 6
    page.line((_MARGIN, page.width - _MARGIN), (y + 4, y + 4))
    _blend_table(page, prediction, _MARGIN, y, middle - _MARGIN - 6)
    _reading(page, prediction, verdict, middle, y, page.width - _MARGIN - middle)
    span = ",".join(pH_text(value) for value in prediction.pH) if prediction.pH.size <= 9 else "FROM:TO:STEP"
    about = (f"mixind {VERSION} · {date} · dye data {prediction.blend.digest()} · reprint at 100 % size: mixind chart BLEND "
             f"OUT.pdf --ph {span} --date {date} · look at it in daylight")
    page.text(_MARGIN, 9, about, 6, page.width - 2 * _MARGIN, color=FAINT)


def _blend_table(page: Page, prediction: Prediction, x: float, y: float, room: float) -> None:
    page.text(x, y, "Stock solution", 8.5, fontweight="bold")
    page.text(x + room - 20, y, "% w/v", 6.5, ha="right", color=FAINT)
    page.text(x + room, y, "mg/L", 6.5, ha="right", color=FAINT)
    components = prediction.blend.components
    shown = components if len(components) <= _MOST_ROWS else components[:_MOST_ROWS - 1]
    pitch = min(4.6, 30 / min(len(components), _MOST_ROWS))
    for component in shown:
        y -= pitch
        size = min(7.5, pitch / POINT * 0.75)
        page.text(x, y, component.dye.name, size, room - 40)
        page.text(x + room - 20, y, significant(component.grams_per_litre / 10), size, ha="right")
        page.text(x + room, y, mg_per_litre(component), size, ha="right")
    if len(shown) < len(components):
        y -= pitch
        page.text(x, y, f"and {len(components) - len(shown)} more: see the blend file", pitch / POINT * 0.75, room)
    hazards = "; ".join(f"{c.dye.name} {c.dye.hazard_text}" for c in components)
    y = page.paragraph(x, y - 6, f"Hazards of the pure dyes: {hazards}.", 6.5, room)
    kept = ("Keep the stock closed, cool and dark; hang the chart out of the sun. Wear gloves, no flame near ethanolic stocks. "
            "The safety data sheet, local codes and licensed practice decide.")
    page.paragraph(x, y - 1.2, kept, 6.5, room)


def _reading(page: Page, prediction: Prediction, verdict: Verdict, x: float, y: float, room: float) -> None:
    page.text(x, y, "How to read it", 8.5, fontweight="bold")
    worst = verdict.worst
    limits = f"told apart side by side from {verdict.threshold:g}, against this print from {PRINTED_CHART_THRESHOLD:g}"
    lines = [
        f"Numbers between rungs: separation (CIEDE2000, kL 2); {limits}. Weakest of all pairs {verdict.held}: pH "
        f"{pH_text(worst.pair[0])} and {pH_text(worst.pair[1])}, {worst.separation:.1f}.",
        "± is the standard uncertainty of the colour. Grades: A sources agree, B one source, C memory, analogy or a guessed "
        "band shape. Check each batch with three buffers.",
        "Valid at the stated temperature ± 5 C, in clear colourless samples without chlorine or protein. "
        f"Small columns: {SIMULATION_REMARK}.",
        f"The white of the vessel is printed at 90 %.{_gamut_note(prediction)}"]
    y -= 5
    for line in lines:
        y = page.paragraph(x, y, line, 6.5, room) - 1.2


def _gamut_note(prediction: Prediction) -> str:
    outside = int((~prediction.patch.in_gamut).sum())
    lie = "colour lies" if outside == 1 else "colours lie"
    return f" {outside} {lie} outside sRGB, printed with less chroma." if outside else ""


def write_chart(path: str | Path, prediction: Prediction, replace_file: bool = False, date: str | None = None,
                paper: str = "a4", verdict: Verdict | None = None) -> None:
    """Draw the chart and write it whole, as PDF, SVG or PNG by the suffix of `path`.

    Args: as `draw_chart`; `replace_file` allows an existing file to be replaced.
    Raises: MixindError as `draw_chart`, `check_suffix` and `files.write_whole`.
    """
    suffix, path = check_suffix(path), check_target(path, replace_file)
    write_whole(path, rendered(draw_chart(prediction, paper, date, verdict), suffix), replace_file)
