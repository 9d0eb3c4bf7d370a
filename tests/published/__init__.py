"""Published figures that decide how far a user trusts the program, one table per subject, each row with its source."""

from __future__ import annotations

import csv
from pathlib import Path


def rows(name: str) -> list[dict[str, str]]:
    """Return the rows of a table of this folder, comment lines left out."""
    with (Path(__file__).parent / f"{name}.csv").open(encoding="utf-8", newline="") as stream:
        return list(csv.DictReader(line for line in stream if not line.startswith("#")))
