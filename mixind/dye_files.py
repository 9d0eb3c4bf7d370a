"""Reading and checking a dye file."""

from __future__ import annotations

import hashlib
import re
from collections.abc import Callable
from itertools import pairwise
from pathlib import Path
from typing import Any

import numpy as np

from mixind import dyes, spectra
from mixind.equilibria import GAS_CONSTANT, REFERENCE_TEMPERATURE, ZERO_CELSIUS
from mixind.errors import MixindError
from mixind.files import Table, parse_toml, read_bytes
from mixind.quantities import AMOUNT_STRENGTH, quantity

MEMORY = "memory"
"""The source of a figure for which no page was found; always resolvable."""

LIMIT_KINDS = ("aggregation", "borate", "chlorine", "concentration", "fading", "ion pair", "light", "metal", "pH",
               "protein", "reducing agent", "salt", "solubility", "surfactant", "temperature")
_CAS = re.compile(r"\d{2,7}-\d{2}-\d")


def read_dye(path: str | Path) -> dyes.Dye:
    """Return the dye described by a file.

    Raises: MixindError listing every fault of the file with its place.
    """
    raw = read_bytes(path)
    table = Table(parse_toml(raw, path), str(path))
    sources = _sources(table.table("sources"))
    reader = _Reader(table, sources)
    dye = reader.dye(hashlib.sha256(raw).hexdigest())
    table.finish()
    return dye


def _sources(table: Table | None) -> dict[str, str]:
    if table is None:
        return {}
    return {key: table.text(key) or "" for key in table.every_key()}


def cas_check_digit_holds(number: str) -> bool:
    """Return whether a CAS registry number is well formed and ends in its check digit.

    Source: CAS, "Check digit verification of CAS registry numbers".
    Example:
        >>> cas_check_digit_holds("7732-18-5")
        True
    """
    if not _CAS.fullmatch(number):
        return False
    *digits, check = (int(c) for c in number if c.isdigit())
    return sum(place * digit for place, digit in enumerate(reversed(digits), 1)) % 10 == check


