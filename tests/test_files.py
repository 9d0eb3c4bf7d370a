"""Reading TOML with all faults at once; writing whole or not at all."""

from __future__ import annotations

import os
from pathlib import Path

import pytest

from mixind import files
from mixind.errors import MixindError


def test_toml_faults_name_the_file(tmp_path: Path) -> None:
    path = tmp_path / "x.toml"
    for raw, message in ((b"a = ", "not valid TOML"), (b"a = '\xff'", "not UTF-8"), (b"#" * (2**20 + 1), "over 1 MiB"),
                         (b"a = " + b"[" * 5000, "not valid TOML")):
        path.write_bytes(raw)
        with pytest.raises(MixindError, match=message) as caught:
            files.parse_toml(files.read_bytes(path), path)
        assert str(path) in str(caught.value)
    with pytest.raises(MixindError, match="cannot be read"):
        files.read_bytes(tmp_path / "missing.toml")


def test_a_table_lists_every_fault() -> None:
    table = files.Table({"a": 1, "n": float("nan"), "b": True, "c": "x", "typo": 2, "l": [1, "x"]}, "f.toml")
    table.text("a")
    table.number("n", 0, 1)
    table.number("b", 0, 1)
    table.choice("c", ["y"])
    table.number("missing", 0, 1)
    table.numbers("l", 0, 5)
    table.close()
    with pytest.raises(MixindError) as caught:
        table.finish()
    message = str(caught.value)
    for part in ("a: must be text", "n: is nan", "b: must be a number", "c: 'x' is not one of y", "missing: is missing",
                 "typo: is not a key", "l: holds 'x'"):
        assert f"f.toml: {part}" in message


def test_a_file_is_written_whole(tmp_path: Path) -> None:
    path = tmp_path / "a.txt"
    files.write_whole(path, b"one", replace=False)
    with pytest.raises(MixindError, match="exists already"):
        files.write_whole(path, b"two", replace=False)
    assert path.read_bytes() == b"one"
    files.write_whole(path, b"two", replace=True)
    assert path.read_bytes() == b"two"
    assert os.listdir(tmp_path) == ["a.txt"]


def test_a_failed_write_leaves_nothing(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def full(descriptor: int) -> None:
        raise OSError(28, "No space left on device")

    path = tmp_path / "a.txt"
    path.write_bytes(b"old")
    monkeypatch.setattr(os, "fsync", full)
    with pytest.raises(MixindError, match="No space left"):
        files.write_whole(path, b"new", replace=True)
    assert path.read_bytes() == b"old"
    assert os.listdir(tmp_path) == ["a.txt"]


def test_targets_are_checked(tmp_path: Path) -> None:
    with pytest.raises(MixindError, match="does not exist"):
        files.check_target(tmp_path / "no" / "a.txt", replace=True)
    with pytest.raises(MixindError, match="is a folder"):
        files.check_target(tmp_path, replace=True)


def test_toml_text_survives_reading() -> None:
    for text in ('a "b" \\ c', "tab\tnew\nline", "bell\x07", "ü µ 水"):
        assert files.parse_toml(f"a = {files.toml_text(text)}".encode(), "x")["a"] == text
