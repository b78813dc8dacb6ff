"""What was solved, in words and numbers: `driftwell fields` prints it."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from driftwell.electrodes.form import Electrode
from driftwell.forms import spelled
from driftwell.forms.paragraph import paragraph
from driftwell.forms.waveforms import waveform_words
from driftwell.solved.acting import ActingField
from driftwell.solved.content import content_lines, contents

_DIGITS = 7
_LONGEST = 44
"""Letters of a voltage in the table."""


def summary(
    acting: ActingField, electrode: Sequence[Electrode], radius: float | None, columns: int
) -> list[str]:
    """The table of electrodes, the multipole content, and how far the field is to be trusted.

    radius : m, that the content is given for; None: half the distance to the nearest electrode
    """
    lines = _electrodes(acting, electrode)
    for found in contents(acting, radius):
        lines += ["", *content_lines(found)]
    return [*lines, "", *_trust(acting, columns)]


def _electrodes(acting: ActingField, electrode: Sequence[Electrode]) -> list[str]:
    """One line for each: voltage, capacitance, and what 1 V on it makes at the centre."""
    field = acting.solved
    centre = np.zeros((1, field.map.grid.axes))
    inside = acting.nearest(centre)[0][0] <= 0.0
    per_length = "/m" if field.geometry == "planar" else ""
    potential = field.solution.potential(centre)[:, 0]
    pushed = np.linalg.norm(field.solution.field(centre)[:, 0], axis=1)
    rows = [("electrode", "voltage", "capacitance", "potential", "field")]
    for number in range(len(potential)):
        grounded = number >= len(electrode)
        words = "grounded" if grounded else waveform_words(electrode[number].voltage, "V")
        own = float(field.solution.capacitance[number, number])
        rows.append(
            (
                field.names[number],
                words if len(words) <= _LONGEST else f"{words[: _LONGEST - 3]}...",
                spelled(own, f"F{per_length}", _DIGITS),
                "-" if inside else f"{potential[number]:.6f} V",
                "-" if inside else f"{pushed[number]:.5g} V/m",
            )
        )
    widths = [max(len(row[k]) for row in rows) for k in range(len(rows[0]))]
    lines = ["  ".join(text.ljust(w) for text, w in zip(row, widths, strict=True)) for row in rows]
    note = "the centre lies in an electrode" if inside else "at the centre, for 1 V"
    return [*(line.rstrip() for line in lines), f"(potential and field: {note})"]


def _trust(acting: ActingField, columns: int) -> list[str]:
    field = acting.solved
    solution, mapped = field.solution, field.map
    nodes = " x ".join(str(n) for n in mapped.grid.counts)
    spatial = field.geometry == "spatial"
    what = "potentials and fields differ" if spatial else "potentials on the surfaces err"
    texts = [
        f"boundary: {len(solution.panels.size)} surface charges; {what} by {solution.error:.1e} at "
        f"the most{' from those of a coarser solution' * spatial}",
        f"map: {nodes} nodes; {mapped.reached.words()}",
        f"in all: rms error of the field {field.error:.1e}",
        f"region: {acting.edges.words()}",
    ]
    return [line for text in texts for line in paragraph(text, columns, "", "  ")]
