"""mixind dye list | show | check"""

from __future__ import annotations

from typing import Any

import click

from mixind.cli import options, printing
from mixind.dye_files import read_dye
from mixind.dyes import Dye
from mixind.equilibria import DEFAULT_IONIC_STRENGTH, Solution
from mixind.library import Library
from mixind.quantities import significant
from mixind.version import VERSION


@click.group(no_args_is_help=True)
def command() -> None:
    """List, show and check dyes.

    Example: mixind dye show "methyl red"
    """


@command.command("list")
@options.library_option
@options.json_option
def list_(libraries: tuple[str, ...], as_json: bool) -> None:
    """List the dyes of the library: constants, interval, colours, ion, grade and hazards.

    Example: mixind dye list
    """
    dyes = Library(libraries).all()
    if as_json:
        printing.as_json({"mixind": VERSION, "dyes": [facts(dye) for dye in dyes]})
        return
    rows = [["dye", "pKa (I = 0.1)", "interval", "colours", "ion", "grade", "hazards"]]
    rows += [_listed(dye) for dye in dyes]
    printing.table(rows, indent="")
    printing.remark("not assessed never means safe; the safety data sheet decides")


def _listed(dye: Dye) -> list[str]:
    constants = ", ".join(f"{step.working_pka(Solution()):.2f}" for step in dye.steps) or "none"
    intervals = "; ".join(f"{i.low:g}-{i.high:g}" for i in dye.intervals) or "none"
    colours = "; ".join("/".join(i.colours) for i in dye.intervals) or "always the same"
    return [dye.name, f"({constants})", f"({intervals})", colours, dye.ion, dye.grade, dye.hazard_text]


def facts(dye: Dye) -> dict[str, Any]:
    """Return a dye for JSON."""
    return {
        "name": dye.name, "aliases": list(dye.aliases), "cas": dye.cas, "family": dye.family, "ion": dye.ion,
        "formula": dye.formula, "molar_mass_g_per_mol": dye.molar_mass, "salt": dye.salt, "grade": dye.grade,
        "pKa_at_zero_ionic_strength": [round(step.pka, 3) for step in dye.steps],
        "pKa_at_0.1": [round(step.working_pka(Solution()), 3) for step in dye.steps],
        "intervals": [{"low": i.low, "high": i.high, "colours": list(i.colours)} for i in dye.intervals],
        "hazards": [hazard.code for hazard in dye.hazards], "by_name_only": dye.by_name_only}


@command.command()
@click.argument("name")
@options.library_option
@options.json_option
def show(name: str, libraries: tuple[str, ...], as_json: bool) -> None:
    """Show every figure of the dye NAME with its uncertainty and source.

    Example: mixind dye show "bromothymol blue"
    """
    dye = Library(libraries).find(name)
    if as_json:
        printing.as_json({"mixind": VERSION, **facts(dye)})
        return
    _show_identity(dye)
    _show_steps(dye)
    _show_forms(dye)
    _show_spectral_facts(dye)
    _show_rest(dye)


def _source(dye: Dye, key: str) -> str:
    return dye.sources.get(key, key)


def _show_identity(dye: Dye) -> None:
    printing.result(f"{dye.name} ({', '.join(dye.aliases)})" if dye.aliases else dye.name)
    printing.result(f"  {dye.formula}, {dye.molar_mass:g} g/mol ({dye.salt}), CAS {dye.cas or 'not known'}; "
                    f"{dye.family}, {dye.ion}, grade {dye.grade} [{_source(dye, dye.source)}]")
    for other in dye.substances:
        printing.result(f"  as {other.form}: {other.formula}, {other.molar_mass:g} g/mol, CAS {other.cas or 'not known'} "
                        f"[{_source(dye, other.source)}]")
    if dye.by_name_only:
        printing.result(f"  not in a search unless named: {dye.by_name_only}")


