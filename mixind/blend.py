"""Blends: which dyes a stock holds and how strong, and how much of it a sample gets."""

from __future__ import annotations

import hashlib
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import numpy as np

from mixind import dyes
from mixind.conditions import conditions_text, read_conditions
from mixind.dyes import Dye
from mixind.errors import MixindError
from mixind.files import Table, parse_toml, read_bytes, toml_text
from mixind.library import Library
from mixind.quantities import Dose, Strength, content, dose, pH_series, significant, strength

DEFAULT_DOSE = Dose(0.2, 10.0)


@dataclass(frozen=True)
class Component:
    """One dye of a blend.

    Attributes:
        dye: the dye.
        strength: in the stock, of dye and not of powder.
        form: the salt whose mass the strength counts, when it is not the main entry of the dye file.
        content: share of dye in the powder that is weighed, above 0 to 1, or None when unknown.
    """

    dye: Dye
    strength: Strength
    form: str | None = None
    content: float | None = None

    def __post_init__(self) -> None:
        if not (np.isfinite(self.strength.value) and self.strength.value >= 0):
            raise MixindError(f"{self.dye.name}: strength {self.strength.value} is not zero or more.")
        self.molar_mass  # noqa: B018 - refuses an unknown form now

    @property
    def molar_mass(self) -> float:
        """Molar mass of the salt whose mass is counted [g/mol]; MixindError for a salt the dye's file does not know."""
        if self.form is None or self.form == self.dye.salt:
            return self.dye.molar_mass
        for substance in self.dye.substances:
            if substance.form == self.form:
                return substance.molar_mass
        known = [self.dye.salt, *(substance.form for substance in self.dye.substances)]
        raise MixindError(f"{self.dye.name}: form {self.form!r} is not in its file. Known: {', '.join(known)}.")

    @property
    def moles_per_litre(self) -> float:
        """Concentration in the stock [mol/L]."""
        return self.strength.moles_per_litre(self.molar_mass)

    @property
    def grams_per_litre(self) -> float:
        """Strength of the stock [g/L], counted as the salt of `form`."""
        return self.strength.grams_per_litre(self.molar_mass)


@dataclass(frozen=True)
class Blend:
    """A stock solution of one or more dyes and the dose it is meant for.

    Attributes:
        title: what it is for.
        dose: stock into sample.
        components: at least one; each dye once.
        conditions: what the blend file states, as keyword arguments of `Conditions`; may be empty.
        span: pH it is meant for, as `quantities.pH_series` reads it, such as "4:10:1"; "" when not stated.
        solvent, alkali, stock_ph: how the stock is made up, "" or None when not stated.
        remarks: what the maker has to know, printed with every answer.
    """

    title: str
    dose: Dose
    components: tuple[Component, ...]
    conditions: Mapping[str, Any] = field(default_factory=dict)
    span: str = ""
    solvent: str = ""
    alkali: str = ""
    stock_ph: float | None = None
    remarks: tuple[str, ...] = ()

    def __post_init__(self) -> None:
        if not self.components:
            raise MixindError(f"{self.title}: has no component. Give at least one [[component]].")
        names = [component.dye.name for component in self.components]
        for name in names:
            if names.count(name) > 1:
                raise MixindError(f"{self.title}: {name} stands {names.count(name)} times. Add the strengths up.")

    @property
    def dyes(self) -> tuple[Dye, ...]:
        """The dyes, in the order of the components."""
        return tuple(component.dye for component in self.components)

    def sample_concentrations(self, dose_factor: float = 1.0) -> np.ndarray:
        """Return the concentration of each dye in the sample, (n,) [mol/L], at so many times the dose."""
        stock = np.array([component.moles_per_litre for component in self.components])
        return stock * self.dose.share(dose_factor)

    def facts(self) -> dict[str, Any]:
        """Return dose and components for JSON."""
        return {"title": self.title, "dose": str(self.dose), "components": [
            {"dye": c.dye.name, "strength_mg_per_L": round(c.grams_per_litre * 1e3, 6),
             "strength_umol_per_L": round(c.moles_per_litre * 1e6, 6), "grade": c.dye.grade} for c in self.components]}

    def beyond_limits(self) -> list[str]:
        """Return a remark for each dye of which the sample gets more than dissolves or than the model holds for."""
        remarks = []
        for dye, concentration in zip(self.dyes, self.sample_concentrations(), strict=True):
            for limit in dye.limits:
                if limit.concentration is not None and concentration > limit.concentration * (1 + 1e-6):
                    remarks.append(f"{dye.name}: {significant(concentration * 1e6)} umol/L in the sample, "
                                   f"{limit.concentration * 1e6:g} umol/L allowed: {limit.kind}: {limit.text}")
        return remarks

    def digest(self) -> str:
        """Return twelve hexadecimal digits that change when the data of one of the dyes changes."""
        return hashlib.sha256("".join(dye.digest for dye in self.dyes).encode()).hexdigest()[:12]


