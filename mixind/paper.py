"""A page of paper, laid out in millimetres, and the file it becomes. The one door to matplotlib and Pillow.

Everything is placed from the lower left corner of the page; nothing depends on the clock, the machine, the user's
matplotlibrc or a random number, so that the same page gives the same bytes.
"""

from __future__ import annotations

import io
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field
from functools import lru_cache
from typing import Any

INK, FAINT, RAIL = "#1a1a1a", "#666666", "#b8b8b8"
POINT = 25.4 / 72
"""A typographic point [mm]."""

_MM = 1 / 25.4
_DPI = 200
_SMALLEST_SIZE = 4.5
_LONGEST_TEXT = 1000
_SLACK = 0.97
"""Share of the room that text may fill: it is measured without the hinting of the page."""


@contextmanager
def own_style() -> Iterator[None]:
    """Draw by matplotlib's own defaults and ours, whatever the user's matplotlibrc says; put everything back after."""
    import matplotlib

    style: Any = {"pdf.fonttype": 42, "svg.hashsalt": "mixind", "svg.fonttype": "path", "font.family": ["DejaVu Sans"]}
    with matplotlib.rc_context():
        matplotlib.rcdefaults()
        matplotlib.rcParams.update(style)
        yield


@dataclass
class Page:
    """A page under construction: a matplotlib axes that spans it, one unit per millimetre."""

    width: float
    height: float
    figure: Any = field(init=False)
    axes: Any = field(init=False)

    def __post_init__(self) -> None:
        from matplotlib.figure import Figure

        self.figure = Figure(figsize=(self.width * _MM, self.height * _MM), facecolor="white")
        self.axes = self.figure.add_axes((0, 0, 1, 1))
        self.axes.set_xlim(0, self.width)
        self.axes.set_ylim(0, self.height)
        self.axes.set_axis_off()

    def text(self, x: float, y: float, text: str, size: float, room: float | None = None, **style: Any) -> None:
        """Write a line; it is set smaller, and cut at the end if need be, to stay within `room` [mm]."""
        text, size = _fitted(_printable(text), size, room, style.get("fontweight", "normal"))
        style = {"color": INK, "va": "center", **style}
        self.axes.text(x, y, text, fontsize=size, parse_math=False, **style)

    def paragraph(self, x: float, y: float, text: str, size: float, room: float, most: int = 6) -> float:
        """Write a text broken into lines within `room`, at most so many; return the y below its last line."""
        lines = _wrapped(_printable(text), size, room * _SLACK)
        lines = [*lines[:most - 1], lines[most - 1] + " …"] if len(lines) > most else lines
        for line in lines:
            self.text(x, y, line, size, room, color=FAINT)
            y -= size * POINT * 1.3
        return y

    def box(self, x: float, y: float, width: float, height: float, colour: str, edge: str = RAIL) -> None:
        """Draw a filled rectangle from its lower left corner."""
        from matplotlib.patches import Rectangle

        self.axes.add_patch(Rectangle((x, y), width, height, facecolor=colour, edgecolor=edge, linewidth=0.4))

    def line(self, xs: tuple[float, ...], ys: tuple[float, ...], width: float = 0.6, colour: str = RAIL) -> None:
        """Draw a line through points."""
        self.axes.plot(xs, ys, color=colour, linewidth=width, solid_capstyle="butt")


@lru_cache(maxsize=1)
def _glyphs() -> frozenset[int]:
    from matplotlib import font_manager, ft2font

    return frozenset(ft2font.FT2Font(font_manager.findfont("DejaVu Sans")).get_charmap())


def _printable(text: str) -> str:
    """Return the text, cut to a sane length, with whitespace folded and "?" for what the font has no glyph for."""
    return "".join(c if ord(c) in _glyphs() else "?" for c in " ".join(text[:_LONGEST_TEXT].split()))


@lru_cache(maxsize=4096)
def _width(text: str, size: float, weight: str) -> float:
    from matplotlib.font_manager import FontProperties
    from matplotlib.textpath import text_to_path

    font = FontProperties(family="DejaVu Sans", size=size, weight=weight)
    return float(text_to_path.get_text_width_height_descent(text, font, ismath=False)[0]) * POINT


def _fitted(text: str, size: float, room: float | None, weight: str) -> tuple[str, float]:
    if room is None or not text:
        return text, size
    room *= _SLACK
    size = min(size, max(size * room / _width(text, size, weight), _SMALLEST_SIZE))
    if _width(text, size, weight) <= room:
        return text, size
    low, high = 0, len(text)
    while high - low > 1:
        middle = (low + high) // 2
        low, high = (middle, high) if _width(text[:middle] + "…", size, weight) <= room else (low, middle)
    return text[:low] + "…", size


def _wrapped(text: str, size: float, room: float) -> list[str]:
    lines, line = [], ""
    for word in text.split():
        longer = f"{line} {word}".strip()
        if line and _width(longer, size, "normal") > room:
            lines.append(line)
            longer = word
        line = longer
    return [*lines, line]


def rendered(figure: Any, suffix: str) -> bytes:
    """Return a figure as the bytes of a file with this suffix, one of `SUFFIXES`."""
    metadata: Any = {
        ".pdf": {"CreationDate": None, "ModDate": None, "Producer": None, "Creator": "mixind"},
        ".svg": {"Date": None, "Creator": "mixind"}, ".png": {"Software": None}}[suffix]
    buffer = io.BytesIO()
    with own_style():
        figure.savefig(buffer, format=suffix[1:], dpi=_DPI, metadata=metadata)
    return _with_profile(buffer.getvalue()) if suffix == ".png" else buffer.getvalue()




def _with_profile(png: bytes) -> bytes:
    """Return the PNG with an sRGB profile in it, whose clock is set to zero so that the bytes do not depend on it."""
    from PIL import Image, ImageCms

    profile = bytearray(ImageCms.ImageCmsProfile(ImageCms.createProfile("sRGB")).tobytes())
    profile[24:36] = bytes(12)
    buffer = io.BytesIO()
    with Image.open(io.BytesIO(png)) as image:
        image.convert("RGB").save(buffer, format="PNG", icc_profile=bytes(profile), dpi=(_DPI, _DPI))
    return buffer.getvalue()
