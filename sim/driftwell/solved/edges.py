"""Where a field that is known in a region only ends: its borders absorb, and none may begin beyond.

A map says nothing of what lies outside of it. So its borders are walls with names of their own, and
losses there are told like any other.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from driftwell.fields.form import FieldForm, FieldRegion
from driftwell.forms import spelled
from driftwell.walls.cylinder import Cylinder
from driftwell.walls.form import WallForm
from driftwell.walls.plane import Plane

Floats = NDArray[np.float64]

LETTERS = {"axisymmetric": "rz", "planar": "xy", "spatial": "xyz"}
"""Names of the coordinates of each geometry."""


@dataclass(frozen=True, slots=True)
class Edges:
    """The borders of one field's region.

    whose : the field in words, to end "edge of ..." with
    region : in the field's own coordinates
    centre : m, place of their origin
    remedy : what to do where charges begin outside
    """

    whose: str
    region: FieldRegion
    centre: tuple[float, float, float]
    remedy: str

    def walls(self) -> list[WallForm]:
        """Absorbing walls on all borders."""
        made: list[WallForm] = []
        for letter, (low, high) in self._ends():
            if letter == "r":
                ends = [("r", high)] if low <= 0.0 else [("low r", low), ("high r", high)]
                made += [self._tube(word, radius) for word, radius in ends]
            else:
                made += [
                    self._face(word, letter, end) for word, end in (("low", low), ("high", high))
                ]
        return made

    def outside(self, position: Floats) -> NDArray[np.bool_]:
        """Which of the places (3, n) lie beyond them."""
        dx, dy, dz = position - np.array(self.centre)[:, None]
        places = {"r": np.hypot(dx, dy), "x": dx, "y": dy, "z": dz}
        out = np.zeros(position.shape[1], dtype=np.bool_)
        for letter, (low, high) in self._ends():
            out |= (places[letter] < low) | (places[letter] > high)
        return out

    def words(self) -> str:
        """The region in words, in the field's own coordinates."""
        return ", ".join(
            f"r up to {spelled(high, 'm', 4)}"
            if letter == "r" and low <= 0.0
            else f"{letter} from {spelled(low, 'm', 4)} to {spelled(high, 'm', 4)}"
            for letter, (low, high) in self._ends()
        )

    def _ends(self) -> list[tuple[str, tuple[float, float]]]:
        return list(zip(LETTERS[self.region.geometry], self.region.ends, strict=True))

    def _tube(self, word: str, radius: float) -> WallForm:
        return Cylinder.model_construct(
            name=f"edge of {self.whose}, {word}",
            kind="cylinder",
            radius=radius,
            centre=self.centre,
        )

    def _face(self, word: str, letter: str, end: float) -> WallForm:
        x, y, z = (float(name == letter) for name in "xyz")
        at = np.array(self.centre) + end * np.array([x, y, z])
        return Plane.model_construct(
            name=f"edge of {self.whose}, {word} {letter}",
            kind="plane",
            at=(float(at[0]), float(at[1]), float(at[2])),
            normal=(x, y, z),
        )


def edges_of(form: FieldForm) -> Edges | None:
    """The borders of a field that a file gives; None of a field that is known everywhere."""
    region = form.region()
    if region is None:
        return None
    remedy = "Move the cloud, or take a file that reaches farther"
    return Edges(f'field "{form.name}"', region, form.centre, remedy)
