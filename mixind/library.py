"""Finding dyes: the bundled library and the folders that a user adds."""

from __future__ import annotations

import os
import re
from collections.abc import Sequence
from pathlib import Path

from mixind.dye_files import read_dye
from mixind.dyes import Dye
from mixind.errors import MixindError, nearest

LIBRARY_VARIABLE = "MIXIND_LIBRARY"


def bundled_folder() -> Path:
    """Return the folder of the bundled dye files: inside the installed package, else beside it in a checkout."""
    package = Path(__file__).parent
    inside = package / "dye_library"
    return inside if inside.is_dir() else package.parent / "dye_library"


def _folded(name: str) -> str:
    return re.sub(r"[^a-z0-9]+", "_", name.casefold()).strip("_")


class Library:
    """Dyes by name. A file in a later folder stands in front of one with the same name in an earlier folder."""

    def __init__(self, folders: Sequence[str | Path] = ()) -> None:
        """Use the bundled dyes, those of the folder in MIXIND_LIBRARY if set, and those of `folders`.

        Raises: MixindError when a folder does not exist.
        """
        from_variable = os.environ.get(LIBRARY_VARIABLE)
        added = [Path(folder) for folder in ([from_variable] if from_variable else []) + list(folders)]
        for folder in added:
            if not os.path.isdir(folder):
                raise MixindError(f"{folder}: is not a folder of dye files.")
        paths = [path for folder in (bundled_folder(), *added) for path in sorted(folder.glob("*.toml"))]
        self._paths = {_folded(path.stem): path for path in paths}
        self._read: dict[str, Dye] = {}

    def _dye(self, stem: str) -> Dye:
        if stem not in self._read:
            dye = read_dye(self._paths[stem])
            if _folded(dye.name) != stem:
                raise MixindError(f"{self._paths[stem]}: holds {dye.name}. Name the file {_folded(dye.name)}.toml.")
            self._read[stem] = dye
        return self._read[stem]

    def all(self) -> list[Dye]:
        """Return every dye, sorted by name."""
        return sorted((self._dye(stem) for stem in self._paths), key=lambda dye: dye.name.casefold())

    def find(self, name: str) -> Dye:
        """Return the dye of this name or alias, whatever its case and punctuation.

        Raises: MixindError with the nearest names when there is none.
        """
        folded = _folded(name)
        if folded in self._paths:
            return self._dye(folded)
        names = {known: dye for dye in self.all() for known in (*dye.aliases, dye.name)}
        for known, dye in names.items():
            if _folded(known) == folded:
                return dye
        raise MixindError(f"dye {name!r} is not in the library{nearest(name, names) or '.'} `mixind dye list` shows all.")
