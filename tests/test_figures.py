"""The chart: exact size, embedded fonts, same bytes, nothing lost."""

from __future__ import annotations

import io
from dataclasses import replace
from pathlib import Path

import numpy as np
import pypdf
import pytest
from PIL import Image, ImageCms

from mixind import figures
from mixind.blend import Blend, read_blend
from mixind.conditions import Conditions
from mixind.errors import MixindError
from mixind.library import Library
from mixind.prediction import Prediction, predict
from mixind.separation import Worst

TITLE = "Ünïcode $100 % of <pH> & a_b^c {x} \\frac 水 over sixty characters long, much longer"


@pytest.fixture
def blend(blend_file: Path, library: Library) -> Blend:
    return read_blend(blend_file, library)


@pytest.fixture
def prediction(blend: Blend) -> Prediction:
    return predict(blend, np.arange(4.0, 9.0), Conditions())


@pytest.mark.parametrize("paper", figures.PAPERS)
def test_pdf_has_the_size_of_the_paper_and_its_fonts(tmp_path: Path, prediction: Prediction, paper: str) -> None:
    path = tmp_path / "c.pdf"
    verdict = figures.Verdict(Worst(12.3, (5.0, 6.0)), 3.0, "with the dose off by up to 20%")
    figures.write_chart(path, prediction, date="2026-03-01", paper=paper, verdict=verdict)
    page = pypdf.PdfReader(path).pages[0]
    width, height = (float(side) / 72 * 25.4 for side in page.mediabox[2:])
    assert (width, height) == pytest.approx(figures.PAPERS[paper], abs=0.05)
    fonts = page["/Resources"]["/Font"].values()  # type: ignore[index]
    for font in fonts:
        descriptor = font.get_object()["/DescendantFonts"][0].get_object()["/FontDescriptor"]
        assert "/FontFile2" in descriptor
    text = page.extract_text()
    for part in ("0.2 mL in 10 mL", "methyl red", "Weakest", "2026-03-01", prediction.blend.digest(), "D65", "simulation, not a test",
                 "with the dose off by up to 20%: pH 5 and 6, 12.3"):
        assert part in text.replace("\n", " ")


@pytest.mark.parametrize("suffix", figures.SUFFIXES)
def test_same_input_and_date_give_the_same_bytes(tmp_path: Path, prediction: Prediction, suffix: str,
                                                 monkeypatch: pytest.MonkeyPatch) -> None:
    first, second = tmp_path / f"a{suffix}", tmp_path / f"b{suffix}"
    figures.write_chart(first, prediction, date="2026-03-01")
    monkeypatch.setenv("SOURCE_DATE_EPOCH", str(1772323200))
    figures.write_chart(second, prediction)
    assert first.read_bytes() == second.read_bytes()


def test_png_carries_an_srgb_profile_and_its_size(tmp_path: Path, prediction: Prediction) -> None:
    path = tmp_path / "c.png"
    figures.write_chart(path, prediction, date="2026-03-01")
    with Image.open(path) as image:
        profile = ImageCms.ImageCmsProfile(io.BytesIO(image.info["icc_profile"]))
        assert "sRGB" in ImageCms.getProfileDescription(profile)
        assert image.info["icc_profile"][24:36] == bytes(12)
        dpi = float(image.info["dpi"][0])
        assert image.size[0] / dpi * 25.4 == pytest.approx(210, abs=0.2)
        seen = {tuple(pixel) for pixel in np.asarray(image.convert("RGB")).reshape(-1, 3)[::7].tolist()}
    for shown in prediction.patch.hex():
        assert tuple(int(shown[i:i + 2], 16) for i in (1, 3, 5)) in seen


@pytest.mark.parametrize("count", [2, 7, 25])
def test_nothing_leaves_the_page_or_overlaps(blend: Blend, count: int) -> None:
    """Every text stays on the page, and no two texts lie on each other."""
    titled = replace(blend, title=TITLE)
    figure = figures.draw_chart(predict(titled, np.linspace(3, 11, count), Conditions(eyes="deutan")), date="2026-03-01")
    figure.set_dpi(100)
    from matplotlib.backends.backend_agg import FigureCanvasAgg

    renderer = FigureCanvasAgg(figure).get_renderer()
    boxes = [text.get_window_extent(renderer) for text in figure.axes[0].texts]
    width, height = figure.get_size_inches() * 100
    for box in boxes:
        assert box.x0 >= 0
        assert box.y0 >= 0
        assert box.x1 <= width
        assert box.y1 <= height
    for one, box in enumerate(boxes):
        for other in boxes[one + 1:]:
            covers = min(box.x1, other.x1) - max(box.x0, other.x0), min(box.y1, other.y1) - max(box.y0, other.y0)
            assert min(covers) < 1.5, (figure.axes[0].texts[one].get_text(), covers)


def test_odd_titles_are_printed_as_they_are(blend: Blend) -> None:
    figure = figures.draw_chart(predict(replace(blend, title=TITLE), np.arange(4.0, 7.0), Conditions()), date="2026-03-01")
    printed = figure.axes[0].texts[0].get_text()
    assert printed.startswith("Ünïcode $100 % of <pH> & a_b^c {x} \\frac ?")


def test_mapped_patches_are_marked(blend: Blend) -> None:
    strong = replace(blend, components=tuple(
        replace(c, strength=replace(c.strength, value=c.strength.value * 4)) for c in blend.components))
    found = predict(strong, np.arange(4.0, 9.0), Conditions())
    assert not found.patch.in_gamut.all()
    texts = [text.get_text() for text in figures.draw_chart(found, date="2026-03-01").axes[0].texts]
    assert sum("print off by" in text for text in texts) == int((~found.patch.in_gamut).sum())


@pytest.mark.parametrize(("name", "message"), [("c.gif", "cannot be drawn as .gif"), ("c", "without suffix")])
def test_unknown_suffixes_are_refused(tmp_path: Path, prediction: Prediction, name: str, message: str) -> None:
    with pytest.raises(MixindError, match=message):
        figures.write_chart(tmp_path / name, prediction)
    assert not list(tmp_path.glob("c*"))


def test_too_many_rungs_bad_papers_and_bad_dates_are_refused(blend: Blend, prediction: Prediction) -> None:
    with pytest.raises(MixindError, match="2 to 25"):
        figures.draw_chart(predict(blend, np.linspace(3, 11, 26), Conditions()))
    with pytest.raises(MixindError, match="paper"):
        figures.draw_chart(prediction, paper="a3")
    with pytest.raises(MixindError, match="not a date"):
        figures.draw_chart(prediction, date="yesterday")


@pytest.mark.parametrize("epoch", ["x", "99999999999999999"])
def test_a_bad_source_date_is_refused(monkeypatch: pytest.MonkeyPatch, epoch: str) -> None:
    monkeypatch.setenv("SOURCE_DATE_EPOCH", epoch)
    with pytest.raises(MixindError, match="not a date"):
        figures.page_date()
