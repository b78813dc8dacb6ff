"""Writes docs/hand-calculations.md from the table of formulas; --check says whether it is stale."""

from __future__ import annotations

import sys
from pathlib import Path

from driftwell.forms.paragraph import paragraph
from driftwell.hand.formula import HandKind
from driftwell.hand.table import HAND_KINDS

PAGE = Path(__file__).parents[1] / "docs" / "hand-calculations.md"
WIDTH = 100

HEAD = """\
# Hand calculations

What a formula says of a scenario costs nothing, and is what a run is to be held against.

```sh
driftwell estimate scenarios/rod-trap.toml
```

counts charges, steps, records, memory and disk, and then tells everything below that the scenario
is about: each with its formula, where that is published, where it holds, and whether the scenario
lies there. Nothing is timed and no field is solved; that is for `--measure`, which times the first
steps and tells the same besides. Of a study the largest of its runs is worked out.

What is taken as given:

- The cloud as the scenario states it, at time zero: sizes and density of its shape, the temperature
  of its `motion`. Where none is stated (a list of places, a file) they are the moments of the
  charges as they are placed.
- Fields as they are at time zero, where they step, ramp or pulse later.
- Traps of ideal quadrupoles and uniform magnets along z. What the field of electrodes does, no
  formula here knows; where the step follows from it and it was not solved before, steps are not
  counted either.

## After a run

`driftwell run` ends with the answers of which a formula speaks, and `driftwell info` repeats them:

```text
By hand, and by the run:
  rms size at 4 us: by hand 2.539 mm (Coulomb explosion of a uniform ball); the run 2.528 ±
      0.029 mm: 0.46 % less, 0.4 of its error bars. They agree; the formula is within its range:
      5.678 times its radius at 4 us
```

They agree within two error bars of the run, or one percent. The error bar is the sampling error of
this one run: what step, force sum and macro-particles do is not in it. Where the scenario lies
outside the formula's range the line says why, and the difference judges neither. A question is
compared only where the formula is about the very quantity it asks for: a density or a Debye length
only at the start, a frequency across a magnet only where `near` says which of the two is meant, the
size of a beam only in free flight.

## Cautions

Where a scenario holds hazards, `estimate` and `check` end with the usual cautions: voltages above
1 kV (also those that give charges their energy), electrons above 5 keV (what they begin with, and
all that two electrodes or a field may add) and X-rays, light ions above 2 MeV, magnets above 0.5 T,
laser light, gas. driftwell says nothing of safety: follow your local codes, and have licensed
practitioners plan and check what is built.

## The formulas
"""


def page() -> str:
    """The whole page."""
    return "\n".join([HEAD, *(_section(kind) for kind in HAND_KINDS)])


def _section(kind: HandKind) -> str:
    lines: list[str] = []
    for formula in kind.formulas:
        lines += [f"### {formula.name[0].upper()}{formula.name[1:]}", ""]
        lines += [*paragraph(formula.equation, WIDTH, "    ", "        "), ""]
        lines += [*paragraph(f"Holds for {formula.range}.", WIDTH), ""]
        lines += [*paragraph(f"Source: {formula.source.rstrip('.')}.", WIDTH), ""]
    return "\n".join(lines)


def main(arguments: list[str]) -> int:
    """Write the page, or with --check say whether it is fresh."""
    if "--check" not in arguments:
        PAGE.write_text(page(), encoding="utf-8")
        return 0
    if PAGE.is_file() and PAGE.read_text(encoding="utf-8") == page():
        return 0
    sys.stderr.write(f"{PAGE.name} is stale: run `python tools/hand_calculations.py`.\n")
    return 1


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
