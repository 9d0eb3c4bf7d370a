"""The wheel carries everything, the parts import in one direction, and no machine leaks into the files."""

from __future__ import annotations

import ast
import os
import re
import shutil
import subprocess
import sys
import zipfile
from pathlib import Path

import pytest

import mixind

ROOT = Path(__file__).parent.parent
PACKAGE = ROOT / "mixind"

# From the ground to the roof: a module imports only from lines above its own.
STOREYS = (
    ("errors", "version"), ("quantities",), ("files",), ("spectra",), ("equilibria",), ("dyes",), ("dye_files",), ("library",),
    ("colorimetry", "colour_words"), ("difference",), ("display", "viewing"), ("conditions",), ("blend",), ("separation", "paper"), ("prediction",),
    ("solvers",), ("search.problem",), ("search.candidates",), ("search.local",), ("search.rounding",), ("search.subsets",),
    ("search.formulate",), ("figures",), ("cli.printing", "cli.options"),
    ("cli.formulate", "cli.predict", "cli.chart", "cli.dye"))
FLOOR = {name: floor for floor, names in enumerate(STOREYS) for name in names}
DOORS = {"colour": {"viewing"}, "matplotlib": {"paper"}, "PIL": {"paper"}, "scipy": {"solvers", "spectra"}}


def modules() -> list[Path]:
    return sorted(PACKAGE.rglob("*.py"))


def imports(path: Path) -> set[str]:
    """Return the dotted names that a module imports, at its top or inside."""
    found = set()
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            found |= {alias.name for alias in node.names}
        elif isinstance(node, ast.ImportFrom) and node.module:
            found |= {node.module} | {f"{node.module}.{alias.name}" for alias in node.names}
    return found


@pytest.mark.parametrize("path", modules(), ids=lambda path: str(path.relative_to(PACKAGE)))
def test_knowledge_flows_one_way_and_libraries_have_one_door(path: Path) -> None:
    name = ".".join(path.relative_to(PACKAGE).with_suffix("").parts)
    for used in imports(path):
        for library, owners in DOORS.items():
            assert used.split(".")[0] != library or name in owners, f"{name} imports {library}"
        part = used.removeprefix("mixind.")
        if name in FLOOR and part in FLOOR and part != name:
            assert FLOOR[part] < FLOOR[name], f"{name} imports {part}"


def test_every_module_has_a_floor() -> None:
    names = {".".join(path.relative_to(PACKAGE).with_suffix("").parts) for path in modules()}
    assert {name for name in names if not name.endswith(("__init__", "__main__"))} == set(FLOOR)


@pytest.mark.parametrize("path", modules(), ids=lambda path: str(path.relative_to(PACKAGE)))
def test_modules_stay_readable(path: Path) -> None:
    """At most 400 lines a module and 40 a function, its docstring not counted."""
    text = path.read_text(encoding="utf-8")
    assert len(text.splitlines()) <= 400
    for node in ast.walk(ast.parse(text)):
        if isinstance(node, ast.FunctionDef):
            body = node.body[1:] if ast.get_docstring(node) else node.body
            length = (body[-1].end_lineno or 0) - body[0].lineno + 1 if body else 0
            assert length <= 40, f"{node.name}: {length} lines"


def test_public_names_exist_and_are_documented() -> None:
    for name in mixind.__all__:
        assert getattr(mixind, name).__doc__
    with pytest.raises(AttributeError):
        mixind.no_such_name  # noqa: B018


def test_the_wheel_does_the_main_job_elsewhere(tmp_path: Path) -> None:
    """Built from a copy of the tree, installed in a folder of its own, run from another."""
    source, wheels, installed, elsewhere = (tmp_path / name for name in ("source", "wheels", "installed", "elsewhere"))
    source.mkdir()
    elsewhere.mkdir()
    for name in ("mixind", "dye_library"):
        shutil.copytree(ROOT / name, source / name, ignore=shutil.ignore_patterns("__pycache__"))
    for name in ("pyproject.toml", "README.md"):
        shutil.copy(ROOT / name, source / name)
    build = [sys.executable, "-m", "build", "--wheel", "--no-isolation", "--outdir", str(wheels), str(source)]
    subprocess.run(build, check=True, capture_output=True, timeout=120)
    wheel = next(wheels.glob("*.whl"))
    names = zipfile.ZipFile(wheel).namelist()
    assert sum(name.startswith("mixind/dye_library/") for name in names) == len(list((ROOT / "dye_library").glob("*.toml")))
    assert {"mixind/viewers.csv", "mixind/deficiencies.csv", "mixind/py.typed", "mixind/LICENSE.txt"} <= set(names)
    zipfile.ZipFile(wheel).extractall(installed)
    job = ["-m", "mixind", "formulate", "--from", "4", "--to", "10", "--most-dyes", "3", "--effort", "quick", "--save", "my.toml",
           "--chart", "my.pdf"]
    done = subprocess.run([sys.executable, *job], cwd=elsewhere, env={**os.environ, "PYTHONPATH": str(installed)},
                          capture_output=True, text=True, timeout=120)
    assert done.returncode == 0, done.stderr
    assert {path.name for path in elsewhere.iterdir()} == {"my.toml", "my.pdf"}


def test_the_top_level_is_what_was_agreed() -> None:
    agreed = {"README.md", "DEVELOPERS.md", "pyproject.toml", "mixind", "tests", "dye_library", "examples"}
    tracked = subprocess.run(["git", "ls-files"], cwd=ROOT, capture_output=True, text=True)
    if tracked.returncode == 0:
        tops = {line.split("/")[0] for line in tracked.stdout.splitlines()}
        assert {top for top in tops if not top.startswith(".")} <= agreed


def test_no_machine_and_no_registry_is_named() -> None:
    words = ["/" + "home/", "/" + "Users/", "/" + "opt/", "pypi" + r"\.", "npm" + "js", "python" + "hosted"]
    pattern = re.compile("|".join(words), re.I)
    texts = [path for folder in ("mixind", "tests", "dye_library", "examples", ".ci") for path in (ROOT / folder).rglob("*")
             if path.suffix in (".py", ".toml", ".csv", ".md", "") and path.is_file()]
    for path in [*texts, *ROOT.glob("*.md"), ROOT / "pyproject.toml"]:
        found = pattern.search(path.read_text(encoding="utf-8"))
        assert not found, f"{path}: {found}"
