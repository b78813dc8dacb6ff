"""What files that become a potential have in common: how fast charges swing in it."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from driftwell.fields.map_files.form import MapFile
from driftwell.fields.map_files.swing import most_curved
from driftwell.fields.maps.potential_map import map_places
from driftwell.fields.rates import linear_rates
from driftwell.forms.body import Body


class SwingingFile(MapFile):
    """Base of the files whose field is minus the gradient of a spline."""

    def rates(self, body: Body, bodies: Mapping[str, Body]) -> dict[str, float]:
        return self._swings(body, self.fitted().strength)

    def rates_at(self, body: Body, position: NDArray[np.float64]) -> dict[str, float]:
        found = self.fitted()
        counts = found.grid.coefficient_counts
        spline = found.coefficients[: int(np.prod(counts))].reshape(counts)
        places = map_places(found.geometry, self.centre, position)
        return self._swings(body, most_curved(found.grid, spline, places))

    def _swings(self, body: Body, strength: float) -> dict[str, float]:
        return linear_rates({"oscillation": abs(body.charge_to_mass) * strength}, self.scale)
