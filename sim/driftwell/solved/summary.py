"""What was solved, in words and numbers: `driftwell fields` prints it."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from driftwell.electrodes.form import Electrode
from driftwell.forms import spelled
from driftwell.forms.paragraph import paragraph
from driftwell.forms.waveforms import waveform_words
from driftwell.solved.solved_field import SolvedField

_DIGITS = 7


def summary(field: SolvedField, electrode: Sequence[Electrode], columns: int) -> list[str]:
    """The table of electrodes, and how far the field is to be trusted."""
    return [*_electrodes(field, electrode), "", *_trust(field, columns)]


def _electrodes(field: SolvedField, electrode: Sequence[Electrode]) -> list[str]:
    """One line for each: voltage, capacitance, and what 1 V on it makes at the centre."""
    voltages = [waveform_words(each.voltage, "V") for each in electrode]
    voltages += ["grounded"] * (len(field.names) - len(voltages))
    centre = np.zeros((1, field.map.grid.axes))
    rows = [("electrode", "voltage", "capacitance", "potential", "field")]
    per_length = "/m" if field.geometry == "planar" else ""
    for number, (name, voltage) in enumerate(zip(field.names, voltages, strict=True)):
        unit = np.eye(len(field.names))[number]
        potential, pushed = field.map.values(centre, unit)
        own = field.solution.capacitance[number, number]
        rows.append(
            (
                name,
                voltage,
                spelled(float(own), f"F{per_length}", _DIGITS),
                f"{potential[0]:.6f} V",
                f"{np.linalg.norm(pushed[0]):.5g} V/m",
            )
        )
    widths = [max(len(row[k]) for row in rows) for k in range(len(rows[0]))]
    lines = ["  ".join(text.ljust(w) for text, w in zip(row, widths, strict=True)) for row in rows]
    lines[0] = lines[0].rstrip()
    return [*(line.rstrip() for line in lines), "(potential and field at the centre, for 1 V)"]


def _trust(field: SolvedField, columns: int) -> list[str]:
    solution, mapped = field.solution, field.map
    nodes = " x ".join(str(n) for n in mapped.grid.counts)
    texts = [
        f"boundary: {len(solution.panels.size)} surface charges, potentials within "
        f"{solution.error:.1e} of the voltage",
        f"map: {nodes} nodes; {mapped.reached.words()}",
        f"region: {field.where()}",
    ]
    return [line for text in texts for line in paragraph(text, columns, "", "  ")]