def _show_steps(dye: Dye) -> None:
    for number, step in enumerate(dye.steps):
        pair = f"{dye.forms[number].label}/{dye.forms[number + 1].label}"
        slow = ", slow: left out of a fresh solution" if step.slow else ""
        temperature = "" if step.dpka_dt is None else f", {step.dpka_dt:+.4f} per K [{_source(dye, step.temperature_source)}]"
        if step.salt_factor is not None:
            temperature += f", moves with salt by {step.salt_factor:g} Davies terms [{_source(dye, step.salt_factor_source)}]"
        printing.result(f"  pKa {pair}: {step.pka:.2f} +- {step.sd:.2f} at I = 0, {step.working_pka(Solution()):.2f} at I = "
                        f"{DEFAULT_IONIC_STRENGTH:g}{temperature}{slow}; stated {step.stated:g} ({step.kind}, I = "
                        f"{step.ionic_strength:g}) [{_source(dye, step.source)}]")
        if step.note:
            printing.result(f"    {step.note}")
        for medium, (pka, sd, source) in step.media.items():
            printing.result(f"    in {medium}: {pka:g} +- {sd:g} [{_source(dye, source)}]")


def _show_forms(dye: Dye) -> None:
    for form in dye.forms:
        if form.peak is None:
            printing.result(f"  {form.label}: colourless, grade {form.grade} [{_source(dye, form.source)}]")
            continue
        printing.result(f"  {form.label}: {form.peak[0]:g} nm, {significant(form.peak[1])} L/(mol cm) +- {form.sd:.0%}, grade "
                        f"{form.grade} [{_source(dye, form.peak_source)}]")
        note = f": {form.note}" if form.note else ""
        printing.result(f"    shape +- {form.shape_sd:.0%} [{_source(dye, form.source)}]{note}")


def _show_spectral_facts(dye: Dye) -> None:
    for ratio in dye.ratios:
        printing.result(f"  absorptivity {ratio.form} at {ratio.wavelength:g} nm over {ratio.to_form} at "
                        f"{ratio.to_wavelength:g} nm: {ratio.value:g} +- {ratio.sd:g} [{_source(dye, ratio.source)}]")
    for point in dye.isosbestics:
        printing.result(f"  {point.forms[0]} and {point.forms[1]} absorb alike at {point.wavelength:g} nm "
                        f"[{_source(dye, point.source)}]")
    for other, source in dye.mixtures.items():
        printing.result(f"  printed in a mixture with {other} in spite of opposite charges [{_source(dye, source)}]")


def _show_rest(dye: Dye) -> None:
    for interval in dye.intervals:
        printing.result(f"  turns from {interval.colours[0]} to {interval.colours[1]} over pH "
                        f"{interval.low:g}-{interval.high:g} [{_source(dye, interval.source)}]")
    if dye.make_up:
        alkali = dye.make_up.alkali and f"alkali {dye.make_up.alkali}"
        parts = ", ".join(part for part in (dye.make_up.strength, dye.make_up.solvent, alkali) if part)
        printing.result(f"  stock: {parts} [{_source(dye, dye.make_up.source)}]")
        for solvent, amount, source in dye.make_up.solubility:
            printing.result(f"  soluble in {solvent}: {amount} [{_source(dye, source)}]")
    for limit in dye.limits:
        printing.result(f"  spoiled by {limit.kind}: {limit.text} [{_source(dye, limit.source)}]")
    for hazard in dye.hazards:
        printing.result(f"  hazard {hazard.code}{': ' + hazard.note if hazard.note else ''} [{_source(dye, hazard.source)}]")
    if not dye.hazards:
        printing.result("  hazards not assessed here, which does not mean safe")
    printing.result("  the safety data sheet, local codes and licensed practice decide")
    for note in dye.notes:
        printing.result(f"  note: {note}")


@command.command()
@click.argument("file", type=click.Path())
def check(file: str) -> None:
    """Check a dye file: structure, ranges, sources; all faults at once.

    Example: mixind dye check my_dye.toml
    """
    dye = read_dye(file)
    printing.result(f"{file}: {dye.name}, {len(dye.steps)} steps, {len(dye.forms)} forms, grade {dye.grade}: no fault found")
