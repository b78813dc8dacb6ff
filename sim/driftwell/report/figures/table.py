"""All kinds of figures by name: a new one is a new file in kinds/ and a line here."""

from __future__ import annotations

from driftwell.report.figures.kind import Kind
from driftwell.report.figures.kinds import (
    arrivals,
    conservation,
    density_axial,
    density_radial,
    energies,
    envelope,
    field,
    losses,
    phase_space,
    projections,
    sizes,
    spectrum,
    temperature,
)

FIGURE_KINDS: dict[str, Kind] = {
    "projections": projections.KIND,
    "phase-space": phase_space.KIND,
    "sizes": sizes.KIND,
    "envelope": envelope.KIND,
    "density-radial": density_radial.KIND,
    "density-axial": density_axial.KIND,
    "temperature": temperature.KIND,
    "energies": energies.KIND,
    "spectrum": spectrum.KIND,
    "arrivals": arrivals.KIND,
    "losses": losses.KIND,
    "field": field.KIND,
    "conservation": conservation.KIND,
}
