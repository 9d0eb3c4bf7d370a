"""A dye: the constants of its steps, the absorption spectra of its forms, and where each figure came from."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from functools import cached_property

import numpy as np

from mixind import equilibria, spectra
from mixind.equilibria import Solution

GRADES = ("A", "B", "C")
"""A: independent sources agree; B: one source, or several that disagree for a known reason; C: memory or analogy."""

NOT_CLASSIFIED = "not classified"
"""Code of a hazard row that says that a supplier lists no hazard."""

IONS = ("anion", "zwitterion", "neutral", "cation")
SALTS = ("free acid", "free base", "sodium salt", "calcium salt", "ammonium salt", "hydrochloride", "chloride", "oxalate")

# By how much the multiple of the Davies term differs from that of a mixed constant, for which it is 2z - 1.
_KIND_OFFSET = {"mixed": 0, "concentration": -1, "total-scale": -1}
CONSTANT_KINDS = ("thermodynamic", *_KIND_OFFSET)

# log10(1 + S_T/K_S) in sea water of salinity 35 at 25 C, S_T = 0.0282 and K_S = 0.100 mol/kg: the step from the
# total to the free scale. Dickson, Sabine and Christian, Guide to best practices, PICES 3 (2007) (from memory).
_TOTAL_TO_FREE = math.log10(1 + 0.0282 / 0.100)

_UNKNOWN_SLOPE_SD = 0.01
"""Standard uncertainty of a temperature slope that nobody states [1/K]: the spread of those in the library, which run from
-0.003 to -0.014."""

VISIBLE = (400.0, 700.0)
"""Range in which a form counts as coloured and in which peak absorbance is limited [nm]."""
_VISIBLE_INDEX = (spectra.WAVELENGTH >= VISIBLE[0]) & (spectra.WAVELENGTH <= VISIBLE[1])
_COLOURLESS_BELOW = 300.0


@dataclass(frozen=True)
class Step:
    """One dissociation step.

    Attributes:
        stated: the constant as its source states it.
        sd: its standard uncertainty.
        kind: "thermodynamic", "mixed" (pH as activity, forms as concentrations), "concentration" or "total-scale".
        ionic_strength: of the solution in which it was measured [mol/L].
        charge: of the step's acid form.
        source: key in the dye's `sources`.
        dpka_dt: change with temperature near 25 C [1/K], or None when it is not known.
        salt_factor: replaces 2z - 1 as the multiple of the Davies term, or None.
        slow: whether the step takes minutes or more, so that a fresh solution has not gone through it.
        media: constants for named media, used there as they are: name to (pKa, sd, source).
    """

    stated: float
    sd: float
    kind: str
    ionic_strength: float
    charge: int
    source: str
    dpka_dt: float | None = None
    temperature_source: str = ""
    salt_factor: float | None = None
    salt_factor_source: str = ""
    slow: bool = False
    note: str = ""
    media: dict[str, tuple[float, float, str]] = field(default_factory=dict)

    @property
    def davies_factor(self) -> float:
        """Multiple of the Davies term by which the mixed constant moves with ionic strength."""
        return 2 * self.charge - 1 if self.salt_factor is None else self.salt_factor

    @cached_property
    def pka(self) -> float:
        """The constant at zero ionic strength and 25 C."""
        if self.kind == "thermodynamic":
            return self.stated
        factor = self.davies_factor + _KIND_OFFSET[self.kind]
        scale = _TOTAL_TO_FREE if self.kind == "total-scale" else 0.0
        return self.stated + scale - factor * equilibria.davies(self.ionic_strength)

    def working_pka(self, solution: Solution) -> float:
        """Return the mixed constant that holds in `solution`."""
        if solution.medium in self.media:
            return self.media[solution.medium][0]
        activity = self.davies_factor * equilibria.davies(solution.ionic_strength, solution.temperature)
        return self.pka + activity + (self.dpka_dt or 0.0) * (solution.temperature - equilibria.REFERENCE_TEMPERATURE)

    def working_sd(self, solution: Solution) -> float:
        """Return the standard uncertainty of the working constant, larger off 25 C where the slope is not known."""
        if solution.medium in self.media:
            return self.media[solution.medium][1]
        off = abs(solution.temperature - equilibria.REFERENCE_TEMPERATURE) if self.dpka_dt is None else 0.0
        return math.hypot(self.sd, _UNKNOWN_SLOPE_SD * off)


@dataclass(frozen=True, eq=False)
class Form:
    """One protonation state and its spectrum.

    Attributes:
        label: such as "HIn-".
        charge: of the dye in this form.
        absorptivity: decadic molar absorptivity on the wavelength grid, (81,) [L mol-1 cm-1].
        sd: relative standard uncertainty of its height.
        shape_sd: relative standard uncertainty of its shape; 0.1 where the shape is a guess.
        grade: "A", "B" or "C".
        bands: the bands it is made of; empty for a table or a colourless form.
        peak: stated maximum as (wavelength [nm], absorptivity [L mol-1 cm-1]), or None.
    """

    label: str
    charge: int
    absorptivity: np.ndarray
    sd: float
    shape_sd: float
    grade: str
    source: str
    bands: tuple[spectra.Band, ...] = ()
    peak: tuple[float, float] | None = None
    peak_source: str = ""
    note: str = ""

    @property
    def coloured(self) -> bool:
        """Whether the form absorbs visible light noticeably."""
        return bool(self.absorptivity[_VISIBLE_INDEX].max() > _COLOURLESS_BELOW)


@dataclass(frozen=True)
class Interval:
    """A printed visual transition interval; `step` counts from 1."""

    step: int
    low: float
    high: float
    colours: tuple[str, str]
    source: str


@dataclass(frozen=True)
class Ratio:
    """A published ratio of absorptivities: of a form at a wavelength to a form at a wavelength."""

    form: str
    wavelength: float
    to_form: str
    to_wavelength: float
    value: float
    sd: float
    source: str


@dataclass(frozen=True)
class Isosbestic:
    """A wavelength [nm] at which two forms absorb equally."""

    forms: tuple[str, str]
    wavelength: float
    source: str


@dataclass(frozen=True)
class Limit:
    """What spoils the colour or the model; `concentration` is a bound on the dye in the sample [mol/L], or None."""

    kind: str
    text: str
    source: str
    concentration: float | None = None


@dataclass(frozen=True)
class Hazard:
    """An H-statement or a word on toxicity, with its source."""

    code: str
    source: str
    note: str = ""


@dataclass(frozen=True)
class Substance:
    """Another salt of the dye that can be weighed instead."""

    form: str
    formula: str
    molar_mass: float
    cas: str
    source: str


@dataclass(frozen=True)
class MakeUp:
    """How a stock is usually made up."""

    strength: str
    solvent: str
    alkali: str
    source: str
    solubility: tuple[tuple[str, str, str], ...] = ()
    """(solvent, as written, source)"""


@dataclass(frozen=True, eq=False)
class Dye:
    """A dye with everything the program knows of it; see DEVELOPERS.md for the file it is read from.

    Two dyes are equal when they come from files of the same content.

    Attributes (beside the obvious):
        formula, molar_mass: of the main entry, whose `salt` says what it is [g/mol].
        ion: what it is in a stock, for ion pairs: "anion", "zwitterion", "neutral" or "cation".
        steps, forms: n steps and n + 1 forms, most protonated first.
        by_name_only: why a search leaves the dye out unless it is named; "" when it does not.
        mixtures: other dyes with which print combines it, with sources, though their charges are opposite.
        sources: key to citation.
        digest: SHA-256 of the file it came from.
    """

    name: str
    aliases: tuple[str, ...]
    cas: str
    formula: str
    molar_mass: float
    salt: str
    family: str
    ion: str
    source: str
    steps: tuple[Step, ...]
    forms: tuple[Form, ...]
    intervals: tuple[Interval, ...] = ()
    ratios: tuple[Ratio, ...] = ()
    isosbestics: tuple[Isosbestic, ...] = ()
    limits: tuple[Limit, ...] = ()
    hazards: tuple[Hazard, ...] = ()
    substances: tuple[Substance, ...] = ()
    make_up: MakeUp | None = None
    by_name_only: str = ""
    mixtures: dict[str, str] = field(default_factory=dict)
    notes: tuple[str, ...] = ()
    sources: dict[str, str] = field(default_factory=dict)
    digest: str = ""

    def __eq__(self, other: object) -> bool:
        return isinstance(other, Dye) and (self.name, self.digest) == (other.name, other.digest)

    def __hash__(self) -> int:
        return hash((self.name, self.digest))

    @property
    def grade(self) -> str:
        """The worst grade among the forms that are coloured; among all forms when none is."""
        coloured = [form.grade for form in self.forms if form.coloured]
        return max(coloured or [form.grade for form in self.forms])

    @property
    def hazard_text(self) -> str:
        """The H-statements in one line; "not assessed" when there are none, which never means safe."""
        codes = [hazard.code for hazard in self.hazards]
        classified = [code for code in codes if code != NOT_CLASSIFIED]
        if classified and len(classified) < len(codes):
            return f"{', '.join(classified)} (not by all suppliers)"
        return ", ".join(codes) or "not assessed"

    @property
    def largest_concentration(self) -> float:
        """The least of the stated bounds on its concentration in the sample [mol/L]; infinite without one."""
        return min((limit.concentration for limit in self.limits if limit.concentration), default=np.inf)

    def active_steps(self, solution: Solution) -> tuple[Step, ...]:
        """Return the steps that have come to rest in `solution`: all, or all but slow ones when it is fresh."""
        return tuple(step for step in self.steps if solution.aged or not step.slow)

    def fractions(self, pH: np.ndarray, solution: Solution) -> np.ndarray:
        """Return the share of each form that takes part in `solution`, (P, S)."""
        constants = [step.working_pka(solution) for step in self.active_steps(solution)]
        return equilibria.fractions(pH, np.array(constants))

    def absorptivity(self, solution: Solution) -> np.ndarray:
        """Return the absorptivities of the forms that take part in `solution`, (S, 81) [L mol-1 cm-1]."""
        return np.array([form.absorptivity for form in self.forms[:len(self.active_steps(solution)) + 1]])

    def absorptivity_at(self, pH: np.ndarray, solution: Solution) -> np.ndarray:
        """Return the absorptivity of the dye at each pH, (P, 81) [L mol-1 cm-1]."""
        return np.asarray(self.fractions(pH, solution) @ self.absorptivity(solution))


def visible_peak(absorptivity: np.ndarray) -> np.ndarray:
    """Return the largest value over 400-700 nm along the last axis, which is the wavelength grid."""
    return np.asarray(absorptivity[..., _VISIBLE_INDEX].max(axis=-1))
