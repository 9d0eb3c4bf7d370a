"""Formulate pH indicators by computation: which dyes, how much, and what colour at each pH.

The names below are the public ones; each is documented where it is defined. A name is imported when it is first used,
so that the command line starts fast.
"""

from importlib import import_module
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from mixind.blend import Blend as Blend
    from mixind.blend import Component as Component
    from mixind.blend import blend_text as blend_text
    from mixind.blend import read_blend as read_blend
    from mixind.conditions import Conditions as Conditions
    from mixind.dye_files import read_dye as read_dye
    from mixind.dyes import Dye as Dye
    from mixind.errors import MixindError as MixindError
    from mixind.errors import NoAnswer as NoAnswer
    from mixind.library import Library as Library
    from mixind.prediction import Prediction as Prediction
    from mixind.prediction import predict as predict
    from mixind.quantities import Dose as Dose
    from mixind.quantities import Strength as Strength
    from mixind.search.candidates import choose as choose
    from mixind.search.formulate import formulate as formulate
    from mixind.search.problem import Task as Task

_HOMES = {
    "blend": ("Blend", "Component", "blend_text", "read_blend"), "conditions": ("Conditions",), "dye_files": ("read_dye",),
    "dyes": ("Dye",), "errors": ("MixindError", "NoAnswer"), "library": ("Library",), "prediction": ("Prediction", "predict"),
    "quantities": ("Dose", "Strength"), "search.candidates": ("choose",), "search.formulate": ("formulate",),
    "search.problem": ("Task",)}

__all__ = sorted(name for names in _HOMES.values() for name in names)


def __getattr__(name: str) -> object:
    for home, names in _HOMES.items():
        if name in names:
            return getattr(import_module(f"mixind.{home}"), name)
    raise AttributeError(f"module 'mixind' has no attribute {name!r}")