class _Reader:
    """Takes a dye file apart table by table; faults gather in the root table."""

    def __init__(self, root: Table, sources: dict[str, str]) -> None:
        self.root, self.sources = root, sources

    def source(self, table: Table, key: str = "source") -> str:
        value = table.text(key)
        if isinstance(value, str) and value != MEMORY and value not in self.sources:
            table.fault(key, f"{value!r} is not a key of [sources] nor 'memory'.")
        return value or MEMORY

    def cas(self, table: Table) -> str:
        number = table.text("cas", "")
        if number and not cas_check_digit_holds(number):
            table.fault("cas", f"{number!r} fails the check digit.")
        return number or ""

    def dye(self, digest: str) -> dyes.Dye:
        root = self.root
        identity: dict[str, Any] = {
            "name": root.text("name") or "", "aliases": root.texts("aliases"), "cas": self.cas(root),
            "formula": root.text("formula") or "", "molar_mass": root.number("molar_mass", 50, 5000) or 0.0,
            "salt": root.choice("salt", dyes.SALTS) or "", "family": root.text("family") or "",
            "ion": root.choice("ion", dyes.IONS) or "", "source": self.source(root),
            "by_name_only": root.text("by_name_only", ""), "notes": root.texts("notes")}
        forms = self.forms()
        steps = self.steps(forms)
        labels = [form.label for form in forms]
        rest: dict[str, Any] = {
            "intervals": self.rows("interval", lambda table: self.interval(table, len(steps))),
            "ratios": self.rows("ratio", lambda table: self.ratio(table, labels)),
            "isosbestics": self.rows("isosbestic", lambda table: self.isosbestic(table, labels)),
            "limits": self.rows("limit", self.limit), "hazards": self.rows("hazard", self.hazard),
            "substances": self.rows("substance", self.substance), "make_up": self.make_up(),
            "mixtures": dict(self.rows("mixture", lambda t: (t.text("dye") or "", self.source(t))))}
        root.close()
        return dyes.Dye(**identity, steps=steps, forms=forms, **rest, sources=self.sources, digest=digest)

    def rows(self, key: str, read: Callable[[Table], Any]) -> tuple[Any, ...]:
        found = []
        for table in self.root.tables(key):
            found.append(read(table))
            table.close()
        return tuple(found)

    def forms(self) -> tuple[dyes.Form, ...]:
        forms: tuple[dyes.Form, ...] = self.rows("form", self.form)
        if not forms:
            self.root.fault("form", "is missing. Give at least one [[form]].")
        for upper, lower in pairwise(forms):
            if lower.charge != upper.charge - 1:
                self.root.fault("form", f"{lower.label} must have one charge less than {upper.label}.")
        if len({form.label for form in forms}) < len(forms):
            self.root.fault("form", "two forms have the same label.")
        return forms

    def form(self, table: Table) -> dyes.Form:
        bands = tuple(self.band(row) for row in table.tables("bands", "band"))
        peak = table.table("peak")
        stated, peak_source = None, ""
        if peak is not None:
            stated = (peak.number("wavelength", 300, 800) or 0.0, peak.number("absorptivity", 1, 1e6) or 0.0)
            peak_source = self.source(peak)
            peak.close()
        return dyes.Form(
            label=table.text("label") or "", charge=table.whole("charge", -8, 8) or 0,
            absorptivity=self.spectrum(table, bands), sd=table.number("sd", 0, 1) or 0.0,
            shape_sd=table.number("shape_sd", 0, 1, 0.0), grade=table.choice("grade", dyes.GRADES) or "C",
            source=self.source(table), bands=bands, peak=stated, peak_source=peak_source, note=table.text("note", ""))

    def band(self, table: Table) -> spectra.Band:
        band = spectra.Band(
            wavenumber=table.number("wavenumber", 8000, 40000) or 20000.0, height=table.number("height", 0, 1e6) or 0.0,
            fwhm=table.number("fwhm", 100, 20000) or 4000.0, skew=table.number("skew", 0.2, 5) or 1.0)
        table.close()
        return band

    def spectrum(self, table: Table, bands: tuple[spectra.Band, ...]) -> np.ndarray:
        rows = table.table("table")
        if rows is None:
            if "bands" not in table:
                table.fault("bands", "is missing. Give bands, a table, or bands = [] for a colourless form.")
            return spectra.sum_of_bands(bands, spectra.WAVELENGTH)
        wavelength, values = rows.numbers("wavelength", 200, 1100), rows.numbers("absorptivity", 0, 1e6)
        rows.close()
        if "bands" in table:
            table.fault("table", "stands beside bands. Give one of them.")
        try:
            return spectra.from_table(wavelength, values)
        except MixindError as error:
            table.faults.append(f"{table.where}: {error}")
            return np.zeros_like(spectra.WAVELENGTH)

    def steps(self, forms: tuple[dyes.Form, ...]) -> tuple[dyes.Step, ...]:
        charges = iter([form.charge for form in forms] + [0] * 99)
        steps: tuple[dyes.Step, ...] = self.rows("step", lambda table: self.step(table, next(charges, 0)))
        if len(forms) != len(steps) + 1:
            self.root.fault("form", f"{len(forms)} forms for {len(steps)} steps. Give one form more than steps.")
        for number, (step, after) in enumerate(pairwise(steps), 2):
            if after.pka <= step.pka:
                self.root.fault(f"step {number}", f"pka {after.stated:g} is not above the {step.stated:g} before it.")
        if any(step.slow for step in steps[:-1]):
            self.root.fault("step", "only the last step may be slow.")
        return steps

    def step(self, table: Table, charge: int) -> dyes.Step:
        kind = table.choice("kind", dyes.CONSTANT_KINDS) or "mixed"
        media = {}
        for row in table.tables("medium"):
            media[row.text("name") or ""] = (row.number("pka", -5, 20) or 0.0, row.number("sd", 0, 3) or 0.0, self.source(row))
            row.close()
        pka = table.number("pka", -5, 20)
        slope, slope_source = self.temperature_slope(table)
        salt_factor = table.number("salt_factor", -12, 12, None)
        return dyes.Step(
            stated=0.0 if pka is None else pka, sd=table.number("sd", 0.001, 3) or 0.1, kind=kind,
            ionic_strength=table.number("ionic_strength", 0, 10) or 0.0, charge=charge, source=self.source(table),
            dpka_dt=slope, temperature_source=slope_source, salt_factor=salt_factor,
            salt_factor_source="" if salt_factor is None else self.source(table, "salt_factor_source"),
            slow=table.flag("slow"), note=table.text("note", ""), media=media)

    def temperature_slope(self, table: Table) -> tuple[float | None, str]:
        """Return the slope [1/K] and its source key; van 't Hoff turns an enthalpy into a slope."""
        slope, enthalpy = table.number("dpka_dt", -0.1, 0.1, None), table.number("enthalpy", -200, 200, None)
        if slope is None and enthalpy is None:
            return None, ""
        source = self.source(table, "temperature_source")
        if slope is not None and enthalpy is not None:
            table.fault("enthalpy", "stands beside dpka_dt. Give one of them.")
        if enthalpy is None:
            return slope, source
        kelvin = REFERENCE_TEMPERATURE + ZERO_CELSIUS
        return float(-enthalpy * 1e3 / (np.log(10) * GAS_CONSTANT * kelvin**2)), source

    def interval(self, table: Table, steps: int) -> dyes.Interval:
        low, high = table.number("low", -2, 16) or 0.0, table.number("high", -2, 16) or 0.0
        colours = table.texts("colours")
        if low >= high:
            table.fault("low", f"{low:g} is not below high {high:g}.")
        if len(colours) != 2:
            table.fault("colours", "give two, of the acid and of the alkaline side.")
            colours = ("", "")
        step = table.whole("step", 1, max(steps, 1), 1) or 1
        return dyes.Interval(step, low, high, (colours[0], colours[1]), self.source(table))

    def ratio(self, table: Table, labels: list[str]) -> dyes.Ratio:
        return dyes.Ratio(
            form=table.choice("form", labels) or "", wavelength=table.number("wavelength", 380, 780) or 0.0,
            to_form=table.choice("to_form", labels) or "", to_wavelength=table.number("to_wavelength", 380, 780) or 0.0,
            value=table.number("value", 0, 100) or 0.0, sd=table.number("sd", 0, 10) or 0.0, source=self.source(table))

    def isosbestic(self, table: Table, labels: list[str]) -> dyes.Isosbestic:
        forms = table.texts("forms")
        if len(forms) != 2 or not set(forms) <= set(labels):
            table.fault("forms", f"must name two of {', '.join(labels)}.")
            forms = ("", "")
        return dyes.Isosbestic((forms[0], forms[1]), table.number("wavelength", 300, 800) or 0.0, self.source(table))

    def limit(self, table: Table) -> dyes.Limit:
        written = table.text("concentration", None)
        concentration = None
        if written is not None:
            try:
                concentration = quantity(written, AMOUNT_STRENGTH, "concentration")
            except MixindError as error:
                table.faults.append(f"{table.where}: {error}")
        return dyes.Limit(table.choice("kind", LIMIT_KINDS) or "", table.text("text") or "", self.source(table), concentration)

    def hazard(self, table: Table) -> dyes.Hazard:
        return dyes.Hazard(table.text("code") or "", self.source(table), table.text("note", ""))

    def substance(self, table: Table) -> dyes.Substance:
        return dyes.Substance(
            form=table.choice("form", dyes.SALTS) or "", formula=table.text("formula") or "",
            molar_mass=table.number("molar_mass", 50, 5000) or 0.0, cas=self.cas(table), source=self.source(table))

    def make_up(self) -> dyes.MakeUp | None:
        table = self.root.table("make_up")
        if table is None:
            return None
        solubility = []
        for row in table.tables("solubility"):
            solubility.append((row.text("solvent") or "", row.text("amount") or "", self.source(row)))
            row.close()
        made = dyes.MakeUp(table.text("strength", ""), table.text("solvent", ""), table.text("alkali", ""),
                           self.source(table), tuple(solubility))
        table.close()
        return made
