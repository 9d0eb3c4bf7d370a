"""Write mixind/viewers.csv and mixind/deficiencies.csv from the tables of colour-science.

    python .ci/freeze_viewers.py
"""

from __future__ import annotations

from importlib.metadata import version

from mixind.viewing import (
    DEFICIENCIES,
    DEFICIENCY_TABLE,
    FROZEN_TABLE,
    ILLUMINANTS,
    OBSERVERS,
    colour_science,
    weights_from_colour_science,
)


def viewer_lines() -> list[str]:
    """Return the lines of the table of viewers."""
    lines = ["# Viewer matrices on 380-780 nm at 5 nm: lamp, observer [degree], axis, then 81 weights; white has Y = 1.",
             f"# Made by .ci/freeze_viewers.py from colour-science {version('colour-science')}."]
    for illuminant in ILLUMINANTS:
        for observer in OBSERVERS:
            weights = weights_from_colour_science(illuminant, observer)
            for axis, column in zip("XYZ", weights.T, strict=True):
                lines.append(f"{illuminant},{observer},{axis}," + ",".join(f"{value:.12g}" for value in column))
    return lines


def deficiency_lines() -> list[str]:
    """Return the lines of the table of colour-deficient eyes."""
    tables = colour_science().blindness.CVD_MATRICES_MACHADO2010
    lines = ["# Machado, Oliveira and Fernandes (2009), table 1: eyes, severity, then the matrix on linear sRGB, row by row.",
             f"# Made by .ci/freeze_viewers.py from colour-science {version('colour-science')}."]
    for eyes, name in DEFICIENCIES.items():
        for tenth in range(11):
            matrix = tables[name][tenth / 10].ravel()
            lines.append(f"{eyes},{tenth / 10:g}," + ",".join(f"{value:.6f}" for value in matrix))
    return lines


def main() -> None:
    FROZEN_TABLE.write_text("\n".join(viewer_lines()) + "\n", encoding="ascii")
    DEFICIENCY_TABLE.write_text("\n".join(deficiency_lines()) + "\n", encoding="ascii")


if __name__ == "__main__":
    main()
