"""Every command of the README works as printed, and its figures are those of the program."""

from __future__ import annotations

import re
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parent.parent
README = (ROOT / "README.md").read_text(encoding="utf-8")
SET_UP = "python3 -m venv"


def blocks(language: str) -> list[str]:
    return re.findall(rf"```{language}\n(.*?)```", README, flags=re.S)


COMMANDS = [line for block in blocks("sh") for line in block.splitlines() if line]


@pytest.fixture(scope="module")
def copy(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A copy of the folder in which .venv is the environment that runs the tests."""
    folder = tmp_path_factory.mktemp("copy")
    for name in ("examples", "dye_library"):
        shutil.copytree(ROOT / name, folder / name)
    (folder / ".venv").mkdir()
    (folder / ".venv" / "bin").symlink_to(Path(sys.executable).parent)
    return folder


def test_two_lines_do_all_the_set_up() -> None:
    assert sum(line.startswith(SET_UP) for line in COMMANDS) == 2


@pytest.mark.parametrize("command", [line for line in COMMANDS if not line.startswith(SET_UP)])
def test_commands_work_as_printed(copy: Path, command: str) -> None:
    done = subprocess.run(["bash", "-c", command], cwd=copy, capture_output=True, text=True, timeout=120)
    assert done.returncode == 0, done.stderr
    assert "Traceback" not in done.stderr


def alike(printed: str, found: str) -> bool:
    """Return whether two lines say the same: words equal, figures within 2 %, as another processor may round them."""
    one, two = printed.replace(";", " ").split(), found.replace(";", " ").split()
    return len(one) == len(two) and all(_same(a.strip(",()"), b.strip(",()")) for a, b in zip(one, two, strict=True))


def _same(one: str, two: str) -> bool:
    if re.fullmatch(r"#[0-9a-f]{6}", one) and two.startswith("#"):
        return all(abs(int(one[i:i + 2], 16) - int(two[i:i + 2], 16)) <= 3 for i in (1, 3, 5))
    try:
        return float(one) == pytest.approx(float(two), rel=0.02, abs=0.3)
    except ValueError:
        return one == two


def test_the_result_shown_is_the_result(copy: Path) -> None:
    """The main job, run here without its installation; the printed block must be in its output."""
    line = next(command for command in COMMANDS if "formulate --from 4 --to 10" in command)
    job = line[line.index(".venv/bin/mixind"):]
    done = subprocess.run(["bash", "-c", job], cwd=copy, capture_output=True, text=True, timeout=120)
    assert done.returncode == 0, done.stderr
    shown = re.search(r"\n    Blend:.*?\n\n", README, flags=re.S)
    assert shown
    for printed, found in zip(shown[0].strip().splitlines(), done.stdout.splitlines(), strict=False):
        assert alike(printed, found), f"{printed!r} against {found!r}"
    assert (copy / "my.pdf").exists()


def test_the_recipe_shown_is_read(copy: Path) -> None:
    (copy / "recipe.toml").write_text(blocks("toml")[0], encoding="utf-8")
    done = subprocess.run([sys.executable, "-m", "mixind", "predict", "recipe.toml"], cwd=copy, capture_output=True, text=True)
    assert done.returncode == 0, done.stderr


def test_the_python_example_runs(copy: Path) -> None:
    done = subprocess.run([sys.executable, "-c", blocks("python")[0]], cwd=copy, capture_output=True, text=True, timeout=60)
    assert done.returncode == 0, done.stderr
    assert done.stdout.count("#") == 7
