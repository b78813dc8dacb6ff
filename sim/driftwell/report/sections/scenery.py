"""What charges moved among: the scenario of a run, with its electrodes' field if that is wanted."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from driftwell.fields.evaluation import evaluate
from driftwell.fields.maps.potential_map import map_places
from driftwell.particles.species import bodies
from driftwell.record.reader import Run
from driftwell.report.again import read_again
from driftwell.report.field_pictures.equipotentials import Drawn
from driftwell.report.paper.ruler import Interval, interval
from driftwell.report.sections.outlines import outlines_of, wall_lines
from driftwell.report.sections.section import Section
from driftwell.scenario.model import Scenario
from driftwell.solved.acting import ActingField, acting_field, field_is_kept
from driftwell.solved.edges import edges_of

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Scenery:
    """The scenario of a run, and the solved field of its electrodes; None where it has none."""

    scenario: Scenario
    acting: ActingField | None

    def potential(self, section: Section, t: float) -> Floats:
        """Potential (nu, na), V, of all fields at a time, s; NaN inside electrodes, and where a
        field is not known."""
        points = section.points
        total = evaluate(self.scenario.field, bodies(self.scenario.species), points, t).potential
        for form in self.scenario.field:
            edges = edges_of(form)
            if edges is not None:
                total[edges.outside(np.ascontiguousarray(points.T))] = np.nan
        acting = self.acting
        if acting is not None:
            places = map_places(acting.solved.map.geometry, acting.centre, points.T)
            outside = acting.nearest(places)[0] > 0.0
            total[~outside] = np.nan
            units = acting.solved.solution.potential(places[outside])
            total[outside] += acting.voltages(t)[: len(units)] @ units
        return total.reshape(section.shape)

    def electrodes(self, section: Section) -> list[Drawn]:
        """Outlines of the electrodes in a plane; each is named once."""
        acting = self.acting
        if acting is None:
            return []
        places = map_places(acting.solved.map.geometry, acting.centre, section.points.T)
        distance, owner = acting.nearest(places)
        return outlines_of(
            section.across,
            section.up,
            distance.reshape(section.shape),
            owner.reshape(section.shape),
            acting.solved.names,
        )

    def walls(self, section: Section) -> list[Floats]:
        """Lines (k, 2), m, of the walls in a plane."""
        return [line for wall in self.scenario.wall for line in wall_lines(wall, section)]

    def detectors(self, section: Section) -> list[Floats]:
        """Lines (k, 2), m, of the detectors in a plane."""
        return [line for each in self.scenario.detector for line in wall_lines(each, section)]

    def reach(self, plane: tuple[int, int]) -> tuple[Interval, Interval] | None:
        """Limits, m, in a plane that hold the electrodes; None without any."""
        acting = self.acting
        if acting is None:
            return None
        panels = acting.solved.solution.panels.position
        region = np.array(acting.solved.map.region())
        low = np.minimum(panels.min(axis=0), region[:, 0])
        high = np.maximum(panels.max(axis=0), region[:, 1])
        geometry = acting.solved.geometry
        if geometry == "axisymmetric":
            corners = np.array([[-high[0], -high[0], low[1]], [high[0], high[0], high[1]]])
        elif geometry == "planar":
            side = float((high - low).max())
            corners = np.array([[*low, -0.5 * side], [*high, 0.5 * side]])
        else:
            corners = np.stack([low, high])
        corners += np.array(acting.centre)
        first, second = plane
        return interval(corners[:, first]), interval(corners[:, second])


def scenery_of(run: Run, solve: bool = True) -> tuple[Scenery | None, str]:
    """The scenery of a run; None, and why, where its scenario cannot be read again.

    solve : whether the electrodes' field is solved where it is not kept any more; without, a
        scenery whose field is not kept has no electrodes

    Raises DriftwellError where the field cannot be solved.
    """
    again = read_again(run)
    if again.loaded is None:
        return None, again.why
    scenario, folder = again.loaded.scenario, again.loaded.folder
    ready = solve or field_is_kept(scenario, folder)
    return Scenery(scenario, acting_field(scenario, folder) if ready else None), ""
