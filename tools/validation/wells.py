"""Harmonic wells as files: potentials that no electrodes make, but a uniform background does."""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np
from scipy.constants import e

NODES = 17


def well(
    path: Path, mass: float, across: float, along: float, radius: float, half_length: float
) -> None:
    """A file (r, z, V): an ion of `mass` (kg) and charge e has these frequencies (Hz) in it.

    Even in z. A polynomial of the second degree is what the map's splines of degree 5 hold exactly.
    """
    stiff = mass * (2.0 * math.pi) ** 2 / e
    lines = ["r [m], z [m], V [V]"]
    for r in np.linspace(0.0, radius, NODES):
        for z in np.linspace(-half_length, half_length, 2 * NODES - 1):
            value = float(0.5 * stiff * (across**2 * r**2 + along**2 * z**2))
            lines.append(f"{float(r)!r}, {float(z)!r}, {value!r}")
    path.write_text("\n".join(lines) + "\n")
