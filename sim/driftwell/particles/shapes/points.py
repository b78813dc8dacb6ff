"""An explicit list of charges: a place for each, and if wanted a velocity."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Literal, Self

import numpy as np

from driftwell.constants import SPEED_OF_LIGHT
from driftwell.forms import Point, Velocity, checked, key, refuse
from driftwell.forms.body import Body
from driftwell.particles.draws import Draws
from driftwell.particles.proper_velocity import proper_velocity
from driftwell.particles.shapes.form import Placement, ShapeForm


class Points(ShapeForm):
    """Charges at listed places, in the order of the list."""

    kind: Literal["points"]
    positions: tuple[Point, ...] = key(
        "place of each charge", example=[["0 mm", "0 mm", "-1 mm"], ["0 mm", "0 mm", "1 mm"]]
    )
    velocities: tuple[tuple[Velocity, Velocity, Velocity], ...] | None = key(
        "velocity of each charge; left out: the cloud's `motion`", default=None
    )

    @checked
    def _consistent(self) -> Self:
        if not self.positions:
            raise refuse("`positions` needs at least one place")
        if self.velocities is not None:
            if len(self.velocities) != len(self.positions):
                raise refuse(
                    f"`velocities` must hold one velocity for each of the {len(self.positions)} "
                    f"positions, found {len(self.velocities)}"
                )
            if any(math.hypot(*velocity) >= SPEED_OF_LIGHT for velocity in self.velocities):
                raise refuse(f"`velocities` must be slower than light ({SPEED_OF_LIGHT:.0f} m/s)")
        return self

    def fixes_count(self) -> bool:
        return True

    def sets_velocity(self, folder: Path) -> bool:
        return self.velocities is not None

    def place(self, count: int, draws: Draws, body: Body, folder: Path) -> Placement:
        position = self.moved(np.array(self.positions).T)
        if self.velocities is None:
            return Placement(position)
        return Placement(position, proper_velocity(np.array(self.velocities).T))

    def words(self) -> str:
        return "at listed places" + (" with listed velocities" if self.velocities else "")
