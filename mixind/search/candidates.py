"""Which dyes may go into a blend, and which of them may stand together."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import combinations

from mixind.dyes import Dye
from mixind.errors import MixindError
from mixind.library import Library

_MOST_KINDS = 10


@dataclass(frozen=True)
class Choice:
    """The dyes a search may use.

    Attributes:
        dyes: all candidates, sorted by name.
        required: positions of those that must be in the blend.
        most: most dyes in the blend.
        left_out: names of dyes left out unasked, with the reason, for the remarks.
        ion_pairs: whether cationic and anionic dyes may be combined freely.
    """

    dyes: tuple[Dye, ...]
    required: tuple[int, ...]
    most: int
    left_out: dict[str, str]
    ion_pairs: bool = False

    def compatible(self, positions: Sequence[int]) -> bool:
        """Return whether no two of these dyes are expected to precipitate each other."""
        return self.ion_pairs or not any(conflict(self.dyes[a], self.dyes[b]) for a, b in combinations(positions, 2))

    def families(self) -> list[tuple[int, ...]]:
        """Return the largest sets of candidates that go together, each with all required dyes.

        Raises: MixindError when the candidates clash in so many ways that the sets cannot be listed.
        """
        every = frozenset(range(len(self.dyes)))
        if self.ion_pairs:
            return [tuple(sorted(every))]
        clashes = {i: frozenset(j for j in every if conflict(self.dyes[i], self.dyes[j]))
                   for i, dye in enumerate(self.dyes) if dye.ion == "cation"}
        kinds = sorted(set(clashes.values()), key=sorted)
        if len(kinds) > _MOST_KINDS:
            raise MixindError(f"the cationic dyes clash with the others in {len(kinds)} ways, too many to go through. "
                              "Leave some out or allow ion pairs.")
        found = set()
        for size in range(len(kinds) + 1):
            for chosen in combinations(kinds, size):
                shut_out = frozenset().union(*chosen)
                cations = frozenset(i for i, clash in clashes.items() if clash <= shut_out)
                family = cations | (every - shut_out - frozenset(clashes))
                if family >= set(self.required):
                    found.add(tuple(sorted(family)))
        return sorted(found)


def conflict(one: Dye, other: Dye) -> bool:
    """Return whether a cationic dye meets an anionic one that print does not combine it with."""
    opposite = {one.ion, other.ion} == {"cation", "anion"}
    printed = other.name in one.mixtures or one.name in other.mixtures
    return opposite and not printed


def choose(library: Library, only: Sequence[str] = (), with_: Sequence[str] = (), without: Sequence[str] = (),
           most: int = 4, ion_pairs: bool = False) -> Choice:
    """Return the candidates of a search.

    Args:
        library: where dyes are found.
        only: names; when given, nothing else is used.
        with_: names that must be in the blend; naming a dye lifts the reason that keeps it out of searches.
        without: names that must not be in it.
        most: most dyes in the blend, 1 or more.
        ion_pairs: allow cationic with anionic dyes.
    Raises: MixindError when a name is unknown, or the demands contradict each other or leave nothing.
    """
    if most < 1:
        raise MixindError(f"most dyes: {most} is less than 1.")
    named = {dye.name: dye for dye in (library.find(name) for name in [*only, *with_])}
    demanded = {library.find(name).name for name in with_}
    excluded = {library.find(name).name for name in without}
    if both := sorted(demanded & excluded):
        raise MixindError(f"{both[0]} is demanded with and without. Choose one.")
    if len(demanded) > most:
        raise MixindError(f"{len(demanded)} dyes are demanded but at most {most} allowed. Raise the limit or demand fewer.")
    pool = list(named.values()) if only else library.all()
    left_out = {dye.name: dye.by_name_only for dye in pool if dye.by_name_only and dye.name not in named}
    kept = [dye for dye in pool if dye.name not in left_out and dye.name not in excluded]
    kept += [dye for name, dye in named.items() if dye not in kept and name not in excluded]
    if not kept:
        raise MixindError("no dye is left to choose from. Exclude fewer or name some.")
    dyes = tuple(sorted({dye.name: dye for dye in kept}.values(), key=lambda dye: dye.name))
    required = tuple(i for i, dye in enumerate(dyes) if dye.name in demanded)
    choice = Choice(dyes, required, most, left_out, ion_pairs)
    if not choice.compatible(required):
        raise MixindError("the demanded dyes include a cationic and an anionic one, which can precipitate each other. "
                          "Drop one or allow ion pairs.")
    return choice
