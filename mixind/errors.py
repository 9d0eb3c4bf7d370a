"""Errors of mixind: one line each, saying what is wrong, where, and how to mend it."""

from __future__ import annotations

from collections.abc import Iterable


class MixindError(ValueError):
    """An input or a request that cannot be honoured; the shell prints it and exits with 2.

    Facts about the fault travel as attributes, for callers that want more than the sentence.
    """

    def __init__(self, message: str, **facts: object) -> None:
        super().__init__(message)
        for name, value in facts.items():
            setattr(self, name, value)


class NoAnswer(MixindError):
    """A sound request to which no answer is good enough; the shell prints the best effort and exits with 1."""


def nearest(word: str, known: Iterable[str], most: int = 3) -> str:
    """Return "; did you mean a, b?" for the known words nearest to `word`, or "" when none is near."""
    from difflib import get_close_matches  # only faults need it

    by_folded = {name.casefold(): name for name in known}
    found = get_close_matches(word.casefold(), list(by_folded), n=most, cutoff=0.6)
    return f"; did you mean {', '.join(by_folded[name] for name in found)}?" if found else ""