def blend_of(dyes_used: Sequence[Dye], sample_concentrations: np.ndarray, made_for: Dose, title: str) -> Blend:
    """Return the blend that brings given concentrations into the sample at its dose.

    Args:
        dyes_used: n dyes, each once.
        sample_concentrations: (n,), zero or more [mol/L].
        made_for: the dose.
    Raises: MixindError when there is no dye, or one twice.
    """
    stock = np.asarray(sample_concentrations) / made_for.share()
    components = tuple(
        Component(dye, Strength(float(c) * dye.molar_mass, by_mass=True)) for dye, c in zip(dyes_used, stock, strict=True))
    return Blend(title, made_for, components)


def read_blend(path: str | Path, library: Library) -> Blend:
    """Return the blend of a file; "-" is standard input.

    Raises: MixindError listing every fault of the file, or for a dye that is not in the library.
    """
    table = Table(parse_toml(read_bytes(path), path), "standard input" if str(path) == "-" else str(path))
    written_dose = table.text("dose", str(DEFAULT_DOSE))
    components = tuple(_component(row, library) for row in table.tables("component"))
    stock_ph = table.number("stock_ph", -1, 15, None)
    stated: dict[str, Any] = {
        "title": table.text("title", "untitled blend"), "conditions": read_conditions(table.table("conditions")),
        "span": _span(table), "solvent": table.text("solvent", ""), "alkali": table.text("alkali", ""),
        "remarks": table.texts("remarks")}
    made_for = DEFAULT_DOSE
    try:
        made_for = dose(written_dose)
    except MixindError as error:
        table.faults.append(f"{table.where}: {error}")
    if not components and "component" not in table:
        table.fault("component", "is missing. Give at least one [[component]].")
    table.close()
    table.finish()
    return Blend(dose=made_for, components=tuple(c for c in components if c), stock_ph=stock_ph, **stated)


def _span(table: Table) -> str:
    """Return the pH span a blend file states, "" when it states none."""
    written = table.text("ph", "")
    try:
        if written:
            pH_series(written)
    except MixindError as error:
        table.faults.append(f"{table.where}: {error}")
    return written or ""


def _component(table: Table, library: Library) -> Component | None:
    name, written = table.text("dye"), table.text("strength")
    form, written_content = table.choice("form", dyes.SALTS, None), table.text("content", None)
    table.close()
    if name is None or written is None:
        return None
    try:
        dye_content = None if written_content is None else content(written_content)
        return Component(library.find(name), strength(written), form, dye_content)
    except MixindError as error:
        table.faults.append(f"{table.where}: {error}")
        return None


def blend_text(blend: Blend) -> str:
    """Return a blend as the text of a blend file, strengths in mg/L with the digits they carry."""
    lines = [f"title = {toml_text(blend.title)}", f'dose = "{blend.dose}"']
    lines += [f"ph = {toml_text(blend.span)}"] if blend.span else []
    lines += [f"{key} = {toml_text(value)}" for key, value in (("solvent", blend.solvent), ("alkali", blend.alkali)) if value]
    if blend.stock_ph is not None:
        lines.append(f"stock_ph = {blend.stock_ph:g}")
    if blend.remarks:
        lines.append(f"remarks = [{', '.join(toml_text(remark) for remark in blend.remarks)}]")
    for component in blend.components:
        lines += ["", "[[component]]", f"dye = {toml_text(component.dye.name)}",
                  f'strength = "{mg_per_litre(component)} mg/L"']
        lines += [f"form = {toml_text(component.form)}"] if component.form else []
        lines += [f'content = "{component.content * 100:g} %"'] if component.content is not None else []
    return "\n".join(lines) + "\n" + conditions_text(dict(blend.conditions))


def mg_per_litre(component: Component) -> str:
    """Return the strength of a component in mg/L, as many digits as it has, at least three figures."""
    value = component.grams_per_litre * 1e3
    short = f"{value:.6g}"
    return significant(value) if len(short.replace(".", "").strip("0")) < 3 else f"{float(short):g}"
