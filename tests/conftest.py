"""Fixtures that several tests share."""

from __future__ import annotations

from pathlib import Path

import pytest

from mixind.library import Library


@pytest.fixture(scope="session")
def library() -> Library:
    return Library()


@pytest.fixture
def dye_text() -> str:
    """A sound dye file, for tests that spoil it."""
    return (Path(__file__).parent / "data" / "sound_dye.toml").read_text(encoding="utf-8")


@pytest.fixture
def blend_file(tmp_path: Path) -> Path:
    """A sound blend file."""
    path = tmp_path / "blend.toml"
    path.write_text(
        'title = "test"\ndose = "0.2 mL in 10 mL"\n[[component]]\ndye = "methyl red"\nstrength = "300 mg/L"\n'
        '[[component]]\ndye = "BTB"\nstrength = "800 mg/L"\n', encoding="utf-8")
    return path
