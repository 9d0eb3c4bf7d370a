"""What a sample is and how it is looked at, in one value that every answer states."""

from __future__ import annotations

from dataclasses import asdict, dataclass, replace
from typing import Any

from mixind import equilibria, quantities, viewing
from mixind.equilibria import Solution
from mixind.errors import MixindError
from mixind.files import Table, toml_text
from mixind.viewing import Vessel, Viewer


@dataclass(frozen=True)
class Conditions:
    """Sample, vessel, lamp and eye. Checked on construction, but for the lamp, which is looked up when it is needed.

    Attributes:
        vessel: one of `viewing.VESSELS`; `path` from wall to wall [cm].
        light, observer, eyes, severity: of the viewer; see `viewing.viewer`.
        temperature [C], ionic_strength [mol/L], aged, medium: of the sample; see `equilibria.Solution`.
    """

    vessel: str = "clear"
    path: float = 1.0
    light: str = "D65"
    observer: str = "2"
    eyes: str = "normal"
    severity: float = 1.0
    temperature: float = equilibria.REFERENCE_TEMPERATURE
    ionic_strength: float = equilibria.DEFAULT_IONIC_STRENGTH
    aged: bool = False
    medium: str | None = None

    def __post_init__(self) -> None:
        self.make_vessel()
        self.solution()
        viewing.check_viewer(self.observer, self.eyes, self.severity)

    def solution(self) -> Solution:
        """Return what the equilibria depend on."""
        return Solution(self.temperature, self.ionic_strength, self.aged, self.medium)

    def make_vessel(self) -> Vessel:
        """Return the vessel."""
        return viewing.vessel(self.vessel, self.path)

    def make_viewer(self) -> Viewer:
        """Return the viewer; raises MixindError for a lamp that nobody knows."""
        return viewing.viewer(self.light, self.observer, self.eyes, self.severity)

    def describe(self) -> str:
        """Return the conditions in one line of words."""
        salt = f"{self.temperature:g} C, ionic strength {self.ionic_strength:g} mol/L"
        fresh = "aged solution" if self.aged else "fresh solution"
        return f"{self.vessel} vessel, {self.path:g} cm; {self.make_viewer().describe()}; {salt}, {fresh}"

    def remarks(self) -> list[str]:
        """Return what has to be said about the conditions themselves."""
        if self.ionic_strength <= equilibria.DAVIES_LIMIT:
            return []
        return [f"ionic strength {self.ionic_strength:g} mol/L is beyond the activity correction, which stays at its value "
                f"for {equilibria.DAVIES_LIMIT:g}"]

    def facts(self) -> dict[str, Any]:
        """Return the conditions for JSON, units in the keys."""
        names = {"path": "path_cm", "temperature": "temperature_C", "ionic_strength": "ionic_strength_mol_per_L"}
        return {names.get(key, key): value for key, value in asdict(self).items()}


_NUMBERS = {"severity": (0.0, 1.0), "temperature": (0.0, 100.0), "ionic_strength": (0.0, 10.0)}


def read_conditions(table: Table | None) -> dict[str, Any]:
    """Return the conditions a blend file states, as keyword arguments of `Conditions`; faults go to the table."""
    if table is None:
        return {}
    stated: dict[str, Any] = {}
    for key, known in (("vessel", viewing.VESSELS), ("observer", viewing.OBSERVERS), ("eyes", viewing.EYES)):
        if key in table:
            stated[key] = table.choice(key, known)
    for key in ("light", "medium"):
        if key in table:
            stated[key] = table.text(key)
    if "aged" in table:
        stated["aged"] = table.flag("aged")
    for key, (low, high) in _NUMBERS.items():
        if key in table:
            stated[key] = table.number(key, low, high)
    if "path" in table:
        written = table.text("path")
        try:
            stated["path"] = quantities.path_length(written or "1 cm")
        except MixindError as error:
            table.faults.append(f"{table.where}: {error}")
    table.close()
    return {key: value for key, value in stated.items() if value is not None}


def conditions_text(stated: dict[str, Any]) -> str:
    """Return stated conditions as the lines of a [conditions] table, "" when there are none."""
    if not stated:
        return ""
    lines = ["", "[conditions]"]
    for key, value in stated.items():
        lines.append(f"{key} = {_written(key, value)}")
    return "\n".join(lines) + "\n"


def _written(key: str, value: Any) -> str:
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        return toml_text(value)
    return f'"{value!r} cm"' if key == "path" else repr(value)


def differing(asked: Conditions, stated: dict[str, Any]) -> list[str]:
    """Return a remark for each condition that was stated with a blend and asked for otherwise."""
    stated_conditions = replace(asked, **stated)
    return [f"the blend was made for {key} {getattr(stated_conditions, key)}{_UNITS.get(key, '')}, shown is "
            f"{getattr(asked, key)}{_UNITS.get(key, '')}"
            for key in stated if getattr(stated_conditions, key) != getattr(asked, key)]


_UNITS = {"path": " cm", "temperature": " C", "ionic_strength": " mol/L"}
