"""Harmonic wells as files: potentials that no electrodes make, but a uniform background does."""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np
from numpy.typing import NDArray
from scipy.constants import e, epsilon_0

Floats = NDArray[np.float64]
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


def box_potential(place: Floats, side: float) -> Floats:
    """Integral of 1/r over a cube about the origin, m^2; `place` (n, 3), m.

    The sum over the corners of the third integral of 1/r, of alternating sign (W. D. MacMillan, The
    Theory of the Potential (1930), sec. 43, from memory); 2.3800774 side^2 in the middle.
    """
    total = np.zeros(len(place))
    for signs in np.ndindex(2, 2, 2):
        x, y, z = (place + side * (np.array(signs) - 0.5)).T
        r = np.sqrt(x**2 + y**2 + z**2)
        term = y * z * np.log(x + r) + x * z * np.log(y + r) + x * y * np.log(z + r)
        for a, b, c in ((x, y, z), (y, x, z), (z, x, y)):
            term -= 0.5 * a**2 * np.arctan(b * c / (a * r))
        total += (-1.0) ** (sum(signs) + 1) * term
    return total


def box_background(path: Path, side: float, charges: int, nodes: int = 25) -> None:
    """A file (x, y, z, V), half of each axis: what balances so many charges in a cube."""
    half = np.linspace(0.0, 0.52 * side, nodes) + 1e-9 * side
    grid = np.stack(np.meshgrid(half, half, half, indexing="ij"), axis=-1).reshape(-1, 3)
    value = -charges * e / (4.0 * math.pi * epsilon_0 * side**3) * box_potential(grid, side)
    grid -= 1e-9 * side
    rows = [
        f"{x!r}, {y!r}, {z!r}, {v!r}"
        for x, y, z, v in zip(*grid.T.tolist(), value.tolist(), strict=True)
    ]
    path.write_text("\n".join(["x [m], y [m], z [m], V [V]", *rows]) + "\n")
