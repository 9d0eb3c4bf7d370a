"""Reading TOML with every fault named at once, and writing files whole or not at all."""

from __future__ import annotations

import os
import sys
import tomllib
from collections.abc import Iterable, Iterator
from pathlib import Path
from typing import Any

from mixind.errors import MixindError, nearest

TOML_LIMIT = 2**20
"""Largest TOML file read [bytes]."""

_MISSING = object()


def read_bytes(path: str | Path, limit: int = TOML_LIMIT) -> bytes:
    """Return the content of a file; "-" is standard input.

    Raises: MixindError when the file cannot be read or is longer than `limit` [bytes].
    """
    try:
        if str(path) == "-":
            if sys.stdin is None:
                raise MixindError("standard input is closed. Name a file instead of -.")
            raw = sys.stdin.buffer.read(limit + 1)
        else:
            with open(path, "rb") as stream:
                raw = stream.read(limit + 1)
    except OSError as error:
        raise MixindError(f"{path}: cannot be read: {error.strerror}.") from None
    if len(raw) > limit:
        raise MixindError(f"{path}: is over {limit // 2**20} MiB. Is it the right file?")
    return raw


def parse_toml(raw: bytes, path: str | Path) -> dict[str, Any]:
    """Return the tables of a TOML text; `path` is where it came from, for the error.

    Raises: MixindError when it is not UTF-8 or not TOML.
    """
    try:
        return tomllib.loads(raw.decode("utf-8-sig"))
    except UnicodeDecodeError as error:
        raise MixindError(f"{path}: byte {error.start} is not UTF-8. Save the file as UTF-8.") from None
    except (tomllib.TOMLDecodeError, RecursionError, ValueError) as error:
        raise MixindError(f"{path}: is not valid TOML: {error or 'nested too deeply'}.") from None


class Table:
    """One table of a TOML file while it is being read.

    Each `text`, `number`, .. takes a key out and notes a fault instead of raising, so that a reader goes through
    the whole file; `finish` then raises one error that lists all faults. A key nobody took is a fault, too.
    """

    def __init__(self, data: dict[str, Any], where: str, faults: list[str] | None = None) -> None:
        self.where = where
        self.faults: list[str] = [] if faults is None else faults
        self._data = data
        self._taken: set[str] = set()

    def fault(self, key: str, message: str) -> None:
        """Note a fault of one key of this table."""
        self.faults.append(f"{self.where}: {key}: {message}")

    def __contains__(self, key: str) -> bool:
        return key in self._data

    def _take(self, key: str, kind: type | tuple[type, ...], default: Any, what: str) -> Any:
        self._taken.add(key)
        if key not in self._data:
            if default is _MISSING:
                self.fault(key, "is missing.")
                return None
            return default
        value = self._data[key]
        if not isinstance(value, kind) or isinstance(value, bool) is not (kind is bool):
            self.fault(key, f"must be {what}, got {_shown(value)}.")
            return None if default is _MISSING else default
        return value

    def text(self, key: str, default: Any = _MISSING) -> Any:
        """Return a string that is not blank."""
        value = self._take(key, str, default, "text in quotes")
        if isinstance(value, str) and key in self._data:
            if not value.strip():
                self.fault(key, "is blank.")
            elif not value.isprintable():
                self.fault(key, "holds a line break or another control character.")
        return value

    def flag(self, key: str) -> bool:
        """Return true or false; false when the key is absent."""
        return bool(self._take(key, bool, False, "true or false"))

    def choice(self, key: str, known: Iterable[str], default: Any = _MISSING) -> Any:
        """Return one of the known words."""
        value = self.text(key, default)
        known = list(known)
        if isinstance(value, str) and value not in known:
            self.fault(key, f"{_shown(value)} is not one of {', '.join(known)}{nearest(value, known)}")
            return None
        return value

    def number(self, key: str, low: float, high: float, default: Any = _MISSING) -> Any:
        """Return a finite number from `low` to `high`."""
        value = self._take(key, (int, float), default, "a number")
        if value is None or key not in self._data:
            return value
        if not low <= value <= high:
            self.fault(key, f"is {_shown(value)}, outside {low:g} to {high:g}. Check the decimal point.")
            return None if default is _MISSING else default
        return float(value)

    def whole(self, key: str, low: int, high: int, default: Any = _MISSING) -> Any:
        """Return a whole number from `low` to `high`."""
        value = self.number(key, low, high, default)
        if isinstance(value, float) and not value.is_integer():
            self.fault(key, f"is {value:g}, not a whole number.")
        return value if value is None else int(value)

    def texts(self, key: str) -> tuple[str, ...]:
        """Return a list of strings; empty when the key is absent."""
        values = self._take(key, list, [], "a list of texts")
        if not all(isinstance(value, str) and value.strip() for value in values):
            self.fault(key, "must hold texts only, none blank.")
            return ()
        return tuple(values)

    def numbers(self, key: str, low: float, high: float) -> list[float]:
        """Return a list of finite numbers from `low` to `high`; empty when the key is absent."""
        values = self._take(key, list, [], "a list of numbers")
        for value in values:
            good = isinstance(value, int | float) and not isinstance(value, bool)
            if not (good and low <= value <= high):
                self.fault(key, f"holds {_shown(value)}, outside {low:g} to {high:g}.")
                return []
        return [float(value) for value in values]

    def table(self, key: str) -> Table | None:
        """Return the table under `key`, or None when it is absent."""
        value = self._take(key, dict, None, "a table")
        return None if value is None else Table(value, f"{self.where}: {key}", self.faults)

    def tables(self, key: str, singular: str | None = None) -> Iterator[Table]:
        """Yield the tables of the array under `key`, each named "<singular> 1", "<singular> 2", .."""
        for number, value in enumerate(self._take(key, list, [], "an array of tables"), 1):
            place = f"{self.where}: {singular or key} {number}"
            if isinstance(value, dict):
                yield Table(value, place, self.faults)
            else:
                self.faults.append(f"{place}: must be a table, got {_shown(value)}.")

    def every_key(self) -> list[str]:
        """Return all keys of the table, for a table whose keys are free."""
        self._taken.update(self._data)
        return list(self._data)

    def close(self) -> None:
        """Note each key that nobody took as a fault."""
        for key in self._data:
            if key not in self._taken:
                self.fault(key, f"is not a key that is known here{nearest(key, self._taken) or '.'}")

    def finish(self) -> None:
        """Raise one MixindError that lists all faults noted so far; do nothing when there are none."""
        if self.faults:
            raise MixindError(" | ".join(self.faults), faults=tuple(self.faults))


