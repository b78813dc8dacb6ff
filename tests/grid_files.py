"""Files of values at the nodes of grids, and harmonic polynomials to fill them with.

The polynomials are of degree 5 at most, so quintic splines hold them to rounding, and fields made
of them have neither sources nor curl.
"""

from __future__ import annotations

import tempfile
from collections.abc import Mapping, Sequence
from pathlib import Path

import h5py
import numpy as np

UNITS = {"r": "mm", "x": "mm", "y": "mm", "z": "mm", "V": "V", "E": "V/mm", "B": "mT"}
"""By the first letter of a column."""


def nodes(**axes: Sequence[float]) -> dict[str, np.ndarray]:
    """Coordinates of all nodes by name, the last axis fastest."""
    mesh = np.meshgrid(*(np.asarray(axis) for axis in axes.values()), indexing="ij")
    return {name: part.ravel() for name, part in zip(axes, mesh, strict=True)}


def write_csv(path: Path, columns: Mapping[str, np.ndarray]) -> None:
    """A file of text, each number to its last bit."""
    lines = [", ".join(f"{name} [{UNITS[name[0]]}]" for name in columns)]
    lines += [", ".join(repr(float(x)) for x in row) for row in zip(*columns.values(), strict=True)]
    path.write_text("\n".join(lines) + "\n")


def write_hdf5(path: Path, columns: Mapping[str, np.ndarray]) -> None:
    """The same in HDF5."""
    with h5py.File(path, "w") as file:
        for name, values in columns.items():
            file[name] = values
            file[name].attrs["unit"] = UNITS[name[0]]


def round_polynomial(r: np.ndarray, z: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """A harmonic function about z and its slopes along r and z; lengths in mm."""
    value = z**2 - r**2 / 2 + 0.1 * (z**3 - 1.5 * z * r**2)
    value += 0.02 * (z**4 - 3 * z**2 * r**2 + 0.375 * r**4)
    along_r = -r - 0.3 * z * r + 0.02 * (-6 * z**2 * r + 1.5 * r**3)
    along_z = 2 * z + 0.1 * (3 * z**2 - 1.5 * r**2) + 0.02 * (4 * z**3 - 6 * z * r**2)
    return value, along_r, along_z


def even_polynomial(r: np.ndarray, z: np.ndarray) -> np.ndarray:
    """A harmonic function about z that is even in z."""
    return z**2 - r**2 / 2 + 0.02 * (z**4 - 3 * z**2 * r**2 + 0.375 * r**4)


def flat_polynomial(x: np.ndarray, y: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """A harmonic function of x and y, and its slopes."""
    power = x + 1j * y
    value = power**2 + (0.1 + 0.05j) * power**3 - 0.01j * power**4
    slope = 2 * power + 3 * (0.1 + 0.05j) * power**2 - 0.04j * power**3
    return value.real, slope.real, -slope.imag


def spatial_polynomial(
    x: np.ndarray, y: np.ndarray, z: np.ndarray
) -> tuple[np.ndarray, np.ndarray, np.ndarray, np.ndarray]:
    """A harmonic function of x, y and z, and its slopes."""
    value = x**2 - 3 * y**2 + 2 * z**2 + 0.2 * x * y * z + 0.1 * (x**3 - 3 * x * z**2)
    along_x = 2 * x + 0.2 * y * z + 0.1 * (3 * x**2 - 3 * z**2)
    along_y = -6 * y + 0.2 * x * z
    along_z = 4 * z + 0.2 * x * y - 0.6 * x * z
    return value, along_x, along_y, along_z


_KEPT = tempfile.TemporaryDirectory(prefix="driftwell-grids-")


def grids() -> Path:
    """A folder with a file of each sort; coordinates reach 4 mm. Gone when the process ends."""
    folder = Path(_KEPT.name)
    if any(folder.iterdir()):
        return folder
    whole, half = np.linspace(-4.0, 4.0, 17), np.linspace(0.0, 4.0, 9)
    place = nodes(r=half, z=whole)
    value, along_r, along_z = round_polynomial(**place)
    write_csv(folder / "round.csv", {**place, "V": value})
    write_csv(folder / "round-e.csv", {**place, "Er": -along_r, "Ez": -along_z})
    write_csv(folder / "round-b.csv", {**place, "Br": along_r, "Bz": along_z})
    place = nodes(r=half, z=half)
    write_hdf5(folder / "half.h5", {**place, "V": even_polynomial(**place)})
    place = nodes(x=whole, y=whole)
    value, along_x, along_y = flat_polynomial(**place)
    write_csv(folder / "flat.csv", {**place, "V": value})
    write_csv(folder / "flat-e.csv", {**place, "Ex": -along_x, "Ey": -along_y})
    place = nodes(x=whole, y=whole, z=whole)
    value, *slopes = spatial_polynomial(**place)
    write_hdf5(folder / "space.h5", {**place, "V": value})
    for letter, sign in (("E", -1.0), ("B", 1.0)):
        parts = {f"{letter}{a}": sign * slope for a, slope in zip("xyz", slopes, strict=True)}
        write_hdf5(folder / f"space-{letter.lower()}.h5", {**place, **parts})
    return folder
