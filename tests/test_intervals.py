"""Visual intervals against print: sources row by row in tests/published/intervals.csv."""

from __future__ import annotations

from pathlib import Path

import pytest

from mixind.library import Library
from tests import published
from tests.intervals import NO_CHECK, TWO_COLOURED, compared, judged, rms_errors


def test_the_list_is_complete() -> None:
    """Every printed interval of the table that spans one step between two coloured forms is on the frozen list."""
    library = Library()
    for row in published.rows("intervals"):
        step = int(row["first_step"])
        forms = library.find(row["dye"]).forms
        two_coloured = row["first_step"] == row["last_step"] and forms[step - 1].coloured and forms[step].coloured
        assert ((row["dye"], step) in TWO_COLOURED) == two_coloured, row


def test_intervals_agree_with_print(capsys: pytest.CaptureFixture[str]) -> None:
    """rms of the midpoints at most 0.25 pH, of the ends at most 0.35; misses over 0.4 are printed.

    Judged are all but the steps of `NO_CHECK`; README and notes give the figures with them, too.
    """
    everything = compared()
    rows = judged(everything)
    assert len(everything) == len(rows) + len(NO_CHECK)
    with capsys.disabled():
        for row in everything:
            if abs(row.midpoint_error) > 0.4:
                print(f"\n  {row.dye}, step {row.step}: midpoint off by {row.midpoint_error:+.2f} pH", end="")
    midpoints, ends = rms_errors(rows)
    assert midpoints <= 0.25
    assert ends <= 0.35
    readme = (Path(__file__).parent.parent / "README.md").read_text(encoding="utf-8")
    assert f"midpoints {midpoints:.2f} pH rms, ends {ends:.2f} pH rms" in readme
    assert "with all {} it is {:.2f} and {:.2f}".format(len(everything), *rms_errors(everything)) in readme