def _shown(value: object) -> str:
    if isinstance(value, dict | list):
        return "a table" if isinstance(value, dict) else "a list"
    text = repr(value) if not isinstance(value, int) or abs(value) < 10**40 else "a very large number"
    return text if len(text) <= 40 else text[:37] + "..."


def check_target(path: str | Path, replace: bool) -> Path:
    """Return the path of a file about to be written.

    Raises: MixindError when its folder is missing, or when it exists and `replace` is false.
    """
    if not str(path):
        raise MixindError("the name of a file to write is blank. Name a file.")
    path = Path(path)
    if not os.path.isdir(path.parent):
        raise MixindError(f"{path}: the folder {path.parent} does not exist. Make it first.")
    if len(os.fsencode(path.name)) > _LONGEST_NAME:
        raise MixindError(f"{path.name[:40]}..: is too long a name for a file. Use at most {_LONGEST_NAME} bytes.")
    if os.path.isdir(path):
        raise MixindError(f"{path}: is a folder. Name a file.")
    if os.path.lexists(path):
        if not replace:
            raise MixindError(f"{path}: exists already. Choose another name or give --replace.")
        if not os.path.isfile(path):
            raise MixindError(f"{path}: is not a file that can be replaced. Choose another name.")
    return path


_LONGEST_NAME = 200


def write_whole(path: str | Path, content: bytes, replace: bool) -> None:
    """Write a file so that it is there whole or not at all, whatever happens on the way.

    Raises: MixindError as `check_target`, or when the disk or the rights do not allow it.
    """
    import tempfile  # only writing needs it

    # a link is followed, so that the file it points to is replaced and not the link
    path = Path(os.path.realpath(check_target(path, replace)))
    temporary = None
    try:
        handle, temporary = tempfile.mkstemp(dir=path.parent, prefix=f".{path.name}.", suffix=".part")
        with os.fdopen(handle, "wb") as stream:
            stream.write(content)
            stream.flush()
            os.fsync(stream.fileno())
        os.chmod(temporary, 0o666 & ~_umask())
        os.replace(temporary, path)
    except OSError as error:
        if temporary is not None and os.path.exists(temporary):
            os.unlink(temporary)
        raise MixindError(f"{path}: cannot be written: {error.strerror}.") from None


def _umask() -> int:
    mask = os.umask(0)
    os.umask(mask)
    return mask


def toml_text(value: str) -> str:
    """Return `value` as a TOML basic string, quotes and control characters escaped.

    Example:
        >>> print(toml_text('5 "drops"'))
        "5 \\"drops\\""
    """
    escapes = {'"': '\\"', "\\": "\\\\", "\n": "\\n", "\t": "\\t", "\r": "\\r"}
    shown = (escapes.get(c) or (f"\\u{ord(c):04x}" if ord(c) < 32 or ord(c) == 127 else c) for c in value)
    return f'"{"".join(shown)}"'
