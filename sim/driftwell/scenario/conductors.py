"""The electrodes' bodies as a scenario has them, and the charges that would begin within them."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from driftwell.electrodes.bodies import bodies_of, enclosure_of, moved, names_of
from driftwell.forms import spelled
from driftwell.geometry.body_table import BodyTable, body_table
from driftwell.geometry.distance import distances
from driftwell.geometry.solid import Solid
from driftwell.scenario.model import Scenario

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Conductors:
    """All electrodes as surfaces.

    names : in the order of the owners in `table`, the enclosure last
    bodies : theirs
    table : their bodies
    inner : what the enclosure encloses; empty without one
    """

    names: tuple[str, ...]
    bodies: tuple[tuple[Solid, ...], ...]
    table: BodyTable
    inner: BodyTable

    @classmethod
    def of(cls, scenario: Scenario, folder: Path) -> Conductors:
        """Those of a scenario without faults; files that shapes name count from `folder`."""
        common = scenario.electrodes
        inner = body_table(())
        if common is not None and common.enclosure is not None:
            inner = body_table([[moved(enclosure_of(common, thin=False), common.centre)]])
        bodies = bodies_of(common, scenario.electrode, folder)
        return cls(names_of(common, scenario.electrode), tuple(bodies), body_table(bodies), inner)

    def own(self, name: str | None) -> tuple[Solid, ...]:
        """The bodies of one electrode; none where there is none of that name."""
        return self.bodies[self.names.index(name)] if name in self.names else ()

    def struck(self, places: Floats) -> str:
        """What is wrong with charges that begin at places (n, 3), m; empty where nothing is.

        On a surface they may begin.
        """
        if not self.names:
            return ""
        distance, owner = distances(self.table, places)
        within = np.flatnonzero(distance < -self.table.touch[0])
        if len(within):
            first = int(within[0])
            return (
                f"{_number(len(within), len(places))} inside the electrode "
                f'"{self.names[owner[first]]}", charge {first} (counted from 0) at '
                f"{_place(places[first])}: move the cloud, or make it smaller"
            )
        if len(self.inner.whole):
            outside = np.flatnonzero(distances(self.inner, places)[0] > self.inner.touch[0])
            if len(outside):
                first = int(outside[0])
                return (
                    f"{_number(len(outside), len(places))} outside [electrodes] enclosure, charge "
                    f"{first} (counted from 0) at {_place(places[first])}: move the cloud, or make "
                    "the enclosure larger"
                )
        return ""


def _number(some: int, all_of_them: int) -> str:
    return f"{some} of {all_of_them} charges begin{'s' * (some == 1)}"


def _place(point: Floats) -> str:
    return "(" + ", ".join(spelled(float(x), "m", 4) for x in point) + ")"
