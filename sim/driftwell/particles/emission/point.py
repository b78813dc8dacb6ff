"""Charges from one place."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import Literal

from driftwell.forms import Direction, Point, key
from driftwell.forms.body import Body
from driftwell.geometry.solid import Solid
from driftwell.particles.draws import Draws
from driftwell.particles.emission.form import EmitterForm, Leaving, repeated
from driftwell.particles.in_words import point_in_words


class PointEmitter(EmitterForm):
    """A place without size, such as the tip of a needle."""

    kind: Literal["point"]
    at: Point = key("where the charges are born", default=(0.0, 0.0, 0.0))
    axis: Direction = key(
        "direction that thermal emission is about, any length but zero", default=(0.0, 0.0, 1.0)
    )

    def leave(
        self, count: int, draws: Draws, body: Body, solids: Sequence[Solid], folder: Path
    ) -> Leaving:
        return Leaving(repeated(self.at, count), repeated(self.axis, count))

    def words(self) -> str:
        return f"from {point_in_words(self.at)}"
