"""The digest of a solved field: of the electrodes' geometry, the accuracy asked, and the solver."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Sequence
from functools import cache
from pathlib import Path

from driftwell.electrodes.form import Electrode, Electrodes
from driftwell.kernels.compiled import sources_digest
from driftwell.scenario.digest import file_digest

_NOT_GEOMETRY = {"centre", "multipole_radius"}
"""Keys of `[electrodes]` that change nothing of what is solved."""
_SOLVER = ("kernels", "boundary", "geometry", "tree", "electrodes", "fields/maps", "solved")
"""Packages whose sources decide what the solution is."""


def field_digest(electrodes: Electrodes, electrode: Sequence[Electrode], folder: Path) -> str:
    """SHA-256, in hexadecimal, of all that decides the unit solutions and their map.

    Voltages, names, and the place the electrodes are put at do not.
    """
    content = {
        "settings": electrodes.model_dump(mode="json", exclude=_NOT_GEOMETRY),
        "shapes": [[s.model_dump(mode="json") for s in each.shape] for each in electrode],
        "files": {
            name: file_digest(folder / name)
            for each in electrode
            for shape in each.shape
            for name in shape.files_named()
        },
        "solver": _solver_digest(),
    }
    text = json.dumps(content, sort_keys=True, separators=(",", ":"), allow_nan=False)
    return hashlib.sha256(text.encode()).hexdigest()


@cache
def _solver_digest() -> str:
    package = Path(__file__).resolve().parent.parent
    return "".join(sources_digest(package / name) for name in _SOLVER)
